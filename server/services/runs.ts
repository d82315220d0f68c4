import { rawFilesOf, rawFileTotals } from '../../db/queries/raw-files';
import {
  countPeriods,
  deleteRun,
  insertRun,
  runById,
  runsInStates,
  runsOf,
  updateRun,
  updateRunIn,
} from '../../db/queries/runs';
import type { RunRow } from '../../db/queries/runs';
import { setUpsOf, stationBySystem } from '../../db/queries/stations';
import type { StationRow } from '../../db/queries/stations';
import type { DeletionAccount, Run, StartRun } from '../contract/api';
import type { Deps } from '../deps';
import { AppError, notFound } from '../errors';
import { softwareVersion } from '../paths';
import { presentRun } from '../presenters/present';
import type { GroupContext } from '../routes/route';
import { refuseUnconfirmed } from './confirmation';
import { dropDerived } from './derived-files';
import { recipeDocument } from './documents';
import { recipeOf } from './recipes';
import { lookAround } from './run-manifest';
import { staleReasons } from './staleness';
import type { SystemInputs } from './staleness';
import { stationOf } from './station-of';

type Context = Pick<GroupContext, 'deps' | 'group' | 'person'>;

const finished = ['done', 'failed', 'cancelled'];

async function inputsOf(deps: Deps, systemId: string): Promise<SystemInputs> {
  return { rawFiles: await rawFilesOf(deps.db, systemId), setUps: await setUpsOf(deps.db, systemId) };
}

/** Runs with what is stale about each; the system's inputs are read once for all of them. */
async function withStaleness(
  deps: Deps,
  systemId: string,
  rows: RunRow[],
): Promise<{ row: RunRow; stale: string[] }[]> {
  if (!rows.some((row) => finished.includes(row.state))) return rows.map((row) => ({ row, stale: [] }));
  const inputs = await inputsOf(deps, systemId);
  const around = new Map<string, ReturnType<typeof lookAround>>();
  for (const { groupId, recipeHash } of rows) {
    if (around.has(recipeHash)) continue;
    const recipe = recipeDocument(await recipeOf(deps.db, groupId, recipeHash));
    around.set(recipeHash, lookAround(recipe.settings));
  }
  return rows.map((row) => ({ row, stale: staleReasons(row, inputs, around.get(row.recipeHash)!) }));
}

/** All runs of a system as they go out, newest first. */
export async function presentedRuns(
  deps: Deps,
  station: Pick<StationRow, 'systemId' | 'slug'>,
): Promise<Run[]> {
  const rows = await runsOf(deps.db, station.systemId);
  return (await withStaleness(deps, station.systemId, rows)).map(({ row, stale }) =>
    presentRun(row, station.slug, stale),
  );
}

export async function presentedRun(deps: Deps, row: RunRow): Promise<Run> {
  const station = (await stationBySystem(deps.db, row.systemId)) as StationRow;
  const [{ stale }] = await withStaleness(deps, row.systemId, [row]);
  return presentRun(row, station.slug, stale);
}

export async function staleRunIds(deps: Deps, station: Pick<StationRow, 'systemId'>): Promise<string[]> {
  const rows = await runsOf(deps.db, station.systemId);
  return (await withStaleness(deps, station.systemId, rows))
    .filter(({ stale }) => stale.length > 0)
    .map(({ row }) => row.id);
}

/** After a correction: tells open pages how each finished run stands now. */
export async function publishStaleRuns(
  { deps, group }: Pick<Context, 'deps' | 'group'>,
  station: StationRow,
): Promise<void> {
  if (deps.events.listeners(group.id) === 0) return;
  for (const run of await presentedRuns(deps, station)) {
    if (finished.includes(run.state))
      deps.events.publish(group.id, { type: 'run', stationSlug: station.slug, run });
  }
}

/** Tells open pages how a run stands now. */
export async function publishRun(deps: Deps, runId: string): Promise<void> {
  const row = await runById(deps.db, runId);
  if (row === null || deps.events.listeners(row.groupId) === 0) return;
  const run = await presentedRun(deps, row);
  deps.events.publish(row.groupId, { type: 'run', stationSlug: run.stationSlug, run });
}

/** Sends on the runs of a system that wait for its raw files. */
export async function resumeRuns(deps: Deps, system: { systemId: string; groupId: string }): Promise<void> {
  for (const run of await runsInStates(deps.db, ['waiting', 'reading'], system.groupId)) {
    if (run.systemId === system.systemId) await deps.jobs.computeRun(run.id);
  }
}

