import { createHash, randomBytes, randomUUID } from 'node:crypto';
import { readdir, readFile, stat } from 'node:fs/promises';
import { request as httpRequest } from 'node:http';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { rawFileById, rawFilesOf } from '../../db/queries/raw-files';
import { errorEnvelopeSchema } from '../../server/contract/errors';
import { rawFileSchema, uploadedSchema } from '../../server/contract/api';
import type { RawFile, Uploaded } from '../../server/contract/api';
import { Bench, layout, makeStation } from './bench';
import type { Group, MadeStation, Someone } from './bench';

const MIB = 1024 ** 2;

let bench: Bench;
let group: Group;
let technician: Someone;
let analyst: Someone;
let place: MadeStation;
let address: string;
let counter = 0;

beforeAll(async () => {
  bench = await Bench.start({
    config: { maxUploadBytes: 2 * MIB, maxUnpackedBytes: 8 * MIB, maxExpansion: 50 },
  });
  group = await bench.addGroup('reedmoor');
  technician = await bench.addPerson(group, 'technician');
  analyst = await bench.addPerson(group, 'analyst');
  place = await makeStation(bench, group, technician, 'alder');
  address = `/api/groups/${group.slug}/stations/${place.slug}/raw-files`;
});
afterAll(() => bench.close());

const sha256 = (bytes: Buffer) => createHash('sha256').update(bytes).digest('hex');

/** Some lines that no other test uses. */
function lines(count: number): Buffer {
  const mark = ++counter;
  return Buffer.from(Array.from({ length: count }, (_, k) => `${mark},${k},${(k * 7919) % 1000}\n`).join(''));
}

async function bring(
  bytes: Buffer,
  name = 'rows.csv',
  id: string = randomUUID(),
): Promise<{ status: number; body: Uploaded }> {
  const answer = await bench.upload(technician, address, { id, layoutId: place.layoutId, name, bytes });
  expect([200, 201]).toContain(answer.status);
  return { status: answer.status, body: uploadedSchema.parse(answer.body) };
}

async function refused(bytes: Buffer, name = 'rows.csv'): Promise<[number, string]> {
  const answer = await bench.upload(technician, address, { layoutId: place.layoutId, name, bytes });
  return [answer.status, errorEnvelopeSchema.parse(answer.body).error.code];
}

const listed = async () => (await bench.as(technician, 'get', address).expect(200)).body as RawFile[];

