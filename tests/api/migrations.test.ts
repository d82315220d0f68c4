import { spawnSync } from 'node:child_process';
import { cpSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { projectRoot } from '../../server/paths';

/** Runs the migration generator on a schema, over a copy of the committed migrations. */
function generate(schema: string): { before: string[]; after: string[]; said: string; folder: string } {
  // Inside the project, so that its packages are found.
  const folder = mkdtempSync(join(projectRoot, '.gustbook', 'migrations-'));
  const out = join(folder, 'drizzle');
  cpSync(join(projectRoot, 'drizzle'), out, { recursive: true });
  const before = readdirSync(out).sort();
  const config = join(folder, 'drizzle.config.ts');
  writeFileSync(
    config,
    `export default { dialect: 'postgresql', schema: ${JSON.stringify(schema)}, out: './drizzle' };\n`,
  );
  const done = spawnSync(
    process.execPath,
    [join(projectRoot, 'node_modules/drizzle-kit/bin.cjs'), 'generate', '--config', config],
    {
      cwd: folder,
      encoding: 'utf8',
    },
  );
  expect([done.status, done.stderr]).toEqual([0, '']);
  return { before, after: readdirSync(out).sort(), said: done.stdout, folder };
}

describe('the committed migrations', () => {
  it('are all that the schema asks for', () => {
    const { before, after, said, folder } = generate(join(projectRoot, 'db', 'schema', 'index.ts'));
    expect(said).toContain('No schema changes');
    expect(after).toEqual(before);
    rmSync(folder, { recursive: true });
  });

  it('would grow by one if the schema had a column more', () => {
    const folder = mkdtempSync(join(projectRoot, '.gustbook', 'schema-'));
    cpSync(join(projectRoot, 'db', 'schema'), folder, { recursive: true });
    const path = join(folder, 'records.ts');
    const text = readFileSync(path, 'utf8');
    writeFileSync(
      path,
      text.replace("slug: text('slug').notNull(),", "slug: text('slug').notNull(),\n    more: text('more'),"),
    );
    const grown = generate(join(folder, 'index.ts'));
    expect(grown.after.length).toBe(grown.before.length + 1);
    rmSync(folder, { recursive: true });
    rmSync(grown.folder, { recursive: true });
  });
});
