import { contentHash } from './canonical';
import { CHUNK_MINUTES, chunkStartMs, type IngestReport } from './chunks/chunk';
import { filesThatCount, SignalHistory } from './chunks/precedence';
import type { ChannelKey, Layout } from './schemas/layout';
import { recipeHash, type RecipeSettings } from './schemas/recipe';
import type { SetUp } from './schemas/set-up';
import type { PeriodContext } from './state';

const CHUNK_MS = CHUNK_MINUTES * 60_000;
/** Stretches without a record that are longer than this are left out of a run whose span was not asked for. */
const LONGEST_GAP_MS = 31 * 86_400_000;

/** Relative difference between the rate of a file and that of the set-up. */
const RATE_WARNING = 0.001;
const RATE_ERROR = 0.05;

export interface PlanFile {
  report: IngestReport;
  layout: Pick<Layout, 'columns'>;
}

export interface PlanRequest<File extends PlanFile> {
  /** In any order; precedence is by content. */
  files: readonly File[];
  /** In any order. */
  setUps: readonly { validFromMs: number; setUp: SetUp }[];
  settings: RecipeSettings;
  utcOffsetMinutes: number;
  /** Whole span wanted; without it, from the first to the last scan. Rounded outwards to whole periods. */
  fromMs?: number;
  toMs?: number;
  /** Only these periods of the span. */
  startsMs?: readonly number[];
}

/** What is to be done for one averaging period. */
export type PlannedPeriod<File extends PlanFile> = { startMs: number; endMs: number } & (
  | {
      kind: 'compute';
      setUp: SetUp;
      sampleRateHz: number;
      /** In order of precedence; `parts` are numbers of chunks in the file's report. Includes what margins need. */
      sources: { file: File; parts: number[] }[];
      marginS: number;
      context: PeriodContext;
    }
  | { kind: 'crossing'; what: string; atMs: number }
  | { kind: 'no-set-up' }
);

export interface RunPlan<File extends PlanFile> {
  fromMs: number;
  toMs: number;
  /** Files that count, in order of precedence. */
  files: File[];
  periods: PlannedPeriod<File>[];
  /** Files that cannot be used, and doubts about files that are. */
  problems: {
    contentHash: string;
    code: 'rate-mismatch' | 'rate-differs';
    message: string;
    isExcluded: boolean;
  }[];
}

/** Start of the averaging period that holds an instant: counted from midnight of station standard time. */
export function periodStartMs(instantMs: number, minutes: number, utcOffsetMinutes: number): number {
  const span = minutes * 60_000;
  const offset = utcOffsetMinutes * 60_000;
  return Math.floor((instantMs + offset) / span) * span - offset;
}

/** Samples wanted on either side of a period [s]: half the width of the means at its ends. */
export function marginSeconds(settings: Pick<RecipeSettings, 'storage'>): number {
  return settings.storage.method === 'single-level' ? (settings.storage.edgeMinutes * 60) / 2 : 0;
}

/**
 * Which periods a run has, and from which chunks, set-up and outside facts each is computed. Depends on content alone: the order of files
 * and set-ups does not matter.
 */
