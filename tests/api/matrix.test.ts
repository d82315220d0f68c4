import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { upsertPeriods } from '../../db/queries/runs';
import { defaultRecipe, recipeHash } from '../../processing/schemas/recipe';
import { routeTable } from '../../server/app';
import { errorEnvelopeSchema } from '../../server/contract/errors';
import { may, roles } from '../../server/contract/roles';
import type { Role } from '../../server/contract/roles';
import { Bench, layout, makeStation, setUp, station } from './bench';
import type { Group, MadeStation, Someone } from './bench';

/**
 * Every route × every role × own and foreign group. A route that is served and not listed here fails, and so does one listed and not
 * served.
 */

let bench: Bench;
let own: Group;
let foreign: Group;
let people: Record<Role, Someone>;
let stranger: Someone;
let place: MadeStation;
let foreignPlace: MadeStation;
let rawFileId: string;
let runId: string;

const START_MS = Date.UTC(2027, 5, 17, 9);
const aRecipeHash = recipeHash(defaultRecipe);
let counter = 0;

interface Sent {
  /** Below the group's address. */
  path: string;
  body?: unknown;
  form?: FormData;
}

async function bringIn(slug: string, layoutId: string): Promise<string> {
  const form = uploadForm(layoutId);
  const answer = await send(people.lead, 'POST', `/api/groups/${own.slug}/stations/${slug}/raw-files`, {
    form,
  });
  expect(answer.status).toBe(201);
  return ((await answer.json()) as { rawFile: { id: string } }).rawFile.id;
}

function uploadForm(layoutId: string): FormData {
  const form = new FormData();
  form.append('id', randomUUID());
  form.append('layoutId', layoutId);
  form.append('file', new Blob([`row ${++counter}\n`]), 'rows.csv');
  return form;
}

async function startRun(): Promise<string> {
  const id = randomUUID();
  const body = { id, recipeHash: aRecipeHash, fromMs: null, toMs: null };
  const answer = await send(people.lead, 'POST', `/api/groups/${own.slug}/stations/${place.slug}/runs`, {
    body,
  });
  expect(answer.status).toBe(201);
  return id;
}

function send(
  someone: Someone | null,
  method: string,
  path: string,
  { body, form }: { body?: unknown; form?: FormData } = {},
): Promise<Response> {
  return fetch(`${bench.url}${path}`, {
    method,
    headers: {
      origin: bench.url,
      ...(someone === null ? {} : { cookie: someone.cookie }),
      ...(body === undefined ? {} : { 'content-type': 'application/json' }),
    },
    body: form ?? (body === undefined ? undefined : JSON.stringify(body)),
  });
}

