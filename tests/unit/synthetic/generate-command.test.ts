import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, readdirSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { gunzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { truthSchema } from '../../../processing/synthetic/truth';
import { readArguments } from '../../../workers/node/generate-arguments';

const script = fileURLToPath(new URL('../../../scripts/generate.mjs', import.meta.url));
const folder = mkdtempSync(join(tmpdir(), 'gustbook-generate-'));
const run = (...args: string[]) => spawnSync(process.execPath, [script, ...args], { encoding: 'utf8' });
const read = (name: string) => {
  const bytes = readFileSync(join(folder, 'a', name));
  return (name.endsWith('.gz') ? gunzipSync(bytes) : bytes).toString('utf8');
};

describe('npm run generate', () => {
  beforeAll(() => {
    const done = run('--out', join(folder, 'a'), '--hours', '7-9', '--rate', '5', '--seed', '3');
    expect(done.stderr).toContain('4 of 4 half hours');
    expect(done.status).toBe(0);
  }, 60_000);
  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  it('writes records, truth and set-up for the hours asked for', () => {
    expect(readdirSync(join(folder, 'a')).sort()).toEqual([
      'HOF_20270617_0700.csv.gz',
      'HOF_20270617_0743.csv',
      'HOF_20270617_0817.csv',
      'layout.json',
      'recipe.json',
      'set-up.json',
      'station.json',
      'truth.json',
    ]);
    const truth = truthSchema.parse(JSON.parse(read('truth.json')));
    expect(truth.periods.map((p) => p.stationStart.slice(11))).toEqual(['07:00', '07:30', '08:00', '08:30']);
    for (const file of truth.files) {
      const lines = read(file.name).trimEnd().split('\n');
      expect(lines[0].startsWith('# INVENTED DATA')).toBe(true);
      expect(lines.length - 3).toBe(file.rows);
      // Stamps are station time, UTC+1.
      expect(Date.parse(`${lines[3].slice(0, 23).replace(' ', 'T')}+01:00`)).toBe(file.fromMs);
    }
    // 3.1 s are missing at 08:11:11: 15.5 rows at 5 Hz, rounded to 16.
    expect(truth.files.map((file) => file.rows)).toEqual([43 * 300, 34 * 300 - 16, 43 * 300]);
  });

  it('refuses a folder that is not empty with exit code 3', () => {
    const refused = run('--out', join(folder, 'a'), '--hours', '7-8');
    expect(refused.status).toBe(3);
    expect(refused.stderr).toContain('not empty');
  });

  it('refuses wrong arguments with exit code 2', () => {
    const refused = run('--hours', '7-8');
    expect(refused.status).toBe(2);
    expect(refused.stderr).toContain('--out is missing');
  });

  it('says which argument is wrong', () => {
    for (const [args, words] of [
      [['--out', 'x', '--hours', '9-8'], '--hours must be'],
      [['--out', 'x', '--hours', '9'], '--hours must be'],
      [['--out', 'x', '--rate', '7'], '--rate must be'],
      [['--out', 'x', '--seed', '1.5'], '--seed'],
      [['--out', 'x', '--days', '0'], '--days'],
      [['--out', 'x', '--faults', 'some'], '--faults'],
      [['--out', 'x', '--colour'], '--colour'],
    ] as const) {
      expect(() => readArguments([...args])).toThrow(words);
    }
  });

  it('takes every choice and fills in the rest', () => {
    expect(readArguments(['--out', '/x', '--hours', '0-24', '--faults', 'none', '--gzip'])).toEqual({
      out: '/x',
      seed: 1,
      fromHour: 0,
      toHour: 24,
      days: 1,
      sampleRateHz: 20,
      faults: 'none',
      mode: 'matched',
      gzip: true,
      force: false,
    });
    expect(readArguments(['--help'])).toBe('help');
  });
});
