// npm test: installs what it needs and runs every check that fits into a quarter of an hour.
// npm run test:deep: the same, then the long harnesses.
import { spawn } from 'node:child_process';
import { existsSync, mkdirSync, readFileSync, rmSync } from 'node:fs';
import { join } from 'node:path';
import {
  checkNode,
  ensureDebianPackages,
  hasChromium,
  hasPythonModule,
  installPackages,
  root,
} from './prepare.mjs';

const deep = process.argv.includes('--deep');
const only = process.argv
  .find((a) => a.startsWith('--only='))
  ?.slice('--only='.length)
  .split(',');

checkNode();
ensureDebianPackages([
  ['chromium', hasChromium],
  ['python3-numpy', hasPythonModule('numpy')],
  ['python3-scipy', hasPythonModule('scipy')],
]);
installPackages();

const reports = join(root, '.gustbook', 'test-reports');
rmSync(reports, { recursive: true, force: true });
mkdirSync(reports, { recursive: true });

/** A gate is one check; a suite is as many as its tests. */
const node = (script, ...args) => ['node', [join('scripts', script), ...args]];
const bin = (name, ...args) => [join('node_modules', '.bin', name), args];
const suite = (name, config) => ({
  name,
  command: bin(
    'vitest',
    'run',
    '--config',
    config,
    '--reporter=default',
    '--reporter=json',
    `--outputFile.json=${join(reports, `${name}.json`)}`,
  ),
  report: join(reports, `${name}.json`),
});

const stages = [
  { name: 'format', command: bin('prettier', '--check', '--log-level=warn', '.') },
  {
    name: 'lint',
    command: bin(
      'eslint',
      '.',
      '--max-warnings',
      '0',
      '--cache',
      '--cache-location',
      '.gustbook/eslint-cache',
    ),
  },
  { name: 'types', command: bin('tsc', '--noEmit') },
  { name: 'generated-kernel', command: node('build-wasm.mjs', '--check') },
  suite('unit', 'vitest.config.mts'),
  { name: 'build-server', command: node('build-server.mjs') },
  { name: 'build-web', command: node('build-web.mjs') },
  suite('api', 'vitest.api.config.mts'),
  suite('chain', 'vitest.chain.config.mts'),
  suite('durability', 'vitest.durability.config.mts'),
  suite('browser', 'vitest.browser.config.mts'),
  ...(deep ? [suite('deep', 'vitest.deep.config.mts')] : []),
].filter((stage) => !only || only.includes(stage.name));

function start([command, args]) {
  return new Promise((resolve) => {
    const child = spawn(command, args, {
      cwd: root,
      stdio: ['ignore', 'inherit', 'inherit'],
      env: { ...process.env, NO_COLOR: '1', EXPO_NO_TELEMETRY: '1', EXPO_OFFLINE: '1' },
    });
    child.on('error', () => resolve(127));
    child.on('exit', (code, signal) => resolve(code ?? (signal ? 1 : 0)));
  });
}

let passed = 0;
let failed = 0;
const lines = [];
for (const stage of stages) {
  const begun = Date.now();
  console.log(`\n── ${stage.name} ──`);
  const code = await start(stage.command);
  const seconds = ((Date.now() - begun) / 1000).toFixed(0);
  if (!stage.report) {
    if (code === 0) passed += 1;
    else failed += 1;
    lines.push(`${code === 0 ? 'ok    ' : 'FAILED'} ${stage.name} (${seconds} s)`);
    continue;
  }
  if (!existsSync(stage.report)) {
    failed += 1;
    lines.push(`FAILED ${stage.name}: ended with code ${code} and no report (${seconds} s)`);
    continue;
  }
  const report = JSON.parse(readFileSync(stage.report, 'utf8'));
  const skipped = (report.numPendingTests ?? 0) + (report.numTodoTests ?? 0);
  // A suite that ran nothing, skipped something, or failed outside its tests has failed.
  const brokenFiles = report.testResults.filter(
    (f) => f.status === 'failed' && f.assertionResults.length === 0,
  ).length;
  const bad = report.numFailedTests + skipped + brokenFiles;
  const extra = bad === 0 && (code !== 0 || report.numPassedTests === 0) ? 1 : 0;
  passed += report.numPassedTests;
  failed += bad + extra;
  lines.push(
    `${bad + extra === 0 ? 'ok    ' : 'FAILED'} ${stage.name}: ${report.numPassedTests} passed, ${report.numFailedTests} failed, ` +
      `${skipped} skipped (a skip is a failure)${brokenFiles ? `, ${brokenFiles} files broken` : ''} (${seconds} s)`,
  );
}

console.log(`\n${lines.join('\n')}\n`);
console.log(`${passed} passed, ${failed} failed`);
process.exit(failed === 0 && passed > 0 ? 0 : 1);
