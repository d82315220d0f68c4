// What every command needs before it can begin: a fitting Node.js and the packages of the lock file.
// Plain Node.js without dependencies, since node_modules may not be there yet.
import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

export const root = dirname(dirname(fileURLToPath(import.meta.url)));

/** Stops with a plain word when Node.js is too old. */
export function checkNode() {
  const [major, minor] = process.versions.node.split('.').map(Number);
  if (major > 20 || (major === 20 && minor >= 19)) return;
  console.error(
    `Gustbook needs Node.js 20.19 or newer; this is ${process.versions.node}. Nothing was changed.`,
  );
  process.exit(1);
}

/** Runs a command in the repository; exits with its code when it fails. */
export function run(command, args, options = {}) {
  const done = spawnSync(command, args, { cwd: root, stdio: 'inherit', ...options });
  if (done.error) throw done.error;
  if (done.status !== 0) {
    console.error(`\n${[command, ...args].join(' ')} ended with code ${done.status}.`);
    process.exit(done.status ?? 1);
  }
}

const stampFile = join(root, 'node_modules', '.gustbook-lock');

function lockHash() {
  return createHash('sha256')
    .update(readFileSync(join(root, 'package-lock.json')))
    .update(process.version)
    .digest('hex');
}

/** Installs the packages of the lock file unless that was done already. */
export function installPackages() {
  if (existsSync(stampFile) && readFileSync(stampFile, 'utf8') === lockHash()) return;
  console.error('Installing packages (once; a few minutes) …');
  run('npm', ['ci', '--no-fund', '--no-audit'], { env: { ...process.env, NODE_ENV: 'development' } });
  mkdirSync(dirname(stampFile), { recursive: true });
  writeFileSync(stampFile, lockHash());
}

/**
 * Makes sure that Debian packages are there. Each entry: [package, test that it works].
 * @param {[string, () => boolean][]} wanted
 */
export function ensureDebianPackages(wanted) {
  const missing = wanted.filter(([, works]) => !works()).map(([name]) => name);
  if (missing.length === 0) return;
  console.error(`Installing ${missing.join(', ')} from Debian …`);
  const asRoot = process.getuid?.() === 0 ? [] : ['sudo', '-n'];
  const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' };
  const apt = (...args) => {
    const [command, ...rest] = [...asRoot, 'apt-get', ...args];
    return spawnSync(command, rest, { stdio: ['ignore', 'ignore', 'inherit'], env }).status === 0;
  };
  if (!(apt('update', '-qq') && apt('install', '-y', '-qq', '--no-install-recommends', ...missing))) {
    console.error(
      `Could not install ${missing.join(', ')}. The tests need them: install them with your system's package manager and try again.`,
    );
    process.exit(1);
  }
}

export const hasChromium = () => existsSync('/usr/bin/chromium');
export const hasPythonModule = (module) => () =>
  spawnSync('/usr/bin/python3', ['-c', `import ${module}`], { stdio: 'ignore' }).status === 0;
