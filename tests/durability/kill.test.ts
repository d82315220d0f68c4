import { createHash, randomUUID } from 'node:crypto';
import { mkdir, mkdtemp, readFile, readdir, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { gunzipSync, gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { catalogue } from '../../processing/catalogue';
import { defaultRecipe, recipeHash } from '../../processing/schemas/recipe';
import { demoLayout, demoSetUp, demoStation } from '../../processing/synthetic/demo-scenario';
import {
  periodDetailSchema,
  periodRowSchema,
  rawFileSchema,
  runSchema,
  seriesSchema,
} from '../../server/contract/api';
import type { RawFile, Run, SeriesData } from '../../server/contract/api';
import { projectRoot } from '../../server/paths';
import { generateRecords } from '../../server/seed/generate-records';
import { ownBundle, ServerProcess } from './server-process';

/**
 * The built server is killed without warning while it takes files in, while it reads them and while it computes, and started again on the
 * same data folder. Then: what it had acknowledged is there byte for byte; work goes on by itself and ends; no period is there twice or in
 * part; the results are those of an undisturbed run; and writing goes on.
 */

const HOURS = '6-18';
const RATE_HZ = 5;
const PERIODS = 24;
/** Kills in all: 22 unless asked for more (the deep harness asks for hundreds), a third of them in each phase. */
const KILLS = Math.max(20, Number(process.env.GUSTBOOK_KILL_ROUNDS ?? 22));
const ROUNDS = {
  upload: KILLS - 2 * Math.floor(KILLS / 3),
  reading: Math.floor(KILLS / 3),
  computing: Math.floor(KILLS / 3),
};
type Phase = keyof typeof ROUNDS;
const PASSWORD = 'a long enough test password';
const aRecipeHash = recipeHash(defaultRecipe);

interface SentFile {
  id: string;
  name: string;
  bytes: Buffer;
  sha256: string;
}

interface Place {
  slug: string;
  layoutId: string;
  files: SentFile[];
}

const counts = {
  rounds: { upload: 0, reading: 0, computing: 0 },
  sent: 0,
  acknowledged: 0,
  lost: 0,
  unexpected: 0,
  /** Stored before the kill, though the sender never heard so: harmless, since it sends them again. */
  storedUnheard: 0,
  filesReadAfterwards: 0,
  runsResumed: 0,
  /** Periods that were there right after a restart in the middle of a run. */
  periodsFoundAfterKill: [] as number[],
  restartMs: [] as number[],
};

let bundle: string;
let dataFolder: string;
let server: ServerProcess;
let cookie: string;
let records: { name: string; content: Buffer; packed: boolean }[];
let reference: SeriesData;
let serial = 0;

/** Spread evenly and the same in every run of the test: multiples of the golden section. */
const spread = (round: number) => (round * 0.618034) % 1;
const pause = (ms: number) => new Promise((resolve) => setTimeout(resolve, ms));

beforeAll(async () => {
  bundle = await ownBundle();
  const kept = join(projectRoot, '.gustbook', 'test-records');
  const folder = join(kept, `day-${HOURS}-${RATE_HZ}`);
  if ((await readFile(join(folder, 'truth.json')).catch(() => null)) === null) {
    await mkdir(folder, { recursive: true });
    await generateRecords(
      folder,
      { hours: HOURS, sampleRateHz: RATE_HZ },
      () => undefined,
      new AbortController().signal,
    );
  }
  const names = (await readdir(folder)).filter((name) => /\.csv(\.gz)?$/.test(name)).sort();
  records = await Promise.all(
    names.map(async (name) => {
      const bytes = await readFile(join(folder, name));
      const packed = name.endsWith('.gz');
      return { name, content: packed ? gunzipSync(bytes) : bytes, packed };
    }),
  );
  dataFolder = await mkdtemp(join(tmpdir(), 'gustbook-durability-'));
  server = await ServerProcess.start(bundle, dataFolder);
  cookie = await firstSignIn();
  const place = await makePlace();
  for (const file of place.files) expect(await upload(place, file)).toBe(201);
  reference = await allColumns((await finishedRun(await startRun(place))).id);
  expect(reference.startMs).toHaveLength(PERIODS);
});

afterAll(async () => {
  await server?.kill();
  await rm(dataFolder, { recursive: true, force: true });
  await rm(bundle, { recursive: true, force: true });
  const text = JSON.stringify(counts, null, 2);
  await mkdir(join(projectRoot, '.gustbook', 'test-reports'), { recursive: true });
  await writeFile(join(projectRoot, '.gustbook', 'test-reports', 'durability-counts.json'), text);
  process.stdout.write(`${text}\n`);
});

async function firstSignIn(): Promise<string> {
  const [name] = await readdir(join(dataFolder, 'outbox'));
  const token = /\/reset-password\/([A-Za-z0-9_-]+)/.exec(
    await readFile(join(dataFolder, 'outbox', name), 'utf8'),
  )?.[1];
  const headers = { origin: server.url, 'content-type': 'application/json' };
  const post = (path: string, body: unknown) =>
    fetch(`${server.url}/api/auth/${path}`, { method: 'POST', headers, body: JSON.stringify(body) });
  expect((await post('reset-password', { token, newPassword: PASSWORD })).status).toBe(200);
  const answer = await post('sign-in/email', { email: 'lead@example.org', password: PASSWORD });
  expect(answer.status).toBe(200);
  return answer.headers
    .getSetCookie()
    .map((one) => one.split(';')[0])
    .join('; ');
}

async function call(path: string, method = 'GET', body?: unknown): Promise<Response> {
  return fetch(`${server.url}/api/groups/reedmoor${path}`, {
    method,
    headers: {
      cookie,
      origin: server.url,
      ...(body === undefined ? {} : { 'content-type': 'application/json' }),
    },
    body: body === undefined ? undefined : JSON.stringify(body),
  });
}

async function json(path: string): Promise<unknown> {
  const answer = await call(path);
  expect([path, answer.status]).toEqual([path, 200]);
  return answer.json();
}

/** A station of its own with files that no other has: the header's remark is marked, the rows are the same. */
async function makePlace(): Promise<Place> {
  const mark = ++serial;
  const place: Place = { slug: `station-${mark}`, layoutId: randomUUID(), files: [] };
  const made = await call('/stations', 'POST', {
    id: randomUUID(),
    systemId: randomUUID(),
    setUpId: randomUUID(),
    station: { ...demoStation, slug: place.slug },
    setUp: { ...demoSetUp, sampleRateHz: RATE_HZ },
  });
  expect(made.status).toBe(201);
  const layout = { id: place.layoutId, layout: demoLayout(RATE_HZ) };
  expect((await call(`/stations/${place.slug}/layouts`, 'POST', layout)).status).toBe(201);
  place.files = records.map(({ name, content, packed }) => {
    const end = content.indexOf('\n');
    const marked = Buffer.concat([
      content.subarray(0, end),
      Buffer.from(` (${mark})`),
      content.subarray(end),
    ]);
    const bytes = packed ? gzipSync(marked, { level: 1 }) : marked;
    return { id: randomUUID(), name, bytes, sha256: createHash('sha256').update(bytes).digest('hex') };
  });
  return place;
}

/** @returns status of the answer, or null when none came */
async function upload(place: Place, file: SentFile): Promise<number | null> {
  const form = new FormData();
  form.append('id', file.id);
  form.append('layoutId', place.layoutId);
  form.append('file', new Blob([new Uint8Array(file.bytes)]), file.name);
  return fetch(`${server.url}/api/groups/reedmoor/stations/${place.slug}/raw-files`, {
    method: 'POST',
    headers: { cookie, origin: server.url },
    body: form,
  }).then(
    async (answer) => {
      await answer.arrayBuffer();
      return answer.status;
    },
    () => null,
  );
}

const filesOf = async (place: Place) =>
  ((await json(`/stations/${place.slug}/raw-files`)) as unknown[]).map((file) => rawFileSchema.parse(file));

async function startRun(place: Place): Promise<string> {
  const id = randomUUID();
  const body = { id, recipeHash: aRecipeHash, fromMs: null, toMs: null };
  expect((await call(`/stations/${place.slug}/runs`, 'POST', body)).status).toBe(201);
  return id;
}

const runNow = async (id: string) => runSchema.parse(await json(`/runs/${id}`));

/** Looks again and again; fails with what was seen last after two minutes. */
async function until<Seen>(
  look: () => Promise<Seen>,
  isEnough: (seen: Seen) => boolean,
  everyMs = 40,
): Promise<Seen> {
  const deadlineMs = performance.now() + 120_000;
  for (;;) {
    const seen = await look();
    if (isEnough(seen)) return seen;
    if (performance.now() > deadlineMs)
      throw new Error(`waited too long; last seen: ${JSON.stringify(seen)}`);
    await pause(everyMs);
  }
}

async function finishedRun(id: string): Promise<Run> {
  return until(
    () => runNow(id),
    ({ state }) => ['done', 'failed', 'cancelled'].includes(state),
  );
}

const keys = catalogue.map(({ key }) => key);
const allColumns = async (id: string) =>
  seriesSchema.parse(await json(`/runs/${id}/series?quantities=${keys.join(',')}`));

async function killAndRestart(): Promise<void> {
  await server.kill();
  const startedMs = performance.now();
  server = await ServerProcess.start(bundle, dataFolder);
  counts.restartMs.push(Math.round(performance.now() - startedMs));
}

/** Everything that was acknowledged is there, byte for byte; nothing is there that nobody sent. */
async function checkFiles(place: Place, acknowledged: SentFile[]): Promise<RawFile[]> {
  const present = await filesOf(place);
  counts.acknowledged += acknowledged.length;
  for (const file of acknowledged) {
    const answer = await call(`/raw-files/${file.id}/content`);
    const bytes = answer.ok ? Buffer.from(await answer.arrayBuffer()) : null;
    if (bytes === null || !bytes.equals(file.bytes)) counts.lost++;
  }
  const sent = new Map(place.files.map((file) => [file.id, file]));
  for (const file of present) {
    if (sent.get(file.id)?.sha256 !== file.sha256) counts.unexpected++;
    else if (!acknowledged.some(({ id }) => id === file.id)) counts.storedUnheard++;
  }
  if (new Set(present.map(({ sha256 }) => sha256)).size !== present.length) counts.unexpected++;
  return present;
}

/** A run that was broken off ends by itself, whole, and equal to an undisturbed one. */
async function checkRun(place: Place, id: string): Promise<void> {
  const run = await finishedRun(id);
  expect(run).toMatchObject({
    state: 'done',
    periodsTotal: PERIODS,
    periodsDone: PERIODS,
    problem: null,
    stale: [],
  });
  counts.runsResumed++;
  const rows = ((await json(`/runs/${id}/periods`)) as unknown[]).map((row) => periodRowSchema.parse(row));
  expect(rows.map(({ startMs }) => startMs)).toEqual(reference.startMs);
  for (const startMs of [rows[0].startMs, rows[PERIODS - 1].startMs]) {
    expect(
      periodDetailSchema.parse(await json(`/runs/${id}/periods/${startMs}`)).ledger.length,
    ).toBeGreaterThan(0);
  }
  const { runId: _own, ...columns } = await allColumns(id);
  const { runId: _other, ...expected } = reference;
  expect(columns).toEqual(expected);
  // The same once more, undisturbed, from the same files: the same hash over every number, word and ledger line.
  const again = await finishedRun(await startRun(place));
  expect([again.manifestHash, again.resultHash]).toEqual([run.manifestHash, run.resultHash]);
}

async function waitUntilRead(place: Place): Promise<void> {
  const states = async () => (await filesOf(place)).map(({ state }) => state);
  await until(states, (seen) => seen.every((state) => state === 'read'));
}

/** One kill in the given phase and all that must hold afterwards. */
async function round(phase: Phase, turn: number): Promise<void> {
  const place = await makePlace();
  counts.sent += place.files.length;
  let runId: string | null = null;
  let acknowledged: SentFile[] = [];
  if (phase === 'upload') {
    // Three at once, as the client sends them; killed somewhere within.
    const waiting = [...place.files];
    const lane = async () => {
      for (let file = waiting.shift(); file !== undefined; file = waiting.shift()) {
        const status = await upload(place, file);
        if (status === null) return;
        expect(status).toBe(201);
        acknowledged.push(file);
      }
    };
    const lanes = Promise.all([lane(), lane(), lane()]);
    // So many are acknowledged, others are on their way.
    const wanted = Math.floor(spread(turn) * (place.files.length - 3));
    await until(
      async () => acknowledged.length,
      (heard) => heard >= wanted,
      1,
    );
    await pause(spread(turn) * 12);
    const heard = [...acknowledged];
    await killAndRestart();
    await lanes;
    // Answers may have arrived between the last look and the kill.
    expect(acknowledged.length).toBeGreaterThanOrEqual(heard.length);
  } else {
    for (const file of place.files) expect(await upload(place, file)).toBe(201);
    acknowledged = [...place.files];
    if (phase === 'reading') {
      // All to be read once more, all at once; killed when some of it is done.
      await waitUntilRead(place);
      for (const { id } of place.files)
        expect((await call(`/raw-files/${id}/reread`, 'POST', {})).status).toBe(200);
      runId = await startRun(place);
      const wanted = Math.floor(spread(turn) * (place.files.length - 2));
      await until(
        async () => (await filesOf(place)).filter(({ state }) => state === 'read').length,
        (done) => done >= wanted,
        5,
      );
    } else {
      runId = await startRun(place);
      const wanted = Math.floor(spread(turn) * (PERIODS - 1));
      await until(
        () => runNow(runId!),
        ({ periodsDone }) => periodsDone >= wanted,
      );
    }
    await killAndRestart();
    if (phase === 'computing') counts.periodsFoundAfterKill.push((await runNow(runId)).periodsDone);
  }
  counts.rounds[phase]++;
  const present = await checkFiles(place, acknowledged);
  counts.filesReadAfterwards += present.filter(({ state }) => state !== 'read').length;
  if (phase === 'upload') {
    // The sender sends again what it got no answer for: nothing comes twice.
    for (const file of place.files) expect([200, 201]).toContain(await upload(place, file));
    expect((await filesOf(place)).map(({ id }) => id).sort()).toEqual(place.files.map(({ id }) => id).sort());
    runId = await startRun(place);
  }
  await waitUntilRead(place);
  await checkRun(place, runId!);
}

describe.each(Object.entries(ROUNDS) as [Phase, number][])('killed while %s', (phase, rounds) => {
  it(`${rounds} times, loses nothing that was acknowledged and ends with the undisturbed result`, async () => {
    for (let turn = 1; turn <= rounds; turn++) await round(phase, turn);
    expect({ lost: counts.lost, unexpected: counts.unexpected }).toEqual({ lost: 0, unexpected: 0 });
    expect(counts.rounds[phase]).toBe(rounds);
  });
});

describe('the kills', () => {
  it('met the server at work, not idle', () => {
    // Some uploads were cut off, some readings were left to do, some runs stood in their middle.
    const total = records.length * (ROUNDS.upload + ROUNDS.reading + ROUNDS.computing);
    expect(counts.sent).toBe(total);
    expect(counts.acknowledged).toBeLessThan(total);
    expect(counts.filesReadAfterwards).toBeGreaterThan(ROUNDS.reading);
    expect(counts.acknowledged).toBeGreaterThan(
      records.length * (ROUNDS.reading + ROUNDS.computing) + ROUNDS.upload,
    );
    expect(counts.periodsFoundAfterKill.filter((done) => done > 0 && done < PERIODS).length).toBeGreaterThan(
      0,
    );
    expect(counts.runsResumed).toBe(ROUNDS.upload + ROUNDS.reading + ROUNDS.computing);
  });
});

describe('the data folder', () => {
  it('is refused to a second server while the first goes on, and is free after an orderly end', async () => {
    await expect(ServerProcess.start(bundle, dataFolder)).rejects.toThrow(
      /ended \(1\).*in use by another Gustbook server/s,
    );
    expect((await call('/stations')).status).toBe(200);
    expect(await server.stop()).toBe(0);
    server = await ServerProcess.start(bundle, dataFolder);
    expect((await call('/stations')).status).toBe(200);
  });

  it('keeps no half-written upload', async () => {
    expect(await readdir(join(dataFolder, 'incoming'))).toEqual([]);
  });
});
