import { mkdir, mkdtemp, rm, writeFile } from 'node:fs/promises';
import { createServer } from 'node:http';
import type { Server } from 'node:http';
import type { AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { createApp } from '../../server/app';
import { errorEnvelopeSchema } from '../../server/contract/errors';
import { Bench } from './bench';

let bench: Bench;
let server: Server;
let url: string;
let folder: string;

beforeAll(async () => {
  bench = await Bench.start();
  folder = await mkdtemp(join(tmpdir(), 'gustbook-web-'));
  await mkdir(join(folder, '_expo'));
  await mkdir(join(folder, 'fonts'));
  await writeFile(join(folder, 'index.html'), '<title>Gustbook</title>');
  await writeFile(join(folder, 'favicon.ico'), 'icon');
  await writeFile(join(folder, '_expo', 'entry-1a2b.js'), '1;'.repeat(2000));
  await writeFile(join(folder, 'fonts', 'text.woff2'), 'font');
  server = createServer(createApp(bench.deps, { webFolder: folder }));
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  url = `http://127.0.0.1:${(server.address() as AddressInfo).port}`;
});
afterAll(async () => {
  server.closeAllConnections();
  await new Promise((resolve) => server.close(resolve));
  await rm(folder, { recursive: true });
  await bench.close();
});

describe('serving the client', () => {
  it('answers every address of a screen with the page, never from a cache', async () => {
    for (const path of ['/', '/lowmere/hollin-fen/series', '/sign-in?next=%2F']) {
      const answer = await fetch(`${url}${path}`);
      expect([path, answer.status, answer.headers.get('cache-control')]).toEqual([path, 200, 'no-cache']);
      expect(await answer.text()).toContain('Gustbook');
    }
  });

  it('lets hashed files and fonts be kept for ever, and packs text', async () => {
    for (const path of ['/_expo/entry-1a2b.js', '/fonts/text.woff2']) {
      const answer = await fetch(`${url}${path}`);
      expect([path, answer.status]).toEqual([path, 200]);
      expect(answer.headers.get('cache-control')).toBe('public, max-age=31536000, immutable');
    }
    expect((await fetch(`${url}/_expo/entry-1a2b.js`)).headers.get('content-encoding')).not.toBeNull();
  });

  it('answers 404 for files and interface addresses that are not there', async () => {
    for (const path of [
      '/missing.js',
      '/_expo/old-chunk.js',
      '/api/missing',
      '/api/groups',
      '/..%2f..%2fpackage.json',
    ]) {
      const answer = await fetch(`${url}${path}`);
      expect([path, answer.status]).toEqual([path, 404]);
      expect(errorEnvelopeSchema.parse(await answer.json()).error.code).toBe('not_found');
    }
  });

  it('says so when the pages are not built', async () => {
    const bare = createServer(createApp(bench.deps, { webFolder: join(folder, 'nowhere') }));
    await new Promise<void>((resolve) => bare.listen(0, '127.0.0.1', resolve));
    const answer = await fetch(`http://127.0.0.1:${(bare.address() as AddressInfo).port}/`);
    expect([answer.status, errorEnvelopeSchema.parse(await answer.json()).error.code]).toEqual([
      503,
      'unavailable',
    ]);
    await new Promise((resolve) => bare.close(resolve));
  });
});