/** How each route of a group is asked so that it succeeds where it is allowed; what is used up is made anew each time. */
const requests: Record<string, () => Sent | Promise<Sent>> = {
  'GET /members': () => ({ path: '/members' }),
  'GET /recipes': () => ({ path: '/recipes' }),
  'POST /recipes': () => ({
    path: '/recipes',
    body: {
      recipe: {
        name: 'Another',
        parentHash: aRecipeHash,
        settings: {
          ...defaultRecipe.settings,
          completeness: { softMissingPercent: 1 + ++counter / 10, hardMissingPercent: 90 },
        },
      },
    },
  }),
  'GET /jobs': () => ({ path: '/jobs' }),
  'GET /events': () => ({ path: '/events' }),
  'GET /stations': () => ({ path: '/stations' }),
  'POST /stations': () => ({
    path: '/stations',
    body: {
      id: randomUUID(),
      systemId: randomUUID(),
      setUpId: randomUUID(),
      station: station(`new-${++counter}`),
      setUp: setUp(),
    },
  }),
  'GET /stations/:station': () => ({ path: `/stations/${place.slug}` }),
  'PATCH /stations/:station': () => ({
    path: `/stations/${place.slug}`,
    body: { description: `text ${++counter}` },
  }),
  'GET /stations/:station/deletion': () => ({ path: `/stations/${place.slug}/deletion` }),
  'DELETE /stations/:station': async () => {
    const { slug } = await makeStation(bench, own, people.lead, `to-go-${++counter}`);
    return { path: `/stations/${slug}?confirm=${slug}` };
  },
  'GET /stations/:station/set-ups': () => ({ path: `/stations/${place.slug}/set-ups` }),
  'POST /stations/:station/set-ups': () => ({
    path: `/stations/${place.slug}/set-ups`,
    body: { id: randomUUID(), setUp: setUp(), why: 'because of a test' },
  }),
  'GET /stations/:station/layouts': () => ({ path: `/stations/${place.slug}/layouts` }),
  'POST /stations/:station/layouts': () => ({
    path: `/stations/${place.slug}/layouts`,
    body: { id: randomUUID(), layout: layout({ name: `layout ${++counter}` }) },
  }),
  'GET /stations/:station/runs': () => ({ path: `/stations/${place.slug}/runs` }),
  'POST /stations/:station/runs': () => ({
    path: `/stations/${place.slug}/runs`,
    body: { id: randomUUID(), recipeHash: aRecipeHash, fromMs: null, toMs: null },
  }),
  'GET /stations/:station/spine': () => ({ path: `/stations/${place.slug}/spine?run=${runId}` }),
  'GET /stations/:station/raw-files': () => ({ path: `/stations/${place.slug}/raw-files` }),
  'POST /stations/:station/raw-files': () => ({
    path: `/stations/${place.slug}/raw-files`,
    form: uploadForm(place.layoutId),
  }),
  'POST /stations/:station/raw-files/check': () => ({
    path: `/stations/${place.slug}/raw-files/check`,
    body: { sha256: ['0'.repeat(64)] },
  }),
  'GET /raw-files/:id': () => ({ path: `/raw-files/${rawFileId}` }),
  'POST /raw-files/:id/withdraw': async () => ({
    path: `/raw-files/${await bringIn(place.slug, place.layoutId)}/withdraw`,
  }),
  'POST /raw-files/:id/restore': () => ({ path: `/raw-files/${rawFileId}/restore` }),
  'POST /raw-files/:id/reread': () => ({ path: `/raw-files/${rawFileId}/reread`, body: {} }),
  'GET /raw-files/:id/content': () => ({ path: `/raw-files/${rawFileId}/content` }),
  'GET /runs/:id': () => ({ path: `/runs/${runId}` }),
  'DELETE /runs/:id': async () => {
    const id = await startRun();
    await send(people.lead, 'POST', `/api/groups/${own.slug}/runs/${id}/cancel`);
    const run = await send(people.lead, 'GET', `/api/groups/${own.slug}/runs/${id}`);
    const { number } = (await run.json()) as { number: number };
    return { path: `/runs/${id}?confirm=run%20${number}` };
  },
  'GET /runs/:id/deletion': () => ({ path: `/runs/${runId}/deletion` }),
  'POST /runs/:id/cancel': async () => ({ path: `/runs/${await startRun()}/cancel` }),
  'GET /runs/:id/series': () => ({ path: `/runs/${runId}/series?quantities=co2Flux` }),
  'GET /runs/:id/periods': () => ({ path: `/runs/${runId}/periods` }),
  'GET /runs/:id/periods/:startMs': () => ({ path: `/runs/${runId}/periods/${START_MS}` }),
  'GET /runs/:id/export': () => ({ path: `/runs/${runId}/export?format=plain` }),
};

const groupEntries = routeTable
  .filter((entry) => entry.path.startsWith('/api/groups/:group'))
  .map((entry) => ({
    ...entry,
    key: `${entry.method.toUpperCase()} ${entry.path.slice('/api/groups/:group'.length)}`,
  }));

beforeAll(async () => {
  bench = await Bench.start();
  own = await bench.addGroup('reedmoor');
  foreign = await bench.addGroup('elsewhere');
  people = await bench.addOnePerRole(own);
  stranger = await bench.addPerson(foreign, 'lead');
  place = await makeStation(bench, own, people.lead, 'alder');
  foreignPlace = await makeStation(bench, foreign, stranger, 'birch');
  rawFileId = await bringIn(place.slug, place.layoutId);
  runId = await startRun();
  const flux = { grade: 0, ssitc: 0, class9: 1, decidedBy: [] };
  await upsertPeriods(bench.deps.db, [
    {
      runId,
      startMs: START_MS,
      endMs: START_MS + 1_800_000,
      manifestHash: '0'.repeat(64),
      outcome: 'computed',
      values: { co2Flux: -1e-6 },
      grades: { momentum: flux, sensibleHeat: flux, latentHeat: flux, co2Flux: flux },
      mainFinding: { co2Flux: null },
      reasons: [],
      ledger: [],
      curves: {},
      rawFiles: [rawFileId],
      hash: '0'.repeat(64),
    },
  ]);
});
afterAll(() => bench.close());

interface Layer {
  route?: { path: string; methods: Record<string, boolean> };
}

describe('the list of routes', () => {
  it('is all that the server serves under /api', () => {
    const app = (bench as unknown as { server: { listeners(event: string): unknown[] } }).server
      .listeners('request')
      .at(-1);
    const { stack } = (app as { router: { stack: Layer[] } }).router;
    const served = stack
      .flatMap(({ route }) =>
        route === undefined ? [] : Object.keys(route.methods).map((method) => `${method} ${route.path}`),
      )
      .filter((one) => one.includes('/api/') && !one.includes('/api/auth/*splat'));
    expect(served.sort()).toEqual(routeTable.map((entry) => `${entry.method} ${entry.path}`).sort());
  });

  it('is the list of this matrix', () => {
    expect(groupEntries.map((entry) => entry.key).sort()).toEqual(Object.keys(requests).sort());
    const others = routeTable.filter((entry) => !entry.path.startsWith('/api/groups/:group'));
    expect(others.map((entry) => `${entry.access} ${entry.path}`).sort()).toEqual([
      'public /api/health',
      'signed-in /api/me',
    ]);
  });
});

