import { randomUUID } from 'node:crypto';
import { access } from 'node:fs/promises';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { defaultRecipe, recipeHash } from '../../processing/schemas/recipe';
import { contentHash } from '../../processing/canonical';
import { errorEnvelopeSchema } from '../../server/contract/errors';
import {
  deletionAccountSchema,
  recipeRecordSchema,
  setUpAddedSchema,
  setUpRevisionSchema,
  stationSummarySchema,
  uploadedSchema,
} from '../../server/contract/api';
import { Bench, makeStation, setUp, station } from './bench';
import type { Group, Someone } from './bench';

let bench: Bench;
let group: Group;
let lead: Someone;
let technician: Someone;
let root: string;

beforeAll(async () => {
  bench = await Bench.start();
  group = await bench.addGroup('reedmoor');
  lead = await bench.addPerson(group, 'lead');
  technician = await bench.addPerson(group, 'technician');
  root = `/api/groups/${group.slug}`;
});
afterAll(() => bench.close());

const codeOf = (answer: { body: unknown }) => errorEnvelopeSchema.parse(answer.body).error.code;

describe('creating a station', () => {
  it('keeps station, system and first set-up, and a repeated request changes nothing', async () => {
    const body = {
      id: randomUUID(),
      systemId: randomUUID(),
      setUpId: randomUUID(),
      station: station('alder'),
      setUp: setUp(),
    };
    const made = await bench.as(technician, 'post', `${root}/stations`).send(body).expect(201);
    const summary = stationSummarySchema.parse(made.body);
    expect(summary).toMatchObject({
      id: body.id,
      systemId: body.systemId,
      rawFiles: 0,
      latestRun: null,
      spine: null,
      setUp: { id: body.setUpId, revision: 1, hash: contentHash(body.setUp), author: { id: technician.id } },
    });
    await bench.as(technician, 'post', `${root}/stations`).send(body).expect(200);
    const list = await bench.as(lead, 'get', `${root}/stations`).expect(200);
    expect((list.body as unknown[]).map((one) => stationSummarySchema.parse(one).id)).toEqual([body.id]);
  });

  it('refuses a short form that is taken in the group, and takes it in another group', async () => {
    const body = () => ({
      id: randomUUID(),
      systemId: randomUUID(),
      setUpId: randomUUID(),
      station: station('alder'),
      setUp: setUp(),
    });
    const taken = await bench.as(technician, 'post', `${root}/stations`).send(body());
    expect([taken.status, codeOf(taken)]).toEqual([409, 'conflict']);
    const other = await bench.addGroup('elsewhere');
    const stranger = await bench.addPerson(other, 'technician');
    await bench.as(stranger, 'post', '/api/groups/elsewhere/stations').send(body()).expect(201);
  });

  it('says which fields are wrong', async () => {
    const answer = await bench.as(technician, 'post', `${root}/stations`).send({
      id: randomUUID(),
      systemId: randomUUID(),
      setUpId: randomUUID(),
      station: station('Not A Slug'),
      setUp: setUp({ sonicHeightM: 0.2 }),
    });
    expect(answer.status).toBe(400);
    const { error } = errorEnvelopeSchema.parse(answer.body);
    expect(error.fields?.map(({ path }) => path)).toEqual(
      expect.arrayContaining(['station.slug', 'setUp.sonicHeightM']),
    );
  });

  it('changes name and description and nothing else', async () => {
    const changed = await bench
      .as(technician, 'patch', `${root}/stations/alder`)
      .send({ name: 'Alder Fen', description: 'wet', slug: 'other', utcOffsetMinutes: 0 })
      .expect(200);
    expect(stationSummarySchema.parse(changed.body).station).toEqual({
      ...station('alder'),
      name: 'Alder Fen',
      description: 'wet',
    });
  });
});

