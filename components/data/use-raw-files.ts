import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { z } from 'zod';
import { checkedHashesSchema, rawFileSchema } from '../../server/contract/api';
import type { RawFile } from '../../server/contract/api';
import { api } from './api-client';
import { runKeys } from './use-runs';
import { stationAddress, stationKeys } from './use-stations';

/** Raw files of a station, in the order of the server. */

export const rawFileKeys = {
  all: (group: string, station: string) => ['group', group, 'raw-files', station] as const,
  /** Share read so far by file id, 0–1; written by the event stream only. */
  progress: (group: string) => ['group', group, 'raw-file-progress'] as const,
};

export function useRawFiles(group: string, station: string) {
  return useQuery({
    queryKey: rawFileKeys.all(group, station),
    queryFn: ({ signal }) =>
      api(`${stationAddress(group, station)}/raw-files`, {
        signal,
        parse: (value) => z.array(rawFileSchema).parse(value),
      }),
  });
}

export type ReadingShares = Readonly<Record<string, number>>;

/** How far files are read that the server is reading now. */
export function useReadingShares(group: string): ReadingShares {
  const client = useQueryClient();
  const query = useQuery<ReadingShares>({
    queryKey: rawFileKeys.progress(group),
    queryFn: () => client.getQueryData<ReadingShares>(rawFileKeys.progress(group)) ?? {},
    staleTime: Number.POSITIVE_INFINITY,
  });
  return query.data ?? {};
}

/** Puts one raw file into the list in the cache, new or changed. */
export function mergeRawFile(files: readonly RawFile[] | undefined, changed: RawFile): RawFile[] | undefined {
  if (!files) return undefined;
  const at = files.findIndex((file) => file.id === changed.id);
  return at < 0 ? [...files, changed] : files.map((file, index) => (index === at ? changed : file));
}

export type RawFileChange = 'withdraw' | 'restore' | 'reread';

/** Withdraws a raw file, brings it back, or reads it again (with another layout). */
export function useChangeRawFile(group: string, station: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ id, change, layoutId }: { id: string; change: RawFileChange; layoutId?: string }) =>
      api(`/groups/${encodeURIComponent(group)}/raw-files/${id}/${change}`, {
        method: 'POST',
        body: change === 'reread' ? { layoutId } : undefined,
        parse: (value) => rawFileSchema.parse(value),
      }),
    onSuccess: (file) => {
      client.setQueryData<RawFile[]>(rawFileKeys.all(group, station), (files) => mergeRawFile(files, file));
      void client.invalidateQueries({ queryKey: rawFileKeys.all(group, station) });
      void client.invalidateQueries({ queryKey: runKeys.all(group, station) });
      void client.invalidateQueries({ queryKey: stationKeys.all(group) });
    },
  });
}

/** Which of these SHA-256 hashes are here already. */
export async function checkHashes(
  group: string,
  station: string,
  sha256: readonly string[],
): Promise<Map<string, string>> {
  const answer = await api(`${stationAddress(group, station)}/raw-files/check`, {
    method: 'POST',
    body: { sha256 },
    parse: (value) => checkedHashesSchema.parse(value),
  });
  return new Map(answer.present.map((file) => [file.sha256, file.rawFileId]));
}

/** Where the bytes of a raw file are to be had, as they were brought in. */
export function rawFileContentUrl(group: string, id: string): string {
  return `/api/groups/${encodeURIComponent(group)}/raw-files/${id}/content`;
}
