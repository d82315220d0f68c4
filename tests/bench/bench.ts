import { spawn } from 'node:child_process';
import { createHash } from 'node:crypto';
import { mkdirSync, readFileSync } from 'node:fs';
import { availableParallelism, loadavg } from 'node:os';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import type { PeriodResult } from '../../processing/state';
import { compare, readReference } from './agreement';
import { benchDay, benchDays } from './day';

/**
 * Speed of the main job as ratios to a chain in pandas and numpy and to a newline scan, all measured in one run on the same records.
 *
 * Answers are compared first: nothing is timed while they differ. On a busy machine ratios of CPU seconds are trustworthy, those of wall
 * time are not; the least of several passes is taken for both sides.
 */

const help = `Measures speed and memory against a chain in pandas and numpy, and against a newline scan.

  npm run bench -- [options]

  --seed N      records to measure with (1)
  --days N      days of the long run whose memory is measured (7); 0 leaves it out
  --rounds N    how often each side is measured, turn by turn (3)
  --json        figures as JSON on standard output
  --gate        exit with 1 when a bar is not met

Records are kept under .gustbook/bench. Exit codes: 0 measured, 1 a bar was not met (--gate), 2 wrong arguments,
3 answers differ, so nothing was timed, 4 a measured program failed.
`;

/** SHA-256 of the numpy chain; a yardstick that moves measures nothing. */
const referenceHash = 'f4ce31c8102753c1911e7351560fabc5c736817a324a8318978e03ca5a10e1c0';

const here = dirname(fileURLToPath(import.meta.url));
// Bundled to .gustbook/bench/bin.
const root = join(here, '..', '..', '..');
const benchSources = join(root, 'tests', 'bench');
const cache = join(root, '.gustbook', 'bench');
const python = '/usr/bin/python3';

class MeasurementError extends Error {}

/** Runs a program and reads the JSON it prints. */
async function figuresOf<Figures>(command: string, args: string[]): Promise<Figures> {
  const child = spawn(command, args, {
    stdio: ['ignore', 'pipe', 'pipe'],
    // One thread per process in numpy's own libraries: jobs are what is compared.
    env: { ...process.env, OMP_NUM_THREADS: '1', OPENBLAS_NUM_THREADS: '1', MKL_NUM_THREADS: '1' },
  });
  let out = '';
  let complaints = '';
  child.stdout.on('data', (piece: Buffer) => (out += piece.toString()));
  child.stderr.on('data', (piece: Buffer) => (complaints += piece.toString()));
  const code = await new Promise<number>((resolve) => {
    child.on('error', () => resolve(127));
    child.on('close', (exit) => resolve(exit ?? 1));
  });
  if (code !== 0)
    throw new MeasurementError(`${command} ${args.join(' ')} ended with ${code}: ${complaints}`);
  return JSON.parse(out) as Figures;
}

interface Pass {
  cpuS: number;
  wallS: number;
}
interface OurChain {
  startUpCpuS: number;
  passes: Pass[];
  peakMb: number;
}
interface ReferenceChain extends Pass {
  startUpCpuS: number;
  peakMb: number;
}

const ours = <Figures>(...args: (string | number)[]): Promise<Figures> =>
  figuresOf(process.execPath, [join(here, 'ours.mjs'), ...args.map(String)]);
const reference = <Figures>(...args: (string | number)[]): Promise<Figures> =>
  figuresOf(python, [join(benchSources, 'reference_timing.py'), ...args.map(String)]);

const least = (values: readonly number[]): number => Math.min(...values);
const cpu = (passes: readonly Pass[]): number => least(passes.map((pass) => pass.cpuS));
const wall = (passes: readonly Pass[]): number => least(passes.map((pass) => pass.wallS));

interface Line {
  what: string;
  figure: number;
  unit: string;
  /** Measured seconds or megabytes that the figure comes from. */
  from: string;
  bar: { atLeast?: number; atMost?: number } | null;
}

function isMet({ figure, bar }: Line): boolean | null {
  if (bar === null) return null;
  return figure >= (bar.atLeast ?? -Infinity) && figure <= (bar.atMost ?? Infinity);
}

function say(text: string): void {
  process.stderr.write(`${text}\n`);
}

