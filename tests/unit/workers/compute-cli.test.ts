import { spawn, spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { gzipSync } from 'node:zlib';
import { build } from 'esbuild';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { readArguments, readInstant, UsageError } from '../../../workers/node/compute-arguments';

/** Runs the real command on two invented hours at 5 Hz, bundled once for these tests. */

const root = resolve(import.meta.dirname, '../../..');
let folder = '';
let command = '';
let records: string[] = [];
const at = (name: string): string => join(folder, name);

function compute(...args: string[]): { code: number | null; stderr: string; stdout: string } {
  const { status, stderr, stdout } = spawnSync(process.execPath, [command, ...args], {
    encoding: 'utf8',
    env: { ...process.env, TMPDIR: at('tmp') },
  });
  return { code: status, stderr, stdout };
}

function usual(out: string, ...more: string[]): string[] {
  return [
    '--station',
    at('station-with-set-ups.json'),
    '--layout',
    at('layout.json'),
    '--out',
    at(out),
    '--quiet',
    ...more,
  ];
}

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'gustbook-cli-'));
  rmSync(at('tmp'), { recursive: true, force: true });
  const tsx = join(root, 'node_modules/tsx/dist/loader.mjs');
  const made = spawnSync(
    process.execPath,
    [
      '--import',
      tsx,
      join(root, 'workers/node/generate.ts'),
      '--out',
      folder,
      '--hours',
      '9-11',
      '--rate',
      '5',
      '--faults',
      'none',
    ],
    { encoding: 'utf8' },
  );
  if (made.status !== 0) throw new Error(made.stderr);
  records = readdirSync(folder)
    .filter((name) => name.includes('.csv'))
    .map(at);
  const read = (name: string): unknown => JSON.parse(readFileSync(at(name), 'utf8'));
  writeFileSync(
    at('station-with-set-ups.json'),
    JSON.stringify({ station: read('station.json'), setUps: [read('set-up.json')] }),
  );
  // Inside the project, so that packages are found.
  const bundle = join(root, 'node_modules', '.cache', `gustbook-cli-test-${process.pid}`);
  await build({
    absWorkingDir: root,
    entryPoints: { compute: 'workers/node/compute.ts', worker: 'workers/node/worker.ts' },
    outdir: bundle,
    outExtension: { '.js': '.mjs' },
    bundle: true,
    packages: 'external',
    platform: 'node',
    format: 'esm',
    target: 'node20',
  });
  command = join(bundle, 'compute.mjs');
  spawnSync('mkdir', ['-p', at('tmp')]);
});

afterAll(() => {
  rmSync(folder, { recursive: true, force: true });
  rmSync(resolve(command, '..'), { recursive: true, force: true });
});

