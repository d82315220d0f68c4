import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { basename, join } from 'node:path';
import { BlockParser, ROWS_PER_BLOCK } from '../../processing/records/block-parser';
import { FIRST_NUMBER_COLUMN } from '../../processing/records/kernel';
import { openText } from '../../processing/records/opening';
import { RecordError } from '../../processing/records/record-error';
import { createTimeReader, timeFields } from '../../processing/records/time-reader';
import { layoutSchema, statusChannels, type Layout } from '../../processing/schemas/layout';
import { recipeSchema } from '../../processing/schemas/recipe';
import { setUpSchema } from '../../processing/schemas/set-up';
import type { PeriodResult } from '../../processing/state';
import { demoStation } from '../../processing/synthetic/demo-scenario';
import { createPool, type WorkerPool } from '../../workers/node/pool';
import { computeStation } from '../../workers/node/station-run';

/**
 * The measured side, in a process of its own: `ours.mjs TASK FOLDER …`, figures as JSON on standard output.
 *
 *   parse FOLDER PASSES         newline scan and parse, turn by turn, text in memory
 *   chain FOLDER THREADS PASSES OUT  whole chain from files; each pass; periods of the first into OUT
 *   scaling FOLDER PASSES       whole chain with one and with two threads, turn by turn
 *   memory FOLDER               whole chain once with two threads
 */

function recordFiles(folder: string): string[] {
  return readdirSync(folder)
    .filter((name) => name.startsWith('HOF_'))
    .sort()
    .map((name) => join(folder, name));
}

function json(folder: string, name: string): unknown {
  return JSON.parse(readFileSync(join(folder, name), 'utf8'));
}

function cpuS(): number {
  const { user, system } = process.cpuUsage();
  return (user + system) / 1e6;
}

interface Pass {
  cpuS: number;
  wallS: number;
}

async function measured(work: () => unknown): Promise<Pass> {
  const [cpu, wall] = [cpuS(), performance.now()];
  await work();
  return { cpuS: cpuS() - cpu, wallS: (performance.now() - wall) / 1000 };
}

// ------------------------------------------------------------------------------------------------------------ parse

function countLines(texts: readonly Buffer[]): number {
  let lines = 0;
  for (const text of texts) for (let at = text.indexOf(10); at >= 0; at = text.indexOf(10, at + 1)) lines++;
  return lines;
}

/** Every field of every row as a number, stamps as milliseconds; the sum of the last column keeps it honest. */
function parse(
  texts: readonly Buffer[],
  names: readonly string[],
  layout: Layout,
): { rows: number; sum: number } {
  let rows = 0;
  let sum = 0;
  texts.forEach((text, index) => {
    const opening = openText(text.subarray(0, 65_536), layout, false);
    if (opening === 'more' || opening instanceof RecordError)
      throw new Error(`${names[index]} cannot be opened`);
    const bound = createTimeReader(layout, names[index], opening.headerLines);
    if ('problem' in bound) throw new Error(bound.problem);
    const { reader } = bound;
    const time = timeFields(layout.time);
    const numberFields = [...new Set([...layout.columns.map((column) => column.index), ...time.numbers])];
    const columnOf = (field: number): number => FIRST_NUMBER_COLUMN + numberFields.indexOf(field);
    const times = new Float64Array(ROWS_PER_BLOCK);
    const parser = new BlockParser({
      delimiter: layout.delimiter,
      decimal: layout.decimal,
      quoted: layout.quoted,
      newline: opening.newline,
      fieldCount: opening.fieldCount,
      numberFields,
      measuredFields: new Set(layout.columns.map((column) => column.index)),
      codeFields: new Set(
        layout.columns
          .filter((column) => statusChannels.includes(column.channel))
          .map((column) => column.index),
      ),
      dateField: time.dateText,
      timeField: time.timeText,
      missingTokens: layout.missingTokens,
      headerLines: opening.headerLines.length,
      resolveTime: reader.resolve,
      onBlock: (block) => {
        reader.fill(times, 0, block.rows, block.columns, columnOf, block.ordinals);
        rows += block.rows;
        sum += times[block.rows - 1] + block.columns[block.columns.length - 1][block.rows - 1];
        return null;
      },
    });
    parser.push(text.subarray(opening.bodyOffset));
    const problem = parser.finish();
    if (problem !== null) throw problem;
  });
  return { rows, sum };
}

