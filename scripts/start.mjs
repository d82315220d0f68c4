/**
 * npm start: installs what is missing, builds what is stale, starts the server.
 *
 * Plain Node.js: node_modules may not be there yet. The server is the direct child, so that signals reach it and not a wrapper.
 */
import { spawn } from 'node:child_process';
import { join } from 'node:path';
import { checkNode, installPackages, root, run } from './prepare.mjs';

checkNode();
installPackages();
run(process.execPath, [join(root, 'scripts', 'build-web.mjs')]);
run(process.execPath, [join(root, 'scripts', 'build-server.mjs')]);

const logFile = process.env.GUSTBOOK_LOG_FILE ?? '.gustbook/server.log';
console.log(`Starting (log: ${logFile}) …`);
const child = spawn(process.execPath, ['--enable-source-maps', join(root, 'dist', 'server', 'main.mjs')], {
  cwd: root,
  stdio: 'inherit',
  env: { NODE_ENV: 'production', ...process.env, GUSTBOOK_LOG_FILE: logFile },
});
// A terminal sends Ctrl-C to both of us: the server answers it, we wait for its end.
process.on('SIGINT', () => undefined);
process.on('SIGTERM', () => child.kill('SIGTERM'));
child.on('exit', (code, signal) => process.exit(signal ? 1 : (code ?? 1)));