async function codeOf(answer: Response): Promise<string> {
  return errorEnvelopeSchema.parse(await answer.json()).error.code;
}

describe.each(groupEntries)('$key', ({ key, method, access }) => {
  const ask = async (someone: Someone | null, group: Group, sent: Sent) => {
    const answer = await send(someone, method.toUpperCase(), `/api/groups/${group.slug}${sent.path}`, sent);
    // The stream of events does not end by itself.
    if (answer.ok) await answer.body?.cancel();
    return answer;
  };

  it.each(roles)('answers a %s by the table', async (role) => {
    const answer = await ask(people[role], own, await requests[key]());
    if (access !== 'public' && access !== 'signed-in' && may(role, access)) {
      expect([200, 201, 204]).toContain(answer.status);
    } else {
      expect([answer.status, await codeOf(answer)]).toEqual([403, 'not_allowed']);
    }
  });

  it('asks nobody in who is not signed in', async () => {
    const answer = await ask(null, own, await requests[key]());
    expect([answer.status, await codeOf(answer)]).toEqual([401, 'not_signed_in']);
  });

  it('does not exist for the lead of another group', async () => {
    const sent = await requests[key]();
    const answer = await ask(stranger, own, sent);
    expect([answer.status, await codeOf(answer)]).toEqual([404, 'not_found']);
    const nowhere = await ask(stranger, { id: '', slug: 'no-such-group' }, await requests[key]());
    expect([nowhere.status, await codeOf(nowhere)]).toEqual([404, 'not_found']);
  });

  if (key.includes('/:')) {
    it('does not find things of another group under one’s own address', async () => {
      const answer = await ask(stranger, foreign, await requests[key]());
      expect([answer.status, await codeOf(answer)]).toEqual([404, 'not_found']);
    });
  }
});

describe('ids of another group in a body', () => {
  it('are not found: a layout', async () => {
    const refused = await send(
      people.lead,
      'POST',
      `/api/groups/${own.slug}/stations/${place.slug}/raw-files`,
      {
        form: uploadForm(foreignPlace.layoutId),
      },
    );
    expect([refused.status, await codeOf(refused)]).toEqual([404, 'not_found']);
    const taken = await send(
      people.lead,
      'POST',
      `/api/groups/${own.slug}/stations/${place.slug}/raw-files`,
      {
        form: uploadForm(place.layoutId),
      },
    );
    expect(taken.status).toBe(201);
  });

  it('are not found: a layout for reading again', async () => {
    const path = `/api/groups/${own.slug}/raw-files/${rawFileId}/reread`;
    const refused = await send(people.lead, 'POST', path, { body: { layoutId: foreignPlace.layoutId } });
    expect([refused.status, await codeOf(refused)]).toEqual([404, 'not_found']);
    expect((await send(people.lead, 'POST', path, { body: { layoutId: place.layoutId } })).status).toBe(200);
  });

  it('are not found: a station, set-up, layout or run of the same id', async () => {
    const mine = { systemId: randomUUID(), setUpId: randomUUID(), station: station('cedar'), setUp: setUp() };
    const root = `/api/groups/${foreign.slug}/stations`;
    const stationTwice = await send(stranger, 'POST', root, { body: { ...mine, id: place.id } });
    expect(stationTwice.status).toBe(404);
    const setUpTwice = await send(stranger, 'POST', `${root}/birch/set-ups`, {
      body: { id: place.setUpId, setUp: setUp(), why: 'a test' },
    });
    expect(setUpTwice.status).toBe(404);
    const layoutTwice = await send(stranger, 'POST', `${root}/birch/layouts`, {
      body: { id: place.layoutId, layout: layout() },
    });
    expect(layoutTwice.status).toBe(404);
    const runTwice = await send(stranger, 'POST', `${root}/birch/runs`, {
      body: { id: runId, recipeHash: aRecipeHash, fromMs: null, toMs: null },
    });
    expect(runTwice.status).toBe(404);
  });

  it('are not found: a run of another station for the spine', async () => {
    const { slug } = await makeStation(bench, own, people.lead, 'dogwood');
    const path = (name: string) => `/api/groups/${own.slug}/stations/${name}/spine?run=${runId}`;
    expect((await send(people.lead, 'GET', path(slug))).status).toBe(404);
    expect((await send(people.lead, 'GET', path(place.slug))).status).toBe(200);
  });
});

describe('the open routes', () => {
  it('tell everybody about health and only the signed-in who they are', async () => {
    expect((await send(null, 'GET', '/api/health')).status).toBe(200);
    expect((await send(null, 'GET', '/api/me')).status).toBe(401);
    for (const role of roles) {
      const answer = await send(people[role], 'GET', '/api/me');
      expect(((await answer.json()) as { groups: unknown }).groups).toEqual([
        { slug: own.slug, name: `Group ${own.slug}`, role },
      ]);
    }
  });
});
