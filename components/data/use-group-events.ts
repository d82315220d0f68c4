import { useEffect } from 'react';
import { useQueryClient } from '@tanstack/react-query';
import type { QueryClient } from '@tanstack/react-query';
import { eventSchema } from '../../server/contract/api';
import type { GroupEvent, PeriodRow, RawFile, Run } from '../../server/contract/api';
import { layoutKeys } from './use-layouts';
import { mergeRawFile, rawFileKeys } from './use-raw-files';
import type { ReadingShares } from './use-raw-files';
import { runResultKeys } from './use-run-results';
import { mergeRun, runKeys } from './use-runs';
import { setUpKeys } from './use-set-ups';
import { stationKeys } from './use-stations';

/** What the server says of its own accord, put into the cache of queries. */

/** Writes one event into the cache. */
export function applyGroupEvent(client: QueryClient, group: string, event: GroupEvent): void {
  switch (event.type) {
    case 'raw-file': {
      const { rawFile, share, stationSlug } = event;
      const before = client
        .getQueryData<RawFile[]>(rawFileKeys.all(group, stationSlug))
        ?.find((file) => file.id === rawFile.id);
      client.setQueryData<RawFile[]>(rawFileKeys.all(group, stationSlug), (files) =>
        mergeRawFile(files, rawFile),
      );
      client.setQueryData<ReadingShares>(rawFileKeys.progress(group), (shares = {}) => {
        const others = Object.fromEntries(Object.entries(shares).filter(([id]) => id !== rawFile.id));
        return rawFile.state === 'reading' && share !== null ? { ...others, [rawFile.id]: share } : others;
      });
      if (before?.state !== rawFile.state && rawFile.state !== 'reading') {
        // another file changes what is recorded, what supersedes what, and which runs are stale
        void client.invalidateQueries({ queryKey: rawFileKeys.all(group, stationSlug) });
        void client.invalidateQueries({ queryKey: stationKeys.all(group) });
        void client.invalidateQueries({ queryKey: runKeys.all(group, stationSlug) });
        void client.invalidateQueries({ queryKey: runResultKeys.spines(group, stationSlug) });
      }
      return;
    }
    case 'run': {
      const { run, stationSlug } = event;
      const before = client
        .getQueryData<Run[]>(runKeys.all(group, stationSlug))
        ?.find((known) => known.id === run.id);
      client.setQueryData<Run[]>(runKeys.all(group, stationSlug), (runs) => mergeRun(runs, run));
      if (before?.state !== run.state) {
        void client.invalidateQueries({ queryKey: stationKeys.all(group) });
        void client.invalidateQueries({ queryKey: runResultKeys.spines(group, stationSlug) });
        if (run.state === 'done')
          void client.invalidateQueries({ queryKey: runResultKeys.all(group, run.id) });
      }
      return;
    }
    case 'periods': {
      client.setQueriesData<unknown>(
        { queryKey: runResultKeys.periods(group, event.runId) },
        (known: unknown) => mergePeriods(known, event.periods),
      );
      void client.invalidateQueries({ queryKey: runResultKeys.series(group, event.runId) });
      void client.invalidateQueries({ queryKey: runResultKeys.spines(group, event.stationSlug) });
      return;
    }
    case 'station': {
      void client.invalidateQueries({ queryKey: stationKeys.all(group) });
      void client.invalidateQueries({ queryKey: setUpKeys.all(group, event.stationSlug) });
      void client.invalidateQueries({ queryKey: layoutKeys.all(group, event.stationSlug) });
      void client.invalidateQueries({ queryKey: runKeys.all(group, event.stationSlug) });
      return;
    }
    case 'resync':
      resync(client, group);
  }
}

/** Asks again for everything of the group: events may have been missed. */
export function resync(client: QueryClient, group: string): void {
  client.setQueryData<ReadingShares>(rawFileKeys.progress(group), {});
  void client.invalidateQueries({
    queryKey: ['group', group],
    predicate: (query) => query.queryKey[2] !== rawFileKeys.progress(group)[2],
  });
}

/** New periods among the known ones, in order of time; leaves what is no list of periods alone. */
function mergePeriods(known: unknown, added: readonly PeriodRow[]): unknown {
  const isList = Array.isArray(known);
  const wrapped = known as { periods?: PeriodRow[] } | undefined;
  const rows = isList ? (known as PeriodRow[]) : wrapped?.periods;
  if (!rows) return known;
  const byStart = new Map(rows.map((row) => [row.startMs, row]));
  for (const row of added) byStart.set(row.startMs, row);
  const merged = [...byStart.values()].sort((a, b) => a.startMs - b.startMs);
  return isList ? merged : { ...wrapped, periods: merged };
}

const firstWaitMs = 1000;
const longestWaitMs = 30_000;

export interface EventStreamOptions {
  url: string;
  onEvent: (event: GroupEvent) => void;
  /** The stream is open again after it broke: events may have been missed. */
  onReopen: () => void;
  /** For tests. */
  open?: (url: string) => EventSource;
}

/**
 * Keeps a stream of events open until it is closed. The browser itself reconnects after a broken line; after a refusal (server
 * restarting, session over) it gives up, so then we try again, slower each time.
 */
export function keepEventStream({
  url,
  onEvent,
  onReopen,
  open = (address) => new EventSource(address, { withCredentials: true }),
}: EventStreamOptions): () => void {
  let source: EventSource | null = null;
  let timer: ReturnType<typeof setTimeout> | undefined;
  let waitMs = firstWaitMs;
  let hasBroken = false;
  let isClosed = false;

  const connect = (): void => {
    const stream = open(url);
    source = stream;
    stream.onopen = () => {
      waitMs = firstWaitMs;
      if (hasBroken) onReopen();
      hasBroken = false;
    };
    stream.onmessage = (message: MessageEvent<string>) => {
      const parsed = eventSchema.safeParse(parseJson(message.data));
      // an event of a newer server: what it is about can be asked for
      if (parsed.success) onEvent(parsed.data);
      else onReopen();
    };
    stream.onerror = () => {
      hasBroken = true;
      if (stream.readyState !== 2 || isClosed) return;
      stream.close();
      timer = setTimeout(connect, waitMs);
      waitMs = Math.min(longestWaitMs, waitMs * 2);
    };
  };
  connect();
  return () => {
    isClosed = true;
    clearTimeout(timer);
    source?.close();
  };
}

function parseJson(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return undefined;
  }
}

/** One stream a group however many screens listen, kept a moment longer when the last of them goes. */
const streams = new Map<string, { listeners: number; close: () => void }>();

/** Keeps the cache of a group up to date while a screen is open. */
export function useGroupEvents(group: string): void {
  const client = useQueryClient();
  useEffect(() => {
    if (typeof EventSource === 'undefined' || group === '') return undefined;
    const known = streams.get(group);
    if (known) known.listeners += 1;
    else {
      streams.set(group, {
        listeners: 1,
        close: keepEventStream({
          url: `/api/groups/${encodeURIComponent(group)}/events`,
          onEvent: (event) => applyGroupEvent(client, group, event),
          onReopen: () => resync(client, group),
        }),
      });
    }
    return () => {
      const stream = streams.get(group);
      if (!stream) return;
      stream.listeners -= 1;
      setTimeout(() => {
        if (stream.listeners > 0 || streams.get(group) !== stream) return;
        stream.close();
        streams.delete(group);
      }, 500);
    };
  }, [client, group]);
}
