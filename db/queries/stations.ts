import { and, asc, desc, eq } from 'drizzle-orm';
import type { Db } from '../client';
import { layoutRevisions, setUpRevisions, stations, systems, user } from '../schema';

export type StationRow = typeof stations.$inferSelect & { systemId: string };

const stationColumns = {
  id: stations.id,
  groupId: stations.groupId,
  slug: stations.slug,
  station: stations.station,
  createdBy: stations.createdBy,
  createdAt: stations.createdAt,
  systemId: systems.id,
};

/** The stations of a group, each with its first system. */
export async function stationsOf(db: Db, groupId: string): Promise<StationRow[]> {
  return db
    .select(stationColumns)
    .from(stations)
    .innerJoin(systems, and(eq(systems.stationId, stations.id), eq(systems.name, 'main')))
    .where(eq(stations.groupId, groupId))
    .orderBy(asc(stations.createdAt), asc(stations.slug));
}

export async function stationBySlug(db: Db, groupId: string, slug: string): Promise<StationRow | null> {
  const rows = await db
    .select(stationColumns)
    .from(stations)
    .innerJoin(systems, and(eq(systems.stationId, stations.id), eq(systems.name, 'main')))
    .where(and(eq(stations.groupId, groupId), eq(stations.slug, slug)));
  return rows[0] ?? null;
}

export async function stationBySystem(db: Db, systemId: string): Promise<StationRow | null> {
  const rows = await db
    .select(stationColumns)
    .from(systems)
    .innerJoin(stations, eq(systems.stationId, stations.id))
    .where(eq(systems.id, systemId));
  return rows[0] ?? null;
}

/** Looks across groups: for telling a repeated request from an id that somebody else has. */
export async function stationById(db: Db, id: string): Promise<typeof stations.$inferSelect | null> {
  return (await db.select().from(stations).where(eq(stations.id, id)))[0] ?? null;
}

/** Creates a station with its system and first set-up, all or nothing. */
export async function insertStation(
  db: Db,
  rows: {
    station: typeof stations.$inferInsert;
    system: typeof systems.$inferInsert;
    setUp: typeof setUpRevisions.$inferInsert;
  },
): Promise<void> {
  await db.transaction(async (tx) => {
    await tx.insert(stations).values(rows.station);
    await tx.insert(systems).values(rows.system);
    await tx.insert(setUpRevisions).values(rows.setUp);
  });
}

export async function updateStation(db: Db, id: string, station: unknown): Promise<void> {
  await db.update(stations).set({ station }).where(eq(stations.id, id));
}

/** Removes a station and, by cascade, all that hangs on it. */
export async function deleteStation(db: Db, id: string): Promise<void> {
  await db.delete(stations).where(eq(stations.id, id));
}

// ------------------------------------------------------------------------------------------------------------ set-ups

export type SetUpRow = typeof setUpRevisions.$inferSelect & { authorName: string };

const setUpColumns = {
  id: setUpRevisions.id,
  groupId: setUpRevisions.groupId,
  systemId: setUpRevisions.systemId,
  revision: setUpRevisions.revision,
  hash: setUpRevisions.hash,
  validFromMs: setUpRevisions.validFromMs,
  setUp: setUpRevisions.setUp,
  why: setUpRevisions.why,
  createdBy: setUpRevisions.createdBy,
  createdAt: setUpRevisions.createdAt,
  authorName: user.name,
};

/** Newest revision first. */
export async function setUpsOf(db: Db, systemId: string): Promise<SetUpRow[]> {
  return db
    .select(setUpColumns)
    .from(setUpRevisions)
    .innerJoin(user, eq(user.id, setUpRevisions.createdBy))
    .where(eq(setUpRevisions.systemId, systemId))
    .orderBy(desc(setUpRevisions.revision));
}

export async function setUpById(db: Db, id: string): Promise<SetUpRow | null> {
  const rows = await db
    .select(setUpColumns)
    .from(setUpRevisions)
    .innerJoin(user, eq(user.id, setUpRevisions.createdBy))
    .where(eq(setUpRevisions.id, id));
  return rows[0] ?? null;
}

export async function insertSetUp(db: Db, row: typeof setUpRevisions.$inferInsert): Promise<void> {
  await db.insert(setUpRevisions).values(row);
}

// ------------------------------------------------------------------------------------------------------------ layouts

export type LayoutRow = typeof layoutRevisions.$inferSelect & { authorName: string };

const layoutColumns = {
  id: layoutRevisions.id,
  groupId: layoutRevisions.groupId,
  systemId: layoutRevisions.systemId,
  revision: layoutRevisions.revision,
  hash: layoutRevisions.hash,
  layout: layoutRevisions.layout,
  createdBy: layoutRevisions.createdBy,
  createdAt: layoutRevisions.createdAt,
  authorName: user.name,
};

/** Newest revision first. */
export async function layoutsOf(db: Db, systemId: string): Promise<LayoutRow[]> {
  return db
    .select(layoutColumns)
    .from(layoutRevisions)
    .innerJoin(user, eq(user.id, layoutRevisions.createdBy))
    .where(eq(layoutRevisions.systemId, systemId))
    .orderBy(desc(layoutRevisions.revision));
}

export async function layoutById(db: Db, id: string): Promise<LayoutRow | null> {
  const rows = await db
    .select(layoutColumns)
    .from(layoutRevisions)
    .innerJoin(user, eq(user.id, layoutRevisions.createdBy))
    .where(eq(layoutRevisions.id, id));
  return rows[0] ?? null;
}

export async function insertLayout(db: Db, row: typeof layoutRevisions.$inferInsert): Promise<void> {
  await db.insert(layoutRevisions).values(row);
}
