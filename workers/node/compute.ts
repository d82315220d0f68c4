import {
  closeSync,
  constants,
  mkdtempSync,
  openSync,
  readFileSync,
  renameSync,
  rmSync,
  writeSync,
  accessSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join, resolve } from 'node:path';
import { fileURLToPath } from 'node:url';
import { z } from 'zod';
import { contentHash } from '../../processing/canonical';
import { catalogue } from '../../processing/catalogue';
import type { IngestReport } from '../../processing/chunks/chunk';
import { exchangeLines } from '../../processing/export/exchange-csv';
import { plainLines } from '../../processing/export/plain-csv';
import type { RecordErrorJson } from '../../processing/records/record-error';
import { inputManifest } from '../../processing/run-plan';
import { layoutSchema } from '../../processing/schemas/layout';
import { defaultRecipe, recipeHash, recipeSchema } from '../../processing/schemas/recipe';
import { setUpSchema, stationSchema, type SetUp, type Station } from '../../processing/schemas/set-up';
import type { PeriodResult } from '../../processing/state';
import {
  exitCodes,
  help,
  readArguments,
  readInstant,
  UsageError,
  type ComputeArguments,
} from './compute-arguments';
import { createPool } from './pool';
import { ResultSpool } from './result-spool';
import { computeStation } from './station-run';

/** Command line: raw records in, table of half-hourly fluxes out. */

const LINES_AT_ONCE = 50;
const DAY_MS = 86_400_000;

const stationWithSetUps = z.object({ station: stationSchema, setUps: z.array(setUpSchema).min(1) });

class OutputError extends Error {}

/** @throws UsageError */
function readJson<Schema extends z.ZodType>(option: string, path: string, schema: Schema): z.infer<Schema> {
  let value: unknown;
  try {
    value = JSON.parse(readFileSync(path, 'utf8'));
  } catch (error) {
    throw new UsageError(`--${option} ${path}: ${error instanceof Error ? error.message : String(error)}`);
  }
  const parsed = schema.safeParse(value);
  if (parsed.success) return parsed.data;
  const [issue] = parsed.error.issues;
  throw new UsageError(`--${option} ${path}: ${issue.path.join('.') || 'the whole'}: ${issue.message}`);
}

function readStation(args: ComputeArguments): Station & { setUps: SetUp[] } {
  const separate = args.setUps.map((path) => readJson('set-up', path, setUpSchema));
  if (separate.length > 0) {
    const station = readJson('station', args.station, z.union([stationSchema, stationWithSetUps]));
    if ('station' in station) return { ...station.station, setUps: [...station.setUps, ...separate] };
    return { ...station, setUps: separate };
  }
  const { station, setUps } = readJson('station', args.station, stationWithSetUps);
  return { ...station, setUps };
}

function softwareVersion(): string {
  for (let folder = dirname(fileURLToPath(import.meta.url)); ; folder = dirname(folder)) {
    try {
      const { name, version } = JSON.parse(readFileSync(join(folder, 'package.json'), 'utf8')) as Record<
        string,
        string
      >;
      if (name === 'gustbook') return version;
    } catch {
      if (folder === dirname(folder)) throw new Error("Gustbook's package.json is missing above this file.");
    }
  }
}

/** Progress and findings on standard error; one line that is rewritten where a person watches. */
class Reporter {
  warnings = 0;
  #hasOpenLine = false;

  constructor(private readonly isQuiet: boolean) {}

  progress(text: string): void {
    if (this.isQuiet || !process.stderr.isTTY) return;
    process.stderr.write(`\r\x1b[K${text.slice(0, (process.stderr.columns ?? 80) - 1)}`);
    this.#hasOpenLine = true;
  }

  line(text: string): void {
    if (this.isQuiet) return;
    this.say(text);
  }

