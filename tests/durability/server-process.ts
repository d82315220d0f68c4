import { spawn } from 'node:child_process';
import type { ChildProcess } from 'node:child_process';
import { cp, mkdtemp } from 'node:fs/promises';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { projectRoot } from '../../server/paths';

/**
 * A copy of the built server of its own: it must not change while the test compares what it computes before and after. It lies inside the
 * project, since it finds its packages from there.
 */
export async function ownBundle(): Promise<string> {
  const { buildServer } = (await import(
    pathToFileURL(join(projectRoot, 'scripts', 'build-server.mjs')).href
  )) as { buildServer(): Promise<boolean> };
  await buildServer();
  const folder = await mkdtemp(join(projectRoot, '.gustbook', 'durability-server-'));
  await cp(join(projectRoot, 'dist', 'server'), folder, { recursive: true });
  return folder;
}

/** The built server as its own process, so that it can be killed as a crash or a power cut would. */
export class ServerProcess {
  private constructor(
    readonly url: string,
    private readonly child: ChildProcess,
  ) {}

  /** Starts and waits until it works; rejects with what it said when it ends before. */
  static start(bundle: string, dataFolder: string): Promise<ServerProcess> {
    const child = spawn(process.execPath, [join(bundle, 'main.mjs')], {
      stdio: ['ignore', 'pipe', 'pipe'],
      env: {
        ...process.env,
        PORT: '0',
        HOST: '127.0.0.1',
        GUSTBOOK_DATA: dataFolder,
        GUSTBOOK_FIRST_GROUP: 'Reedmoor',
        GUSTBOOK_FIRST_LEAD: 'lead@example.org',
        GUSTBOOK_LOG_FILE: join(dataFolder, 'server.log'),
        GUSTBOOK_WORKERS: '2',
      },
    });
    let said = '';
    return new Promise((resolve, reject) => {
      const hear = (text: Buffer) => {
        said += text.toString('utf8');
        const url = /is at (http:\S+)/.exec(said)?.[1];
        if (url !== undefined) resolve(new ServerProcess(url, child));
      };
      child.stdout.on('data', hear);
      child.stderr.on('data', hear);
      child.on('exit', (code, signal) => reject(new Error(`the server ended (${code ?? signal}): ${said}`)));
    });
  }

  /** No warning, no shutdown. */
  async kill(): Promise<void> {
    const gone = new Promise((resolve) => this.child.once('exit', resolve));
    this.child.kill('SIGKILL');
    await gone;
  }

  /** @returns exit code of an orderly end */
  async stop(): Promise<number | null> {
    const gone = new Promise<number | null>((resolve) => this.child.once('exit', resolve));
    this.child.kill('SIGTERM');
    return gone;
  }
}
