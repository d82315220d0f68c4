import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { z } from 'zod';
import { deletionAccountSchema, stationSummarySchema } from '../../server/contract/api';
import type { CreateStation } from '../../server/contract/api';
import { api } from './api-client';

/** Stations with their systems, latest run and spine. */

export const stationKeys = {
  all: (group: string) => ['group', group, 'stations'] as const,
  one: (group: string, slug: string) => [...stationKeys.all(group), 'one', slug] as const,
  deletion: (group: string, slug: string) => [...stationKeys.all(group), 'deletion', slug] as const,
};

const parseList = (value: unknown) => z.array(stationSummarySchema).parse(value);
const parseOne = (value: unknown) => stationSummarySchema.parse(value);

export function stationAddress(group: string, slug: string): string {
  return `/groups/${encodeURIComponent(group)}/stations/${encodeURIComponent(slug)}`;
}

export function useStations(group: string) {
  return useQuery({
    queryKey: stationKeys.all(group),
    queryFn: ({ signal }) =>
      api(`/groups/${encodeURIComponent(group)}/stations`, { signal, parse: parseList }),
  });
}

export function useStation(group: string, slug: string) {
  return useQuery({
    queryKey: stationKeys.one(group, slug),
    queryFn: ({ signal }) => api(stationAddress(group, slug), { signal, parse: parseOne }),
  });
}

/** Makes a station with its system and first set-up; the ids are the caller's, so that sending twice is harmless. */
export function useCreateStation(group: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (station: CreateStation) =>
      api(`/groups/${encodeURIComponent(group)}/stations`, {
        method: 'POST',
        body: station,
        parse: parseOne,
      }),
    onSuccess: (summary) => {
      client.setQueryData(stationKeys.one(group, summary.station.slug), summary);
      void client.invalidateQueries({ queryKey: stationKeys.all(group), exact: true });
    },
  });
}

/** What would go with a station and what would stay; asked only while a person looks at it. */
export function useStationDeletion(group: string, slug: string, enabled: boolean) {
  return useQuery({
    queryKey: stationKeys.deletion(group, slug),
    enabled,
    staleTime: 0,
    queryFn: ({ signal }) =>
      api(`${stationAddress(group, slug)}/deletion`, {
        signal,
        parse: (value) => deletionAccountSchema.parse(value),
      }),
  });
}

export function useDeleteStation(group: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ slug, confirm }: { slug: string; confirm: string }) =>
      api<void>(stationAddress(group, slug), { method: 'DELETE', query: { confirm } }),
    onSuccess: (_, { slug }) => {
      client.removeQueries({ queryKey: stationKeys.one(group, slug) });
      void client.invalidateQueries({ queryKey: stationKeys.all(group), exact: true });
    },
  });
}