describe('bringing in a raw file', () => {
  it('keeps the bytes under their hash, read-only, and gives them back unchanged', async () => {
    const bytes = randomBytes(300_000);
    const { status, body } = await bring(bytes, 'day.bin');
    expect(status).toBe(201);
    expect(body).toMatchObject({
      duplicate: false,
      rawFile: {
        fileName: 'day.bin',
        bytes: bytes.length,
        sha256: sha256(bytes),
        contentHash: sha256(bytes),
        state: 'stored',
      },
    });
    const path = bench.deps.storage.path(sha256(bytes));
    expect((await readFile(path)).equals(bytes)).toBe(true);
    expect((await stat(path)).mode & 0o222).toBe(0);
    const back = await bench
      .as(analyst, 'get', `/api/groups/${group.slug}/raw-files/${body.rawFile.id}/content`)
      .buffer(true)
      .parse((res, done) => {
        const parts: Buffer[] = [];
        res.on('data', (part: Buffer) => parts.push(part));
        res.on('end', () => done(null, Buffer.concat(parts)));
      });
    expect((back.body as Buffer).equals(bytes)).toBe(true);
    expect(back.get('content-disposition')).toContain('filename="day.bin"');
  });

  it('answers a repeated request and the same bytes again with the existing file', async () => {
    const bytes = lines(50);
    const first = await bring(bytes);
    const repeated = await bring(bytes, 'rows.csv', first.body.rawFile.id);
    expect([repeated.status, repeated.body.duplicate, repeated.body.rawFile.id]).toEqual([
      200,
      true,
      first.body.rawFile.id,
    ]);
    const renamed = await bring(bytes, 'other-name.csv');
    expect([renamed.status, renamed.body.duplicate, renamed.body.rawFile.id]).toEqual([
      200,
      true,
      first.body.rawFile.id,
    ]);
  });

  it('knows a content again when it comes packed, and the other way round', async () => {
    const one = lines(500);
    const plain = await bring(one);
    const packed = await bring(gzipSync(one), 'rows.csv.gz');
    expect([packed.status, packed.body.rawFile.id]).toEqual([200, plain.body.rawFile.id]);
    const two = lines(500);
    const packedFirst = await bring(gzipSync(two), 'rows.csv.gz');
    expect(packedFirst.body.rawFile.contentHash).toBe(sha256(two));
    expect(packedFirst.body.rawFile.sha256).toBe(sha256(gzipSync(two)));
    const plainLater = await bring(two);
    expect([plainLater.status, plainLater.body.rawFile.id]).toEqual([200, packedFirst.body.rawFile.id]);
    // Packed otherwise: other bytes, the same content.
    const otherLevel = gzipSync(two, { level: 1 });
    expect(sha256(otherLevel)).not.toBe(sha256(gzipSync(two)));
    expect((await bring(otherLevel)).body.rawFile.id).toBe(packedFirst.body.rawFile.id);
  });

  it('makes one file of ten requests with the same content at once', async () => {
    const bytes = lines(2000);
    const answers = await Promise.all(Array.from({ length: 10 }, () => bring(bytes)));
    expect(new Set(answers.map(({ body }) => body.rawFile.id)).size).toBe(1);
    expect(answers.filter(({ status }) => status === 201)).toHaveLength(1);
    expect((await listed()).filter((file) => file.sha256 === sha256(bytes))).toHaveLength(1);
  });

  it('takes the same content on another station as a file of its own, over one object', async () => {
    const bytes = lines(70);
    const here = await bring(bytes);
    const other = await makeStation(bench, group, technician, 'birch');
    const there = await bench.upload(technician, `/api/groups/${group.slug}/stations/birch/raw-files`, {
      layoutId: other.layoutId,
      name: 'rows.csv',
      bytes,
    });
    expect(there.status).toBe(201);
    const copy = uploadedSchema.parse(there.body).rawFile;
    expect(copy.id).not.toBe(here.body.rawFile.id);
    const lead = await bench.addPerson(group, 'lead');
    await bench.as(lead, 'delete', `/api/groups/${group.slug}/stations/birch?confirm=birch`).expect(204);
    expect((await readFile(bench.deps.storage.path(sha256(bytes)))).equals(bytes)).toBe(true);
  });

  it('refuses another content under an id that is taken', async () => {
    const first = await bring(lines(10));
    const answer = await bench.upload(technician, address, {
      id: first.body.rawFile.id,
      layoutId: place.layoutId,
      name: 'x.csv',
      bytes: lines(11),
    });
    expect([answer.status, errorEnvelopeSchema.parse(answer.body).error.code]).toEqual([409, 'conflict']);
  });
});

describe('limits', () => {
  it('take a file of exactly the largest size and refuse one byte more', async () => {
    expect((await bring(randomBytes(2 * MIB))).status).toBe(201);
    expect(await refused(randomBytes(2 * MIB + 1))).toEqual([413, 'too_large']);
  });

  it('refuse a packed file that unpacks to too much, and take one that does not', async () => {
    // 60 MiB of zeros pack to about 60 kB: a thousand times.
    expect(await refused(gzipSync(Buffer.alloc(60 * MIB)))).toEqual([413, 'too_large']);
    expect((await bring(gzipSync(lines(40_000)))).status).toBe(201);
  });

  it('refuse an empty file', async () => {
    expect(await refused(Buffer.alloc(0))).toEqual([422, 'unreadable_file']);
  });

  it('take one file a request, with its fields before it', async () => {
    const code = (answer: { status: number; body: unknown }) => [
      answer.status,
      errorEnvelopeSchema.parse(answer.body).error.code,
    ];
    const two = await bench
      .as(technician, 'post', address)
      .field('id', randomUUID())
      .field('layoutId', place.layoutId)
      .attach('file', lines(3), 'a.csv')
      .attach('more', lines(3), 'b.csv');
    expect(code(two)).toEqual([400, 'invalid_input']);
    const late = await bench
      .as(technician, 'post', address)
      .attach('file', lines(3), 'a.csv')
      .field('id', randomUUID())
      .field('layoutId', place.layoutId);
    expect(code(late)).toEqual([400, 'invalid_input']);
    const none = await bench
      .as(technician, 'post', address)
      .field('id', randomUUID())
      .field('layoutId', place.layoutId);
    expect(code(none)).toEqual([400, 'invalid_input']);
    const json = await bench.as(technician, 'post', address).send({ id: randomUUID() });
    expect(code(json)).toEqual([400, 'invalid_input']);
  });

  it('leave nothing behind when they refuse', async () => {
    expect(await readdir(join(bench.deps.config.dataFolder, 'incoming'))).toEqual([]);
  });
});

