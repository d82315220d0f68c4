import type { RunRow } from '../../db/queries/runs';
import type { SetUpRow } from '../../db/queries/stations';
import type { RawFileRow } from '../../db/queries/raw-files';
import { manifestDocument } from './documents';
import { effectiveSetUps, filesInUse, reaches, setUpsWithin } from './run-manifest';

/** What a system holds now, against which finished runs are compared. */
export interface SystemInputs {
  rawFiles: RawFileRow[];
  /** All revisions. */
  setUps: SetUpRow[];
}

function day(ms: number, utcOffsetMinutes: number): string {
  return new Date(ms + utcOffsetMinutes * 60_000).toISOString().slice(0, 10);
}

/** "a.csv", "a.csv and b.csv", "a.csv and 4 others". */
function named(files: string[]): string {
  if (files.length === 1) return files[0];
  if (files.length === 2) return `${files[0]} and ${files[1]}`;
  return `${files[0]} and ${files.length - 1} others`;
}

const were = (files: string[]) => (files.length === 1 ? 'was' : 'were');

/**
 * What has been corrected since a run was made, in words; empty while the run is what it would be now.
 *
 * Compares what the run used with what it would use now, so that nothing has to be marked when a correction is made, and taking a
 * correction back makes the run current again.
 *
 * @param around how far outside its span the run's recipe looks [ms]
 */
export function staleReasons(
  run: RunRow,
  inputs: SystemInputs,
  around: { backMs: number; aheadMs: number },
): string[] {
  const manifest = manifestDocument(run);
  if (manifest === null || !['done', 'failed', 'cancelled'].includes(run.state)) return [];
  const { fromMs, toMs, utcOffsetMinutes } = manifest;
  const reasons: string[] = [];

  const now = setUpsWithin(effectiveSetUps(inputs.setUps), fromMs, toMs);
  const used = new Map(manifest.setUps.map((setUp) => [setUp.validFromMs, setUp.hash]));
  for (const setUp of now) {
    const before = used.get(setUp.validFromMs);
    if (before === setUp.hash) continue;
    const since = day(setUp.validFromMs, utcOffsetMinutes);
    reasons.push(
      before === undefined
        ? `A set-up holds from ${since} on that the run does not know (revision ${setUp.revision}: ${setUp.why}).`
        : `The set-up from ${since} was corrected (revision ${setUp.revision}: ${setUp.why}).`,
    );
  }

  const inUse = filesInUse(inputs.rawFiles);
  const usedLayouts = new Map(manifest.rawFiles.map((file) => [file.contentHash, file.layoutHash]));
  const inUseByContent = new Map(inUse.map((row) => [row.contentHash, row]));
  const byContent = new Map(inputs.rawFiles.map((row) => [row.contentHash, row]));
  const gone = { withdrawn: [] as string[], superseded: [] as string[], unread: [] as string[] };
  const otherLayout: string[] = [];
  for (const [content, layoutHash] of usedLayouts) {
    const current = inUseByContent.get(content);
    const row = byContent.get(content);
    if (current !== undefined) {
      if (current.readWithLayoutHash !== layoutHash) otherLayout.push(current.fileName);
    } else if (row === undefined || row.withdrawnAt !== null)
      gone.withdrawn.push(row?.fileName ?? 'A raw file');
    else if (row.state === 'read') gone.superseded.push(row.fileName);
    else gone.unread.push(row.fileName);
  }
  const wantsEverything = run.askedFromMs === null && run.askedToMs === null;
  const added = inUse
    .filter((row) => !usedLayouts.has(row.contentHash))
    .filter((row) => wantsEverything || reaches(row, fromMs - around.backMs, toMs + around.aheadMs))
    .map((row) => row.fileName);

  if (gone.withdrawn.length > 0) reasons.push(`${named(gone.withdrawn)} ${were(gone.withdrawn)} withdrawn.`);
  if (gone.superseded.length > 0) {
    reasons.push(`${named(gone.superseded)} ${were(gone.superseded)} superseded by a longer file.`);
  }
  if (gone.unread.length > 0) reasons.push(`${named(gone.unread)} ${were(gone.unread)} not read again yet.`);
  if (otherLayout.length > 0)
    reasons.push(`${named(otherLayout)} ${were(otherLayout)} read with another layout.`);
  if (added.length > 0) reasons.push(`${named(added)} ${were(added)} brought in since.`);
  return reasons;
}