async function measure(seed: number, days: number, rounds: number): Promise<Line[] | null> {
  mkdirSync(cache, { recursive: true });
  const day = benchDay(cache, seed, (hour) => say(`records of hour ${hour + 1} of 24 written`));
  const long = days > 0 ? benchDays(cache, day, seed, days) : null;

  const ourOut = join(cache, 'ours.json');
  const referenceOut = join(cache, 'reference.csv');
  say('Comparing answers …');
  await ours<OurChain>('chain', day.folder, 1, 1, ourOut);
  await reference<ReferenceChain>('chain', day.folder, referenceOut, 1);
  const agreement = compare(
    JSON.parse(readFileSync(ourOut, 'utf8')) as PeriodResult[],
    readReference(readFileSync(referenceOut, 'utf8')),
  );
  if (agreement.problems.length > 0) {
    say(`The answers differ in ${agreement.problems.length} places; nothing is timed.`);
    for (const problem of agreement.problems.slice(0, 40)) say(`  ${problem}`);
    return null;
  }
  say(
    `${agreement.values} values and ${agreement.grades} grades agree. Largest differences, as shares of what is allowed:`,
  );
  for (const { column, period, ours: found, reference: expected, ofAllowed } of [...agreement.largest]
    .sort((a, b) => b.ofAllowed - a.ofAllowed)
    .slice(0, 8))
    say(`  ${column.padEnd(10)} ${ofAllowed.toFixed(3)}  period ${period}: ${found} against ${expected}`);

  say('Measuring the parsers …');
  const parsing = await ours<{ bytes: number; lines: number; rows: number; scan: Pass[]; parse: Pass[] }>(
    'parse',
    day.folder,
    2 * rounds + 1,
  );
  const pandas = await reference<{ numbers: Pass[]; withStamps: Pass[] }>('parse', day.folder, rounds);

  const single: OurChain[] = [];
  const pooled: OurChain[] = [];
  const referenceOne: ReferenceChain[] = [];
  const referenceTwo: ReferenceChain[] = [];
  for (let round = 0; round < rounds; round++) {
    say(`Measuring the chains, round ${round + 1} of ${rounds} …`);
    single.push(await ours('chain', day.folder, 1, 3, ourOut));
    referenceOne.push(await reference('chain', day.folder, referenceOut, 1));
    pooled.push(await ours('chain', day.folder, 2, 3, ourOut));
    referenceTwo.push(await reference('chain', day.folder, referenceOut, 2));
  }
  say('Measuring one and two threads …');
  const scaling = await ours<{ one: Pass[]; two: Pass[] }>('scaling', day.folder, rounds + 1);
  say('Measuring memory …');
  const memoryDay = await ours<{ periods: number; peakMb: number }>('memory', day.folder);
  const memoryLong =
    long === null ? null : await ours<{ periods: number; peakMb: number }>('memory', long.folder);

  const warm = (runs: readonly OurChain[]): Pass[] => runs.flatMap((run) => run.passes.slice(1));
  const coldCpu = least(single.map((run) => run.startUpCpuS + run.passes[0].cpuS));
  const referenceCpu = cpu(referenceOne);
  const referenceColdCpu = least(referenceOne.map((run) => run.startUpCpuS + run.cpuS));
  const s = (seconds: number): string => `${seconds.toFixed(seconds < 1 ? 3 : 2)} s`;
  const scanWall = wall(parsing.scan);
  const lines: Line[] = [
    {
      what: "parse against pandas' C engine, numbers only (CPU)",
      figure: cpu(pandas.numbers) / cpu(parsing.parse),
      unit: '× faster',
      from: `${s(cpu(parsing.parse))} against ${s(cpu(pandas.numbers))}`,
      bar: { atLeast: 6 },
    },
    {
      what: 'the same, stamps read by both (CPU)',
      figure: cpu(pandas.withStamps) / cpu(parsing.parse),
      unit: '× faster',
      from: `${s(cpu(parsing.parse))} against ${s(cpu(pandas.withStamps))}`,
      bar: null,
    },
    {
      what: 'parse against the newline scan (wall)',
      figure: wall(parsing.parse) / scanWall,
      unit: '× as long',
      from: `${s(wall(parsing.parse))} against ${s(scanWall)}`,
      bar: { atMost: 8 },
    },
    {
      what: 'chain, one thread against one process, warm (CPU)',
      figure: referenceCpu / cpu(warm(single)),
      unit: '× faster',
      from: `${s(cpu(warm(single)))} against ${s(referenceCpu)}`,
      bar: { atLeast: 5 },
    },
    {
      what: 'the same, whole processes with start-up (CPU)',
      figure: referenceColdCpu / coldCpu,
      unit: '× faster',
      from: `${s(coldCpu)} against ${s(referenceColdCpu)}`,
      bar: null,
    },
    {
      what: 'chain, warm pool of two against two processes (wall)',
      figure: wall(referenceTwo) / wall(warm(pooled)),
      unit: '× faster',
      from: `${s(wall(warm(pooled)))} against ${s(wall(referenceTwo))}`,
      bar: { atLeast: 5 },
    },
    {
      what: 'the same in CPU seconds',
      figure: cpu(referenceTwo) / cpu(warm(pooled)),
      unit: '× less',
      from: `${s(cpu(warm(pooled)))} against ${s(cpu(referenceTwo))}`,
      bar: null,
    },
    {
      what: 'chain against the newline scan, warm pool of two (wall)',
      figure: wall(warm(pooled)) / scanWall,
      unit: '× as long',
      from: `${s(wall(warm(pooled)))} against ${s(scanWall)}`,
      bar: { atMost: 25 },
    },
    {
      what: 'pool from one to two threads, warm (wall)',
      figure: wall(scaling.one.slice(1)) / wall(scaling.two.slice(1)),
      unit: '× faster',
      from: `${s(wall(scaling.one.slice(1)))} to ${s(wall(scaling.two.slice(1)))}`,
      bar: { atLeast: 1.5 },
    },
    {
      what: 'peak memory of the compute process, a day',
      figure: memoryDay.peakMb,
      unit: 'MB',
      from: `${memoryDay.periods} periods; numpy chain ${least(referenceOne.map((run) => run.peakMb)).toFixed(0)} MB`,
      bar: { atMost: 300 },
    },
  ];
  if (memoryLong !== null)
    lines.push({
      what: `peak memory of the compute process, ${days} days`,
      figure: memoryLong.peakMb,
      unit: 'MB',
      from: `${memoryLong.periods} periods`,
      bar: { atMost: 300 },
    });
  say(
    `${(parsing.bytes / 1e6).toFixed(0)} MB, ${parsing.rows} rows; newline scan ${s(scanWall)} (${(parsing.bytes / 1e9 / scanWall).toFixed(1)} GB/s).`,
  );
  return lines;
}