describe('an upload that breaks off', () => {
  it('stores nothing, and the whole file comes in afterwards', async () => {
    const bytes = lines(60_000);
    const before = (await listed()).length;
    const boundary = 'half-way';
    const head =
      `--${boundary}\r\nContent-Disposition: form-data; name="id"\r\n\r\n${randomUUID()}\r\n` +
      `--${boundary}\r\nContent-Disposition: form-data; name="layoutId"\r\n\r\n${place.layoutId}\r\n` +
      `--${boundary}\r\nContent-Disposition: form-data; name="file"; filename="cut.csv"\r\n\r\n`;
    await new Promise<void>((resolve) => {
      const half = httpRequest(`${bench.url}${address}`, {
        method: 'POST',
        headers: {
          cookie: technician.cookie,
          origin: bench.url,
          'content-type': `multipart/form-data; boundary=${boundary}`,
          'content-length': head.length + bytes.length + boundary.length + 8,
        },
      });
      half.on('error', () => resolve());
      half.on('close', () => resolve());
      half.write(head);
      half.write(bytes.subarray(0, bytes.length / 2), () => half.destroy());
    });
    expect(await listed()).toHaveLength(before);
    expect((await bring(bytes)).status).toBe(201);
    expect(await readdir(join(bench.deps.config.dataFolder, 'incoming'))).toEqual([]);
  });
});

describe('file names', () => {
  it.each([
    ['../../../etc/passwd', 'passwd'],
    ['C:\\data\\day one.csv', 'day one.csv'],
    ['Größe.csv', 'Größe.csv'],
    ['.hidden.csv', '.hidden.csv'],
    ['a"b;c.csv', 'a"b;c.csv'],
  ])('are shown and never become a path: %s', async (name, shown) => {
    const bytes = lines(5);
    const { body } = await bring(bytes, name);
    expect(body.rawFile.fileName).toBe(shown);
    expect((await readFile(bench.deps.storage.path(sha256(bytes)))).equals(bytes)).toBe(true);
    const content = await bench.as(
      technician,
      'get',
      `/api/groups/${group.slug}/raw-files/${body.rawFile.id}/content`,
    );
    expect(content.status).toBe(200);
    expect(content.get('content-disposition')).toMatch(
      /^attachment; filename="[ -~]*"; filename\*=UTF-8''\S+$/,
    );
  });
});