export function planRun<File extends PlanFile>(request: PlanRequest<File>): RunPlan<File> {
  const { settings, utcOffsetMinutes } = request;
  const setUps = [...request.setUps].sort((a, b) => a.validFromMs - b.validFromMs);
  const problems: RunPlan<File>['problems'] = [];
  const files = filesThatCount(request.files, (file) => file.report).filter((file) =>
    checkRate(file, setUps, problems),
  );
  const minutes = settings.averaging.minutes;
  const spanMs = minutes * 60_000;
  const marginS = marginSeconds(settings);

  // Chunks by the half hour they belong to.
  const byStart = new Map<number, { file: number; part: number }[]>();
  files.forEach(({ report }, file) =>
    report.chunks.forEach((chunk, part) => {
      const here = byStart.get(chunk.startMs);
      if (here === undefined) byStart.set(chunk.startMs, [{ file, part }]);
      else here.push({ file, part });
    }),
  );

  const first = request.fromMs ?? Math.min(...files.map((f) => f.report.firstScanMs));
  const last =
    request.toMs ?? Math.max(...files.map((f) => f.report.lastScanMs + 1000 / f.report.sampleRateHz));
  const empty = { fromMs: 0, toMs: 0, files, periods: [], problems };
  if (!(first < last)) return empty;
  const fromMs = periodStartMs(first, minutes, utcOffsetMinutes);
  const toMs = periodStartMs(last - 1e-3, minutes, utcOffsetMinutes) + spanMs;
  const starts =
    request.startsMs ??
    periodStarts(
      fromMs,
      toMs,
      spanMs,
      request.fromMs === undefined ? [...byStart.keys()] : null,
      minutes,
      utcOffsetMinutes,
    );

  const history = new SignalHistory(files.map((file) => file.report));
  const { referenceDays, referencePercentile } = settings.diagnostics.signalStrength;

  const periods = starts.map((startMs): PlannedPeriod<File> => {
    const endMs = startMs + spanMs;
    const change = setUps.find((s) => s.validFromMs > startMs && s.validFromMs < endMs);
    if (change !== undefined)
      return { startMs, endMs, kind: 'crossing', what: 'Set-up changed', atMs: change.validFromMs };
    const setUp = setUps.filter((s) => s.validFromMs <= startMs).at(-1)?.setUp;
    if (setUp === undefined) return { startMs, endMs, kind: 'no-set-up' };

    const within = new Set<number>();
    const parts = new Map<number, number[]>();
    const marginMs = marginS * 1000;
    for (let at = chunkStartMs(startMs - marginMs, utcOffsetMinutes); at < endMs + marginMs; at += CHUNK_MS)
      for (const { file, part } of byStart.get(at) ?? []) {
        const list = parts.get(file);
        if (list === undefined) parts.set(file, [part]);
        else list.push(part);
        if (at < endMs && at + CHUNK_MS > startMs && overlaps(files[file].report, part, startMs, endMs))
          within.add(file);
      }
    const used = [...within].sort((a, b) => a - b);
    const sampleRateHz = used.length > 0 ? files[used[0]].report.sampleRateHz : setUp.sampleRateHz;
    const other = used.find((file) => files[file].report.sampleRateHz !== sampleRateHz);
    if (other !== undefined) {
      const atMs = Math.max(...used.map((file) => firstScanWithin(files[file].report, startMs, endMs)));
      return { startMs, endMs, kind: 'crossing', what: 'Sampling rate changed', atMs };
    }
    return {
      startMs,
      endMs,
      kind: 'compute',
      setUp,
      sampleRateHz,
      sources: [...parts]
        .sort((a, b) => a[0] - b[0])
        .map(([file, list]) => ({ file: files[file], parts: list.sort((a, b) => a - b) })),
      marginS,
      context: {
        utcOffsetMinutes,
        signalStrengthReference: history.reference(startMs, referenceDays, referencePercentile),
        ...layoutContext(used.map((file) => files[file])),
      },
    };
  });
  return { fromMs, toMs, files, periods, problems };
}

function periodStarts(
  fromMs: number,
  toMs: number,
  spanMs: number,
  chunkStarts: number[] | null,
  minutes: number,
  utcOffsetMinutes: number,
): number[] {
  const starts: number[] = [];
  if (chunkStarts === null) {
    for (let at = fromMs; at < toMs; at += spanMs) starts.push(at);
    return starts;
  }
  // A single stamp far off (a clock that was not set) must not make a run of decades.
  let at = fromMs;
  for (const startMs of chunkStarts.sort((a, b) => a - b)) {
    if (startMs - at > LONGEST_GAP_MS) at = Math.max(at, periodStartMs(startMs, minutes, utcOffsetMinutes));
    for (; at < startMs + CHUNK_MS && at < toMs; at += spanMs) starts.push(at);
  }
  return starts;
}

