/**
 * Exports the client to dist/web, only when its sources are newer than the last export.
 *
 * node scripts/build-web.mjs [--force]
 */
import { spawn } from 'node:child_process';
import { createHash } from 'node:crypto';
import { existsSync } from 'node:fs';
import { copyFile, mkdir, readdir, readFile, rename, rm, writeFile } from 'node:fs/promises';
import path from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';

const root = path.resolve(path.dirname(fileURLToPath(import.meta.url)), '..');
const outputFolder = path.join(root, 'dist', 'web');
const stampFile = path.join(outputFolder, '.built-from');

/** All that the export depends on; node_modules stands behind the lock file. */
const sources = [
  'entry.ts',
  'app',
  'components',
  'processing',
  'server/contract',
  'workers/browser',
  'assets',
  'public',
  'package-lock.json',
  'app.json',
  'metro.config.js',
  'tsconfig.json',
  'scripts/build-web.mjs',
];
const notSources = new Set([path.join('public', 'fonts')]);

const fonts = [
  ['archivo', 'archivo-latin-600-normal.woff2'],
  ['atkinson-hyperlegible-next', 'atkinson-hyperlegible-next-latin-400-normal.woff2'],
  ['atkinson-hyperlegible-next', 'atkinson-hyperlegible-next-latin-600-normal.woff2'],
  ['jetbrains-mono', 'jetbrains-mono-latin-400-normal.woff2'],
  ['jetbrains-mono', 'jetbrains-mono-latin-600-normal.woff2'],
  ['jetbrains-mono', 'jetbrains-mono-greek-400-normal.woff2'],
];

async function filesUnder(relative) {
  if (notSources.has(relative)) return [];
  const absolute = path.join(root, relative);
  if (!existsSync(absolute)) return [];
  const entries = await readdir(absolute, { withFileTypes: true }).catch((error) => {
    if (error.code === 'ENOTDIR') return null;
    throw error;
  });
  if (entries === null) return [relative];
  const nested = await Promise.all(
    entries.map((entry) =>
      entry.isDirectory() || entry.isFile() ? filesUnder(path.join(relative, entry.name)) : [],
    ),
  );
  return nested.flat();
}

/** SHA-256 over names and contents of all sources, in a fixed order. */
export async function hashOfSources() {
  const files = (await Promise.all(sources.map(filesUnder))).flat().sort();
  const hash = createHash('sha256');
  for (const file of files) {
    const content = await readFile(path.join(root, file));
    hash.update(`${file.split(path.sep).join('/')}\0${content.length}\0`);
    hash.update(content);
  }
  return hash.digest('hex');
}

export async function copyFonts() {
  const target = path.join(root, 'public', 'fonts');
  await mkdir(target, { recursive: true });
  for (const [family, file] of fonts) {
    await copyFile(
      path.join(root, 'node_modules', '@fontsource', family, 'files', file),
      path.join(target, file),
    );
  }
}

function runExport(intoFolder) {
  return new Promise((resolve, reject) => {
    const cli = path.join(root, 'node_modules', '@expo', 'cli', 'build', 'bin', 'cli');
    const child = spawn(
      process.execPath,
      [cli, 'export', '--platform', 'web', '--output-dir', path.relative(root, intoFolder)],
      {
        cwd: root,
        stdio: ['ignore', 'pipe', 'pipe'],
        env: { ...process.env, EXPO_NO_TELEMETRY: '1', EXPO_OFFLINE: '1', CI: '1', NODE_ENV: 'production' },
      },
    );
    let tail = '';
    let isPrinting = true;
    const read = (chunk) => {
      const text = String(chunk);
      tail = (tail + text).slice(-8000);
      for (const line of text.split('\n')) {
        if (line.startsWith('›') || line.includes('assets (')) isPrinting = false;
        if (isPrinting && line.trim() !== '') process.stdout.write(`  ${line.trim()}\n`);
      }
    };
    child.stdout.on('data', read);
    child.stderr.on('data', read);
    child.on('error', reject);
    child.on('exit', (code) => {
      if (code === 0) resolve();
      else reject(new Error(`The export of the client stopped (exit ${code}). Its last words:\n${tail}`));
    });
  });
}

/** @returns {Promise<{built: boolean, hash: string}>} */
export async function buildWeb({ force = false } = {}) {
  const hash = await hashOfSources();
  const last = await readFile(stampFile, 'utf8').catch(() => '');
  if (!force && last.trim() === hash) {
    process.stdout.write('Client: up to date.\n');
    return { built: false, hash };
  }
  const startedAt = Date.now();
  process.stdout.write('Client: exporting (about a minute the first time) …\n');
  await copyFonts();
  // into a folder of its own, so that a server keeps serving the old export until the new one is whole
  const fresh = path.join(root, 'dist', 'web.next');
  await rm(fresh, { recursive: true, force: true });
  await runExport(fresh);
  await writeFile(path.join(fresh, '.built-from'), `${hash}\n`);
  await rm(outputFolder, { recursive: true, force: true });
  await mkdir(path.dirname(outputFolder), { recursive: true });
  await rename(fresh, outputFolder);
  process.stdout.write(`Client: exported to dist/web in ${Math.round((Date.now() - startedAt) / 1000)} s.\n`);
  return { built: true, hash };
}

if (process.argv[1] && import.meta.url === pathToFileURL(process.argv[1]).href) {
  await buildWeb({ force: process.argv.includes('--force') });
}
