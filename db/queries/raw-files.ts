import { and, asc, count, eq, inArray, isNull, max, min, or, sum } from 'drizzle-orm';
import type { Db } from '../client';
import { layoutRevisions, rawFiles, user } from '../schema';

export type RawFileRow = typeof rawFiles.$inferSelect & {
  authorName: string;
  layout: unknown;
  layoutHash: string;
};

const columns = {
  id: rawFiles.id,
  groupId: rawFiles.groupId,
  systemId: rawFiles.systemId,
  fileName: rawFiles.fileName,
  sha256: rawFiles.sha256,
  bytes: rawFiles.bytes,
  packed: rawFiles.packed,
  contentHash: rawFiles.contentHash,
  contentBytes: rawFiles.contentBytes,
  headHash: rawFiles.headHash,
  state: rawFiles.state,
  layoutId: rawFiles.layoutId,
  readWithLayoutHash: rawFiles.readWithLayoutHash,
  chunkFolder: rawFiles.chunkFolder,
  report: rawFiles.report,
  rows: rawFiles.rows,
  badRows: rawFiles.badRows,
  firstScanMs: rawFiles.firstScanMs,
  lastScanMs: rawFiles.lastScanMs,
  problem: rawFiles.problem,
  supersededBy: rawFiles.supersededBy,
  computeRecipeHash: rawFiles.computeRecipeHash,
  withdrawnAt: rawFiles.withdrawnAt,
  withdrawnBy: rawFiles.withdrawnBy,
  createdBy: rawFiles.createdBy,
  createdAt: rawFiles.createdAt,
  authorName: user.name,
  layout: layoutRevisions.layout,
  layoutHash: layoutRevisions.hash,
};

function selectRawFiles(db: Db) {
  return db
    .select(columns)
    .from(rawFiles)
    .innerJoin(user, eq(user.id, rawFiles.createdBy))
    .innerJoin(layoutRevisions, eq(layoutRevisions.id, rawFiles.layoutId));
}

/** In the order of their first scan, then as they came. */
export async function rawFilesOf(db: Db, systemId: string): Promise<RawFileRow[]> {
  return selectRawFiles(db)
    .where(eq(rawFiles.systemId, systemId))
    .orderBy(asc(rawFiles.firstScanMs), asc(rawFiles.createdAt), asc(rawFiles.id));
}

export async function rawFileById(db: Db, id: string): Promise<RawFileRow | null> {
  return (await selectRawFiles(db).where(eq(rawFiles.id, id)))[0] ?? null;
}

/** The file of this system with these bytes or, packed or not, this content. */
export async function rawFileByContent(
  db: Db,
  systemId: string,
  sha256: string,
  contentHash: string,
): Promise<RawFileRow | null> {
  const rows = await selectRawFiles(db).where(
    and(
      eq(rawFiles.systemId, systemId),
      or(eq(rawFiles.sha256, sha256), eq(rawFiles.contentHash, contentHash)),
    ),
  );
  return rows[0] ?? null;
}

export async function presentHashes(
  db: Db,
  systemId: string,
  hashes: string[],
): Promise<{ sha256: string; rawFileId: string }[]> {
  if (hashes.length === 0) return [];
  return db
    .select({ sha256: rawFiles.sha256, rawFileId: rawFiles.id })
    .from(rawFiles)
    .where(and(eq(rawFiles.systemId, systemId), inArray(rawFiles.sha256, hashes)));
}

export interface ContentLength {
  id: string;
  contentBytes: number;
  contentHash: string;
  headHash: string;
  sha256: string;
  packed: boolean;
  supersededBy: string | null;
}

/** Lengths and hashes of all contents of a system, the shortest first: for finding files that have grown. */
export async function contentLengths(db: Db, systemId: string): Promise<ContentLength[]> {
  return db
    .select({
      id: rawFiles.id,
      contentBytes: rawFiles.contentBytes,
      contentHash: rawFiles.contentHash,
      headHash: rawFiles.headHash,
      sha256: rawFiles.sha256,
      packed: rawFiles.packed,
      supersededBy: rawFiles.supersededBy,
    })
    .from(rawFiles)
    .where(eq(rawFiles.systemId, systemId))
    .orderBy(asc(rawFiles.contentBytes));
}

/**
 * Adds a file and marks those it grew from, all or nothing.
 *
 * @returns false when another request was quicker with the same bytes, content or id
 */
export async function insertRawFile(
  db: Db,
  row: typeof rawFiles.$inferInsert,
  supersedes: string[],
): Promise<boolean> {
  return db.transaction(async (tx) => {
    const added = await tx.insert(rawFiles).values(row).onConflictDoNothing().returning({ id: rawFiles.id });
    if (added.length === 0) return false;
    if (supersedes.length > 0) {
      await tx.update(rawFiles).set({ supersededBy: row.id }).where(inArray(rawFiles.id, supersedes));
    }
    return true;
  });
}

export async function updateRawFile(
  db: Db,
  id: string,
  change: Partial<typeof rawFiles.$inferInsert>,
): Promise<void> {
  await db.update(rawFiles).set(change).where(eq(rawFiles.id, id));
}

/** Files that still have to be read, over all groups. */
export async function unreadRawFiles(db: Db): Promise<{ id: string; systemId: string }[]> {
  return db
    .select({ id: rawFiles.id, systemId: rawFiles.systemId })
    .from(rawFiles)
    .where(and(inArray(rawFiles.state, ['stored', 'reading']), isNull(rawFiles.withdrawnAt)))
    .orderBy(asc(rawFiles.createdAt));
}

export async function countUnread(db: Db, systemId: string): Promise<number> {
  const rows = await db
    .select({ n: count() })
    .from(rawFiles)
    .where(
      and(
        eq(rawFiles.systemId, systemId),
        inArray(rawFiles.state, ['stored', 'reading']),
        isNull(rawFiles.withdrawnAt),
      ),
    );
  return rows[0].n;
}

export async function rawFileTotals(
  db: Db,
  systemId: string,
): Promise<{ files: number; bytes: number; firstScanMs: number | null; lastScanMs: number | null }> {
  const rows = await db
    .select({
      files: count(),
      bytes: sum(rawFiles.bytes),
      firstScanMs: min(rawFiles.firstScanMs),
      lastScanMs: max(rawFiles.lastScanMs),
    })
    .from(rawFiles)
    .where(and(eq(rawFiles.systemId, systemId), isNull(rawFiles.withdrawnAt)));
  const row = rows[0];
  return {
    files: row.files,
    bytes: Number(row.bytes ?? 0),
    firstScanMs: row.firstScanMs,
    lastScanMs: row.lastScanMs,
  };
}

export async function allRawFileBytes(db: Db, systemId: string): Promise<{ files: number; bytes: number }> {
  const rows = await db
    .select({ files: count(), bytes: sum(rawFiles.bytes) })
    .from(rawFiles)
    .where(eq(rawFiles.systemId, systemId));
  return { files: rows[0].files, bytes: Number(rows[0].bytes ?? 0) };
}

/** Which of these objects does no file refer to any more? */
export async function unreferenced(db: Db, sha256: string[]): Promise<string[]> {
  if (sha256.length === 0) return [];
  const rows = await db
    .selectDistinct({ sha256: rawFiles.sha256 })
    .from(rawFiles)
    .where(inArray(rawFiles.sha256, sha256));
  const used = new Set(rows.map((row) => row.sha256));
  return [...new Set(sha256)].filter((hash) => !used.has(hash));
}
