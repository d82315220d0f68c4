import { rmSync, statSync } from 'node:fs';
import { basename, join } from 'node:path';
import type { IngestReport } from '../../processing/chunks/chunk';
import { Ingest } from '../../processing/records/ingest';
import { RecordError, type RecordErrorJson } from '../../processing/records/record-error';
import {
  marginSeconds,
  planRun,
  type PlannedPeriod,
  type PlanRequest,
  type RunPlan,
} from '../../processing/run-plan';
import type { Layout } from '../../processing/schemas/layout';
import type { RecipeSettings } from '../../processing/schemas/recipe';
import type { SetUp } from '../../processing/schemas/set-up';
import type { FileInFolder, WorkerPool } from './pool';
import { unpackedPieces } from './unpacked-pieces';

/** Bytes of a file that are looked at to find out when it begins. */
const PROBE_BYTES = 64 * 1024;
/** Sets of periods that may be under way while the next file is read. */
const SETS_UNDER_WAY = 2;

export interface StationRunRequest {
  paths: string[];
  layout: Layout;
  setUps: { validFromMs: number; setUp: SetUp }[];
  settings: RecipeSettings;
  utcOffsetMinutes: number;
  fromMs: number | null;
  toMs: number | null;
  /** Chunks are kept here while they are needed. */
  folder: string;
  /** Stamps later than this are pointed out. */
  latestPlausibleMs?: number;
}

export interface StationRunHooks {
  onReading?: (path: string, share: number, rows: number) => void;
  onFile?: (path: string, outcome: { report: IngestReport } | { problem: RecordErrorJson }) => void;
  /** A result as JSON; a later one for the same period replaces the earlier. */
  onPeriod: (json: string, startMs: number) => void;
  signal?: AbortSignal;
}

interface RunFile extends FileInFolder {
  path: string;
  hasChunks: boolean;
}

/** First scan in the beginning of a file [ms]; infinite when it cannot be told. */
async function firstScanMs(path: string, layout: Layout, utcOffsetMinutes: number): Promise<number> {
  const probe = new Ingest({
    layout,
    fileName: basename(path),
    utcOffsetMinutes,
    onChunk: () => undefined,
    rowsPerBlock: 512,
  });
  try {
    for await (const piece of unpackedPieces(path, () => undefined)) {
      probe.push(piece.subarray(0, PROBE_BYTES));
      break;
    }
  } catch (cause) {
    if (cause instanceof RecordError) return Infinity;
    throw cause;
  }
  const report = probe.finish('');
  return report instanceof RecordError ? Infinity : report.firstScanMs;
}

/**
 * Computes a station's periods from its raw files. Files are read one after the other in order of their beginnings; periods that no later
 * file can reach any more are computed meanwhile. At the end the whole run is planned once more, and what that plan sees otherwise (a file
 * whose clock went back to before its beginning) is computed again: the result is that of the whole plan.
 *
 * @returns the plan of the whole run
 */
