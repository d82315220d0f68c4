/**
 * npm run dev: the server, bundled anew and restarted when its sources change. The client is served by `npx expo start --web` beside it,
 * which sends /api to this server.
 */
import { spawn } from 'node:child_process';
import { watch } from 'node:fs';
import { join } from 'node:path';
import { buildServer } from './build-server.mjs';
import { checkNode, installPackages, root } from './prepare.mjs';

checkNode();
installPackages();

let child = null;

function start() {
  child = spawn(process.execPath, ['--enable-source-maps', join(root, 'dist', 'server', 'main.mjs')], {
    cwd: root,
    stdio: 'inherit',
    env: {
      GUSTBOOK_DEV_ORIGIN: 'http://localhost:8081',
      GUSTBOOK_LOG_FILE: '.gustbook/server.log',
      ...process.env,
    },
  });
}

/** Ends the server that runs and waits for it, since two cannot hold one data folder. */
function stop() {
  return new Promise((resolve) => {
    if (child === null || child.exitCode !== null) return resolve();
    child.once('exit', resolve);
    child.kill('SIGTERM');
  });
}

async function rebuild() {
  try {
    if (!(await buildServer()) && child !== null) return;
  } catch (error) {
    console.error(error.message);
    return;
  }
  await stop();
  start();
}

let waiting = null;
let turn = rebuild();
for (const folder of ['server', 'db', 'workers/node', 'processing']) {
  watch(join(root, folder), { recursive: true }, () => {
    clearTimeout(waiting);
    waiting = setTimeout(() => {
      turn = turn.then(rebuild);
    }, 300);
  });
}
for (const signal of ['SIGINT', 'SIGTERM']) {
  process.on(signal, () => void stop().then(() => process.exit(0)));
}
