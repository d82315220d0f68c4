import { QueryClient } from '@tanstack/react-query';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import type { RawFile, Run } from '../../../../server/contract/api';
import { applyGroupEvent, keepEventStream, resync } from '../../../../components/data/use-group-events';
import { rawFileKeys } from '../../../../components/data/use-raw-files';
import { runResultKeys } from '../../../../components/data/use-run-results';
import { againFrom, runKeys } from '../../../../components/data/use-runs';

const group = 'lowmere';
const station = 'hollin-fen';
const rawFile = (more: Partial<RawFile>): RawFile =>
  ({
    id: 'f1',
    fileName: 'a.csv',
    state: 'reading',
    firstScanMs: null,
    lastScanMs: null,
    ...more,
  }) as RawFile;
const run = (more: Partial<Run>): Run =>
  ({ id: 'r1', number: 1, state: 'computing', periodsDone: 0, stale: [], ...more }) as Run;

describe('applyGroupEvent', () => {
  let client: QueryClient;
  let invalidated: unknown[];
  beforeEach(() => {
    client = new QueryClient();
    invalidated = [];
    vi.spyOn(client, 'invalidateQueries').mockImplementation(async (filters) => {
      invalidated.push(filters?.queryKey);
    });
    client.setQueryData(rawFileKeys.all(group, station), [rawFile({})]);
    client.setQueryData(runKeys.all(group, station), [run({})]);
  });

  it('counts how far a file is read, without asking the server again', () => {
    applyGroupEvent(client, group, {
      type: 'raw-file',
      stationSlug: station,
      rawFile: rawFile({}),
      share: 0.4,
    });
    expect(client.getQueryData(rawFileKeys.progress(group))).toEqual({ f1: 0.4 });
    expect(invalidated).toEqual([]);
  });

  it('takes a read file over and asks again for what depends on it', () => {
    applyGroupEvent(client, group, {
      type: 'raw-file',
      stationSlug: station,
      rawFile: rawFile({}),
      share: 0.9,
    });
    applyGroupEvent(client, group, {
      type: 'raw-file',
      stationSlug: station,
      rawFile: rawFile({ state: 'read' }),
      share: null,
    });
    expect(client.getQueryData(rawFileKeys.progress(group))).toEqual({});
    expect(client.getQueryData<RawFile[]>(rawFileKeys.all(group, station))?.[0]?.state).toBe('read');
    expect(invalidated).toContainEqual(runKeys.all(group, station));
    expect(invalidated).toContainEqual(runResultKeys.spines(group, station));
  });

  it('puts a new run first and follows one that is under way', () => {
    applyGroupEvent(client, group, { type: 'run', stationSlug: station, run: run({ periodsDone: 7 }) });
    expect(invalidated).toEqual([]);
    applyGroupEvent(client, group, { type: 'run', stationSlug: station, run: run({ id: 'r2', number: 2 }) });
    expect(
      client.getQueryData<Run[]>(runKeys.all(group, station))?.map((one) => [one.number, one.periodsDone]),
    ).toEqual([
      [2, 0],
      [1, 7],
    ]);
  });

  it('sorts new periods among the known ones', () => {
    const key = [...runResultKeys.periods(group, 'r1'), 0, 10];
    client.setQueryData(key, [{ startMs: 0 }, { startMs: 4, values: { old: 1 } }]);
    const period = (startMs: number) => ({
      startMs,
      endMs: startMs + 2,
      outcome: 'computed' as const,
      values: {},
      grades: {},
      mainFinding: {},
    });
    applyGroupEvent(client, group, {
      type: 'periods',
      stationSlug: station,
      runId: 'r1',
      periods: [period(4), period(2)],
    });
    const rows = client.getQueryData<{ startMs: number; values?: object }[]>(key);
    expect(rows?.map((row) => row.startMs)).toEqual([0, 2, 4]);
    expect(rows?.[2]?.values).toEqual({});
  });

  it('asks for everything of the group after a resync', () => {
    vi.restoreAllMocks();
    client.setQueryData(rawFileKeys.progress(group), { f1: 0.5 });
    resync(client, group);
    expect(client.getQueryData(rawFileKeys.progress(group))).toEqual({});
    expect(client.getQueryState(runKeys.all(group, station))?.isInvalidated).toBe(true);
    expect(client.getQueryState(rawFileKeys.progress(group))?.isInvalidated).toBe(false);
  });
});

