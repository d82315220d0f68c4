import { spawn } from 'node:child_process';
import { createRequire } from 'node:module';
import { existsSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { projectRoot } from '../paths';

/** How the generator of invented records is started: its bundle beside ours, or its source in development. */
function command(): string[] {
  const bundle = join(dirname(fileURLToPath(import.meta.url)), 'generate.mjs');
  if (existsSync(bundle)) return [bundle];
  const loader = createRequire(import.meta.url).resolve('tsx');
  return ['--import', pathToFileURL(loader).href, join(projectRoot, 'workers', 'node', 'generate.ts')];
}

/**
 * Writes invented records with their truth into a folder, in a process of its own, so that the server stays quick.
 *
 * @param onProgress half hours written, and how many there are
 */
export async function generateRecords(
  folder: string,
  options: { hours: string; sampleRateHz: number },
  onProgress: (done: number, total: number) => void,
  signal: AbortSignal,
): Promise<void> {
  const child = spawn(
    process.execPath,
    [
      ...command(),
      '--out',
      folder,
      '--force',
      '--hours',
      options.hours,
      '--rate',
      String(options.sampleRateHz),
    ],
    { stdio: ['ignore', 'ignore', 'pipe'], signal },
  );
  let said = '';
  child.stderr.setEncoding('utf8').on('data', (text: string) => {
    said = (said + text).slice(-2000);
    const last = [...said.matchAll(/(\d+) of (\d+) half hours/g)].at(-1);
    if (last) onProgress(Number(last[1]), Number(last[2]));
  });
  await new Promise<void>((resolve, reject) => {
    child.on('error', reject);
    child.on('exit', (code) => {
      if (code === 0) resolve();
      else reject(new Error(`generating invented records ended with code ${code}: ${said.trim()}`));
    });
  });
}
