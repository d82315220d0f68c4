import { useMutation, useQuery, useQueryClient } from '@tanstack/react-query';
import { z } from 'zod';
import type { Layout } from '../../processing/schemas/layout';
import { layoutRevisionSchema } from '../../server/contract/api';
import { api } from './api-client';
import { stationAddress } from './use-stations';

/** Layouts saved for a station's raw files, newest first. */

export const layoutKeys = {
  all: (group: string, station: string) => ['group', group, 'layouts', station] as const,
};

export function useLayouts(group: string, station: string) {
  return useQuery({
    queryKey: layoutKeys.all(group, station),
    queryFn: ({ signal }) =>
      api(`${stationAddress(group, station)}/layouts`, {
        signal,
        parse: (value) => z.array(layoutRevisionSchema).parse(value),
      }),
  });
}

/** Saves a layout; an equal one that is there already is answered instead. */
export function useSaveLayout(group: string, station: string) {
  const client = useQueryClient();
  return useMutation({
    mutationFn: ({ id, layout }: { id: string; layout: Layout }) =>
      api(`${stationAddress(group, station)}/layouts`, {
        method: 'POST',
        body: { id, layout },
        parse: (value) => layoutRevisionSchema.parse(value),
      }),
    onSuccess: () => void client.invalidateQueries({ queryKey: layoutKeys.all(group, station) }),
  });
}
