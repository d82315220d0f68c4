/**
 * Measures speed and memory of the main job; installs what it needs, bundles as the server does, and runs tests/bench.
 *
 * npm run bench -- --help
 */
import { spawn } from 'node:child_process';
import path from 'node:path';
import { checkNode, ensureDebianPackages, hasPythonModule, installPackages, root } from './prepare.mjs';

checkNode();
ensureDebianPackages([
  ['python3-numpy', hasPythonModule('numpy')],
  ['python3-scipy', hasPythonModule('scipy')],
  ['python3-pandas', hasPythonModule('pandas')],
]);
installPackages();

const folder = path.join(root, '.gustbook', 'bench', 'bin');
const { build } = await import('esbuild');
await build({
  absWorkingDir: root,
  entryPoints: {
    bench: 'tests/bench/bench.ts',
    ours: 'tests/bench/ours.ts',
    worker: 'workers/node/worker.ts',
  },
  outdir: folder,
  outExtension: { '.js': '.mjs' },
  bundle: true,
  packages: 'external',
  platform: 'node',
  format: 'esm',
  target: 'node20',
  logLevel: 'warning',
});
const child = spawn(process.execPath, [path.join(folder, 'bench.mjs'), ...process.argv.slice(2)], {
  stdio: 'inherit',
});
for (const signal of ['SIGINT', 'SIGTERM']) process.on(signal, () => child.kill(signal));
child.on('exit', (code, signal) => {
  process.exitCode = signal === null ? (code ?? 1) : 130;
});
