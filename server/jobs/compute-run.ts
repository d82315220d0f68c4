import { access, rm } from 'node:fs/promises';
import { join } from 'node:path';
import { countUnread, rawFilesOf, updateRawFile } from '../../db/queries/raw-files';
import {
  dropOtherPeriods,
  finishedStarts,
  periodHashes,
  periodSummaries,
  runById,
  updateRun,
  updateRunIn,
  upsertPeriods,
} from '../../db/queries/runs';
import type { RunRow } from '../../db/queries/runs';
import { setUpsOf, stationBySystem } from '../../db/queries/stations';
import type { StationRow } from '../../db/queries/stations';
import { contentHash } from '../../processing/canonical';
import { inputManifest, planRun } from '../../processing/run-plan';
import type { InputManifest, RunPlan } from '../../processing/run-plan';
import type { RecipeSettings } from '../../processing/schemas/recipe';
import type { SetUp } from '../../processing/schemas/set-up';
import { fluxKeys } from '../../processing/state';
import type { FluxKey, PeriodResult } from '../../processing/state';
import type { FileInFolder } from '../../workers/node/pool';
import type { Run } from '../contract/api';
import type { Deps } from '../deps';
import { softwareVersion } from '../paths';
import { presentPeriod } from '../presenters/present';
import { chunkFolder } from '../services/derived-files';
import {
  layoutDocument,
  recipeDocument,
  reportDocument,
  setUpDocument,
  stationDocument,
} from '../services/documents';
import { packRun } from '../services/packed-columns';
import { recipeOf } from '../services/recipes';
import { effectiveSetUps, filesInUse, lookAround, reaches, setUpsWithin } from '../services/run-manifest';
import { publishRun } from '../services/runs';
import type { Engine } from './engine';

/** Periods written by one statement, and how long one may wait for company. */
const WRITE_AT_ONCE = 8;
const WRITE_EVERY_MS = 400;

const working = ['waiting', 'reading', 'computing'];

/**
 * Goes on with a run from wherever its rows say it stands: waits for raw files, plans, computes the periods that are missing, sums up.
 * A period that was written stays written; after a crash only the missing ones are computed, unless what they depend on has changed.
 */
export async function computeRun(
  deps: Deps,
  engine: Engine,
  runId: string,
  isLastTry: boolean,
  signal: AbortSignal,
): Promise<void> {
  const run = await runById(deps.db, runId);
  if (run === null || !working.includes(run.state)) return;
  if (run.cancelAsked) return endAs(deps, runId, { state: 'cancelled' });
  try {
    await advance(deps, engine, run, signal);
  } catch (cause) {
    const now = await runById(deps.db, runId);
    if (now === null) return;
    if (now.cancelAsked) return endAs(deps, runId, { state: 'cancelled' });
    if (signal.aborted || !isLastTry) throw cause;
    deps.log.error({ err: cause, runId }, 'a run failed for good');
    await endAs(deps, runId, {
      state: 'failed',
      problem:
        'Computing failed on the server, three times. Raw files and the periods computed so far are safe. Start a new run; if it fails again, tell whoever runs this server.',
    });
  }
}

async function endAs(deps: Deps, runId: string, change: Parameters<typeof updateRun>[2]): Promise<void> {
  await updateRunIn(deps.db, runId, working, { ...change, finishedAt: new Date() });
  await publishRun(deps, runId);
}

