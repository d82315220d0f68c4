import { execFile } from 'node:child_process';
import { mkdtemp, readFile, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { promisify } from 'node:util';
import { projectRoot } from '../../server/paths';

export interface RawRecords {
  /** 17:00–18:00, plain text; the half hours are clean. */
  plain: string;
  /** 18:00–19:00, packed; rain blocks the analyser in both half hours. */
  packed: string;
  setUp: Record<string, unknown>;
  remove(): Promise<void>;
}

/** Two hours of invented records of five scans a second, from the generator that people have too. */
export async function makeRawRecords(): Promise<RawRecords> {
  const folder = await mkdtemp(join(tmpdir(), 'gustbook-records-'));
  await promisify(execFile)(process.execPath, [
    join(projectRoot, 'dist', 'server', 'generate.mjs'),
    ...['--out', folder, '--hours', '17-19', '--rate', '5'],
  ]);
  return {
    plain: join(folder, 'HOF_20270617_1700.csv'),
    packed: join(folder, 'HOF_20270617_1800.csv.gz'),
    setUp: JSON.parse(await readFile(join(folder, 'set-up.json'), 'utf8')) as Record<string, unknown>,
    remove: () => rm(folder, { recursive: true, force: true }),
  };
}
