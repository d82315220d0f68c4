import { and, asc, count, desc, eq, gte, inArray, lt, ne, sql } from 'drizzle-orm';
import type { Db } from '../client';
import { periods, recipes, runCounters, runs, truths, user } from '../schema';

// ------------------------------------------------------------------------------------------------------------ recipes

export type RecipeRow = typeof recipes.$inferSelect & { authorName: string | null };

function selectRecipes(db: Db) {
  return db
    .select({
      groupId: recipes.groupId,
      hash: recipes.hash,
      recipe: recipes.recipe,
      createdBy: recipes.createdBy,
      createdAt: recipes.createdAt,
      authorName: user.name,
    })
    .from(recipes)
    .leftJoin(user, eq(user.id, recipes.createdBy));
}

export async function recipesOf(db: Db, groupId: string): Promise<RecipeRow[]> {
  return selectRecipes(db).where(eq(recipes.groupId, groupId)).orderBy(asc(recipes.createdAt));
}

export async function recipeByHash(db: Db, groupId: string, hash: string): Promise<RecipeRow | null> {
  return (
    (await selectRecipes(db).where(and(eq(recipes.groupId, groupId), eq(recipes.hash, hash))))[0] ?? null
  );
}

/** @returns false when the group has a recipe of this hash already */
export async function insertRecipe(db: Db, row: typeof recipes.$inferInsert): Promise<boolean> {
  return (
    (await db.insert(recipes).values(row).onConflictDoNothing().returning({ hash: recipes.hash })).length > 0
  );
}

// ------------------------------------------------------------------------------------------------------------ runs

export type RunRow = typeof runs.$inferSelect & { authorName: string; recipeName: string };

function selectRuns(db: Db) {
  return db
    .select({
      id: runs.id,
      groupId: runs.groupId,
      systemId: runs.systemId,
      number: runs.number,
      recipeHash: runs.recipeHash,
      askedFromMs: runs.askedFromMs,
      askedToMs: runs.askedToMs,
      fromMs: runs.fromMs,
      toMs: runs.toMs,
      state: runs.state,
      cancelAsked: runs.cancelAsked,
      periodsTotal: runs.periodsTotal,
      periodsDone: runs.periodsDone,
      manifest: runs.manifest,
      manifestHash: runs.manifestHash,
      softwareVersion: runs.softwareVersion,
      resultHash: runs.resultHash,
      grades: runs.grades,
      problem: runs.problem,
      createdBy: runs.createdBy,
      createdAt: runs.createdAt,
      finishedAt: runs.finishedAt,
      authorName: user.name,
      recipeName: sql<string>`${recipes.recipe}->>'name'`,
    })
    .from(runs)
    .innerJoin(user, eq(user.id, runs.createdBy))
    .innerJoin(recipes, and(eq(recipes.groupId, runs.groupId), eq(recipes.hash, runs.recipeHash)));
}

/** Newest first. */
export async function runsOf(db: Db, systemId: string): Promise<RunRow[]> {
  return selectRuns(db).where(eq(runs.systemId, systemId)).orderBy(desc(runs.number));
}

export async function runById(db: Db, id: string): Promise<RunRow | null> {
  return (await selectRuns(db).where(eq(runs.id, id)))[0] ?? null;
}

export async function runsInStates(db: Db, states: string[], groupId?: string): Promise<RunRow[]> {
  return selectRuns(db)
    .where(and(inArray(runs.state, states), groupId === undefined ? undefined : eq(runs.groupId, groupId)))
    .orderBy(asc(runs.number));
}

/**
 * Adds a run under the group's next number.
 *
 * @returns false when a run of this id exists
 */
export async function insertRun(db: Db, row: Omit<typeof runs.$inferInsert, 'number'>): Promise<boolean> {
  return db.transaction(async (tx) => {
    const taken = await tx.select({ id: runs.id }).from(runs).where(eq(runs.id, row.id));
    if (taken.length > 0) return false;
    const [counter] = await tx
      .insert(runCounters)
      .values({ groupId: row.groupId, last: 1 })
      .onConflictDoUpdate({ target: runCounters.groupId, set: { last: sql`${runCounters.last} + 1` } })
      .returning({ last: runCounters.last });
    const added = await tx
      .insert(runs)
      .values({ ...row, number: counter.last })
      .onConflictDoNothing()
      .returning({ id: runs.id });
    return added.length > 0;
  });
}