/** @throws AppError not_found, also for a run of another group */
export async function runOf({ deps, group }: Pick<Context, 'deps' | 'group'>, id: string): Promise<RunRow> {
  const row = await runById(deps.db, id);
  if (row === null || row.groupId !== group.id) throw notFound('run');
  return row;
}

/** Starts a run; the same id twice is success with the run that exists. */
export async function startRun(
  context: Context,
  slug: string,
  input: StartRun,
): Promise<{ row: RunRow; isNew: boolean }> {
  const { deps, group, person } = context;
  const station = await stationOf(context, slug);
  const known = await runById(deps.db, input.id);
  if (known !== null) {
    if (known.systemId !== station.systemId) throw notFound('run');
    return { row: known, isNew: false };
  }
  await recipeOf(deps.db, group.id, input.recipeHash);
  if (input.fromMs !== null && input.toMs !== null && input.fromMs >= input.toMs) {
    throw new AppError('invalid_input', {
      userMessage: 'The span ends before it begins, so no run was started. Exchange its two ends.',
      fields: [{ path: 'toMs', message: 'must be later than fromMs' }],
    });
  }
  const totals = await rawFileTotals(deps.db, station.systemId);
  if (totals.files === 0) {
    throw new AppError('not_ready', {
      userMessage:
        'This station has no raw files in use, so there is nothing to compute. Bring in records first.',
    });
  }
  const fromMs = input.fromMs ?? totals.firstScanMs ?? 0;
  const added = await insertRun(deps.db, {
    id: input.id,
    groupId: group.id,
    systemId: station.systemId,
    recipeHash: input.recipeHash,
    askedFromMs: input.fromMs === null ? null : Math.floor(input.fromMs),
    askedToMs: input.toMs === null ? null : Math.ceil(input.toMs),
    // Until the run is planned, what was asked for; planning rounds to whole periods.
    fromMs: Math.floor(fromMs),
    toMs: Math.ceil(input.toMs ?? totals.lastScanMs ?? fromMs),
    state: 'waiting',
    softwareVersion,
    createdBy: person.id,
  });
  const row = await runOf(context, input.id);
  if (added) {
    await deps.jobs.computeRun(row.id);
    await publishRun(deps, row.id);
  }
  return { row, isNew: added };
}

/** Stops a run that is waiting or working; its finished periods stay with it. */
export async function cancelRun(context: Context, id: string): Promise<RunRow> {
  const { deps } = context;
  const row = await runOf(context, id);
  if (row.state === 'cancelled') return row;
  if (finished.includes(row.state)) {
    throw new AppError('conflict', {
      userMessage: 'This run has finished already, so there is nothing to stop.',
    });
  }
  await updateRun(deps.db, id, { cancelAsked: true });
  deps.jobs.stopRun(id);
  // A run that computes marks itself when its threads have stopped.
  await updateRunIn(deps.db, id, ['waiting', 'reading'], { state: 'cancelled', finishedAt: new Date() });
  await publishRun(deps, id);
  return runOf(context, id);
}

export async function runDeletion(context: Context, id: string): Promise<DeletionAccount> {
  const row = await runOf(context, id);
  return {
    what: `Run ${row.number} with its results`,
    goes: [{ label: 'computed periods', count: await countPeriods(context.deps.db, id), bytes: null }],
    stays: [
      'The raw files, layouts and set-ups it was made from',
      `The recipe "${row.recipeName}"`,
      'Its number: no other run will be called that',
    ],
    confirmWord: `run ${row.number}`,
  };
}

export async function removeRun(context: Context, id: string, confirm: string): Promise<void> {
  const { deps } = context;
  const row = await runOf(context, id);
  if (!finished.includes(row.state)) {
    throw new AppError('conflict', {
      userMessage: 'This run is still at work, so it was not deleted. Stop it first.',
    });
  }
  refuseUnconfirmed(confirm, `run ${row.number}`);
  await deleteRun(deps.db, id);
  await dropDerived(deps.config.dataFolder, [], [id]);
  const station = (await stationBySystem(deps.db, row.systemId)) as StationRow;
  deps.events.publish(row.groupId, { type: 'station', stationSlug: station.slug, change: 'changed' });
}
