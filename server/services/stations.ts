import { isUniqueViolation } from '../../db/errors';
import {
  deleteStation,
  insertLayout,
  insertSetUp,
  insertStation,
  layoutById,
  layoutsOf,
  setUpById,
  setUpsOf,
  stationById,
  stationBySlug,
  updateStation,
} from '../../db/queries/stations';
import type { LayoutRow, SetUpRow, StationRow } from '../../db/queries/stations';
import { allRawFileBytes, rawFilesOf, unreferenced } from '../../db/queries/raw-files';
import { countSystemPeriods, runsOf } from '../../db/queries/runs';
import { contentHash } from '../../processing/canonical';
import type { Layout } from '../../processing/schemas/layout';
import type { SetUp } from '../../processing/schemas/set-up';
import type { AddSetUp, CreateStation, DeletionAccount } from '../contract/api';
import { AppError, notFound } from '../errors';
import type { GroupContext } from '../routes/route';
import { refuseUnconfirmed } from './confirmation';
import { stationDocument } from './documents';
import { dropDerived } from './derived-files';
import { staleRunIds } from './runs';
import { stationOf } from './station-of';

type Context = Pick<GroupContext, 'deps' | 'group' | 'person'>;

function conflict(userMessage: string, path?: string): AppError {
  return new AppError('conflict', {
    userMessage,
    fields: path ? [{ path, message: userMessage }] : undefined,
  });
}

export async function createStation(
  context: Context,
  input: CreateStation,
): Promise<{ row: StationRow; isNew: boolean }> {
  const { deps, group, person } = context;
  const { slug } = input.station;
  const known = await stationById(deps.db, input.id);
  if (known !== null) {
    // The same request twice is success; an id of another group is as good as not there.
    if (known.groupId !== group.id) throw notFound('station');
    if (known.slug !== slug)
      throw conflict('A station with this id exists under another short form. Nothing was changed.');
    return { row: await stationOf(context, slug), isNew: false };
  }
  if ((await stationBySlug(deps.db, group.id, slug)) !== null) {
    throw conflict(
      `The short form "${slug}" is taken in this group. Nothing was created. Choose another one.`,
      'station.slug',
    );
  }
  const made = { groupId: group.id, createdBy: person.id };
  try {
    await insertStation(deps.db, {
      station: { id: input.id, slug, station: input.station, ...made },
      system: { id: input.systemId, stationId: input.id, name: 'main', ...made },
      setUp: {
        id: input.setUpId,
        systemId: input.systemId,
        revision: 1,
        hash: contentHash(input.setUp),
        validFromMs: Date.parse(input.setUp.validFrom),
        setUp: input.setUp,
        why: 'First set-up',
        ...made,
      },
    });
  } catch (cause) {
    if (!isUniqueViolation(cause)) throw cause;
    throw new AppError('conflict', {
      userMessage:
        'An id or the short form of this station is taken. Nothing was created. Try again with new ones.',
      cause,
    });
  }
  deps.events.publish(group.id, { type: 'station', stationSlug: slug, change: 'created' });
  return { row: await stationOf(context, slug), isNew: true };
}

/** Name and description may change; place, clock and short form stay, since periods and addresses hang on them. */
export async function changeStation(
  context: Context,
  slug: string,
  change: { name?: string; description?: string },
): Promise<StationRow> {
  const row = await stationOf(context, slug);
  await updateStation(context.deps.db, row.id, { ...stationDocument(row), ...change });
  context.deps.events.publish(context.group.id, { type: 'station', stationSlug: slug, change: 'changed' });
  return stationOf(context, slug);
}

export async function stationDeletion(context: Context, slug: string): Promise<DeletionAccount> {
  const { db } = context.deps;
  const row = await stationOf(context, slug);
  const files = await allRawFileBytes(db, row.systemId);
  const results = await countSystemPeriods(db, row.systemId);
  const setUps = await setUpsOf(db, row.systemId);
  const layouts = await layoutsOf(db, row.systemId);
  return {
    what: `Station ${stationDocument(row).name} with all that hangs on it`,
    goes: [
      { label: 'raw files', count: files.files, bytes: files.bytes },
      { label: 'set-up revisions', count: setUps.length, bytes: null },
      { label: 'layouts', count: layouts.length, bytes: null },
      { label: 'runs', count: results.runs, bytes: null },
      { label: 'computed periods', count: results.periods, bytes: null },
    ],
    stays: ['The recipes of the group', 'All other stations', 'The files on your own disks'],
    confirmWord: row.slug,
  };
}