async function advance(deps: Deps, engine: Engine, run: RunRow, signal: AbortSignal): Promise<void> {
  const { db } = deps;
  if ((await countUnread(db, run.systemId)) > 0) {
    // The last file that is read sends this run on.
    if (await updateRunIn(db, run.id, ['waiting'], { state: 'reading' })) await publishRun(deps, run.id);
    return;
  }
  const station = await stationBySystem(db, run.systemId);
  if (station === null) return;
  const { plan, manifest, settings, problem } = await planOf(deps, run, station);
  const periods = plan.periods.filter((period) => period.kind !== 'no-set-up');
  if (plan.files.length === 0 || periods.length === 0) {
    return endAs(deps, run.id, {
      state: 'failed',
      ...(plan.fromMs < plan.toMs ? { fromMs: plan.fromMs, toMs: plan.toMs } : {}),
      problem:
        problem ??
        (plan.periods.length > 0
          ? 'No set-up holds in the span of this run, so nothing was computed. Add a set-up that begins before the records.'
          : 'Nothing is recorded in the span of this run, so there was nothing to compute. Choose another span, or look at the raw files that could not be read.'),
    });
  }
  if (await readAgainWhereMissing(deps, run, plan.files)) return;
  const hash = contentHash(manifest);
  await dropOtherPeriods(db, run.id, hash);
  const done = new Set(await finishedStarts(db, run.id, hash));
  const isMine = await updateRunIn(db, run.id, working, {
    state: 'computing',
    manifest,
    manifestHash: hash,
    softwareVersion,
    fromMs: plan.fromMs,
    toMs: plan.toMs,
    periodsTotal: periods.length,
    periodsDone: done.size,
    problem,
  });
  if (!isMine) return;
  await publishRun(deps, run.id);
  const left = periods.filter(({ startMs }) => !done.has(startMs));
  if (left.length > 0) {
    const writer = new PeriodWriter(deps, run, station.slug, hash, done.size);
    try {
      await engine.computePlanned(left, settings, (result) => writer.add(result), signal);
    } catch (cause) {
      // What is computed is kept; the failure is told all the same.
      await writer.finish();
      await dropDamaged(deps, cause, plan.files);
      throw cause;
    }
    await writer.finish();
  }
  signal.throwIfAborted();
  await sumUp(deps, run.id);
}

interface PlannedFile extends FileInFolder {
  id: string;
  fileName: string;
}

/** What the run depends on and consists of, now. */
async function planOf(
  deps: Deps,
  run: RunRow,
  station: StationRow,
): Promise<{
  plan: RunPlan<PlannedFile>;
  manifest: InputManifest;
  settings: RecipeSettings;
  problem: string | null;
}> {
  const { settings } = recipeDocument(await recipeOf(deps.db, run.groupId, run.recipeHash));
  const { backMs, aheadMs } = lookAround(settings);
  const inUse = filesInUse(await rawFilesOf(deps.db, run.systemId));
  const files = inUse
    .filter((file) =>
      reaches(file, (run.askedFromMs ?? -Infinity) - backMs, (run.askedToMs ?? Infinity) + aheadMs),
    )
    .map((file) => ({
      id: file.id,
      fileName: file.fileName,
      layout: layoutDocument(file),
      report: reportDocument(file)!,
      chunkFolder: chunkFolder(deps.config.dataFolder, file.id, file.chunkFolder ?? 'none'),
    }));
  const request = {
    files,
    setUps: [] as { validFromMs: number; setUp: SetUp }[],
    settings,
    utcOffsetMinutes: stationDocument(station).utcOffsetMinutes,
    fromMs: run.askedFromMs ?? undefined,
    toMs: run.askedToMs ?? undefined,
  };
  // The span is known only when all files are; set-ups that do not touch it are no part of the run.
  const effective = effectiveSetUps(await setUpsOf(deps.db, run.systemId));
  const { fromMs, toMs } = planRun(request);
  request.setUps = setUpsWithin(effective, fromMs, toMs).map((row) => ({
    validFromMs: row.validFromMs,
    setUp: setUpDocument(row),
  }));
  const plan = planRun(request);
  const names = new Map(files.map((file) => [file.report.contentHash, file.fileName]));
  const excluded = plan.problems.filter((problem) => problem.isExcluded);
  return {
    plan,
    manifest: inputManifest(request, plan, softwareVersion),
    settings,
    problem:
      excluded.length === 0
        ? null
        : excluded.map(({ contentHash: hash, message }) => `${names.get(hash)}: ${message}`).join(' '),
  };
}

/**
 * Chunks can be made anew from the raw files: where some are missing, their files are read again and the run waits for them.
 *
 * @returns whether the run has to wait
 */
async function readAgainWhereMissing(
  deps: Deps,
  run: RunRow,
  files: readonly PlannedFile[],
): Promise<boolean> {
  const missing: PlannedFile[] = [];
  for (const file of files) {
    const isThere = await access(join(file.chunkFolder, 'index.json')).then(
      () => true,
      () => false,
    );
    if (!isThere) missing.push(file);
  }
  for (const { id } of missing) await updateRawFile(deps.db, id, { state: 'stored' });
  if (missing.length > 0) await updateRunIn(deps.db, run.id, working, { state: 'reading' });
  for (const { id } of missing) await deps.jobs.readRawFile(id);
  if (missing.length > 0) await publishRun(deps, run.id);
  return missing.length > 0;
}