async function parseTask(folder: string, passes: number): Promise<unknown> {
  const layout = layoutSchema.parse(json(folder, 'layout.json'));
  const paths = recordFiles(folder);
  const texts = paths.map((path) => readFileSync(path));
  const names = paths.map((path) => basename(path));
  const scan: Pass[] = [];
  const parsed: Pass[] = [];
  let lines = 0;
  let rows = 0;
  for (let pass = 0; pass < passes; pass++) {
    scan.push(await measured(() => (lines = countLines(texts))));
    parsed.push(await measured(() => ({ rows } = parse(texts, names, layout))));
  }
  return { bytes: texts.reduce((sum, text) => sum + text.length, 0), lines, rows, scan, parse: parsed };
}

// ------------------------------------------------------------------------------------------------------------ chain

async function chain(pool: WorkerPool, folder: string): Promise<PeriodResult[]> {
  const layout = layoutSchema.parse(json(folder, 'layout.json'));
  const setUp = setUpSchema.parse(json(folder, 'set-up.json'));
  const recipe = recipeSchema.parse(json(folder, 'recipe.json'));
  const chunks = mkdtempSync(join(tmpdir(), 'gustbook-bench-'));
  const texts = new Map<number, string>();
  try {
    await computeStation(
      pool,
      {
        paths: recordFiles(folder),
        layout,
        setUps: [{ validFromMs: Date.parse(setUp.validFrom), setUp }],
        settings: recipe.settings,
        utcOffsetMinutes: demoStation.utcOffsetMinutes,
        fromMs: null,
        toMs: null,
        folder: chunks,
      },
      {
        onFile: (path, outcome) => {
          if ('problem' in outcome) throw new Error(`${path}: ${outcome.problem.message}`);
        },
        onPeriod: (text, startMs) => void texts.set(startMs, text),
      },
    );
  } finally {
    rmSync(chunks, { recursive: true, force: true });
  }
  return [...texts.entries()].sort((a, b) => a[0] - b[0]).map(([, text]) => JSON.parse(text) as PeriodResult);
}

async function chainTask(folder: string, threads: number, passes: number, out: string): Promise<unknown> {
  const pool = createPool(threads);
  const done: Pass[] = [];
  const startUpCpuS = cpuS();
  for (let pass = 0; pass < passes; pass++) {
    let periods: PeriodResult[] = [];
    done.push(await measured(async () => (periods = await chain(pool, folder))));
    if (pass === 0) writeFileSync(out, JSON.stringify(periods));
  }
  await pool.close();
  return { startUpCpuS, passes: done, peakMb: process.resourceUsage().maxRSS / 1024 };
}

async function scalingTask(folder: string, passes: number): Promise<unknown> {
  const pools = [createPool(1), createPool(2)];
  const done: [Pass[], Pass[]] = [[], []];
  for (let pass = 0; pass < passes; pass++)
    for (const [index, pool] of pools.entries()) done[index].push(await measured(() => chain(pool, folder)));
  for (const pool of pools) await pool.close();
  return { one: done[0], two: done[1] };
}

async function memoryTask(folder: string): Promise<unknown> {
  const pool = createPool(2);
  const periods = await chain(pool, folder);
  await pool.close();
  return { periods: periods.length, peakMb: process.resourceUsage().maxRSS / 1024 };
}

const [task, folder, ...rest] = process.argv.slice(2);
const tasks: Record<string, () => Promise<unknown>> = {
  parse: () => parseTask(folder, Number(rest[0])),
  chain: () => chainTask(folder, Number(rest[0]), Number(rest[1]), rest[2]),
  scaling: () => scalingTask(folder, Number(rest[0])),
  memory: () => memoryTask(folder),
};
void tasks[task]().then((figures) => process.stdout.write(`${JSON.stringify(figures)}\n`));