describe('logger files that have grown', () => {
  const supersededBy = async (id: string) => (await rawFileById(bench.deps.db, id))?.supersededBy;

  it('point each to the next longer one, in whatever order they came', async () => {
    const whole = lines(9000);
    const at = (share: number) => whole.subarray(0, Math.floor(whole.length * share));
    const middle = (await bring(at(0.5))).body.rawFile.id;
    const longest = (await bring(gzipSync(whole), 'grown.csv.gz')).body.rawFile.id;
    const shortest = (await bring(at(0.2))).body.rawFile.id;
    const long = (await bring(gzipSync(at(0.8)))).body.rawFile.id;
    expect(await supersededBy(shortest)).toBe(middle);
    expect(await supersededBy(middle)).toBe(long);
    expect(await supersededBy(long)).toBe(longest);
    expect(await supersededBy(longest)).toBeNull();
  });

  it('see each other when they come at the same moment', async () => {
    const whole = lines(9000);
    const parts = [0.25, 0.5, 0.75, 1].map((share) => whole.subarray(0, Math.floor(whole.length * share)));
    const ids = (await Promise.all(parts.map((part) => bring(part)))).map(({ body }) => body.rawFile.id);
    expect(await Promise.all(ids.map(supersededBy))).toEqual([ids[1], ids[2], ids[3], null]);
  });

  it('are not mistaken for files that only share their beginning', async () => {
    const head = lines(3000);
    const one = (await bring(Buffer.concat([head, lines(10)]))).body.rawFile.id;
    const two = (await bring(Buffer.concat([head, lines(2000)]))).body.rawFile.id;
    expect([await supersededBy(one), await supersededBy(two)]).toEqual([null, null]);
  });
});

describe('asking which hashes are here', () => {
  it('names the present ones with their files', async () => {
    const bytes = lines(20);
    const { body } = await bring(bytes);
    const answer = await bench
      .as(technician, 'post', `${address}/check`)
      .send({ sha256: [sha256(bytes), '0'.repeat(64)] })
      .expect(200);
    expect(answer.body).toEqual({ present: [{ sha256: sha256(bytes), rawFileId: body.rawFile.id }] });
    await bench
      .as(technician, 'post', `${address}/check`)
      .send({ sha256: ['nonsense'] })
      .expect(400);
  });
});

describe('withdrawing', () => {
  it('takes a file out of use and bringing back restores it, bytes untouched', async () => {
    const bytes = lines(30);
    const { id } = (await bring(bytes)).body.rawFile;
    const root = `/api/groups/${group.slug}/raw-files/${id}`;
    const withdrawn = await bench.as(analyst, 'post', `${root}/withdraw`).expect(200);
    expect(rawFileSchema.parse(withdrawn.body).state).toBe('withdrawn');
    const row = (await rawFilesOf(bench.deps.db, place.systemId)).find((file) => file.id === id);
    expect(row?.withdrawnBy).toBe(analyst.id);
    // The same content again does not bring it back by itself.
    const again = await bring(bytes);
    expect([again.status, again.body.rawFile.state]).toEqual([200, 'withdrawn']);
    const reread = await bench.as(technician, 'post', `${root}/reread`).send({});
    expect([reread.status, errorEnvelopeSchema.parse(reread.body).error.code]).toEqual([409, 'conflict']);
    const restored = await bench.as(analyst, 'post', `${root}/restore`).expect(200);
    expect(rawFileSchema.parse(restored.body).state).toBe('stored');
    expect((await readFile(bench.deps.storage.path(sha256(bytes)))).equals(bytes)).toBe(true);
  });
});

describe('who brought a file in', () => {
  it('stands with the file', async () => {
    const { body } = await bring(lines(8));
    expect(body.rawFile.author).toEqual({ id: technician.id, name: 'technician of reedmoor' });
  });
});

describe('layouts', () => {
  it('are kept once, numbered, and never changed', async () => {
    const root = `/api/groups/${group.slug}/stations/${place.slug}/layouts`;
    const again = await bench.as(technician, 'post', root).send({ id: randomUUID(), layout: layout() });
    expect([again.status, (again.body as { id: string }).id]).toEqual([200, place.layoutId]);
    const second = await bench
      .as(technician, 'post', root)
      .send({ id: randomUUID(), layout: layout({ name: 'Other' }) })
      .expect(201);
    expect(second.body).toMatchObject({ revision: 2, author: { id: technician.id } });
    const all = (await bench.as(technician, 'get', root).expect(200)).body as { revision: number }[];
    expect(all.map(({ revision }) => revision)).toEqual([2, 1]);
    await bench
      .as(technician, 'post', root)
      .send({ id: randomUUID(), layout: { ...layout(), delimiter: 'comma', decimal: ',' } })
      .expect(400);
  });
});