export async function computeStation(
  pool: WorkerPool,
  request: StationRunRequest,
  hooks: StationRunHooks,
): Promise<RunPlan<FileInFolder>> {
  const { layout, settings, utcOffsetMinutes, setUps, folder } = request;
  const { signal } = hooks;
  const fromMs = request.fromMs ?? undefined;
  const toMs = request.toMs ?? undefined;
  const marginMs = marginSeconds(settings) * 1000;
  const lookBackMs = settings.diagnostics.signalStrength.referenceDays * 86_400_000 + 3_600_000;

  const beginnings: { path: string; startMs: number; size: number }[] = [];
  for (const path of request.paths) {
    signal?.throwIfAborted();
    beginnings.push({
      path,
      startMs: await firstScanMs(path, layout, utcOffsetMinutes),
      size: statSync(path, { throwIfNoEntry: false })?.size ?? 0,
    });
  }
  // Of files that begin alike the smaller first: the larger one may be the same file, grown.
  beginnings.sort((a, b) => (a.startMs === b.startMs ? a.size - b.size : a.startMs < b.startMs ? -1 : 1));

  const files: RunFile[] = [];
  const computed = new Map<number, string>();
  const underWay: Promise<void>[] = [];
  let doneUntilMs = -Infinity;
  let failure: { cause: unknown } | null = null;

  const readFile = async (path: string, outFolder: string): ReturnType<WorkerPool['ingestFile']> =>
    pool.ingestFile(
      {
        path,
        fileName: basename(path),
        layout,
        utcOffsetMinutes,
        outFolder,
        olderFiles: files.map(({ report }) => ({
          contentHash: report.contentHash,
          bytes: report.contentBytes,
        })),
        latestPlausibleMs: request.latestPlausibleMs,
        isDurable: false,
      },
      { onProgress: (share, rows) => hooks.onReading?.(path, share, rows), signal },
    );

  const plan = (some: RunFile[], span: Partial<PlanRequest<RunFile>>): RunPlan<RunFile> =>
    planRun<RunFile>({ files: some, setUps, settings, utcOffsetMinutes, fromMs, toMs, ...span });

  const compute = (periods: PlannedPeriod<RunFile>[]): void => {
    const isNew = (period: PlannedPeriod<RunFile>): boolean =>
      computed.get(period.startMs) !== identity(period);
    const todo = periods.filter(isNew);
    if (todo.length === 0) return;
    for (const period of todo) computed.set(period.startMs, identity(period));
    underWay.push(
      pool.computeTexts(todo, settings, hooks.onPeriod, signal).catch((cause: unknown) => {
        failure ??= { cause };
      }),
    );
  };

  const settle = async (allowed: number): Promise<void> => {
    while (underWay.length > allowed) await underWay.shift();
    if (failure !== null) throw failure.cause;
  };

  for (let k = 0; k < beginnings.length; k++) {
    const { path, startMs } = beginnings[k];
    if (toMs !== undefined && startMs !== Infinity && startMs > toMs + marginMs) continue;
    await settle(SETS_UNDER_WAY - 1);
    const chunkFolder = join(folder, `file-${k}`);
    const outcome = await readFile(path, chunkFolder);
    hooks.onFile?.(path, outcome);
    if ('report' in outcome)
      files.push({ report: outcome.report, layout, chunkFolder, path, hasChunks: true });
    const frontierMs = beginnings[k + 1]?.startMs ?? Infinity;
    if (frontierMs === Infinity) continue;
    // What the next files cannot reach any more.
    const near = files.filter((file) => file.report.lastScanMs >= doneUntilMs - lookBackMs);
    const minutes = settings.averaging.minutes * 60_000;
    const span: Partial<PlanRequest<RunFile>> = {};
    if (fromMs !== undefined) span.fromMs = Math.max(fromMs, doneUntilMs);
    if (toMs !== undefined) span.toMs = Math.min(toMs, frontierMs + minutes);
    const ready = plan(near, span).periods.filter(
      (period) => period.startMs >= doneUntilMs && period.endMs + marginMs <= frontierMs,
    );
    compute(ready);
    if (ready.length > 0) doneUntilMs = ready[ready.length - 1].endMs;
    await dropChunks(doneUntilMs - marginMs);
  }

  const whole = plan(files, {});
  const last = whole.periods.filter((period) => computed.get(period.startMs) !== identity(period));
  for (const period of last) {
    if (period.kind !== 'compute') continue;
    for (const { file } of period.sources) {
      if (file.hasChunks) continue;
      await readFile(file.path, file.chunkFolder);
      file.hasChunks = true;
    }
  }
  compute(last);
  await settle(0);
  return whole;

  /** Frees the disk of files whose periods have all been computed. */
  async function dropChunks(beforeMs: number): Promise<void> {
    const finished = files.filter((file) => file.hasChunks && file.report.lastScanMs < beforeMs);
    if (finished.length === 0) return;
    await settle(0);
    for (const file of finished) {
      rmSync(file.chunkFolder, { recursive: true, force: true });
      file.hasChunks = false;
    }
  }
}

/** What a period's result depends on, apart from what is the same for the whole run. */
function identity(period: PlannedPeriod<RunFile>): string {
  if (period.kind !== 'compute') return period.kind === 'crossing' ? `crossing ${period.atMs}` : period.kind;
  const sources = period.sources.map(({ file, parts }) => `${file.report.contentHash}:${parts.join(',')}`);
  return `${period.sampleRateHz} ${period.context.signalStrengthReference} ${sources.join(' ')}`;
}
