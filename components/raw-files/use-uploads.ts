import { useEffect, useSyncExternalStore } from 'react';
import { useQueryClient } from '@tanstack/react-query';
import type { QueryClient } from '@tanstack/react-query';
import type { RawFile } from '../../server/contract/api';
import { mergeRawFile, rawFileKeys } from '../data/use-raw-files';
import { stationAddress } from '../data/use-stations';
import { httpTransport, isBusy, UploadQueue } from './upload-queue';
import type { UploadItem } from './upload-queue';

const queues = new Map<string, UploadQueue>();

function queueOf(client: QueryClient, group: string, station: string): UploadQueue {
  const key = `${group}/${station}`;
  const known = queues.get(key);
  if (known) return known;
  const queue = new UploadQueue(httpTransport(stationAddress(group, station)), (item) => {
    const { rawFile } = item;
    if (!rawFile) return;
    client.setQueryData<RawFile[]>(rawFileKeys.all(group, station), (files) => mergeRawFile(files, rawFile));
  });
  queues.set(key, queue);
  return queue;
}

/** The files that are being sent to a station, and a warning before the page is left while they are. */
export function useUploads(
  group: string,
  station: string,
): { queue: UploadQueue; items: readonly UploadItem[] } {
  const client = useQueryClient();
  const queue = queueOf(client, group, station);
  const items = useSyncExternalStore(queue.subscribe, queue.snapshot, queue.snapshot);
  const busy = isBusy(items);
  useEffect(() => {
    if (!busy) return undefined;
    const warn = (event: BeforeUnloadEvent): void => event.preventDefault();
    window.addEventListener('beforeunload', warn);
    return () => window.removeEventListener('beforeunload', warn);
  }, [busy]);
  return { queue, items };
}
