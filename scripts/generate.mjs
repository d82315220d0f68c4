/**
 * Writes invented raw records with known fluxes.
 *
 * node scripts/generate.mjs --help
 */
import { spawn } from 'node:child_process';
import { dirname, join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';

const root = dirname(dirname(fileURLToPath(import.meta.url)));
const tsx = pathToFileURL(join(root, 'node_modules/tsx/dist/loader.mjs')).href;
const child = spawn(
  process.execPath,
  ['--import', tsx, join(root, 'workers/node/generate.ts'), ...process.argv.slice(2)],
  { stdio: 'inherit' },
);
for (const signal of ['SIGINT', 'SIGTERM']) process.on(signal, () => child.kill(signal));
child.on('exit', (code, signal) => process.exit(signal ? 130 : (code ?? 1)));
