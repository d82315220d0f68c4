import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { z } from 'zod';
import { setUpAddedSchema, setUpRevisionSchema } from '../../server/contract/api';
import type { AddSetUp } from '../../server/contract/api';
import { api } from './api-client';
import { runKeys } from './use-runs';
import { stationAddress, stationKeys } from './use-stations';

/** Revisions of a station's set-up, newest first; they are only ever added. */

export const setUpKeys = {
  all: (group: string, station: string) => ['group', group, 'set-ups', station] as const,
};

export function useSetUps(group: string, station: string) {
  return useQuery({
    queryKey: setUpKeys.all(group, station),
    queryFn: ({ signal }) =>
      api(`${stationAddress(group, station)}/set-ups`, {
        signal,
        parse: (value) => z.array(setUpRevisionSchema).parse(value),
      }),
  });
}

/** Adds a revision; the answer names the runs that are stale now. */
export function useAddSetUp(group: string, station: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: (addition: AddSetUp) =>
      api(`${stationAddress(group, station)}/set-ups`, {
        method: 'POST',
        body: addition,
        parse: (value) => setUpAddedSchema.parse(value),
      }),
    onSuccess: () => {
      void client.invalidateQueries({ queryKey: setUpKeys.all(group, station) });
      void client.invalidateQueries({ queryKey: stationKeys.all(group) });
      void client.invalidateQueries({ queryKey: runKeys.all(group, station) });
    },
  });
}
