import { rawFilesOf } from '../../db/queries/raw-files';
import { neighbours, periodAt, periodSummaries, truthsOf } from '../../db/queries/runs';
import type { PeriodRowStored, PeriodSummaryRow, RunRow } from '../../db/queries/runs';
import { isQuantity } from '../../processing/catalogue';
import type { SeriesData } from '../contract/api';
import type { Deps } from '../deps';
import { AppError, notFound } from '../errors';
import { columnsFromPacked, columnsFromRows, packRun } from './packed-columns';
import type { Columns } from './packed-columns';

/** Rows with words are for tables and short spans; long spans come from columns. */
const MAX_PERIODS = 5000;

async function columnsOf(
  deps: Deps,
  run: RunRow,
  fromMs: number,
  toMs: number,
  keys: string[],
): Promise<Columns> {
  if (run.state !== 'done') return columnsFromRows(deps.db, run.id, fromMs, toMs, keys);
  const { dataFolder } = deps.config;
  const packed = await columnsFromPacked(dataFolder, run, fromMs, toMs, keys);
  if (packed !== null) return packed;
  await packRun(deps.db, dataFolder, run);
  return (
    (await columnsFromPacked(dataFolder, run, fromMs, toMs, keys)) ??
    columnsFromRows(deps.db, run.id, fromMs, toMs, keys)
  );
}

const plain = (column: Float64Array) => Array.from(column, (value) => (Number.isNaN(value) ? null : value));

/** Columns for plotting; truth stands beside them where the records are invented and it is known. */
export async function seriesOf(
  deps: Deps,
  run: RunRow,
  keys: string[],
  fromMs = run.fromMs,
  toMs = run.toMs,
): Promise<SeriesData> {
  const unknown = keys.filter((key) => !isQuantity(key));
  if (unknown.length > 0) {
    throw new AppError('invalid_input', {
      userMessage: `There is no quantity called ${unknown.slice(0, 3).join(', ')}. Choose quantities of the catalogue.`,
      fields: [{ path: 'quantities', message: `unknown: ${unknown.slice(0, 10).join(', ')}` }],
    });
  }
  const columns = await columnsOf(deps, run, fromMs, toMs, keys);
  const startMs = Array.from(columns.startMs);
  return {
    runId: run.id,
    startMs,
    endMs: Array.from(columns.endMs),
    quantities: Object.fromEntries([...columns.values].map(([key, column]) => [key, plain(column)])),
    grades: Object.fromEntries(
      [...columns.grades].map(([flux, column]) => [
        flux,
        Array.from(column, (grade) => (grade < 0 ? null : grade)),
      ]),
    ),
    truth: await truthBeside(deps, run, startMs, keys),
  };
}

async function truthBeside(
  deps: Deps,
  run: RunRow,
  startsMs: number[],
  keys: string[],
): Promise<Record<string, (number | null)[]> | null> {
  if (startsMs.length === 0) return null;
  const rows = await truthsOf(deps.db, run.systemId, startsMs[0], startsMs[startsMs.length - 1] + 1);
  if (rows.length === 0) return null;
  const byStart = new Map(rows.map((row) => [row.startMs, row.values]));
  return Object.fromEntries(
    keys
      .filter((key) => rows.some((row) => key in row.values))
      .map((key) => [key, startsMs.map((startMs) => byStart.get(startMs)?.[key] ?? null)]),
  );
}

/** @throws AppError invalid_input when the span holds more periods than one answer carries */
export async function periodsOf(
  deps: Deps,
  run: RunRow,
  fromMs = run.fromMs,
  toMs = run.toMs,
): Promise<PeriodSummaryRow[]> {
  const rows = await periodSummaries(deps.db, run.id, fromMs, toMs, MAX_PERIODS + 1);
  if (rows.length > MAX_PERIODS) {
    throw new AppError('invalid_input', {
      userMessage: `The span holds more than ${MAX_PERIODS} periods. Ask for a shorter one, or for series.`,
      fields: [{ path: 'toMs', message: `at most ${MAX_PERIODS} periods` }],
    });
  }
  return rows;
}

export async function periodOf(
  deps: Deps,
  run: RunRow,
  startMs: number,
): Promise<{
  row: PeriodRowStored;
  rawFiles: { id: string; fileName: string }[];
  neighbours: { previousStartMs: number | null; nextStartMs: number | null };
}> {
  const row = await periodAt(deps.db, run.id, startMs);
  if (row === null) throw notFound('period');
  const used = new Set(row.rawFiles);
  const files = (await rawFilesOf(deps.db, run.systemId)).filter((file) => used.has(file.contentHash));
  return {
    row,
    rawFiles: files.map((file) => ({ id: file.id, fileName: file.fileName })),
    neighbours: await neighbours(deps.db, run.id, startMs),
  };
}
