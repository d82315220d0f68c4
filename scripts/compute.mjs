/**
 * Computes fluxes from raw records on the command line: the bundle where it is up to date, else the sources.
 *
 * npm run compute -- --help
 */
import { spawn } from 'node:child_process';
import path from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { isServerBuilt } from './build-server.mjs';

const root = path.resolve(path.dirname(fileURLToPath(import.meta.url)), '..');

if (await isServerBuilt()) {
  await import(pathToFileURL(path.join(root, 'dist/server/compute.mjs')).href);
} else {
  const tsx = pathToFileURL(path.join(root, 'node_modules/tsx/dist/loader.mjs')).href;
  const child = spawn(
    process.execPath,
    ['--import', tsx, path.join(root, 'workers/node/compute.ts'), ...process.argv.slice(2)],
    { stdio: 'inherit' },
  );
  // A terminal sends its signals to both; a parent process only to this one.
  for (const signal of ['SIGINT', 'SIGTERM', 'SIGHUP']) process.on(signal, () => child.kill(signal));
  child.on('exit', (code, signal) => {
    process.exitCode = signal === null ? (code ?? 1) : 130;
  });
}