describe('the command line', () => {
  it('writes a table of half hours, the same for any number of threads and order of files', () => {
    expect(compute(...usual('one.csv', '--threads', '1'), ...records)).toMatchObject({ code: 0 });
    expect(compute(...usual('two.csv', '--threads', '2'), ...[...records].reverse())).toMatchObject({
      code: 0,
    });
    const table = readFileSync(at('one.csv'), 'utf8');
    expect(readFileSync(at('two.csv'), 'utf8')).toBe(table);
    const lines = table.trimEnd().split('\n');
    // Names, units, and four half hours.
    expect(lines).toHaveLength(6);
    const cells = (line: string): string[] => line.split(',');
    const co2 = cells(lines[0]).indexOf('co2Flux');
    const truth = JSON.parse(readFileSync(at('truth.json'), 'utf8')) as {
      periods: { realised: { co2Flux: number } }[];
    };
    // The generator knows the flux of each half hour. At 5 Hz the corrections are large: 5 % is allowed here, where only the way
    // from file to table is tested.
    lines.slice(2).forEach((line, i) => {
      const { co2Flux } = truth.periods[i].realised;
      expect(Math.abs(Number(cells(line)[co2]) / co2Flux - 1)).toBeLessThan(0.05);
    });
  });

  it('writes exchange files to standard output', () => {
    const { code, stdout } = compute(
      ...usual('-', '--format', 'exchange').map((a) => (a === at('-') ? '-' : a)),
      ...records,
    );
    expect(code).toBe(0);
    expect(stdout.split('\n')[0]).toMatch(/^TIMESTAMP_START,TIMESTAMP_END,/);
    expect(stdout.trimEnd().split('\n')).toHaveLength(5);
  });

  it('writes everything as JSON, with the manifest', () => {
    expect(compute(...usual('three.csv', '--json', at('all.json')), ...records).code).toBe(0);
    const all = JSON.parse(readFileSync(at('all.json'), 'utf8')) as Record<string, never>;
    expect(all).toMatchObject({
      schema: 'gustbook/results/1',
      manifest: { schema: 'gustbook/manifest/1', utcOffsetMinutes: expect.any(Number) as number },
      manifestHash: expect.stringMatching(/^[0-9a-f]{64}$/) as string,
    });
    expect((all.periods as unknown[]).length).toBe(4);
    expect((all.periods as { ledger: unknown[] }[])[1].ledger.length).toBeGreaterThan(10);
  });

  it('computes only the span asked for', () => {
    expect(
      compute(...usual('span.csv', '--from', '2027-06-17T09:30', '--to', '2027-06-17T10:30'), ...records)
        .code,
    ).toBe(0);
    const lines = readFileSync(at('span.csv'), 'utf8').trimEnd().split('\n');
    expect(lines.slice(2).map((line) => line.split(',')[2])).toEqual([
      '2027-06-17T09:30+01:00',
      '2027-06-17T10:00+01:00',
    ]);
  });

  it('goes on without a file that cannot be read, and says so in its exit code', () => {
    writeFileSync(at('broken.gz'), gzipSync('x').subarray(0, 15));
    const { code, stderr } = compute(...usual('part.csv'), ...records, at('broken.gz'), at('missing.csv'));
    expect(code).toBe(2);
    expect(stderr).toMatch(/broken\.gz: The packed file ends too early/);
    expect(stderr).toMatch(/missing\.csv: There is no such file/);
    expect(readFileSync(at('part.csv'), 'utf8')).toBe(readFileSync(at('one.csv'), 'utf8'));
  });

  it('writes no table when nothing could be computed', () => {
    const { code, stderr } = compute(...usual('none.csv'), at('missing.csv'));
    expect(code).toBe(3);
    expect(stderr).toContain('Nothing could be computed');
    expect(existsSync(at('none.csv'))).toBe(false);
  });

  it('refuses wrong arguments and documents before doing anything', () => {
    expect(compute('--station', 'x').code).toBe(1);
    expect(compute(...usual('x.csv', '--threads', 'many'), ...records).code).toBe(1);
    expect(compute(...usual('x.csv', '--unknown'), ...records).code).toBe(1);
    writeFileSync(at('bad-layout.json'), JSON.stringify({ schema: 'gustbook/layout/1' }));
    const { code, stderr } = compute(
      '--station',
      at('station-with-set-ups.json'),
      '--layout',
      at('bad-layout.json'),
      '--out',
      at('x.csv'),
      ...records,
    );
    expect(code).toBe(1);
    expect(stderr).toMatch(/--layout .*bad-layout\.json: name/);
    expect(
      compute(...usual('x.csv').map((a) => (a === at('x.csv') ? at('no/such/folder.csv') : a)), ...records)
        .code,
    ).toBe(4);
  });

  it('says what it does and what its exit codes mean', () => {
    const { code, stdout } = compute('--help');
    expect(code).toBe(0);
    expect(stdout).toMatch(/Exit codes[\s\S]*0 {3}all files were read[\s\S]*130 interrupted/);
  });

  it('leaves no temporary files behind, even when interrupted', async () => {
    const child = spawn(process.execPath, [command, ...usual('late.csv', '--threads', '1'), ...records], {
      env: { ...process.env, TMPDIR: at('tmp') },
      stdio: ['ignore', 'ignore', 'pipe'],
    });
    // Its folder is there as soon as the arguments are read.
    while (readdirSync(at('tmp')).length === 0 && child.exitCode === null)
      await new Promise((done) => setImmediate(done));
    child.kill('SIGTERM');
    const code = await new Promise((done) => child.on('exit', done));
    expect(code).toBe(130);
    expect(existsSync(at('late.csv'))).toBe(false);
    expect(readdirSync(at('tmp'))).toEqual([]);
  });
});

describe('arguments', () => {
  it('takes times without offset as station standard time', () => {
    expect(readInstant('from', '2027-06-17T10:30', 60)).toBe(Date.UTC(2027, 5, 17, 9, 30));
    expect(readInstant('from', '2027-06-17T10:30Z', 60)).toBe(Date.UTC(2027, 5, 17, 10, 30));
    expect(readInstant('from', '2027-06-17', -60)).toBe(Date.UTC(2027, 5, 17, 1));
    expect(() => readInstant('from', 'yesterday', 0)).toThrow(UsageError);
    expect(() => readInstant('to', '2027-13-17', 0)).toThrow(UsageError);
  });

  it('asks for what it needs', () => {
    expect(() => readArguments(['--station', 's', '--layout', 'l', '--out', 'o'])).toThrow('No records');
    expect(() => readArguments(['--layout', 'l', '--out', 'o', 'f'])).toThrow('--station is missing');
    expect(() =>
      readArguments(['--station', 's', '--layout', 'l', '--out', 'o', '--format', 'xml', 'f']),
    ).toThrow('--format');
  });
});