function table(lines: readonly Line[]): string {
  const rows = lines.map((line) => {
    const { bar } = line;
    const met = isMet(line);
    return [
      line.what,
      `${line.figure.toFixed(line.figure < 100 ? 1 : 0)} ${line.unit}`,
      bar === null ? '' : bar.atLeast !== undefined ? `≥ ${bar.atLeast}` : `≤ ${bar.atMost}`,
      met === null ? '' : met ? 'met' : 'NOT MET',
      line.from,
    ];
  });
  const all = [['what', 'figure', 'bar', '', 'from'], ...rows];
  const widths = all[0].map((_, column) => Math.max(...all.map((row) => row[column].length)));
  return all
    .map((row) =>
      row
        .map((cell, column) => cell.padEnd(widths[column]))
        .join('  ')
        .trimEnd(),
    )
    .join('\n');
}

async function main(): Promise<number> {
  let values;
  try {
    ({ values } = parseArgs({
      options: {
        seed: { type: 'string', default: '1' },
        days: { type: 'string', default: '7' },
        rounds: { type: 'string', default: '3' },
        json: { type: 'boolean', default: false },
        gate: { type: 'boolean', default: false },
        help: { type: 'boolean', default: false },
      },
    }));
  } catch (error) {
    say(`${error instanceof Error ? error.message : String(error)}\n\n${help}`);
    return 2;
  }
  if (values.help) {
    process.stdout.write(help);
    return 0;
  }
  const [seed, days, rounds] = [values.seed, values.days, values.rounds].map((text) =>
    /^\d+$/.test(text) ? Number(text) : NaN,
  );
  if (Number.isNaN(seed + days + rounds) || rounds < 1) {
    say(`--seed, --days and --rounds are whole numbers.\n\n${help}`);
    return 2;
  }
  const hash = createHash('sha256')
    .update(readFileSync(join(benchSources, 'reference_chain.py')))
    .digest('hex');
  if (hash !== referenceHash) {
    say(`tests/bench/reference_chain.py is not the one this bench was written for (${hash}).`);
    return 3;
  }
  const cores = availableParallelism();
  const busy = loadavg()[0];
  if (busy > cores / 2)
    say(
      `The machine is busy (load ${busy.toFixed(1)} on ${cores} cores): judge by CPU seconds, not by wall time.`,
    );
  try {
    const lines = await measure(seed, days, rounds);
    if (lines === null) return 3;
    if (values.json)
      process.stdout.write(
        `${JSON.stringify({ seed, cores, loadBefore: busy, loadAfter: loadavg()[0], lines: lines.map((line) => ({ ...line, met: isMet(line) })) }, null, 2)}\n`,
      );
    else process.stdout.write(`\n${table(lines)}\n`);
    return values.gate && lines.some((line) => isMet(line) === false) ? 1 : 0;
  } catch (error) {
    if (!(error instanceof MeasurementError)) throw error;
    say(error.message);
    return 4;
  }
}

void main().then((code) => {
  process.exitCode = code;
});
