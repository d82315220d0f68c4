import type { Deps } from '../deps';
import { rawFilesOf } from '../../db/queries/raw-files';
import { gradesOf, runsOf } from '../../db/queries/runs';
import type { RunRow } from '../../db/queries/runs';
import { setUpsOf } from '../../db/queries/stations';
import type { StationRow } from '../../db/queries/stations';
import { CHUNK_MINUTES, slotsPerChunk } from '../../processing/chunks/chunk';
import type { SpineData } from '../contract/api';
import { reportDocument } from './documents';
import { columnsFromPacked } from './packed-columns';
import { effectiveSetUps, filesInUse } from './run-manifest';

/** The flux whose grades the spine shows. */
export const SPINE_FLUX = 'co2Flux';

const CHUNK_MS = CHUNK_MINUTES * 60_000;

/** What one raw file holds of a half hour. */
export interface HalfHour {
  startMs: number;
  /** Where in the half hour it lies and how many scans it holds there, as shares of the whole half hour, 0–1. */
  from: number;
  to: number;
  recorded: number;
}

interface GradedPeriod {
  startMs: number;
  endMs: number;
  grade: number | null;
}

export interface SpineRequest {
  /** The run whose grades are shown; null for none. */
  run: RunRow | null;
  fromMs?: number;
  toMs?: number;
  bins: number;
}

/**
 * Coverage and grades of a system in equal bins of time.
 *
 * @returns null when nothing is recorded or computed
 */
export async function spineOf(
  deps: Deps,
  station: StationRow,
  request: SpineRequest,
): Promise<SpineData | null> {
  const files = filesInUse(await rawFilesOf(deps.db, station.systemId));
  const halfHours = files.flatMap((file) => {
    const report = reportDocument(file);
    if (report === null) return [];
    const slots = slotsPerChunk(report.sampleRateHz);
    return report.chunks.map((chunk) => ({
      startMs: chunk.startMs,
      from: chunk.firstSlot / slots,
      to: (chunk.firstSlot + chunk.length) / slots,
      recorded: Math.min(chunk.length, Math.max(0, chunk.rowsRead - chunk.duplicates)) / slots,
    }));
  });
  const { run } = request;
  // A run that was never planned may have no span.
  const hasSpan = run !== null && run.fromMs < run.toMs;
  let firstMs = hasSpan ? run.fromMs : Infinity;
  let lastMs = hasSpan ? run.toMs : -Infinity;
  for (const { startMs } of halfHours) {
    firstMs = Math.min(firstMs, startMs);
    lastMs = Math.max(lastMs, startMs + CHUNK_MS);
  }
  const fromMs = request.fromMs ?? firstMs;
  const toMs = request.toMs ?? lastMs;
  if (!(Number.isFinite(fromMs) && Number.isFinite(toMs) && fromMs < toMs)) return null;
  const graded = run === null ? [] : await gradedPeriods(deps, run, fromMs, toMs);
  const setUps = effectiveSetUps(await setUpsOf(deps.db, station.systemId));
  // Bins of whole half hours where there are enough of them, so that a bin's edge does not cut one.
  const wanted = (toMs - fromMs) / request.bins;
  const binMs = wanted <= CHUNK_MS ? CHUNK_MS : Math.ceil(wanted / CHUNK_MS) * CHUNK_MS;
  return {
    ...binned(halfHours, graded, fromMs, toMs, binMs),
    gradedFlux: SPINE_FLUX,
    setUpChangesMs: setUps
      .map((setUp) => setUp.validFromMs)
      .filter((changeMs, k) => k > 0 && changeMs >= fromMs && changeMs < toMs),
    runId: run?.id ?? null,
  };
}

async function gradedPeriods(deps: Deps, run: RunRow, fromMs: number, toMs: number): Promise<GradedPeriod[]> {
  const packed =
    run.state === 'done' ? await columnsFromPacked(deps.config.dataFolder, run, fromMs, toMs, []) : null;
  if (packed === null) return gradesOf(deps.db, run.id, SPINE_FLUX, fromMs, toMs);
  const grades = packed.grades.get(SPINE_FLUX)!;
  return Array.from(packed.startMs, (startMs, k) => ({
    startMs,
    endMs: packed.endMs[k],
    grade: grades[k] < 0 ? null : grades[k],
  }));
}

/**
 * Share of each half hour that was recorded by any file. Where files overlap the stretch counts once; where a half hour is cut between
 * two files both parts count.
 */
export function recordedShares(halfHours: readonly HalfHour[]): Map<number, number> {
  const byStart = new Map<number, HalfHour[]>();
  for (const half of halfHours) byStart.set(half.startMs, [...(byStart.get(half.startMs) ?? []), half]);
  const shares = new Map<number, number>();
  for (const [startMs, parts] of byStart) {
    let share = 0;
    let covered = 0;
    for (const { from, to, recorded } of parts.sort((a, b) => a.from - b.from || b.to - a.to)) {
      const fresh = Math.max(0, to - Math.max(from, covered));
      if (to > from) share += (recorded * fresh) / (to - from);
      covered = Math.max(covered, to);
    }
    shares.set(startMs, Math.min(1, share));
  }
  return shares;
}

/** Sums half hours and periods into bins by the share of each bin they fill. */
export function binned(
  halfHours: HalfHour[],
  graded: GradedPeriod[],
  fromMs: number,
  toMs: number,
  binMs: number,
): Pick<SpineData, 'fromMs' | 'toMs' | 'binMs' | 'recorded' | 'good' | 'usable' | 'rejected'> {
  const bins = Math.max(1, Math.ceil((toMs - fromMs) / binMs));
  const columns = [0, 1, 2, 3].map(() => new Float64Array(bins));
  const spread = (column: Float64Array, startMs: number, endMs: number, share: number) => {
    const first = Math.max(0, Math.floor((startMs - fromMs) / binMs));
    for (let bin = first; bin < bins && fromMs + bin * binMs < endMs; bin++) {
      const overlap = Math.min(endMs, fromMs + (bin + 1) * binMs) - Math.max(startMs, fromMs + bin * binMs);
      if (overlap > 0) column[bin] += (share * overlap) / binMs;
    }
  };
  for (const [startMs, share] of recordedShares(halfHours))
    spread(columns[3], startMs, startMs + CHUNK_MS, share);
  for (const { startMs, endMs, grade } of graded)
    if (grade !== null) spread(columns[grade], startMs, endMs, 1);
  const list = (column: Float64Array) => Array.from(column, (share) => Math.min(1, share));
  return {
    fromMs,
    toMs,
    binMs,
    recorded: list(columns[3]),
    good: list(columns[0]),
    usable: list(columns[1]),
    rejected: list(columns[2]),
  };
}

/** The run that a station shows unless another is chosen: the newest finished one, else the newest at work. */
export async function shownRun(deps: Deps, systemId: string): Promise<RunRow | null> {
  const rows = await runsOf(deps.db, systemId);
  return (
    rows.find((row) => row.state === 'done') ??
    rows.find((row) => row.state === 'computing') ??
    rows[0] ??
    null
  );
}
