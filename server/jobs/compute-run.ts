import { countUnread, rawFilesOf } from '../../db/queries/raw-files';
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
import { comparePrecedence } from '../../processing/chunks/precedence';
import { fluxKeys } from '../../processing/state';
import type { FluxKey, PeriodResult } from '../../processing/state';
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
import {
  effectiveSetUps,
  filesInUse,
  lookAround,
  manifestHash,
  reaches,
  recordedSpan,
  setUpsWithin,
  wholePeriods,
} from '../services/run-manifest';
import type { RunManifest } from '../services/run-manifest';
import { publishRun } from '../services/runs';
import type { ComputeRequest, Engine } from './engine';

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
  const plan = await planRun(deps, run, station);
  if (plan === null) {
    return endAs(deps, run.id, {
      state: 'failed',
      problem:
        'Nothing is recorded in the span of this run, so there was nothing to compute. Choose another span, or look at the raw files that could not be read.',
    });
  }
  const hash = manifestHash(plan.manifest);
  await dropOtherPeriods(db, run.id, hash);
  const done = new Set(await finishedStarts(db, run.id, hash));
  const isMine = await updateRunIn(db, run.id, working, {
    state: 'computing',
    manifest: plan.manifest,
    manifestHash: hash,
    softwareVersion,
    fromMs: plan.manifest.fromMs,
    toMs: plan.manifest.toMs,
    periodsTotal: plan.request.startsMs.length,
    periodsDone: done.size,
  });
  if (!isMine) return;
  await publishRun(deps, run.id);
  const startsMs = plan.request.startsMs.filter((startMs) => !done.has(startMs));
  if (startsMs.length > 0) {
    const writer = new PeriodWriter(deps, run, station.slug, hash, done.size);
    await engine
      .computePeriods({ ...plan.request, startsMs }, (result) => writer.add(result), signal)
      .then(
        () => writer.finish(),
        async (cause) => {
          // What is computed is kept; the failure is told all the same.
          await writer.finish();
          throw cause;
        },
      );
  }
  signal.throwIfAborted();
  await sumUp(deps, run.id);
}

/** What the run depends on, now; null when nothing is recorded in its span. */
async function planRun(
  deps: Deps,
  run: RunRow,
  station: StationRow,
): Promise<{ manifest: RunManifest; request: ComputeRequest } | null> {
  const { settings } = recipeDocument(await recipeOf(deps.db, run.groupId, run.recipeHash));
  const { utcOffsetMinutes } = stationDocument(station);
  const inUse = filesInUse(await rawFilesOf(deps.db, run.systemId));
  const recorded = recordedSpan(inUse, inUse.map(reportDocument));
  if (recorded === null) return null;
  const { fromMs, toMs, startsMs } = wholePeriods(
    run.askedFromMs ?? recorded.fromMs,
    run.askedToMs ?? recorded.toMs,
    settings.averaging.minutes,
    utcOffsetMinutes,
  );
  if (startsMs.length === 0 || !inUse.some((file) => reaches(file, fromMs, toMs))) return null;
  const { backMs, aheadMs } = lookAround(settings);
  const files = inUse
    .filter((file) => reaches(file, fromMs - backMs, toMs + aheadMs))
    .sort((a, b) => comparePrecedence(reportDocument(a)!, reportDocument(b)!));
  const setUps = setUpsWithin(effectiveSetUps(await setUpsOf(deps.db, run.systemId)), fromMs, toMs);
  return {
    manifest: {
      schema: 'gustbook/manifest/1',
      softwareVersion,
      recipeHash: run.recipeHash,
      utcOffsetMinutes,
      fromMs,
      toMs,
      rawFiles: files.map((file) => ({
        contentHash: file.contentHash,
        layoutHash: file.readWithLayoutHash as string,
      })),
      setUps: setUps.map(({ hash, validFromMs }) => ({ hash, validFromMs })),
    },
    request: {
      files: files.map((file) => ({
        id: file.id,
        contentHash: file.contentHash,
        layoutHash: file.readWithLayoutHash as string,
        layout: layoutDocument(file),
        report: reportDocument(file)!,
        chunkFolder: chunkFolder(deps.config.dataFolder, file.id, file.readWithLayoutHash as string),
      })),
      setUps: setUps.map((row) => ({
        hash: row.hash,
        validFromMs: row.validFromMs,
        setUp: setUpDocument(row),
      })),
      settings,
      utcOffsetMinutes,
      fromMs,
      toMs,
      startsMs,
    },
  };
}

/** Identity of a period's result: the hash of all of it but the ids of raw files, which differ from one bench to the next. */
export function periodHash(result: PeriodResult): string {
  const { rawFiles: _ids, ...rest } = result;
  return contentHash(rest);
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
      hash: periodHash(result),
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
    problem: null,
  });
}
