import { assembleBlock, BlockArrays } from '../../processing/chunks/assemble';
import { computePeriod } from '../../processing/pipeline';
import type { Layout } from '../../processing/schemas/layout';
import type { RecipeSettings } from '../../processing/schemas/recipe';
import type { SetUp } from '../../processing/schemas/set-up';
import type { PeriodContext, PeriodResult } from '../../processing/state';
import { ChunkStore } from './chunk-store';

/** All that one period is computed from; samples are read from the chunk folders. */
export interface ComputeBlockRequest {
  startMs: number;
  endMs: number;
  sampleRateHz: number;
  marginS: number;
  /** Folders of chunks, and which chunks of each. */
  sources: { folder: string; columns: Layout['columns']; parts: number[] }[];
  setUp: SetUp;
  settings: RecipeSettings;
  context: PeriodContext;
}

const OPEN_FILES = 8;
/** A period of half an hour with margins touches three chunks. */
const KEPT_CHUNKS = 4;
const store = new ChunkStore(OPEN_FILES, KEPT_CHUNKS);
const arrays = new BlockArrays();

export function computeBlock(request: ComputeBlockRequest): PeriodResult {
  const { startMs, endMs, sampleRateHz, marginS, setUp, settings, context } = request;
  store.nextTurn();
  const block = assembleBlock({
    startMs,
    endMs,
    sampleRateHz,
    marginS,
    arrays,
    sources: request.sources.map(({ folder, columns, parts }) => {
      const { report } = store.file(folder);
      return {
        report,
        layout: { columns },
        chunks: parts.map((part) => ({ intake: report.chunks[part], columns: store.read(folder, part) })),
      };
    }),
  });
  return computePeriod(block, setUp, settings, context);
}
