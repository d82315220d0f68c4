import { seriesLabels } from '../catalogue';
import { defaultValue } from '../defaults';
import { medianAbsoluteDeviation, scratch } from '../numerics/selection';
import { removeLine } from '../numerics/regression';
import type { RecipeSettings } from '../schemas/recipe';
import type { PeriodState, SeriesKey, Step } from '../state';
import { seriesKeys } from '../state';
import {
  addLedger,
  addReason,
  addSkipped,
  alreadyStopped,
  capitalised,
  countOf,
  fluxesOf,
  formatNumber,
} from './ledger';

const version = 1;

/** MAD of a unit Gaussian, Φ⁻¹(3/4) rounded as published [1]. */
const madOfUnitGaussian = defaultValue('despiking.madToSigma');

export interface SpikeFindings {
  spikes: number;
  /** Median of the valid values [unit]; of the residuals when detrended first. */
  median: number;
  /** Median absolute deviation [unit]. */
  mad: number;
  /** More than half of the values are the same: nothing was judged. */
  constantMajority: boolean;
}

/**
 * Leaves out spikes by their distance from the median.
 *
 * |x − median| > q MAD / 0.6745
 *
 * @param values n samples of one whole period, changed in place: NaN where a spike was; gaps are left, not filled
 * @param threshold q, distance in Gaussian-equivalent standard deviations
 * @param detrendFirst judge the residuals of a least-squares line, so that a ramp does not widen the MAD
 * @returns what was found; with MAD = 0 nothing is left out
 * @assumes fewer than half of the values are spikes
 * @reference Mauder et al. (2013), Agric. For. Meteorol. 169:122–135 (from memory: formula and q = 7)
 * @deviates one pass over the whole period, no rule about runs (project choice)
 */
export function leaveOutSpikes(
  values: Float64Array,
  threshold: number,
  detrendFirst: boolean,
): SpikeFindings {
  const length = values.length;
  let judged = values;
  if (detrendFirst) {
    judged = scratch(length, 1);
    if (judged.length !== length) judged = judged.subarray(0, length);
    removeLine(values, judged);
  }
  const { n, median: middle, mad, farthest } = medianAbsoluteDeviation(judged);
  if (!(mad > 0)) return { spikes: 0, median: middle, mad, constantMajority: n > 0 };
  const reach = (threshold * mad) / madOfUnitGaussian;
  let spikes = 0;
  for (let i = 0; farthest > reach && i < length; i++) {
    if (Math.abs(judged[i] - middle) > reach) {
      values[i] = NaN;
      spikes++;
    }
  }
  return { spikes, median: middle, mad, constantMajority: false };
}

/**
 * Leaves out lone impossible values in every series.
 *
 * How many spikes are too many is judged by the screening step.
 */
export const despikingStep: Step<RecipeSettings['despiking']> = (state, settings) => {
  if (state.stopped) return addSkipped(state, 'despiking', version, {}, alreadyStopped);
  if (settings.method === 'none') {
    return addLedger(state, {
      step: 'despiking',
      version,
      parameters: { method: settings.method },
      changes: {},
      summary: 'Despiking is switched off in this recipe.',
    });
  }
  const counts: Partial<Record<SeriesKey, { before: number; after: number }>> = {};
  const changes: Record<string, number | string | null> = {};
  let total = 0;
  for (const key of seriesKeys) {
    const values = state.series[key];
    const own = state.counts[key];
    if (!values || !own) continue;
    const before = own.valid;
    const found = leaveOutSpikes(values, settings.threshold, settings.detrendFirst);
    own.spikes = found.spikes;
    own.valid = before - found.spikes;
    counts[key] = { before, after: own.valid };
    state.values[`spikes.${key}`] = before === 0 ? NaN : found.spikes / before;
    changes[`spikes.${key}`] = found.spikes;
    changes[`median.${key}`] = finiteOrNull(found.median);
    changes[`mad.${key}`] = finiteOrNull(found.mad);
    total += found.spikes;
    if (found.constantMajority) noteConstantMajority(state, key, found.median);
  }
  return addLedger(state, {
    step: 'despiking',
    version,
    parameters: {
      method: settings.method,
      threshold: settings.threshold,
      detrendFirst: settings.detrendFirst,
    },
    counts,
    changes,
    summary:
      total === 0
        ? 'No spikes found.'
        : `${countOf(total, 'spike')} left out as ${total === 1 ? 'a gap' : 'gaps'}, further than ${formatNumber(settings.threshold, 1)} standard deviations from the median.`,
  });
};

function finiteOrNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}

function noteConstantMajority(state: PeriodState, key: SeriesKey, middle: number): void {
  const { label } = seriesLabels[key];
  addReason(state, {
    key: `despiking.constantMajority.${key}`,
    step: 'despiking',
    fluxes: fluxesOf(key, 'absent'),
    series: key,
    grade: state.settings.screening.hardGrade,
    statistic: { label: 'value of more than half the samples', value: middle, unit: innerUnits[key] },
    finding: `${capitalised(label)} stuck at one value`,
    sentence: `More than half of all ${label} samples are exactly the same, so spikes cannot be told from the rest and none were left out. A frozen or far too coarse signal looks like this.`,
  });
}

const innerUnits: Record<SeriesKey, string> = {
  windU: 'm s-1',
  windV: 'm s-1',
  windW: 'm s-1',
  sonicTemperature: 'K',
  co2: 'mol m-3',
  h2o: 'mol m-3',
};