export async function updateRun(
  db: Db,
  id: string,
  change: Partial<typeof runs.$inferInsert>,
): Promise<void> {
  await db.update(runs).set(change).where(eq(runs.id, id));
}

/** Changes a run only while it is in one of these states; a finished run never goes back to work. */
export async function updateRunIn(
  db: Db,
  id: string,
  states: string[],
  change: Partial<typeof runs.$inferInsert>,
): Promise<boolean> {
  const changed = await db
    .update(runs)
    .set(change)
    .where(and(eq(runs.id, id), inArray(runs.state, states)))
    .returning({ id: runs.id });
  return changed.length > 0;
}

export async function deleteRun(db: Db, id: string): Promise<void> {
  await db.delete(runs).where(eq(runs.id, id));
}

// ------------------------------------------------------------------------------------------------------------ periods

export type PeriodRowStored = typeof periods.$inferSelect;

/** Writes periods of one run, a handful at a time; a repeated period replaces itself. */
export async function upsertPeriods(db: Db, rows: (typeof periods.$inferInsert)[]): Promise<void> {
  if (rows.length === 0) return;
  await db
    .insert(periods)
    .values(rows)
    .onConflictDoUpdate({
      target: [periods.runId, periods.startMs],
      set: {
        endMs: sql`excluded.end_ms`,
        manifestHash: sql`excluded.manifest_hash`,
        outcome: sql`excluded.outcome`,
        values: sql`excluded."values"`,
        grades: sql`excluded.grades`,
        mainFinding: sql`excluded.main_finding`,
        reasons: sql`excluded.reasons`,
        ledger: sql`excluded.ledger`,
        curves: sql`excluded.curves`,
        rawFiles: sql`excluded.raw_files`,
        hash: sql`excluded.hash`,
      },
    });
}

/** Starts of the periods that a run already has from this manifest. */
export async function finishedStarts(db: Db, runId: string, manifestHash: string): Promise<number[]> {
  const rows = await db
    .select({ startMs: periods.startMs })
    .from(periods)
    .where(and(eq(periods.runId, runId), eq(periods.manifestHash, manifestHash)));
  return rows.map((row) => row.startMs);
}

/** Takes away periods of an earlier plan of the run. */
export async function dropOtherPeriods(db: Db, runId: string, manifestHash: string): Promise<void> {
  await db.delete(periods).where(and(eq(periods.runId, runId), ne(periods.manifestHash, manifestHash)));
}

export async function periodHashes(db: Db, runId: string): Promise<{ startMs: number; hash: string }[]> {
  return db
    .select({ startMs: periods.startMs, hash: periods.hash })
    .from(periods)
    .where(eq(periods.runId, runId))
    .orderBy(asc(periods.startMs));
}

export interface PeriodSummaryRow {
  startMs: number;
  endMs: number;
  outcome: string;
  values: Record<string, number | null>;
  grades: unknown;
  mainFinding: Record<string, string | null>;
}

/** Values and grades, without what only the period's own page needs. */
export async function periodSummaries(
  db: Db,
  runId: string,
  fromMs: number,
  toMs: number,
  limit: number,
): Promise<PeriodSummaryRow[]> {
  return db
    .select({
      startMs: periods.startMs,
      endMs: periods.endMs,
      outcome: periods.outcome,
      values: periods.values,
      grades: periods.grades,
      mainFinding: periods.mainFinding,
    })
    .from(periods)
    .where(and(eq(periods.runId, runId), gte(periods.startMs, fromMs), lt(periods.startMs, toMs)))
    .orderBy(asc(periods.startMs))
    .limit(limit);
}

