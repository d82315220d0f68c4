import { execFile, spawn } from 'node:child_process';
import { createReadStream } from 'node:fs';
import { mkdir, mkdtemp, readFile, readdir, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { text } from 'node:stream/consumers';
import { fileURLToPath } from 'node:url';
import { promisify } from 'node:util';
import { createGunzip } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';

/**
 * Memory of the command line: one 20 Hz day, and the same day seven times over with shifted dates. Peak resident memory is the kernel's
 * own high-water mark of the process (VmHWM), read while it runs.
 */

const run = promisify(execFile);
const root = fileURLToPath(new URL('../../', import.meta.url));
const compute = join(root, 'dist/server/compute.mjs');
let folder = '';
let records = '';
const days: string[][] = [];

beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'gustbook-week-'));
  records = join(folder, 'records');
  await run('node', [
    join(root, 'scripts/generate.mjs'),
    '--out',
    records,
    '--seed',
    '3',
    '--faults',
    'none',
  ]);
  const names = (await readdir(records)).filter((name) => name.includes('.csv'));
  for (let day = 0; day < 7; day++) {
    const date = `2027-06-${17 + day}`;
    const to = join(folder, date);
    await mkdir(to);
    const files: string[] = [];
    for (const name of names) {
      const packed = createReadStream(join(records, name));
      const content = await text(name.endsWith('.gz') ? packed.pipe(createGunzip()) : packed);
      const path = join(to, name.replace(/\.gz$/, ''));
      await writeFile(path, content.replaceAll('2027-06-17', date));
      files.push(path);
    }
    days.push(files);
  }
});

afterAll(() => rm(folder, { recursive: true, force: true }));

/** Peak resident memory of one computation [MB] and the number of periods it wrote. */
async function peakOf(files: string[]): Promise<{ peakMB: number; periods: number }> {
  const out = join(folder, 'periods.csv');
  const child = spawn(
    'node',
    [
      compute,
      ...['--station', join(records, 'station.json'), '--set-up', join(records, 'set-up.json')],
      ...['--layout', join(records, 'layout.json'), '--out', out, '--threads', '2', '--quiet'],
      ...files,
    ],
    { stdio: ['ignore', 'ignore', 'inherit'] },
  );
  let peakKB = 0;
  const timer = setInterval(() => {
    readFile(`/proc/${child.pid}/status`, 'utf8')
      .then((status) => {
        peakKB = Math.max(peakKB, Number(/VmHWM:\s+(\d+) kB/.exec(status)?.[1] ?? 0));
      })
      .catch(() => undefined);
  }, 100);
  const code = await new Promise<number | null>((resolve) => child.on('exit', resolve));
  clearInterval(timer);
  expect(code).toBe(0);
  const rows = (await readFile(out, 'utf8')).trim().split('\n').length;
  return { peakMB: peakKB / 1024, periods: rows - 2 };
}

describe('memory of a computation from text', () => {
  it('stays below 300 MB for a day and for a week, and the week needs less than 20 % more', async () => {
    const day = await peakOf(days[0]);
    const week = await peakOf(days.flat());
    console.log(`peak resident memory: day ${day.peakMB.toFixed(0)} MB, week ${week.peakMB.toFixed(0)} MB`);
    expect(day.periods).toBe(48);
    expect(week.periods).toBe(7 * 48);
    expect(day.peakMB).toBeGreaterThan(50);
    expect(day.peakMB).toBeLessThan(300);
    expect(week.peakMB).toBeLessThan(300);
    expect(Math.abs(week.peakMB - day.peakMB) / day.peakMB).toBeLessThan(0.2);
  });
});
