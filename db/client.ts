import type { ExtractTablesWithRelations } from 'drizzle-orm';
import { drizzle as drizzlePostgres } from 'drizzle-orm/node-postgres';
import { migrate as migratePostgres } from 'drizzle-orm/node-postgres/migrator';
import type { PgDatabase, PgQueryResultHKT } from 'drizzle-orm/pg-core';
import { drizzle as drizzleEmbedded } from 'drizzle-orm/pglite';
import { migrate as migrateEmbedded } from 'drizzle-orm/pglite/migrator';
import pg from 'pg';
import { FolderLock } from './folder-lock';
import { migrationsFolder } from './migrations';
import { openPrepared } from './prepared-folder';
import * as schema from './schema';

/**
 * One schema, two drivers. Nothing outside this folder knows which one is in use.
 *
 * Trap: the embedded database has one connection. A query on the outer `db` awaited inside `db.transaction` waits for itself for ever.
 */
export type Schema = typeof schema;
export type Db = PgDatabase<PgQueryResultHKT, Schema, ExtractTablesWithRelations<Schema>>;

export interface Database {
  db: Db;
  driver: 'embedded' | 'postgresql';
  /** Raw statements, for the job queue; the two drivers answer alike here and nowhere else. */
  executeSql(text: string, values?: unknown[]): Promise<{ rows: Record<string, unknown>[] }>;
  close(): Promise<void>;
}

/** Any number, the same in every server process of this project. */
const MIGRATION_LOCK = 7_041_906;

/**
 * Opens the embedded database of a data folder, which belongs to this process until it is closed.
 *
 * @param folder the data folder; `<folder>/db` is the database
 * @param cacheFolder where the prepared first state is kept
 * @throws FolderInUseError when another process has it open
 */
export async function openEmbedded(folder: string, cacheFolder: string): Promise<Database> {
  const lock = await FolderLock.take(folder);
  try {
    const client = await openPrepared(folder, cacheFolder);
    const db = drizzleEmbedded(client, { schema });
    await migrateEmbedded(db, { migrationsFolder: migrationsFolder() });
    return {
      db: db as unknown as Db,
      driver: 'embedded',
      executeSql: async (text, values) =>
        values?.length
          ? ((await client.query(text, values)) as { rows: Record<string, unknown>[] })
          : (((await client.exec(text)).at(-1) ?? { rows: [] }) as { rows: Record<string, unknown>[] }),
      close: async () => {
        await client.close();
        await lock.release();
      },
    };
  } catch (cause) {
    await lock.release();
    throw cause;
  }
}

/** Opens a PostgreSQL database by its address; migrations run under an advisory lock, so that several servers may start at once. */
export async function openPostgres(url: string): Promise<Database> {
  const pool = new pg.Pool({ connectionString: url, max: 10 });
  const guard = await pool.connect();
  try {
    await guard.query('select pg_advisory_lock($1)', [MIGRATION_LOCK]);
    await migratePostgres(drizzlePostgres(pool, { schema }), { migrationsFolder: migrationsFolder() });
  } finally {
    await guard.query('select pg_advisory_unlock($1)', [MIGRATION_LOCK]).catch(() => undefined);
    guard.release();
  }
  return {
    db: drizzlePostgres(pool, { schema }) as unknown as Db,
    driver: 'postgresql',
    executeSql: async (text, values) => {
      const answer = await pool.query(text, values);
      const last = Array.isArray(answer) ? answer.at(-1) : answer;
      return { rows: last?.rows ?? [] };
    },
    close: () => pool.end(),
  };
}
