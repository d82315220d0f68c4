import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { z } from 'zod';
import { deletionAccountSchema, runSchema } from '../../server/contract/api';
import type { Run, StartRun } from '../../server/contract/api';
import { api } from './api-client';
import { stationAddress, stationKeys } from './use-stations';

/** Runs of a station, newest first. */

export const runKeys = {
  all: (group: string, station: string) => ['group', group, 'runs', station] as const,
  deletion: (group: string, id: string) => ['group', group, 'run-deletion', id] as const,
};

const runAddress = (group: string, id: string): string => `/groups/${encodeURIComponent(group)}/runs/${id}`;

export function isUnderWay(run: Pick<Run, 'state'>): boolean {
  return run.state === 'waiting' || run.state === 'reading' || run.state === 'computing';
}

/** What to ask for to compute a run again: its span, or everything where that was asked. */
export function againFrom(run: Run, id: string): StartRun {
  const isAll = run.everything === true;
  return { id, recipeHash: run.recipeHash, fromMs: isAll ? null : run.fromMs, toMs: isAll ? null : run.toMs };
}

export function useRuns(group: string, station: string) {
  return useQuery({
    queryKey: runKeys.all(group, station),
    queryFn: ({ signal }) =>
      api(`${stationAddress(group, station)}/runs`, {
        signal,
        parse: (value) => z.array(runSchema).parse(value),
      }),
  });
}

/** Puts one run into the list in the cache; a new one stands first. */
export function mergeRun(runs: readonly Run[] | undefined, changed: Run): Run[] | undefined {
  if (!runs) return undefined;
  const at = runs.findIndex((run) => run.id === changed.id);
  return at < 0 ? [changed, ...runs] : runs.map((run, index) => (index === at ? changed : run));
}

export function useStartRun(group: string, station: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (start: StartRun) =>
      api(`${stationAddress(group, station)}/runs`, {
        method: 'POST',
        body: start,
        parse: (value) => runSchema.parse(value),
      }),
    onSuccess: (run) => {
      client.setQueryData<Run[]>(runKeys.all(group, station), (runs) => mergeRun(runs, run));
      void client.invalidateQueries({ queryKey: runKeys.all(group, station) });
    },
  });
}

export function useCancelRun(group: string, station: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (id: string) =>
      api(`${runAddress(group, id)}/cancel`, { method: 'POST', parse: (value) => runSchema.parse(value) }),
    onSuccess: (run) =>
      client.setQueryData<Run[]>(runKeys.all(group, station), (runs) => mergeRun(runs, run)),
  });
}

/** What would go with a run and what would stay; asked only while a person looks at it. */
export function useRunDeletion(group: string, id: string | null) {
  return useQuery({
    queryKey: runKeys.deletion(group, id ?? ''),
    enabled: id !== null,
    staleTime: 0,
    queryFn: ({ signal }) =>
      api(`${runAddress(group, id ?? '')}/deletion`, {
        signal,
        parse: (value) => deletionAccountSchema.parse(value),
      }),
  });
}

export function useDeleteRun(group: string, station: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ id, confirm }: { id: string; confirm: string }) =>
      api<void>(runAddress(group, id), { method: 'DELETE', query: { confirm } }),
    onSuccess: (_, { id }) => {
      client.setQueryData<Run[]>(runKeys.all(group, station), (runs) => runs?.filter((run) => run.id !== id));
      void client.invalidateQueries({ queryKey: stationKeys.all(group) });
    },
  });
}
