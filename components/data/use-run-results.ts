import { keepPreviousData, useQuery } from '@tanstack/react-query';
import { z } from 'zod';
import { periodDetailSchema, periodRowSchema, seriesSchema, spineSchema } from '../../server/contract/api';
import { api } from './api-client';

/** Results of runs: columns for plotting, rows for tables, one period in full, the spine. */

export const runResultKeys = {
  all: (group: string, runId: string) => ['group', group, 'run-results', runId] as const,
  series: (group: string, runId: string) => [...runResultKeys.all(group, runId), 'series'] as const,
  periods: (group: string, runId: string) => [...runResultKeys.all(group, runId), 'periods'] as const,
  period: (group: string, runId: string, startMs: number) =>
    [...runResultKeys.all(group, runId), 'period', startMs] as const,
  spines: (group: string, station: string) => ['group', group, 'spine', station] as const,
};

export interface TimeSpan {
  fromMs: number;
  toMs: number;
}

export function useSeries(
  group: string,
  runId: string | null,
  quantities: readonly string[],
  span: TimeSpan | null,
) {
  return useQuery({
    queryKey: [...runResultKeys.series(group, runId ?? ''), quantities.join(','), span?.fromMs, span?.toMs],
    enabled: runId !== null && span !== null,
    placeholderData: keepPreviousData,
    queryFn: ({ signal }) =>
      api(`/groups/${group}/runs/${runId}/series`, {
        signal,
        query: { quantities: quantities.join(','), fromMs: span?.fromMs, toMs: span?.toMs },
        parse: seriesSchema.parse,
      }),
  });
}

export function usePeriods(group: string, runId: string | null, span: TimeSpan | null) {
  return useQuery({
    queryKey: [...runResultKeys.periods(group, runId ?? ''), span?.fromMs, span?.toMs],
    enabled: runId !== null && span !== null,
    placeholderData: keepPreviousData,
    queryFn: ({ signal }) =>
      api(`/groups/${group}/runs/${runId}/periods`, {
        signal,
        query: { fromMs: span?.fromMs, toMs: span?.toMs },
        parse: (value) => z.array(periodRowSchema).parse(value),
      }),
  });
}

export function usePeriod(group: string, runId: string | null, startMs: number) {
  return useQuery({
    queryKey: runResultKeys.period(group, runId ?? '', startMs),
    enabled: runId !== null && Number.isFinite(startMs),
    queryFn: ({ signal }) =>
      api(`/groups/${group}/runs/${runId}/periods/${startMs}`, { signal, parse: periodDetailSchema.parse }),
  });
}

export function useSpine(group: string, station: string, runId: string | null, bins: number) {
  return useQuery({
    queryKey: [...runResultKeys.spines(group, station), runId, bins],
    enabled: bins > 0,
    placeholderData: keepPreviousData,
    queryFn: ({ signal }) =>
      api(`/groups/${group}/stations/${station}/spine`, {
        signal,
        query: { run: runId, bins },
        parse: spineSchema.nullable().parse,
      }),
  });
}
