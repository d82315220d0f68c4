import { readdir } from 'node:fs/promises';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { demoAccounts } from '../../server/auth/demo-accounts';
import type { RawFile, Run } from '../../server/contract/api';
import { runSchema, seriesSchema } from '../../server/contract/api';
import { projectRoot } from '../../server/paths';
import { seedDemoPeople, seedDemoRecords } from '../../server/seed/demo';
import { createPool } from '../../workers/node/pool';
import { Bench } from './bench';
import type { Someone } from './bench';

/** The demonstration, cut to two half hours. */
const extent = { hours: '10-11', sampleRateHz: 10 };
const root = '/api/groups/lowmere';

let bench: Bench;

beforeAll(async () => {
  bench = await Bench.start({
    engine: createPool(1, { workerFile: join(projectRoot, 'dist', 'server', 'worker.mjs') }),
    config: { demo: true },
  });
});
afterAll(() => bench.close());

async function student(): Promise<Someone> {
  const account = demoAccounts.find(({ role }) => role === 'student')!;
  return { id: '', email: account.email, cookie: await bench.signIn(account.email, account.password) };
}

describe('seeding the demonstration', () => {
  it('makes one person per role who can sign in', async () => {
    expect(await seedDemoPeople(bench.deps)).toBe(true);
    for (const { email, password, role } of demoAccounts) {
      const cookie = await bench.signIn(email, password);
      const me = await bench.as({ id: '', email, cookie }, 'get', '/api/me').expect(200);
      expect((me.body as { groups: unknown[] }).groups).toEqual([
        { slug: 'lowmere', name: 'Lowmere Field Group', role },
      ]);
    }
  });

  it('goes on after it was broken off, and makes everything once', async () => {
    const stopped = new AbortController();
    stopped.abort(new Error('broken off'));
    await expect(seedDemoRecords(bench.deps, stopped.signal, extent)).rejects.toThrow();
    // As at the next start: people are there, records are still to be made.
    expect(await seedDemoPeople(bench.deps)).toBe(true);
    const going = new AbortController();
    await seedDemoRecords(bench.deps, going.signal, extent);
    await seedDemoRecords(bench.deps, going.signal, extent);
    const someone = await student();
    const stations = (await bench.as(someone, 'get', `${root}/stations`)).body as unknown[];
    expect(stations).toHaveLength(1);
    const files = (await bench.as(someone, 'get', `${root}/stations/hollin-fen/raw-files`)).body as RawFile[];
    expect(new Set(files.map(({ fileName }) => fileName)).size).toBe(files.length);
    expect(files.every(({ author }) => author.name === 'Tobin Reyle')).toBe(true);
    const runs = async () =>
      ((await bench.as(someone, 'get', `${root}/stations/hollin-fen/runs`)).body as Run[]).map((run) =>
        runSchema.parse(run),
      );
    await expect.poll(async () => (await runs())[0]?.state, { timeout: 40_000, interval: 100 }).toBe('done');
    expect(await runs()).toHaveLength(1);
    expect((await readdir(bench.deps.config.dataFolder)).filter((name) => name.includes('records'))).toEqual(
      [],
    );
  });

  it('puts the truth beside, and the run comes near it', async () => {
    const someone = await student();
    const [run] = (await bench.as(someone, 'get', `${root}/stations/hollin-fen/runs`)).body as Run[];
    const answer = await bench.as(
      someone,
      'get',
      `${root}/runs/${run.id}/series?quantities=ustar,sensibleHeat`,
    );
    const { quantities, truth } = seriesSchema.parse(answer.body);
    for (const key of ['ustar', 'sensibleHeat']) {
      quantities[key].forEach((value, k) => {
        // Single half hours at 10 Hz scatter by some per cent about what the records hold.
        expect(Math.abs(value! / truth![key][k]! - 1)).toBeLessThan(0.1);
      });
    }
  });

  it('is done once and leaves a bench alone that has people of its own', async () => {
    expect(await seedDemoPeople(bench.deps)).toBe(false);
    const other = await Bench.start({ config: { demo: true } });
    await other.addPerson(await other.addGroup('reedmoor'), 'lead');
    expect(await seedDemoPeople(other.deps)).toBe(false);
    expect(other.deps.startUp.hasDemo).toBe(false);
    await other.close();
  });
});
