import { mean, meanVariance } from '../numerics/moments';
import { leastSquaresLine } from '../numerics/regression';
import type { RecipeSettings } from '../schemas/recipe';
import type { LedgerEntry, PeriodState, SeriesKey } from '../state';
import { seriesKeys } from '../state';
import { seriesLabels } from '../catalogue';
import { addLedger, addSkipped, formatPercent } from './ledger';

const version = 1;

/**
 * Deviations from the mean of the period.
 *
 * @param values n samples, NaN where missing (not changed)
 * @param into receives the deviations, same length; may be `values` itself
 * @returns the mean that was taken off; NaN with no valid value
 * @assumes nothing; block averaging obeys Reynolds' rules
 * @reference Rannik & Vesala (1999), Boundary-Layer Meteorol. 91:259–280 (definition; from memory)
 * @deviates none
 */
export function removeBlockMean(values: Float64Array, into: Float64Array): number {
  const taken = mean(values);
  for (let i = 0; i < values.length; i++) into[i] = values[i] - taken;
  return taken;
}

export interface TrendShare {
  /** Slope of the least-squares line [unit per sample]. */
  slope: number;
  /** Share of the variance that lies in that line, 0 … 1; NaN for fewer than three values or a constant series. */
  share: number;
}

/**
 * How much of a series' variance is a straight drift, which a block mean leaves in and linear detrending would take out.
 *
 * share = b² var(t) / var(x)
 *
 * @param values n samples, NaN where missing (not changed)
 * @returns slope and share
 * @assumes samples evenly spaced
 * @reference definition of the coefficient of determination
 * @deviates none
 */
export function trendShare(values: Float64Array): TrendShare {
  const line = leastSquaresLine(values);
  if (line.n < 3) return { slope: Number.NaN, share: Number.NaN };
  const { variance, isConstant } = meanVariance(values, line.valueAtCentre);
  if (isConstant) return { slope: line.slope, share: Number.NaN };
  // Σ (t − t̄)² of a complete record is n (n² − 1)/12.
  let spread = (line.n * (line.n * line.n - 1)) / 12;
  if (line.n < values.length) {
    spread = 0;
    for (let i = 0; i < values.length; i++) {
      if (values[i] !== values[i]) continue;
      const t = i - line.centre;
      spread += t * t;
    }
  }
  return { slope: line.slope, share: Math.min(1, (line.slope * line.slope * (spread / line.n)) / variance) };
}

/**
 * Separates the mean from turbulence. With block means nothing is written into the series: every later moment takes its means over exactly
 * the samples it uses, which is block averaging without error from gaps. The step records how much straight drift stays in.
 */
export function detrendingStep(state: PeriodState, settings: RecipeSettings['detrending']): PeriodState {
  const parameters = { method: settings.method };
  if (state.stopped)
    return addSkipped(state, 'detrending', version, parameters, 'Not done: the period was stopped before.');
  const changes: LedgerEntry['changes'] = {};
  let largest: { key: SeriesKey; share: number } | null = null;
  for (const key of seriesKeys) {
    const series = state.series[key];
    if (!series) continue;
    const { slope, share } = trendShare(series);
    changes[`trendPerHour.${key}`] = Number.isFinite(slope) ? slope * state.block.sampleRateHz * 3600 : null;
    changes[`trendShare.${key}`] = Number.isFinite(share) ? share : null;
    if (share > (largest?.share ?? 0)) largest = { key, share };
  }
  return addLedger(state, {
    step: 'detrending',
    version,
    parameters,
    changes,
    summary: largest
      ? `Means of the whole period are taken off; a straight drift stays in, at most ${formatPercent(largest.share)} of the variance (${seriesLabels[largest.key].label}).`
      : 'Means of the whole period are taken off.',
  });
}
