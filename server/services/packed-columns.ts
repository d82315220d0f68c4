import { mkdir, open, readFile, rename, rm } from 'node:fs/promises';
import { join } from 'node:path';
import { makeVector, Table, tableFromIPC, tableToIPC } from 'apache-arrow';
import type { Vector } from 'apache-arrow';
import { periodSummaries } from '../../db/queries/runs';
import type { Db } from '../../db/client';
import { catalogue } from '../../processing/catalogue';
import { fluxKeys } from '../../processing/state';
import { syncFolder } from '../storage/object-store';
import { packedFolder } from './derived-files';

/**
 * A finished run's plottable columns, one Arrow file per year (UTC), so that long spans are read without touching the rows. Rebuildable:
 * whoever asks for a file that is missing has it made again.
 */

/** Columns of some consecutive periods; NaN and −1 stand for missing. */
export interface Columns {
  startMs: Float64Array;
  endMs: Float64Array;
  values: Map<string, Float64Array>;
  grades: Map<string, Int8Array>;
}

const READ_AT_ONCE = 1000;

export function yearOf(startMs: number): number {
  return new Date(startMs).getUTCFullYear();
}

/** Reads periods from the rows, a thousand at a time, so that the one thread stays free in between. */
export async function columnsFromRows(
  db: Db,
  runId: string,
  fromMs: number,
  toMs: number,
  keys: readonly string[] | null,
): Promise<Columns> {
  const starts: number[] = [];
  const ends: number[] = [];
  const values = new Map<string, number[]>();
  const grades = new Map<string, number[]>(fluxKeys.map((flux) => [flux, []]));
  const wanted = keys ?? catalogue.map((quantity) => quantity.key);
  for (const key of wanted) values.set(key, []);
  for (let at = fromMs; ;) {
    const rows = await periodSummaries(db, runId, at, toMs, READ_AT_ONCE);
    for (const row of rows) {
      starts.push(row.startMs);
      ends.push(row.endMs);
      for (const [key, column] of values) column.push(row.values[key] ?? NaN);
      const rowGrades = row.grades as Record<string, { grade: number | null } | undefined>;
      for (const [flux, column] of grades) column.push(rowGrades[flux]?.grade ?? -1);
    }
    if (rows.length < READ_AT_ONCE) break;
    at = rows[rows.length - 1].startMs + 1;
  }
  return {
    startMs: Float64Array.from(starts),
    endMs: Float64Array.from(ends),
    values: new Map([...values].map(([key, column]) => [key, Float64Array.from(column)])),
    grades: new Map([...grades].map(([flux, column]) => [flux, Int8Array.from(column)])),
  };
}

/** Writes the year's file of a run: beside, synced, renamed. */
async function writeYear(path: string, columns: Columns): Promise<void> {
  const vectors: Record<string, Vector> = {
    startMs: makeVector(columns.startMs),
    endMs: makeVector(columns.endMs),
  };
  for (const [key, column] of columns.values) {
    if (column.some((value) => !Number.isNaN(value))) vectors[`value:${key}`] = makeVector(column);
  }
  for (const [flux, column] of columns.grades) vectors[`grade:${flux}`] = makeVector(column);
  const temporary = `${path}.part`;
  const file = await open(temporary, 'w');
  try {
    await file.writeFile(tableToIPC(new Table(vectors), 'file'));
    await file.sync();
  } finally {
    await file.close();
  }
  await rename(temporary, path);
}

/** Packs all years of a finished run. */
export async function packRun(
  db: Db,
  dataFolder: string,
  run: { id: string; fromMs: number; toMs: number },
): Promise<void> {
  const folder = packedFolder(dataFolder, run.id);
  await rm(folder, { recursive: true, force: true });
  await mkdir(folder, { recursive: true });
  for (let year = yearOf(run.fromMs); year <= yearOf(Math.max(run.fromMs, run.toMs - 1)); year++) {
    const columns = await columnsFromRows(db, run.id, Date.UTC(year, 0, 1), Date.UTC(year + 1, 0, 1), null);
    await writeYear(join(folder, `${year}.arrow`), columns);
  }
  await syncFolder(folder);
}

/** Reads columns of [fromMs, toMs) from the year files; null when one of them is not there. */
export async function columnsFromPacked(
  dataFolder: string,
  run: { id: string; fromMs: number; toMs: number },
  fromMs: number,
  toMs: number,
  keys: readonly string[],
): Promise<Columns | null> {
  const first = Math.max(fromMs, run.fromMs);
  const end = Math.min(toMs, run.toMs);
  const parts: Columns[] = [];
  for (let year = yearOf(first); first < end && year <= yearOf(end - 1); year++) {
    const bytes = await readFile(join(packedFolder(dataFolder, run.id), `${year}.arrow`)).catch(
      (cause: NodeJS.ErrnoException) => {
        if (cause.code === 'ENOENT') return null;
        throw cause;
      },
    );
    if (bytes === null) return null;
    parts.push(slice(tableFromIPC(bytes), first, end, keys));
  }
  return joined(parts, keys);
}

function slice(table: Table, fromMs: number, toMs: number, keys: readonly string[]): Columns {
  const starts = floats(table, 'startMs');
  let from = 0;
  while (from < starts.length && starts[from] < fromMs) from++;
  let to = from;
  while (to < starts.length && starts[to] < toMs) to++;
  const missing = () => new Float64Array(to - from).fill(NaN);
  return {
    startMs: starts.slice(from, to),
    endMs: floats(table, 'endMs').slice(from, to),
    values: new Map(
      keys.map((key) => [
        key,
        table.getChild(`value:${key}`) ? floats(table, `value:${key}`).slice(from, to) : missing(),
      ]),
    ),
    grades: new Map(
      fluxKeys.map((flux) => [
        flux,
        (table.getChild(`grade:${flux}`)!.toArray() as Int8Array).slice(from, to),
      ]),
    ),
  };
}

function floats(table: Table, name: string): Float64Array {
  return table.getChild(name)!.toArray() as Float64Array;
}

function joined(parts: Columns[], keys: readonly string[]): Columns {
  const all = (pick: (part: Columns) => Float64Array) =>
    Float64Array.from(parts.flatMap((part) => [...pick(part)]));
  return {
    startMs: all((part) => part.startMs),
    endMs: all((part) => part.endMs),
    values: new Map(keys.map((key) => [key, all((part) => part.values.get(key)!)])),
    grades: new Map(
      fluxKeys.map((flux) => [flux, Int8Array.from(parts.flatMap((part) => [...part.grades.get(flux)!]))]),
    ),
  };
}
