/**
 * A server of the built bundle with the invented demonstration, in a data folder of its own that goes when it stops. Used by the browser
 * tests and the screenshots.
 */
import { spawn } from 'node:child_process';
import { existsSync } from 'node:fs';
import { mkdtemp, readFile, rm } from 'node:fs/promises';
import { createServer } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { root } from './prepare.mjs';

const wait = (ms) => new Promise((resolve) => setTimeout(resolve, ms));

function freePort() {
  return new Promise((resolve, reject) => {
    const probe = createServer();
    probe.once('error', reject);
    probe.listen(0, '127.0.0.1', () => {
      const { port } = probe.address();
      probe.close(() => resolve(port));
    });
  });
}

/** Signs in and returns the cookie header. */
export async function signInByRequest(url, account) {
  const answer = await fetch(`${url}/api/auth/sign-in/email`, {
    method: 'POST',
    headers: { 'content-type': 'application/json', origin: url },
    body: JSON.stringify({ email: account.email, password: account.password }),
  });
  if (!answer.ok) throw new Error(`signing ${account.email} in answered ${answer.status}`);
  return answer.headers
    .getSetCookie()
    .map((cookie) => cookie.split(';')[0])
    .join('; ');
}

/**
 * Starts the server and waits until the demonstration is computed.
 *
 * @param {{ withinMs?: number }} options
 * @returns {Promise<{ url: string, dataFolder: string, startedMs: number, computedMs: number, log: () => Promise<string>, stop: () => Promise<void> }>}
 */
export async function startDemoServer({ withinMs = 300_000 } = {}) {
  const main = join(root, 'dist', 'server', 'main.mjs');
  if (!existsSync(main)) throw new Error('dist/server is missing: node scripts/build-server.mjs');
  const folder = await mkdtemp(join(tmpdir(), 'gustbook-demo-'));
  const logFile = join(folder, 'server.log');
  const url = `http://127.0.0.1:${await freePort()}`;
  // A group of its own, so that nothing that the server started outlives it.
  const child = spawn(process.execPath, ['--enable-source-maps', main], {
    cwd: root,
    detached: true,
    stdio: ['ignore', 'pipe', 'pipe'],
    env: {
      PATH: process.env.PATH,
      HOME: process.env.HOME,
      NODE_ENV: 'production',
      PORT: new URL(url).port,
      GUSTBOOK_DATA: join(folder, 'data'),
      GUSTBOOK_LOG_FILE: logFile,
    },
  });
  let said = '';
  child.stdout.on('data', (text) => (said += text));
  child.stderr.on('data', (text) => (said += text));
  const ended = new Promise((resolve) => child.once('exit', resolve));
  const killGroup = () => {
    try {
      process.kill(-child.pid, 'SIGKILL');
    } catch {
      // nothing of it is left
    }
  };
  process.once('exit', killGroup);
  const log = async () => `${said}${await readFile(logFile, 'utf8').catch(() => '')}`;
  const stop = async () => {
    process.off('exit', killGroup);
    if (child.exitCode === null) child.kill('SIGTERM');
    await Promise.race([ended, wait(15_000)]);
    killGroup();
    await rm(folder, { recursive: true, force: true });
  };

  const begun = Date.now();
  try {
    let lastHealth = 'no answer';
    const health = async () => {
      const answer = await fetch(`${url}/api/health`, { signal: AbortSignal.timeout(10_000) }).catch(
        () => null,
      );
      if (answer === null) return null;
      lastHealth = `${answer.status} ${await answer.clone().text()}`;
      return answer.ok ? await answer.json() : null;
    };
    /** Asks until something is so; the server's end and the deadline are errors. */
    const until = async (what, ask) => {
      for (;;) {
        const found = await ask();
        if (found) return found;
        if (child.exitCode !== null) throw new Error(`the server ended with code ${child.exitCode}`);
        if (Date.now() - begun > withinMs)
          throw new Error(`${what}: not after ${withinMs / 1000} s; its health: ${lastHealth}`);
        await wait(250);
      }
    };
    const ready = await until('the server is ready', async () => {
      const state = await health();
      return state?.status === 'ready' && state.demo ? state : null;
    });
    const startedMs = Date.now() - begun;
    const cookie = await signInByRequest(url, ready.demo.signIns[0]);
    await until('the demonstration is computed', async () => {
      const answer = await fetch(`${url}/api/groups/lowmere/stations/hollin-fen/runs`, {
        headers: { cookie },
      });
      if (!answer.ok) return false;
      const [run] = await answer.json();
      if (run?.state === 'failed') throw new Error(`the demonstration's run failed: ${run.problem}`);
      return run?.state === 'done' && (await health())?.progress === null;
    });
    return { url, dataFolder: join(folder, 'data'), startedMs, computedMs: Date.now() - begun, log, stop };
  } catch (cause) {
    const tail = (await log()).split('\n').slice(-60).join('\n');
    await stop();
    throw new Error(`${cause instanceof Error ? cause.message : cause}\nThe server's last words:\n${tail}`);
  }
}