describe('keepEventStream', () => {
  beforeEach(() => void vi.useFakeTimers());
  afterEach(() => void vi.useRealTimers());

  class FakeSource {
    readyState = 0;
    onopen: (() => void) | null = null;
    onmessage: ((message: MessageEvent<string>) => void) | null = null;
    onerror: (() => void) | null = null;
    isClosed = false;
    close(): void {
      this.isClosed = true;
    }
  }
  function start() {
    const sources: FakeSource[] = [];
    const events: string[] = [];
    let reopened = 0;
    const stop = keepEventStream({
      url: '/api/groups/lowmere/events',
      onEvent: (event) => events.push(event.type),
      onReopen: () => {
        reopened += 1;
      },
      open: () => {
        const source = new FakeSource();
        sources.push(source);
        return source as unknown as EventSource;
      },
    });
    return { sources, events, stop, reopened: () => reopened };
  }
  const message = (value: unknown) => ({ data: JSON.stringify(value) }) as MessageEvent<string>;

  it('hands on what it understands, and asks again when it does not understand', () => {
    const { sources, events, reopened } = start();
    sources[0]?.onopen?.();
    sources[0]?.onmessage?.(message({ type: 'resync' }));
    expect(events).toEqual(['resync']);
    expect(reopened()).toBe(0);
    sources[0]?.onmessage?.(message({ type: 'of a later version' }));
    sources[0]?.onmessage?.({ data: 'no json' } as MessageEvent<string>);
    expect(events).toEqual(['resync']);
    expect(reopened()).toBe(2);
  });

  it('opens again after a refusal, slower each time, and resyncs then', () => {
    const { sources, reopened } = start();
    sources[0]!.onopen?.();
    sources[0]!.readyState = 2;
    sources[0]!.onerror?.();
    expect(sources).toHaveLength(1);
    vi.advanceTimersByTime(1000);
    expect(sources).toHaveLength(2);
    sources[1]!.readyState = 2;
    sources[1]!.onerror?.();
    vi.advanceTimersByTime(1999);
    expect(sources).toHaveLength(2);
    vi.advanceTimersByTime(1);
    expect(sources).toHaveLength(3);
    sources[2]!.onopen?.();
    expect(reopened()).toBe(1);
  });

  it('lets the browser reconnect a broken line itself', () => {
    const { sources, reopened } = start();
    sources[0]!.onopen?.();
    sources[0]!.onerror?.();
    vi.advanceTimersByTime(60_000);
    expect(sources).toHaveLength(1);
    sources[0]!.onopen?.();
    expect(reopened()).toBe(1);
  });

  it('stays closed once closed', () => {
    const { sources, stop } = start();
    sources[0]!.readyState = 2;
    sources[0]!.onerror?.();
    stop();
    vi.advanceTimersByTime(60_000);
    expect(sources).toHaveLength(1);
    expect(sources[0]?.isClosed).toBe(true);
  });
});

describe('againFrom', () => {
  it('asks for everything where that was asked, else for the same span', () => {
    const one = run({ recipeHash: 'h', fromMs: 10, toMs: 20 });
    expect(againFrom(one, 'new')).toEqual({ id: 'new', recipeHash: 'h', fromMs: 10, toMs: 20 });
    expect(againFrom({ ...one, everything: true }, 'new')).toEqual({
      id: 'new',
      recipeHash: 'h',
      fromMs: null,
      toMs: null,
    });
  });
});
