import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import type { TestProject } from 'vitest/node';
import { projectRoot } from '../../server/paths';

/** The plain scripts that these tests share with the commands. */
interface Scripts {
  buildServer(): Promise<boolean>;
  buildWeb(): Promise<unknown>;
  startDemoServer(options?: { withinMs?: number }): Promise<DemoServer>;
}

interface DemoServer {
  url: string;
  startedMs: number;
  computedMs: number;
  log(): Promise<string>;
  stop(): Promise<void>;
}

declare module 'vitest' {
  export interface ProvidedContext {
    /** Where the server with the demonstration listens. */
    serverUrl: string;
  }
}

async function script<Name extends keyof Scripts>(file: string, name: Name): Promise<Scripts[Name]> {
  const loaded = (await import(pathToFileURL(join(projectRoot, 'scripts', file)).href)) as Scripts;
  return loaded[name];
}

/** Builds what is stale, starts one server with the demonstration for all files, prints its log when something failed. */
export default async function serve(project: TestProject): Promise<() => Promise<void>> {
  await (
    await script('build-server.mjs', 'buildServer')
  )();
  await (
    await script('build-web.mjs', 'buildWeb')
  )();
  const server = await (await script('demo-server.mjs', 'startDemoServer'))();
  const seconds = (ms: number) => (ms / 1000).toFixed(1);
  process.stdout.write(
    `Server ready after ${seconds(server.startedMs)} s, demonstration computed after ${seconds(server.computedMs)} s.\n`,
  );
  project.provide('serverUrl', server.url);
  return async () => {
    const log = await server.log();
    await server.stop();
    const hasFailed =
      project.vitest.state.getCountOfFailedTests() > 0 ||
      project.vitest.state.getFiles().some((file) => file.result?.state === 'fail');
    if (hasFailed) {
      process.stderr.write(`The end of the server's log:\n${log.split('\n').slice(-80).join('\n')}\n`);
    }
  };
}