describe('set-ups', () => {
  it('are appended with author and why, and none is ever changed', async () => {
    const { slug } = await makeStation(bench, group, technician, 'birch');
    const first = setUpRevisionSchema.parse(
      ((await bench.as(lead, 'get', `${root}/stations/${slug}/set-ups`)).body as unknown[])[0],
    );
    const body = { id: randomUUID(), setUp: setUp({ sonicHeightM: 3.4 }), why: 'Measured again' };
    const added = await bench.as(lead, 'post', `${root}/stations/${slug}/set-ups`).send(body).expect(201);
    expect(setUpAddedSchema.parse(added.body)).toMatchObject({
      revision: { revision: 2, why: 'Measured again', author: { id: lead.id } },
      staleRuns: [],
    });
    await bench.as(lead, 'post', `${root}/stations/${slug}/set-ups`).send(body).expect(200);
    const all = ((await bench.as(lead, 'get', `${root}/stations/${slug}/set-ups`)).body as unknown[]).map(
      (one) => setUpRevisionSchema.parse(one),
    );
    expect(all.map(({ revision }) => revision)).toEqual([2, 1]);
    expect(all[1]).toEqual(first);
  });

  it('need a why', async () => {
    const { slug } = await makeStation(bench, group, technician, 'cedar');
    const path = `${root}/stations/${slug}/set-ups`;
    await bench.as(lead, 'post', path).send({ id: randomUUID(), setUp: setUp(), why: ' ' }).expect(400);
    await bench
      .as(lead, 'post', path)
      .send({ id: randomUUID(), setUp: setUp(), why: 'typing error' })
      .expect(201);
  });

  it('get numbers of their own when they are added at once', async () => {
    const { slug } = await makeStation(bench, group, technician, 'dogwood');
    const answers = await Promise.all(
      Array.from({ length: 4 }, (_, k) =>
        bench
          .as(lead, 'post', `${root}/stations/${slug}/set-ups`)
          .send({ id: randomUUID(), setUp: setUp(), why: `number ${k}` }),
      ),
    );
    const made = answers
      .filter(({ status }) => status === 201)
      .map(({ body }) => setUpAddedSchema.parse(body));
    const refused = answers.filter(({ status }) => status === 409);
    expect(made.length + refused.length).toBe(4);
    const numbers = made.map(({ revision }) => revision.revision).sort();
    expect(numbers).toEqual(Array.from({ length: made.length }, (_, k) => k + 2));
  });
});

describe('deleting a station', () => {
  it('says what goes and what stays, wants the word, and takes exactly that', async () => {
    const place = await makeStation(bench, group, technician, 'elm');
    const bytes = Buffer.from('1,2,3\n');
    const uploaded = await bench.upload(technician, `${root}/stations/elm/raw-files`, {
      layoutId: place.layoutId,
      name: 'a.csv',
      bytes,
    });
    const { rawFile } = uploadedSchema.parse(uploaded.body);
    await bench
      .as(lead, 'post', `${root}/stations/elm/runs`)
      .send({ id: randomUUID(), recipeHash: recipeHash(defaultRecipe), fromMs: null, toMs: null })
      .expect(201);
    const account = deletionAccountSchema.parse(
      (await bench.as(lead, 'get', `${root}/stations/elm/deletion`).expect(200)).body,
    );
    expect(account.goes).toEqual([
      { label: 'raw files', count: 1, bytes: bytes.length },
      { label: 'set-up revisions', count: 1, bytes: null },
      { label: 'layouts', count: 1, bytes: null },
      { label: 'runs', count: 1, bytes: null },
      { label: 'computed periods', count: 0, bytes: null },
    ]);
    const unconfirmed = await bench.as(lead, 'delete', `${root}/stations/elm`);
    expect([unconfirmed.status, codeOf(unconfirmed)]).toEqual([400, 'invalid_input']);
    await access(bench.deps.storage.path(rawFile.sha256));
    await bench.as(lead, 'delete', `${root}/stations/elm?confirm=${account.confirmWord}`).expect(204);
    await bench.as(lead, 'get', `${root}/stations/elm`).expect(404);
    await bench.as(lead, 'get', `${root}/raw-files/${rawFile.id}`).expect(404);
    await expect(access(bench.deps.storage.path(rawFile.sha256))).rejects.toThrow('ENOENT');
    await bench.as(lead, 'get', `${root}/stations/birch`).expect(200);
  });
});

