import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { preparedDump } from '../../db/prepared-folder';
import { projectRoot } from '../../server/paths';

/** The prepared empty database and the bundle of the worker threads, built once before the test files start side by side. */
export default async function prepare(): Promise<void> {
  await preparedDump(join(projectRoot, '.gustbook', 'cache'));
  const { buildServer } = (await import(
    pathToFileURL(join(projectRoot, 'scripts', 'build-server.mjs')).href
  )) as {
    buildServer(): Promise<boolean>;
  };
  await buildServer();
}
