import { createHash } from 'node:crypto';
import { existsSync, readFileSync, readdirSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

/** The migrations folder, found upwards from this file: it stands in the source tree and beside the bundled server alike. */
export function migrationsFolder(): string {
  let folder = dirname(fileURLToPath(import.meta.url));
  for (;;) {
    const candidate = join(folder, 'drizzle');
    if (existsSync(join(candidate, 'meta', '_journal.json'))) return candidate;
    const parent = dirname(folder);
    if (parent === folder) throw new Error('The folder with the database migrations (drizzle/) is missing.');
    folder = parent;
  }
}

/** Hash over all migrations: changes when one is added. */
export function migrationsHash(): string {
  const folder = migrationsFolder();
  const hash = createHash('sha256');
  for (const name of readdirSync(folder)
    .filter((file) => file.endsWith('.sql'))
    .sort()) {
    hash
      .update(name)
      .update('\0')
      .update(readFileSync(join(folder, name)))
      .update('\0');
  }
  return hash.digest('hex').slice(0, 16);
}
