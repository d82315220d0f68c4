/**
 * Bundles the server, its worker threads and the command-line tools to dist/server, only when their sources changed since.
 *
 * node scripts/build-server.mjs [--force]
 */
import { createHash } from 'node:crypto';
import { existsSync } from 'node:fs';
import { mkdir, readdir, readFile, rename, rm, writeFile } from 'node:fs/promises';
import path from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';

const root = path.resolve(path.dirname(fileURLToPath(import.meta.url)), '..');
const outputFolder = path.join(root, 'dist', 'server');
const stampFile = path.join(outputFolder, '.built-from');

/** Bundle → where it begins. Packages stay outside: they are installed beside. */
const entries = {
  main: 'server/main.ts',
  worker: 'workers/node/worker.ts',
  compute: 'workers/node/compute.ts',
  generate: 'workers/node/generate.ts',
};

const sources = [
  'server',
  'db',
  'workers/node',
  'processing',
  'package-lock.json',
  'tsconfig.json',
  'scripts/build-server.mjs',
];

async function filesUnder(relative) {
  const entriesHere = await readdir(path.join(root, relative), { withFileTypes: true }).catch((error) => {
    if (error.code === 'ENOTDIR') return null;
    throw error;
  });
  if (entriesHere === null) return [relative];
  const nested = await Promise.all(entriesHere.map((entry) => filesUnder(path.join(relative, entry.name))));
  return nested.flat();
}

/** SHA-256 over names and contents of all sources, in a fixed order. */
async function hashOfSources() {
  const files = (await Promise.all(sources.map(filesUnder))).flat().sort();
  const hash = createHash('sha256');
  for (const file of files) {
    const content = await readFile(path.join(root, file));
    hash.update(`${file.split(path.sep).join('/')}\0${content.length}\0`);
    hash.update(content);
  }
  return hash.digest('hex');
}

/** Whether dist/server was built from the sources as they are now. */
export async function isServerBuilt() {
  return existsSync(stampFile) && (await readFile(stampFile, 'utf8')).trim() === (await hashOfSources());
}

/** @returns whether anything had to be built */
export async function buildServer({ force = false } = {}) {
  const wanted = await hashOfSources();
  const built = existsSync(stampFile) ? (await readFile(stampFile, 'utf8')).trim() : '';
  if (!force && built === wanted) return false;
  const { build } = await import('esbuild');
  // Beside and renamed: a server that is starting never finds half a bundle.
  const half = `${outputFolder}.half`;
  await rm(half, { recursive: true, force: true });
  await mkdir(half, { recursive: true });
  await build({
    absWorkingDir: root,
    entryPoints: entries,
    outdir: half,
    outExtension: { '.js': '.mjs' },
    bundle: true,
    packages: 'external',
    platform: 'node',
    format: 'esm',
    target: 'node20',
    sourcemap: 'linked',
    logLevel: 'warning',
  });
  await writeFile(path.join(half, '.built-from'), wanted);
  await rm(outputFolder, { recursive: true, force: true });
  await rename(half, outputFolder);
  return true;
}

if (import.meta.url === pathToFileURL(process.argv[1]).href) {
  const startedMs = performance.now();
  const isNew = await buildServer({ force: process.argv.includes('--force') });
  console.log(
    isNew
      ? `dist/server built in ${((performance.now() - startedMs) / 1000).toFixed(1)} s`
      : 'dist/server is up to date',
  );
}
