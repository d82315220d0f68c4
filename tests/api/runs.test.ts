import { randomUUID } from 'node:crypto';
import { mkdtemp, readFile, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { rawFileById } from '../../db/queries/raw-files';
import { upsertTruths } from '../../db/queries/runs';
import { catalogue } from '../../processing/catalogue';
import { defaultRecipe, recipeHash } from '../../processing/schemas/recipe';
import { fluxKeys } from '../../processing/state';
import {
  periodDetailSchema,
  periodRowSchema,
  rawFileSchema,
  runSchema,
  seriesSchema,
  setUpAddedSchema,
  spineSchema,
  stationSummarySchema,
  uploadedSchema,
} from '../../server/contract/api';
import type { PeriodRow, RawFile, Run, SeriesData } from '../../server/contract/api';
import { projectRoot } from '../../server/paths';
import { generateRecords } from '../../server/seed/generate-records';
import { createPool } from '../../workers/node/pool';
import { Bench, layout, makeStation, setUp } from './bench';
import type { Group, MadeStation, Someone } from './bench';

/** From upload to export, with real threads: two hours of invented records at 10 Hz, four periods. */

let bench: Bench;
let group: Group;
let analyst: Someone;
let place: MadeStation;
let records: { name: string; bytes: Buffer }[];
let root: string;
let firstRun: Run;

const HALF_HOUR_MS = 1_800_000;
/** 17 June 2027, 10:00 station time (UTC+1). */
const FIRST_MS = Date.UTC(2027, 5, 17, 9);
const aRecipeHash = recipeHash(defaultRecipe);

beforeAll(async () => {
  const folder = await mkdtemp(join(tmpdir(), 'gustbook-records-'));
  await generateRecords(
    folder,
    { hours: '10-12', sampleRateHz: 10 },
    () => undefined,
    new AbortController().signal,
  );
  const truth = JSON.parse(await readFile(join(folder, 'truth.json'), 'utf8')) as {
    files: { name: string }[];
  };
  records = await Promise.all(
    truth.files.map(async ({ name }) => ({ name, bytes: await readFile(join(folder, name)) })),
  );
  await rm(folder, { recursive: true });
  bench = await Bench.start({
    engine: createPool(2, { workerFile: join(projectRoot, 'dist', 'server', 'worker.mjs') }),
  });
  group = await bench.addGroup('reedmoor');
  analyst = await bench.addPerson(group, 'analyst');
  root = `/api/groups/${group.slug}`;
  place = await makeStation(bench, group, analyst, 'alder');
});
afterAll(() => bench.close());

async function bring(
  slug: string,
  layoutId: string,
  record: { name: string; bytes: Buffer },
  query = '',
): Promise<RawFile> {
  const path = `${root}/stations/${slug}/raw-files${query}`;
  const answer = await bench.upload(analyst, path, { layoutId, ...record }).expect(201);
  return uploadedSchema.parse(answer.body).rawFile;
}

const patient = { timeout: 30_000, interval: 100 };

async function readWhole(id: string): Promise<RawFile> {
  const current = async () =>
    rawFileSchema.parse((await bench.as(analyst, 'get', `${root}/raw-files/${id}`)).body);
  await expect.poll(async () => (await current()).state, patient).not.toMatch(/stored|reading/);
  return current();
}

const runNow = async (id: string) =>
  runSchema.parse((await bench.as(analyst, 'get', `${root}/runs/${id}`).expect(200)).body);

async function finished(id: string): Promise<Run> {
  await expect.poll(async () => (await runNow(id)).state, patient).toMatch(/done|failed|cancelled/);
  return runNow(id);
}

async function start(
  slug = place.slug,
  span: { fromMs: number | null; toMs: number | null } = { fromMs: null, toMs: null },
): Promise<string> {
  const id = randomUUID();
  const body = { id, recipeHash: aRecipeHash, ...span };
  await bench.as(analyst, 'post', `${root}/stations/${slug}/runs`).send(body).expect(201);
  return id;
}

async function series(runId: string, keys: string[]): Promise<SeriesData> {
  const answer = await bench
    .as(analyst, 'get', `${root}/runs/${runId}/series?quantities=${keys.join(',')}`)
    .expect(200);
  return seriesSchema.parse(answer.body);
}

describe('from raw files to results', () => {
  it('reads what is brought in', async () => {
    for (const record of records) await bring(place.slug, place.layoutId, record);
    const list = (await bench.as(analyst, 'get', `${root}/stations/alder/raw-files`)).body as RawFile[];
    const files = await Promise.all(list.map(({ id }) => readWhole(id)));
    expect(files.map(({ state }) => state)).toEqual(files.map(() => 'read'));
    // Two hours at 10 Hz, less what the planted faults leave out.
    const rows = files.reduce((sum, file) => sum + (file.rows ?? 0), 0);
    expect(rows).toBeGreaterThan(70_000);
    expect(rows).toBeLessThanOrEqual(72_000);
    expect(Math.min(...files.map((file) => file.firstScanMs!))).toBe(FIRST_MS);
    const summary = stationSummarySchema.parse(
      (await bench.as(analyst, 'get', `${root}/stations/alder`)).body,
    );
    expect(summary).toMatchObject({ rawFiles: records.length, firstScanMs: FIRST_MS });
    expect(summary.spine?.recorded.length).toBe(4);
    expect(Math.min(...summary.spine!.recorded)).toBeGreaterThan(0.9);
  });

  it('computes every period once and sums up', async () => {
    const id = await start();
    firstRun = await finished(id);
    expect(firstRun).toMatchObject({
      state: 'done',
      periodsTotal: 4,
      periodsDone: 4,
      fromMs: FIRST_MS,
      toMs: FIRST_MS + 4 * HALF_HOUR_MS,
      stale: [],
      problem: null,
    });
    expect(firstRun.resultHash).toMatch(/^[0-9a-f]{64}$/);
    for (const flux of fluxKeys) {
      const { good, usable, rejected, missing } = firstRun.grades[flux];
      expect(good + usable + rejected + missing).toBe(4);
    }
    const rows = (
      (await bench.as(analyst, 'get', `${root}/runs/${id}/periods`).expect(200)).body as unknown[]
    ).map((row) => periodRowSchema.parse(row));
    expect(rows.map(({ startMs }) => startMs)).toEqual([0, 1, 2, 3].map((k) => FIRST_MS + k * HALF_HOUR_MS));
    expect(rows.some((row) => row.values.co2Flux !== null)).toBe(true);
  });

  it('hands out the same columns packed, from rows, and packed anew', async () => {
    const keys = ['co2Flux', 'latentHeat', 'ustar', 'windSpeed'];
    const packed = await series(firstRun.id, keys);
    const rows = (await bench.as(analyst, 'get', `${root}/runs/${firstRun.id}/periods`)).body as PeriodRow[];
    for (const key of keys)
      expect(packed.quantities[key]).toEqual(rows.map((row) => row.values[key] ?? null));
    for (const flux of fluxKeys)
      expect(packed.grades[flux]).toEqual(rows.map((row) => row.grades[flux].grade));
    await rm(join(bench.deps.config.dataFolder, 'packed'), { recursive: true });
    expect(await series(firstRun.id, keys)).toEqual(packed);
    await bench.as(analyst, 'get', `${root}/runs/${firstRun.id}/series?quantities=nonsense`).expect(400);
    const part = await bench
      .as(
        analyst,
        'get',
        `${root}/runs/${firstRun.id}/series?quantities=ustar&fromMs=${FIRST_MS + HALF_HOUR_MS}&toMs=${FIRST_MS + 3 * HALF_HOUR_MS}`,
      )
      .expect(200);
    expect(seriesSchema.parse(part.body).quantities.ustar).toEqual(packed.quantities.ustar.slice(1, 3));
  });

  it('shows truth beside the columns where it is known', async () => {
    expect((await series(firstRun.id, ['ustar'])).truth).toBeNull();
    await upsertTruths(bench.deps.db, [
      {
        systemId: place.systemId,
        startMs: FIRST_MS + HALF_HOUR_MS,
        endMs: FIRST_MS + 2 * HALF_HOUR_MS,
        values: { ustar: 0.25 },
        createdBy: analyst.id,
      },
    ]);
    expect((await series(firstRun.id, ['ustar', 'tau'])).truth).toEqual({ ustar: [null, 0.25, null, null] });
  });

  it('tells everything about one period, with its files and neighbours', async () => {
    const startMs = FIRST_MS + HALF_HOUR_MS;
    const answer = await bench
      .as(analyst, 'get', `${root}/runs/${firstRun.id}/periods/${startMs}`)
      .expect(200);
    const period = periodDetailSchema.parse(answer.body);
    expect(period).toMatchObject({ previousStartMs: FIRST_MS, nextStartMs: startMs + HALF_HOUR_MS });
    expect(period.ledger.length).toBeGreaterThan(15);
    expect(period.rawFiles.map(({ fileName }) => fileName)).toContain(records[0].name);
    for (const flux of fluxKeys) {
      const decisive = period.grades[flux].decidedBy[0];
      const finding = period.reasons.find((reason) => reason.key === decisive)?.finding ?? null;
      expect(period.mainFinding[flux]).toBe(finding);
    }
    await bench.as(analyst, 'get', `${root}/runs/${firstRun.id}/periods/${startMs + 1}`).expect(404);
  });

  it('gives the same result hash for the same inputs, and another span another manifest', async () => {
    const again = await finished(await start());
    expect(again.id).not.toBe(firstRun.id);
    expect([again.manifestHash, again.resultHash]).toEqual([firstRun.manifestHash, firstRun.resultHash]);
    const half = await finished(
      await start(place.slug, { fromMs: FIRST_MS + 60_000, toMs: FIRST_MS + HALF_HOUR_MS + 60_000 }),
    );
    expect(half).toMatchObject({ periodsTotal: 2, fromMs: FIRST_MS, toMs: FIRST_MS + 2 * HALF_HOUR_MS });
    expect(half.manifestHash).not.toBe(firstRun.manifestHash);
  });

  it('shows coverage and grades on the spine', async () => {
    const answer = await bench
      .as(analyst, 'get', `${root}/stations/alder/spine?run=${firstRun.id}&bins=100`)
      .expect(200);
    const spine = spineSchema.parse(answer.body);
    expect(spine).toMatchObject({
      fromMs: FIRST_MS,
      binMs: HALF_HOUR_MS,
      runId: firstRun.id,
      gradedFlux: 'co2Flux',
    });
    const total = (shares: number[]) => Math.round(shares.reduce((sum, share) => sum + share, 0));
    const { good, usable, rejected } = firstRun.grades.co2Flux;
    expect([total(spine.good), total(spine.usable), total(spine.rejected)]).toEqual([good, usable, rejected]);
  });
});

describe('the export', () => {
  const text = async (format: string, query = '') => {
    const answer = await bench
      .as(analyst, 'get', `${root}/runs/${firstRun.id}/export?format=${format}${query}`)
      .expect(200);
    expect(answer.get('content-type')).toContain('text/csv');
    expect(answer.get('content-disposition')).toBe(
      `attachment; filename="alder-run-${firstRun.number}-${format}.csv"`,
    );
    return answer.text
      .trimEnd()
      .split('\n')
      .map((line) => line.split(','));
  };

  it('for exchange stands in station time, with −9999 for missing', async () => {
    const [header, ...rows] = await text('exchange');
    expect(rows.map((row) => row.slice(0, 2))).toEqual([
      ['202706171000', '202706171030'],
      ['202706171030', '202706171100'],
      ['202706171100', '202706171130'],
      ['202706171130', '202706171200'],
    ]);
    const periods = (await bench.as(analyst, 'get', `${root}/runs/${firstRun.id}/periods`))
      .body as PeriodRow[];
    const column = (name: string) => rows.map((row) => Number(row[header.indexOf(name)]));
    // FC is given in µmol m-2 s-1; a product with 1e6 is exact to the last digit or two.
    column('FC').forEach((value, k) => {
      const inner = periods[k].values.co2Flux;
      if (inner === null) expect(value).toBe(-9999);
      else expect(value / (inner! * 1e6)).toBeCloseTo(1, 12);
    });
    expect(column('FC_SSITC_TEST')).toEqual(periods.map(({ grades }) => grades.co2Flux.ssitc ?? -9999));
    for (const row of rows) expect(row).toHaveLength(header.length);
    expect(rows.flat().filter((cell) => !/^-?[0-9.]+(e-?\d+)?$/.test(cell))).toEqual([]);
  });

  it('plain has every quantity, and missing left empty', async () => {
    const [names, , ...rows] = await text('plain');
    expect(names).toEqual(expect.arrayContaining(catalogue.map(({ key }) => key)));
    expect(rows.map((row) => row[0])).toEqual([
      '2027-06-17T09:00Z',
      '2027-06-17T09:30Z',
      '2027-06-17T10:00Z',
      '2027-06-17T10:30Z',
    ]);
    expect(rows.flat().filter((cell) => cell === 'NaN' || cell === 'null' || cell === '-9999')).toEqual([]);
  });

  it('can be of a part of the run, with the same columns', async () => {
    const span = `&fromMs=${FIRST_MS + HALF_HOUR_MS}&toMs=${FIRST_MS + 3 * HALF_HOUR_MS}`;
    for (const format of ['exchange', 'plain']) {
      const whole = await text(format);
      const headerLines = format === 'exchange' ? 1 : 2;
      const part = await text(format, span);
      expect(part).toEqual([
        ...whole.slice(0, headerLines),
        ...whole.slice(headerLines + 1, headerLines + 3),
      ]);
    }
    const [header, ...none] = await text('exchange', '&fromMs=0&toMs=1');
    expect([header[0], none]).toEqual(['TIMESTAMP_START', []]);
  });
});

describe('corrections', () => {
  it('mark runs stale in words, and taking one back makes them current again', async () => {
    const path = `${root}/stations/alder/set-ups`;
    const corrected = setUp({ sonicHeightM: 3.6 });
    const added = await bench
      .as(analyst, 'post', path)
      .send({ id: randomUUID(), setUp: corrected, why: 'Height measured again' })
      .expect(201);
    expect(setUpAddedSchema.parse(added.body).staleRuns).toContain(firstRun.id);
    const stale = await runNow(firstRun.id);
    expect(stale.stale).toEqual([
      'The set-up from 2027-04-01 was corrected (revision 2: Height measured again).',
    ]);
    expect(stale.resultHash).toBe(firstRun.resultHash);
    const anew = await finished(await start());
    expect(anew.stale).toEqual([]);
    expect(anew.resultHash).not.toBe(firstRun.resultHash);
    await bench
      .as(analyst, 'post', path)
      .send({ id: randomUUID(), setUp: setUp(), why: 'The first height was right' })
      .expect(201);
    expect((await runNow(firstRun.id)).stale).toEqual([]);
    expect((await runNow(anew.id)).stale).toHaveLength(1);
  });

  it('of raw files mark runs stale: withdrawn, brought back, read with another layout', async () => {
    const list = (await bench.as(analyst, 'get', `${root}/stations/alder/raw-files`)).body as RawFile[];
    const file = list[0];
    const address = `${root}/raw-files/${file.id}`;
    await bench.as(analyst, 'post', `${address}/withdraw`).expect(200);
    expect((await runNow(firstRun.id)).stale).toEqual([`${file.fileName} was withdrawn.`]);
    await bench.as(analyst, 'post', `${address}/restore`).expect(200);
    expect((await runNow(firstRun.id)).stale).toEqual([]);
    const other = {
      id: randomUUID(),
      layout: layout({ name: 'Another', missingTokens: ['NaN', '-9999', 'x'] }),
    };
    await bench.as(analyst, 'post', `${root}/stations/alder/layouts`).send(other).expect(201);
    await bench.as(analyst, 'post', `${address}/reread`).send({ layoutId: other.id }).expect(200);
    expect((await readWhole(file.id)).layoutName).toBe('Another');
    expect((await runNow(firstRun.id)).stale).toEqual([`${file.fileName} was read with another layout.`]);
    await bench.as(analyst, 'post', `${address}/reread`).send({ layoutId: place.layoutId }).expect(200);
    await readWhole(file.id);
    expect((await runNow(firstRun.id)).stale).toEqual([]);
  });
});

describe('things that go wrong', () => {
  it('a run over records that are older than the set-up says so, with the span of the records', async () => {
    const made = await makeStation(bench, group, analyst, 'elder', { validFrom: '2027-06-18T00:00:00Z' });
    // the record is read and computed in one go, before anybody knows its span
    const file = await bring('elder', made.layoutId, records[0], `?compute=${aRecipeHash}`);
    await readWhole(file.id);
    const runs = async () =>
      (await bench.as(analyst, 'get', `${root}/stations/elder/runs`).expect(200)).body as Run[];
    await expect.poll(async () => (await runs())[0]?.state, patient).toBe('failed');
    const [run] = await runs();
    expect(run.problem).toMatch(/^No set-up holds/);
    expect([run.fromMs, run.toMs]).toEqual([FIRST_MS, FIRST_MS + 2 * HALF_HOUR_MS]);
    const { spine } = stationSummarySchema.parse(
      (await bench.as(analyst, 'get', `${root}/stations/elder`).expect(200)).body,
    );
    expect([spine?.fromMs, spine?.toMs]).toEqual([FIRST_MS, FIRST_MS + 2 * HALF_HOUR_MS]);
  });

  it('a file that is no record is called unreadable, says why, and does not hold up a run', async () => {
    const made = await makeStation(bench, group, analyst, 'birch');
    const bad = await bring('birch', made.layoutId, {
      name: 'notes.txt',
      bytes: Buffer.from('not a record at all\n'.repeat(50)),
    });
    await bring('birch', made.layoutId, records[0]);
    const run = await finished(await start('birch'));
    expect(run.state).toBe('done');
    const file = await readWhole(bad.id);
    expect(file.state).toBe('unreadable');
    expect(file.problem).toMatch(/\w{4,}/);
    expect(file.rows).toBeNull();
  });

  it('a run with nothing to compute fails in words', async () => {
    const made = await makeStation(bench, group, analyst, 'cedar');
    const bad = await bring('cedar', made.layoutId, {
      name: 'x.txt',
      bytes: Buffer.from('also no record\n'.repeat(50)),
    });
    const run = await finished(await start('cedar'));
    expect(run).toMatchObject({ state: 'failed', periodsTotal: 0 });
    expect(run.problem).toContain('Nothing is recorded');
    expect((await readWhole(bad.id)).state).toBe('unreadable');
  });

  it('chunks that are lost are made again from the raw file', async () => {
    const before = await finished(await start());
    await rm(join(bench.deps.config.dataFolder, 'chunks'), { recursive: true });
    const after = await finished(await start());
    expect([after.state, after.resultHash]).toEqual(['done', before.resultHash]);
  });

  it('chunks that are damaged are made again from the raw file', async () => {
    const before = await finished(await start());
    const list = (await bench.as(analyst, 'get', `${root}/stations/alder/raw-files`)).body as RawFile[];
    const row = await rawFileById(bench.deps.db, list[0].id);
    const { truncate } = await import('node:fs/promises');
    const path = join(bench.deps.config.dataFolder, 'chunks', row!.id, row!.chunkFolder!, 'chunks.arrow');
    await truncate(path, 1000);
    const after = await finished(await start());
    expect([after.state, after.resultHash]).toEqual(['done', before.resultHash]);
  });
});

describe('an upload that asks for a run', () => {
  it('gets it once everything is read', async () => {
    const made = await makeStation(bench, group, analyst, 'dogwood');
    for (const record of records) await bring('dogwood', made.layoutId, record, `?compute=${aRecipeHash}`);
    const runs = async () => (await bench.as(analyst, 'get', `${root}/stations/dogwood/runs`)).body as Run[];
    await expect.poll(async () => (await runs()).length, patient).toBeGreaterThan(0);
    const whole = await finished((await runs()).at(-1)!.id);
    expect(whole.state).toBe('done');
    await bench
      .upload(analyst, `${root}/stations/dogwood/raw-files?compute=${'0'.repeat(64)}`, {
        layoutId: made.layoutId,
        name: 'x.csv',
        bytes: Buffer.from('1,2\n'),
      })
      .expect(404);
  });
});
