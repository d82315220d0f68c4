import { join } from 'node:path';
import { preparedDump } from '../../db/prepared-folder';
import { projectRoot } from '../../server/paths';

/** The prepared empty database is built once, before the test files start side by side. */
export default async function prepare(): Promise<void> {
  await preparedDump(join(projectRoot, '.gustbook', 'cache'));
}