/** Span of a chunk's scans [ms]. */
function scanSpan(report: IngestReport, part: number): [number, number] {
  const { startMs, firstSlot, length } = report.chunks[part];
  const stepMs = 1000 / report.sampleRateHz;
  return [startMs + firstSlot * stepMs, startMs + (firstSlot + length) * stepMs];
}

function overlaps(report: IngestReport, part: number, startMs: number, endMs: number): boolean {
  const [from, to] = scanSpan(report, part);
  return from < endMs && to > startMs;
}

function firstScanWithin(report: IngestReport, startMs: number, endMs: number): number {
  let first = endMs;
  report.chunks.forEach((_, part) => {
    if (overlaps(report, part, startMs, endMs))
      first = Math.min(first, Math.max(startMs, scanSpan(report, part)[0]));
  });
  return first;
}

/** False when the file's rate is so far from that of the set-up that one of them must be wrong. */
function checkRate(
  file: PlanFile,
  setUps: readonly { validFromMs: number; setUp: SetUp }[],
  problems: RunPlan<PlanFile>['problems'],
): boolean {
  const { contentHash, firstScanMs, sampleRateHz } = file.report;
  const setUp = (setUps.filter((s) => s.validFromMs <= firstScanMs).at(-1) ?? setUps[0])?.setUp;
  if (setUp === undefined) return true;
  const off = Math.abs(sampleRateHz / setUp.sampleRateHz - 1);
  if (off <= RATE_WARNING) return true;
  const isExcluded = off > RATE_ERROR;
  problems.push({
    contentHash,
    code: isExcluded ? 'rate-mismatch' : 'rate-differs',
    message: `The file is read at ${sampleRateHz} Hz, the set-up says ${setUp.sampleRateHz} Hz. ${isExcluded ? 'It is not used: correct the set-up or the layout.' : 'Correct whichever is wrong.'}`,
    isExcluded,
  });
  return !isExcluded;
}

/** Rules for status codes and signal strength, from the first file that has the channel. */
function layoutContext(
  files: readonly PlanFile[],
): Pick<PeriodContext, 'goodCodes' | 'signalHigherIsBetter'> {
  const goodCodes: PeriodContext['goodCodes'] = {};
  let signalHigherIsBetter: boolean | null = null;
  const seen = new Set<ChannelKey>();
  for (const { layout } of files)
    for (const column of layout.columns) {
      if (seen.has(column.channel)) continue;
      seen.add(column.channel);
      if (column.good !== undefined) goodCodes[column.channel] = column.good;
      if (column.channel === 'signalStrength') signalHigherIsBetter = column.higherIsBetter ?? true;
    }
  return { goodCodes, signalHigherIsBetter: signalHigherIsBetter ?? true };
}

/** All that a run's numbers depend on, by hash: the same manifest and software give the same result, bit for bit. */
export interface InputManifest {
  schema: 'gustbook/manifest/1';
  softwareVersion: string;
  recipeHash: string;
  utcOffsetMinutes: number;
  fromMs: number;
  toMs: number;
  /** In order of precedence. */
  rawFiles: { contentHash: string; layoutHash: string }[];
  /** In the order of their dates. */
  setUps: { hash: string; validFromMs: number }[];
}

export function inputManifest<File extends PlanFile>(
  request: PlanRequest<File>,
  plan: RunPlan<File>,
  softwareVersion: string,
): InputManifest {
  return {
    schema: 'gustbook/manifest/1',
    softwareVersion,
    recipeHash: recipeHash(request),
    utcOffsetMinutes: request.utcOffsetMinutes,
    fromMs: plan.fromMs,
    toMs: plan.toMs,
    rawFiles: plan.files.map(({ report }) => ({
      contentHash: report.contentHash,
      layoutHash: report.layoutHash,
    })),
    setUps: [...request.setUps]
      .sort((a, b) => a.validFromMs - b.validFromMs)
      .map(({ validFromMs, setUp }) => ({ hash: contentHash(setUp), validFromMs })),
  };
}
