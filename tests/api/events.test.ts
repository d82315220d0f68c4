import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { eventSchema } from '../../server/contract/api';
import type { GroupEvent } from '../../server/contract/api';
import { Bench, makeStation } from './bench';
import type { Group, Someone } from './bench';

let bench: Bench;
let group: Group;
let technician: Someone;

beforeAll(async () => {
  bench = await Bench.start();
  group = await bench.addGroup('reedmoor');
  technician = await bench.addPerson(group, 'technician');
});
afterAll(() => bench.close());

/** An open stream of events, read as a browser reads it. */
class Stream {
  private text = '';
  private constructor(
    readonly response: Response,
    private readonly reader: ReadableStreamDefaultReader<Uint8Array>,
    private readonly stop: AbortController,
  ) {}

  static async open(someone: Someone, slug: string, headers: Record<string, string> = {}): Promise<Stream> {
    const stop = new AbortController();
    const response = await fetch(`${bench.url}/api/groups/${slug}/events`, {
      headers: { cookie: someone.cookie, 'accept-encoding': 'gzip', ...headers },
      signal: stop.signal,
    });
    return new Stream(response, response.body!.getReader(), stop);
  }

  async next(): Promise<GroupEvent> {
    for (;;) {
      const end = this.text.indexOf('\n\n');
      if (end >= 0) {
        const block = this.text.slice(0, end);
        this.text = this.text.slice(end + 2);
        if (block.startsWith('data: ')) return eventSchema.parse(JSON.parse(block.slice(6)));
        continue;
      }
      const { value, done } = await this.reader.read();
      if (done) throw new Error('the stream has ended');
      this.text += new TextDecoder().decode(value);
    }
  }

  async ended(): Promise<boolean> {
    for (;;) if ((await this.reader.read()).done) return true;
  }

  close(): void {
    this.stop.abort();
  }
}

describe('the stream of events', () => {
  it('tells members what happens in their group, uncompressed and at once', async () => {
    const stream = await Stream.open(technician, group.slug);
    expect(stream.response.headers.get('content-type')).toContain('text/event-stream');
    expect(stream.response.headers.get('content-encoding')).toBeNull();
    expect(stream.response.headers.get('cache-control')).toContain('no-transform');
    const place = await makeStation(bench, group, technician, 'alder');
    expect(await stream.next()).toEqual({ type: 'station', stationSlug: 'alder', change: 'created' });
    await bench
      .upload(technician, `/api/groups/${group.slug}/stations/alder/raw-files`, {
        layoutId: place.layoutId,
        name: 'a.csv',
        bytes: Buffer.from('1,2\n'),
      })
      .expect(201);
    expect(await stream.next()).toMatchObject({
      type: 'raw-file',
      rawFile: { fileName: 'a.csv', state: 'stored' },
    });
    stream.close();
  });

  it('tells nobody of another group', async () => {
    const foreign = await bench.addGroup('elsewhere');
    const stranger = await bench.addPerson(foreign, 'lead');
    const stream = await Stream.open(stranger, foreign.slug);
    await makeStation(bench, group, technician, 'birch');
    await makeStation(bench, foreign, stranger, 'cedar');
    expect(await stream.next()).toEqual({ type: 'station', stationSlug: 'cedar', change: 'created' });
    stream.close();
  });

  it('asks who comes back after a break to look again', async () => {
    const stream = await Stream.open(technician, group.slug, { 'last-event-id': '7' });
    expect(await stream.next()).toEqual({ type: 'resync' });
    stream.close();
  });

  it('forgets a listener that has gone', async () => {
    const quiet = await bench.addGroup('quiet');
    const stream = await Stream.open(await bench.addPerson(quiet, 'student'), quiet.slug);
    expect(bench.deps.events.listeners(quiet.id)).toBe(1);
    stream.close();
    // Its end is told to the server over the socket: asked again until it has arrived.
    await expect.poll(() => bench.deps.events.listeners(quiet.id)).toBe(0);
  });

  it('ends by itself when the server goes down', async () => {
    const stream = await Stream.open(technician, group.slug);
    bench.deps.events.close();
    expect(await stream.ended()).toBe(true);
  });
});