/** Values, grades and reasons, for files that leave. */
export async function periodsForExport(
  db: Db,
  runId: string,
  fromMs: number,
  toMs: number,
  limit: number,
): Promise<Pick<PeriodRowStored, 'startMs' | 'endMs' | 'outcome' | 'values' | 'grades' | 'reasons'>[]> {
  return db
    .select({
      startMs: periods.startMs,
      endMs: periods.endMs,
      outcome: periods.outcome,
      values: periods.values,
      grades: periods.grades,
      reasons: periods.reasons,
    })
    .from(periods)
    .where(and(eq(periods.runId, runId), gte(periods.startMs, fromMs), lt(periods.startMs, toMs)))
    .orderBy(asc(periods.startMs))
    .limit(limit);
}

export async function periodAt(db: Db, runId: string, startMs: number): Promise<PeriodRowStored | null> {
  const rows = await db
    .select()
    .from(periods)
    .where(and(eq(periods.runId, runId), eq(periods.startMs, startMs)));
  return rows[0] ?? null;
}

export async function neighbours(
  db: Db,
  runId: string,
  startMs: number,
): Promise<{ previousStartMs: number | null; nextStartMs: number | null }> {
  const rows = await db
    .select({
      previousStartMs: sql<
        string | null
      >`max(${periods.startMs}) filter (where ${periods.startMs} < ${startMs})`,
      nextStartMs: sql<string | null>`min(${periods.startMs}) filter (where ${periods.startMs} > ${startMs})`,
    })
    .from(periods)
    .where(eq(periods.runId, runId));
  const number = (value: string | number | null) => (value === null ? null : Number(value));
  return { previousStartMs: number(rows[0].previousStartMs), nextStartMs: number(rows[0].nextStartMs) };
}

/** Grade of one flux by period, for the spine of a run that is still computing. */
export async function gradesOf(
  db: Db,
  runId: string,
  flux: string,
  fromMs: number,
  toMs: number,
): Promise<{ startMs: number; endMs: number; grade: number | null }[]> {
  const rows = await db
    .select({
      startMs: periods.startMs,
      endMs: periods.endMs,
      grade: sql<string | null>`${periods.grades} -> ${flux} ->> 'grade'`,
    })
    .from(periods)
    .where(and(eq(periods.runId, runId), gte(periods.endMs, fromMs), lt(periods.startMs, toMs)))
    .orderBy(asc(periods.startMs));
  return rows.map((row) => ({ ...row, grade: row.grade === null ? null : Number(row.grade) }));
}

export async function countPeriods(db: Db, runId: string): Promise<number> {
  return (await db.select({ n: count() }).from(periods).where(eq(periods.runId, runId)))[0].n;
}

export async function countSystemPeriods(
  db: Db,
  systemId: string,
): Promise<{ runs: number; periods: number }> {
  const own = await db.select({ n: count() }).from(runs).where(eq(runs.systemId, systemId));
  const rows = await db
    .select({ n: count() })
    .from(periods)
    .innerJoin(runs, eq(runs.id, periods.runId))
    .where(eq(runs.systemId, systemId));
  return { runs: own[0].n, periods: rows[0].n };
}

// ------------------------------------------------------------------------------------------------------------ truth

export async function truthsOf(
  db: Db,
  systemId: string,
  fromMs: number,
  toMs: number,
): Promise<{ startMs: number; endMs: number; values: Record<string, number | null> }[]> {
  return db
    .select({ startMs: truths.startMs, endMs: truths.endMs, values: truths.values })
    .from(truths)
    .where(and(eq(truths.systemId, systemId), gte(truths.startMs, fromMs), lt(truths.startMs, toMs)))
    .orderBy(asc(truths.startMs));
}

export async function upsertTruths(db: Db, rows: (typeof truths.$inferInsert)[]): Promise<void> {
  if (rows.length === 0) return;
  await db
    .insert(truths)
    .values(rows)
    .onConflictDoUpdate({
      target: [truths.systemId, truths.startMs],
      set: { endMs: sql`excluded.end_ms`, values: sql`excluded."values"` },
    });
}