export async function removeStation(context: Context, slug: string, confirm: string): Promise<void> {
  const { deps, group } = context;
  const row = await stationOf(context, slug);
  refuseUnconfirmed(confirm, row.slug);
  const files = await rawFilesOf(deps.db, row.systemId);
  const runs = await runsOf(deps.db, row.systemId);
  for (const run of runs) deps.jobs.stopRun(run.id);
  await deleteStation(deps.db, row.id);
  for (const sha256 of new Set(files.map((file) => file.sha256))) {
    // Another station may be taking the same bytes in at this moment.
    await deps.storage.exclusively(sha256, async () => {
      if ((await unreferenced(deps.db, [sha256])).length > 0) await deps.storage.remove(sha256);
    });
  }
  await dropDerived(
    deps.config.dataFolder,
    files.map((file) => file.id),
    runs.map((run) => run.id),
  );
  deps.events.publish(group.id, { type: 'station', stationSlug: slug, change: 'deleted' });
}

// ------------------------------------------------------------------------------------------------------------ set-ups

/** Appends a revision and tells which runs it makes stale. */
export async function addSetUp(
  context: Context,
  slug: string,
  input: AddSetUp,
): Promise<{ row: SetUpRow; isNew: boolean; staleRuns: string[] }> {
  const { deps, group, person } = context;
  const station = await stationOf(context, slug);
  const known = await setUpById(deps.db, input.id);
  if (known !== null) {
    if (known.systemId !== station.systemId) throw notFound('set-up');
    return { row: known, isNew: false, staleRuns: [] };
  }
  const staleBefore = new Set(await staleRunIds(deps, station));
  await insertNextRevision(async () => {
    const newest = (await setUpsOf(deps.db, station.systemId))[0]?.revision ?? 0;
    await insertSetUp(deps.db, {
      id: input.id,
      groupId: group.id,
      systemId: station.systemId,
      revision: newest + 1,
      hash: contentHash(input.setUp),
      validFromMs: Date.parse(input.setUp.validFrom),
      setUp: input.setUp satisfies SetUp,
      why: input.why,
      createdBy: person.id,
    });
  });
  const row = (await setUpById(deps.db, input.id)) as SetUpRow;
  const staleRuns = (await staleRunIds(deps, station)).filter((id) => !staleBefore.has(id));
  deps.events.publish(group.id, { type: 'station', stationSlug: slug, change: 'changed' });
  return { row, isNew: true, staleRuns };
}

/** Two people may add a revision at once: the slower takes the number after. */
async function insertNextRevision(insert: () => Promise<void>): Promise<void> {
  for (let attempt = 1; ; attempt++) {
    try {
      await insert();
      return;
    } catch (cause) {
      if (!isUniqueViolation(cause)) throw cause;
      if (attempt < 3) continue;
      throw new AppError('conflict', {
        userMessage: 'Somebody else is changing this at the same moment. Nothing was saved. Try again.',
        cause,
      });
    }
  }
}

// ------------------------------------------------------------------------------------------------------------ layouts

/** Keeps a layout; one that the system has already is success with the existing one. */
export async function saveLayout(
  context: Context,
  slug: string,
  input: { id: string; layout: Layout },
): Promise<{ row: LayoutRow; isNew: boolean }> {
  const { deps, group, person } = context;
  const station = await stationOf(context, slug);
  const known = await layoutById(deps.db, input.id);
  if (known !== null) {
    if (known.systemId !== station.systemId) throw notFound('layout');
    return { row: known, isNew: false };
  }
  const hash = contentHash(input.layout);
  const equal = (await layoutsOf(deps.db, station.systemId)).find((layout) => layout.hash === hash);
  if (equal !== undefined) return { row: equal, isNew: false };
  await insertNextRevision(async () => {
    const newest = (await layoutsOf(deps.db, station.systemId))[0]?.revision ?? 0;
    await insertLayout(deps.db, {
      id: input.id,
      groupId: group.id,
      systemId: station.systemId,
      revision: newest + 1,
      hash,
      layout: input.layout,
      createdBy: person.id,
    });
  });
  return { row: (await layoutById(deps.db, input.id)) as LayoutRow, isNew: true };
}

/** @throws AppError not_found, also for a layout of another system */
export async function layoutOfSystem({ deps }: Context, systemId: string, id: string): Promise<LayoutRow> {
  const row = await layoutById(deps.db, id);
  if (row === null || row.systemId !== systemId) throw notFound('layout');
  return row;
}
