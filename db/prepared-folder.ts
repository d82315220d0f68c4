import { openAsBlob } from 'node:fs';
import { access, mkdir, open, readFile, rename, rm, writeFile } from 'node:fs/promises';
import { createRequire } from 'node:module';
import { dirname, join } from 'node:path';
import { PGlite } from '@electric-sql/pglite';
import { drizzle } from 'drizzle-orm/pglite';
import { migrate } from 'drizzle-orm/pglite/migrator';
import PgBoss from 'pg-boss';
import { migrationsFolder, migrationsHash } from './migrations';

/**
 * The embedded database: a first start takes many seconds, loading a prepared dump one or two. The dump is built once and kept; it holds
 * the empty, migrated database with the tables of the job queue.
 */

/** Every commit reaches the disk: the library starts its server with fsync off. */
const startParams = [
  ...PGlite.defaultStartParams.filter((parameter) => parameter !== '-F'),
  '-c',
  'fsync=on',
  '-c',
  'wal_sync_method=open_datasync',
];

async function exists(path: string): Promise<boolean> {
  return access(path).then(
    () => true,
    () => false,
  );
}

/** Version of an installed package, also of one that does not export its package.json. */
async function versionOf(packageName: string): Promise<string> {
  let folder = dirname(createRequire(import.meta.url).resolve(packageName));
  for (;;) {
    const text = await readFile(join(folder, 'package.json'), 'utf8').catch(() => '{}');
    const { name, version } = JSON.parse(text) as { name?: string; version?: string };
    if (name === packageName && version !== undefined) return version;
    if (folder === dirname(folder))
      throw new Error(`The package ${packageName} is not installed as it must be.`);
    folder = dirname(folder);
  }
}

/**
 * Path of the prepared dump, built when it is not there yet.
 *
 * @param cacheFolder kept between starts; anybody may delete it
 */
export async function preparedDump(cacheFolder: string): Promise<string> {
  const versions = `${await versionOf('@electric-sql/pglite')}-${await versionOf('pg-boss')}`;
  const path = join(cacheFolder, `empty-database-${versions}-${migrationsHash()}.tar`);
  if (await exists(path)) return path;
  const client = await PGlite.create();
  await migrate(drizzle(client), { migrationsFolder: migrationsFolder() });
  await client.exec(PgBoss.getConstructionPlans());
  const dump = await client.dumpDataDir('none');
  await client.close();
  await mkdir(cacheFolder, { recursive: true });
  const temporary = `${path}.${process.pid}.part`;
  await writeFile(temporary, Buffer.from(await dump.arrayBuffer()));
  await rename(temporary, path);
  return path;
}

/**
 * Opens `<folder>/db`, made from the prepared dump when it does not exist. The first state is laid into a folder of another name and
 * renamed when it is whole, so that an interrupted first start leaves nothing half made.
 */
export async function openPrepared(folder: string, cacheFolder: string): Promise<PGlite> {
  const home = join(folder, 'db');
  if (!(await exists(home))) {
    const half = join(folder, 'db.half');
    await rm(half, { recursive: true, force: true });
    const dump = await openAsBlob(await preparedDump(cacheFolder));
    const first = await PGlite.create({ dataDir: half, loadDataDir: dump, startParams });
    await first.close();
    await rename(half, home);
    const parent = await open(folder, 'r');
    await parent.sync();
    await parent.close();
  }
  return PGlite.create({ dataDir: home, startParams });
}
