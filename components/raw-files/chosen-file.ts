import { guessLayout } from '../../processing/records/guess-layout';
import { bestLayout } from '../../processing/records/layout-fit';
import type { LayoutRevision, StationSummary } from '../../server/contract/api';
import type { FileBeginning } from './file-beginning';
import { draftOfGuess, draftOfSaved } from './layout-draft';
import type { LayoutDraft } from './layout-draft';

/** A file that somebody chose, with its first lines; nothing of it was sent yet. */
export interface ChosenFile {
  id: string;
  file: File;
  beginning: FileBeginning;
}

/** The saved layout that reads the file best, or a new proposal. */
export function proposalOf(
  first: ChosenFile,
  summary: StationSummary,
  layouts: readonly LayoutRevision[],
): LayoutDraft {
  const saved = bestSaved(layouts, first);
  return saved ? draftOfSaved(saved.saved) : draftOfGuess(guessOf(first, summary));
}

export function guessOf({ file, beginning }: ChosenFile, summary: StationSummary) {
  return guessLayout({
    text: beginning.text,
    isCutOff: beginning.isCutOff,
    fileName: file.name,
    sampleRateHz: summary.setUp?.setUp.sampleRateHz ?? null,
    utcOffsetMinutes: summary.station.utcOffsetMinutes,
  });
}

export function bestSaved(layouts: readonly LayoutRevision[], { file, beginning }: ChosenFile) {
  return bestLayout(layouts, beginning.text, beginning.isCutOff, file.name);
}