/** Removes chunks that a thread found damaged, so that the next try reads their file again. */
async function dropDamaged(deps: Deps, cause: unknown, files: readonly PlannedFile[]): Promise<void> {
  const message = cause instanceof Error ? cause.message : '';
  for (const file of files) {
    if (!message.includes(file.chunkFolder)) continue;
    deps.log.warn({ folder: file.chunkFolder }, 'damaged chunks; the raw file will be read again');
    await rm(file.chunkFolder, { recursive: true, force: true });
  }
}

function mainFindings(result: PeriodResult): Record<FluxKey, string | null> {
  const findings = new Map(result.reasons.map((reason) => [reason.key, reason.finding]));
  return Object.fromEntries(
    fluxKeys.map((flux) => {
      const decisive = result.grades[flux].decidedBy[0];
      return [flux, decisive === undefined ? null : (findings.get(decisive) ?? null)];
    }),
  ) as Record<FluxKey, string | null>;
}

/** Collects periods as they come from the threads and writes them a handful at a time, one statement after the other. */
class PeriodWriter {
  private waiting: PeriodResult[] = [];
  private tail: Promise<void> = Promise.resolve();
  private timer: NodeJS.Timeout | undefined;
  private failure: unknown = null;

  constructor(
    private readonly deps: Deps,
    private readonly run: RunRow,
    private readonly stationSlug: string,
    private readonly manifest: string,
    private done: number,
  ) {}

  add(result: PeriodResult): void {
    this.waiting.push(result);
    if (this.waiting.length >= WRITE_AT_ONCE) this.flush();
    else this.timer ??= setTimeout(() => this.flush(), WRITE_EVERY_MS);
  }

  private flush(): void {
    clearTimeout(this.timer);
    this.timer = undefined;
    const batch = this.waiting;
    this.waiting = [];
    if (batch.length === 0) return;
    this.tail = this.tail
      .then(() => this.write(batch))
      .catch((cause: unknown) => {
        this.failure ??= cause;
      });
  }

  private async write(batch: PeriodResult[]): Promise<void> {
    const { db, events } = this.deps;
    const rows = batch.map((result) => ({
      runId: this.run.id,
      startMs: result.startMs,
      endMs: result.endMs,
      manifestHash: this.manifest,
      outcome: result.outcome,
      values: result.values,
      grades: result.grades,
      mainFinding: mainFindings(result),
      reasons: result.reasons,
      ledger: result.ledger,
      curves: result.curves,
      rawFiles: result.rawFiles,
      hash: contentHash(result),
    }));
    await upsertPeriods(db, rows);
    this.done += rows.length;
    await updateRun(db, this.run.id, { periodsDone: this.done });
    events.publish(this.run.groupId, {
      type: 'periods',
      stationSlug: this.stationSlug,
      runId: this.run.id,
      periods: rows.map(presentPeriod),
    });
    await publishRun(this.deps, this.run.id);
  }

  /** @throws what went wrong while writing */
  async finish(): Promise<void> {
    this.flush();
    await this.tail;
    if (this.failure !== null) throw this.failure;
  }
}

/** Counts grades, hashes the result, packs the columns; only then is the run done. */
async function sumUp(deps: Deps, runId: string): Promise<void> {
  const { db } = deps;
  const run = (await runById(db, runId)) as RunRow;
  const hashes = await periodHashes(db, runId);
  const grades: Run['grades'] = Object.fromEntries(
    fluxKeys.map((flux) => [flux, { good: 0, usable: 0, rejected: 0, missing: 0 }]),
  );
  const names = ['good', 'usable', 'rejected'] as const;
  for (let at = run.fromMs; ;) {
    const rows = await periodSummaries(db, runId, at, run.toMs, 1000);
    for (const row of rows) {
      for (const flux of fluxKeys) {
        const grade = (row.grades as PeriodResult['grades'])[flux].grade;
        grades[flux][grade === null ? 'missing' : names[grade]]++;
      }
    }
    if (rows.length < 1000) break;
    at = rows[rows.length - 1].startMs + 1;
  }
  await packRun(db, deps.config.dataFolder, run);
  await endAs(deps, runId, {
    state: 'done',
    periodsDone: hashes.length,
    grades,
    resultHash: contentHash(hashes.map(({ startMs, hash }) => [startMs, hash])),
  });
}
