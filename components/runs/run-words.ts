import type { Run } from '../../server/contract/api';
import { fluxLabels } from '../../processing/catalogue';
import { fluxKeys } from '../../processing/state';
import type { FluxKey } from '../../processing/state';
import { formatPlural } from '../format/numbers';
import type { GradeValue } from '../tokens';

/** A run in words. */

export interface RunState {
  mark: GradeValue;
  words: string;
}

export function runState(run: Run): RunState {
  switch (run.state) {
    case 'waiting':
      return { mark: null, words: 'waits for its turn' };
    case 'reading':
      return { mark: null, words: 'reading raw files' };
    case 'computing':
      return { mark: null, words: 'being computed' };
    case 'failed':
      return { mark: 2, words: 'failed' };
    case 'cancelled':
      return { mark: null, words: 'cancelled' };
    case 'done':
      return run.stale.length > 0 ? { mark: 1, words: 'done, but stale' } : { mark: 0, words: 'done' };
  }
}

/** Fluxes in the order people read them, with their counts. */
export function gradedFluxes(
  grades: Run['grades'],
): { flux: FluxKey; symbol: string; counts: Run['grades'][string] }[] {
  const order: FluxKey[] = ['co2Flux', 'latentHeat', 'sensibleHeat', 'momentum'];
  return [...order, ...fluxKeys.filter((flux) => !order.includes(flux))].flatMap((flux) => {
    const counts = grades[flux];
    return counts ? [{ flux, symbol: fluxLabels[flux].symbol, counts }] : [];
  });
}

/** The page's heading as a finding. */
export function runsFinding(runs: readonly Run[]): string {
  if (runs.length === 0) return 'Nothing computed yet';
  const working = runs.filter((run) => ['waiting', 'reading', 'computing'].includes(run.state));
  if (working.length > 0)
    return working.length === 1
      ? `Run ${working[0]?.number ?? ''} is under way`
      : `${working.length} runs are under way`;
  const newest = runs[0];
  if (newest?.state === 'failed') return `Run ${newest.number} failed`;
  const stale = runs.filter((run) => run.state === 'done' && run.stale.length > 0);
  if (newest && stale.includes(newest)) return `Run ${newest.number} is stale`;
  return `${formatPlural(runs.length, 'run')}, the newest up to date`;
}