describe('recipes', () => {
  it('begin with the default, and one that computes the same is the one that is there', async () => {
    const list = ((await bench.as(lead, 'get', `${root}/recipes`).expect(200)).body as unknown[]).map((one) =>
      recipeRecordSchema.parse(one),
    );
    expect(list).toHaveLength(1);
    expect(list[0]).toMatchObject({ hash: recipeHash(defaultRecipe), isDefault: true, author: null });
    const renamed = { ...defaultRecipe, name: 'The same under another name', parentHash: list[0].hash };
    const same = await bench.as(lead, 'post', `${root}/recipes`).send({ recipe: renamed }).expect(200);
    expect(recipeRecordSchema.parse(same.body).recipe.name).toBe(defaultRecipe.name);
    const strict = {
      ...renamed,
      name: 'Strict',
      settings: {
        ...defaultRecipe.settings,
        steadyState: { subIntervals: 6, goodPercent: 20, usablePercent: 60 },
      },
    };
    const made = await bench.as(lead, 'post', `${root}/recipes`).send({ recipe: strict }).expect(201);
    expect(recipeRecordSchema.parse(made.body)).toMatchObject({ isDefault: false, author: { id: lead.id } });
    const orphan = { ...strict, name: 'Orphan', parentHash: '0'.repeat(64) };
    await bench.as(lead, 'post', `${root}/recipes`).send({ recipe: orphan }).expect(400);
  });
});

describe('starting a run', () => {
  it('wants raw files, a recipe of the group and a span that runs forward', async () => {
    const place = await makeStation(bench, group, technician, 'fir');
    const path = `${root}/stations/fir/runs`;
    const body = { id: randomUUID(), recipeHash: recipeHash(defaultRecipe), fromMs: null, toMs: null };
    const early = await bench.as(lead, 'post', path).send(body);
    expect([early.status, codeOf(early)]).toEqual([409, 'not_ready']);
    await bench.upload(technician, `${root}/stations/fir/raw-files`, {
      layoutId: place.layoutId,
      name: 'a.csv',
      bytes: Buffer.from('4,5,6\n'),
    });
    await bench
      .as(lead, 'post', path)
      .send({ ...body, recipeHash: '0'.repeat(64) })
      .expect(404);
    await bench
      .as(lead, 'post', path)
      .send({ ...body, fromMs: 2000, toMs: 1000 })
      .expect(400);
    const made = await bench.as(lead, 'post', path).send(body).expect(201);
    expect(made.body).toMatchObject({ state: 'waiting', stationSlug: 'fir', author: { id: lead.id } });
    await bench.as(lead, 'post', path).send(body).expect(200);
    const next = await bench
      .as(lead, 'post', path)
      .send({ ...body, id: randomUUID() })
      .expect(201);
    expect((next.body as { number: number }).number).toBe((made.body as { number: number }).number + 1);
  });

  it('can be stopped while it waits, deleted only then, and its number is not given again', async () => {
    const path = `${root}/stations/fir/runs`;
    const start = async () => {
      const body = { id: randomUUID(), recipeHash: recipeHash(defaultRecipe), fromMs: null, toMs: null };
      return (await bench.as(lead, 'post', path).send(body).expect(201)).body as {
        id: string;
        number: number;
      };
    };
    const run = await start();
    const address = `${root}/runs/${run.id}`;
    const account = deletionAccountSchema.parse((await bench.as(lead, 'get', `${address}/deletion`)).body);
    const confirm = encodeURIComponent(account.confirmWord);
    const atWork = await bench.as(lead, 'delete', `${address}?confirm=${confirm}`);
    expect([atWork.status, codeOf(atWork)]).toEqual([409, 'conflict']);
    const cancelled = await bench.as(technician, 'post', `${address}/cancel`).expect(200);
    expect(cancelled.body).toMatchObject({ state: 'cancelled' });
    await bench.as(lead, 'delete', `${address}?confirm=${confirm}`).expect(204);
    await bench.as(lead, 'get', address).expect(404);
    expect((await start()).number).toBe(run.number + 1);
  });
});