  /** Also when quiet. */
  say(text: string): void {
    if (this.#hasOpenLine) process.stderr.write('\r\x1b[K');
    this.#hasOpenLine = false;
    process.stderr.write(`${text}\n`);
  }
}

/** Writes text to a file that takes its place only when whole, or to standard output. */
function writeOut(path: string, pieces: Iterable<string>): void {
  const isStdout = path === '-';
  const half = `${path}.half-${process.pid}`;
  try {
    const fd = isStdout ? 1 : openSync(half, 'w');
    try {
      for (const piece of pieces) {
        const bytes = Buffer.from(piece);
        for (let at = 0; at < bytes.length;) {
          try {
            at += writeSync(fd, bytes, at);
          } catch (error) {
            if ((error as NodeJS.ErrnoException).code !== 'EAGAIN') throw error;
          }
        }
      }
    } finally {
      if (!isStdout) closeSync(fd);
    }
    if (!isStdout) renameSync(half, path);
  } catch (error) {
    if (!isStdout) rmSync(half, { force: true });
    throw new OutputError(`${path}: ${error instanceof Error ? error.message : String(error)}`);
  }
}

function* batches(periods: Iterable<PeriodResult>): Generator<PeriodResult[]> {
  let batch: PeriodResult[] = [];
  for (const period of periods) {
    batch.push(period);
    if (batch.length < LINES_AT_ONCE) continue;
    yield batch;
    batch = [];
  }
  if (batch.length > 0) yield batch;
}

/** The table in pieces: a batch of periods at a time, the header from the first. */
function* table(
  spool: ResultSpool,
  used: ReadonlySet<string>,
  args: ComputeArguments,
  utcOffsetMinutes: number,
): Generator<string> {
  const keys = catalogue.map((quantity) => quantity.key).filter((key) => used.has(key));
  let fromMs: number | undefined;
  for (const batch of batches(spool.inOrder())) {
    const lines =
      args.format === 'plain'
        ? plainLines(batch, { utcOffsetMinutes }, { keys })
        : exchangeLines(batch, { utcOffsetMinutes }, { fromMs });
    const skipped = fromMs === undefined ? 0 : args.format === 'plain' ? 2 : 1;
    let text = '';
    let n = 0;
    for (const line of lines) if (n++ >= skipped) text += `${line}\n`;
    fromMs = batch[batch.length - 1].endMs;
    yield text;
  }
}

function* everything(spool: ResultSpool, head: Record<string, unknown>): Generator<string> {
  yield `${JSON.stringify(head, null, 1).slice(0, -2)},\n "periods": [`;
  let separator = '\n';
  for (const period of spool.inOrder()) {
    yield `${separator}${JSON.stringify(period)}`;
    separator = ',\n';
  }
  yield '\n]}\n';
}

async function run(args: ComputeArguments, folder: string, signal: AbortSignal): Promise<number> {
  const reporter = new Reporter(args.quiet);
  const { name, utcOffsetMinutes, invented, setUps } = readStation(args);
  const layout = readJson('layout', args.layout, layoutSchema);
  const recipe = args.recipe === null ? defaultRecipe : readJson('recipe', args.recipe, recipeSchema);
  const fromMs = args.from === null ? null : readInstant('from', args.from, utcOffsetMinutes);
  const toMs = args.to === null ? null : readInstant('to', args.to, utcOffsetMinutes);
  if (fromMs !== null && toMs !== null && fromMs >= toMs) throw new UsageError('--from is not before --to.');
  if (args.out !== '-') checkWritable(args.out);

  const paths = [...new Set(args.files.map((path) => resolve(path)))];
  const datedSetUps = setUps.map((setUp) => ({ validFromMs: Date.parse(setUp.validFrom), setUp }));
  const spool = new ResultSpool(join(folder, 'results.ndjson'));
  const pool = createPool(args.threads);
  const reports: { path: string; report: IngestReport }[] = [];
  const problems: { path: string; problem: RecordErrorJson }[] = [];
  const outcomes: Record<string, number> = {};
  const startedMs = performance.now();
  try {
    const request = {
      paths,
      layout,
      setUps: datedSetUps,
      settings: recipe.settings,
      utcOffsetMinutes,
      fromMs,
      toMs,
      folder,
      // Invented records may well be of days to come.
      latestPlausibleMs: invented ? undefined : Date.now() + DAY_MS,
    };
    reporter.line(
      `${name}: ${paths.length} ${paths.length === 1 ? 'file' : 'files'}, recipe "${recipe.name}"`,
    );
    const plan = await computeStation(pool, request, {
      signal,
      onReading: (path, share) =>
        reporter.progress(`reading ${path} ${Math.round(share * 100)} % · ${spool.size} periods computed`),
      onFile: (path, outcome) => {
        if ('problem' in outcome) {
          problems.push({ path, problem: outcome.problem });
          reporter.say(`${path}: ${outcome.problem.userMessage}`);
          return;
        }
        const { report } = outcome;
        reports.push({ path, report });
        reporter.line(
          `${path}: ${report.rows} scans, ${new Date(report.firstScanMs).toISOString()} to ${new Date(report.lastScanMs).toISOString()}`,
        );
        for (const { message } of report.warnings) reporter.line(`  ${message}`);
      },
      onPeriod: (json, startMs) => {
        spool.add(json, startMs);
        reporter.progress(`${spool.size} periods computed`);
      },
    });
    for (const { contentHash: hash, message, isExcluded } of plan.problems) {
      const path = reports.find(({ report }) => report.contentHash === hash)?.path ?? hash;
      reporter.say(`${path}: ${message}`);
      if (isExcluded)
        problems.push({
          path,
          problem: { code: 'rate-mismatch', message, userMessage: message, line: null },
        });
    }
    const withoutSetUp = plan.periods.filter((period) => period.kind === 'no-set-up').length;
    if (withoutSetUp > 0)
      reporter.say(`${withoutSetUp} periods lie before the first set-up and were left out.`);
    const keys = new Set<string>();
    for (const { outcome, values } of spool.inOrder()) {
      outcomes[outcome] = (outcomes[outcome] ?? 0) + 1;
      for (const key of Object.keys(values)) keys.add(key);
    }
    if ((outcomes.computed ?? 0) + (outcomes.partial ?? 0) === 0) {
      reporter.say(
        'Nothing could be computed, so no table was written. The reasons stand above, or in --json for single periods.',
      );
      if (args.json !== null && spool.size > 0) writeJson(args.json);
      return exitCodes.nothing;
    }
    writeOut(args.out, table(spool, keys, args, utcOffsetMinutes));
    if (args.json !== null) writeJson(args.json);
    const counts = Object.entries(outcomes).map(([outcome, n]) => `${n} ${outcome}`);
    reporter.line(
      `${spool.size} periods (${counts.join(', ')}) in ${((performance.now() - startedMs) / 1000).toFixed(1)} s → ${args.out}`,
    );
    return problems.length > 0 ? exitCodes.input : exitCodes.done;

    function writeJson(path: string): void {
      const manifest = inputManifest(
        { ...request, files: plan.files, fromMs: undefined, toMs: undefined },
        plan,
        softwareVersion(),
      );
      writeOut(
        path,
        everything(spool, {
          schema: 'gustbook/results/1',
          station: name,
          recipe: { name: recipe.name, hash: recipeHash(recipe) },
          manifest,
          manifestHash: contentHash(manifest),
          files: reports.map(({ path: file, report }) => ({ file, report })),
          problems,
        }),
      );
    }
  } finally {
    spool.close();
    await pool.close();
  }
}

/** Fails before hours of work rather than after them. */
function checkWritable(path: string): void {
  try {
    accessSync(dirname(resolve(path)), constants.W_OK);
  } catch {
    throw new OutputError(`${path}: its folder does not exist or cannot be written to.`);
  }
}

async function main(): Promise<number> {
  let args: ComputeArguments | 'help';
  try {
    args = readArguments(process.argv.slice(2));
  } catch (error) {
    if (!(error instanceof UsageError)) throw error;
    process.stderr.write(`${error.message}\nSee --help.\n`);
    return exitCodes.usage;
  }
  if (args === 'help') {
    process.stdout.write(help);
    return exitCodes.done;
  }
  const interruption = new AbortController();
  for (const name of ['SIGINT', 'SIGTERM', 'SIGHUP'] as const)
    process.on(name, () => {
      // A second one does not wait for the threads.
      if (interruption.signal.aborted) process.exit(exitCodes.interrupted);
      interruption.abort(new Error(`interrupted by ${name}`));
    });
  const folder = mkdtempSync(join(tmpdir(), 'gustbook-compute-'));
  process.on('exit', () => rmSync(folder, { recursive: true, force: true }));
  try {
    return await run(args, folder, interruption.signal);
  } catch (error) {
    if (interruption.signal.aborted) {
      process.stderr.write('\nInterrupted: no table was written, temporary files are removed.\n');
      return exitCodes.interrupted;
    }
    if (error instanceof UsageError) {
      process.stderr.write(`${error.message}\n`);
      return exitCodes.usage;
    }
    if (error instanceof OutputError) {
      process.stderr.write(`Results cannot be written: ${error.message}\n`);
      return exitCodes.output;
    }
    process.stderr.write(
      `Failed inside: ${error instanceof Error ? (error.stack ?? error.message) : String(error)}\n`,
    );
    return exitCodes.failure;
  }
}

void main().then((code) => {
  process.exitCode = code;
});
