import { fluxLabels } from '../catalogue';
import { defaultValue } from '../defaults';
import { isConstantSignal, mergeMoments, pairMoments } from '../numerics/moments';
import type { PartialMoments } from '../numerics/moments';
import type { RecipeSettings } from '../schemas/recipe';
import type { FluxKey, PeriodState, ScalarKey, SeriesKey } from '../state';
import { fluxKeys } from '../state';
import { alignByLag } from './lag';
import { addLedger, addReason, addSkipped, formatNumber, gradeAbove } from './ledger';
import { countWord, periodWord, quantityText } from './wording';

const version = 1;

const minimumValidPercent = defaultValue('steadyState.minimumValidPercent');
const minimumSubIntervals = defaultValue('steadyState.minimumSubIntervals');
const nearZeroCorrelation = defaultValue('steadyState.nearZeroCorrelation');

export interface SteadyState {
  /** |short − whole| / |whole| [1]; NaN when not testable. */
  deviation: number;
  /** Mean of the covariances of the short intervals. */
  shortCovariance: number;
  /** Covariance of the whole period. */
  wholeCovariance: number;
  /** Correlation coefficient of the whole period; small means that the flux is near zero. */
  correlation: number;
  /** Covariance of each short interval; NaN where too few pairs are valid. */
  parts: number[];
  /** Short intervals that were used. */
  used: number;
}

/**
 * Steady-state test: do the covariances of short intervals average to that of the whole period?
 *
 * RN = |mean of cov over the short intervals − cov of the period| / |cov of the period|, each with its own means
 *
 * @param x,y n samples each, aligned, NaN where missing (not changed)
 * @param subIntervals number of short intervals of equal length
 * @param offset index of the first sample within the period, when alignment has cut the beginning
 * @param length samples of the period; the short intervals are cut from it, so that they lie at fixed times
 * @param near means of both series if they are known, which saves a pass
 * @returns deviation and what it is made of
 * @assumes same lag and rotation in the short intervals and the whole, no trend removed
 * @reference Foken & Wichura (1996), Agric. For. Meteorol. 78:83–105 (from memory)
 * @deviates a short interval needs half of its pairs, and four of them are needed (project choices)
 */
export function steadyState(
  x: Float64Array,
  y: Float64Array,
  subIntervals: number,
  offset = 0,
  length: number = x.length,
  near?: { x: number; y: number },
): SteadyState {
  let whole: PartialMoments = { n: 0, meanX: Number.NaN, meanY: Number.NaN, m2x: 0, m2y: 0, cxy: 0 };
  const parts: number[] = [];
  let sum = 0;
  let used = 0;
  for (let part = 0; part < subIntervals; part++) {
    const start = Math.round((part * length) / subIntervals);
    const end = Math.round(((part + 1) * length) / subIntervals);
    const from = Math.min(x.length, Math.max(0, start - offset));
    const to = Math.min(x.length, Math.max(0, end - offset));
    const found = pairMoments(x, y, from, to, 0, near);
    whole = mergeMoments(whole, found);
    if (found.n > 0 && found.n >= (minimumValidPercent / 100) * (end - start)) {
      parts.push(found.cxy / found.n);
      sum += found.cxy / found.n;
      used++;
    } else {
      parts.push(Number.NaN);
    }
  }
  const isFrozen =
    whole.n > 0 &&
    (isConstantSignal(whole.m2x / whole.n, whole.meanX) ||
      isConstantSignal(whole.m2y / whole.n, whole.meanY));
  const wholeCovariance = whole.n === 0 ? Number.NaN : isFrozen ? 0 : whole.cxy / whole.n;
  const shortCovariance = used > 0 ? sum / used : Number.NaN;
  const spread = Math.sqrt(whole.m2x * whole.m2y) / whole.n;
  const testable = used >= Math.min(minimumSubIntervals, subIntervals) && wholeCovariance !== 0;
  return {
    deviation: testable ? Math.abs((shortCovariance - wholeCovariance) / wholeCovariance) : Number.NaN,
    shortCovariance,
    wholeCovariance,
    correlation: spread > 0 ? wholeCovariance / spread : Number.NaN,
    parts,
    used,
  };
}

/** What each flux is tested on: which covariance, and how it is told. */
const tested: Record<
  FluxKey,
  { x: SeriesKey; y: SeriesKey; scalar: ScalarKey | null; valueKey: string; words: string }
> = {
  momentum: { x: 'windU', y: 'windW', scalar: null, valueKey: 'covUW', words: 'u and w' },
  sensibleHeat: {
    x: 'windW',
    y: 'sonicTemperature',
    scalar: 'sonicTemperature',
    valueKey: 'covWTs',
    words: 'w and sonic temperature',
  },
  latentHeat: { x: 'windW', y: 'h2o', scalar: 'h2o', valueKey: 'covWH2o', words: 'w and H2O' },
  co2Flux: { x: 'windW', y: 'co2', scalar: 'co2', valueKey: 'covWCo2', words: 'w and CO2' },
};

/**
 * Tests the four covariances for steady state. Gas is tested on the densities as they were measured, before density terms: those follow
 * from the means of the whole period.
 */
export function steadyStateStep(state: PeriodState, settings: RecipeSettings['steadyState']): PeriodState {
  const parameters = { ...settings };
  if (state.stopped)
    return addSkipped(state, 'steadyState', version, parameters, 'Not done: the period was stopped before.');
  const minutes = (state.block.endMs - state.block.startMs) / 60_000;
  const shortMinutes = minutes / settings.subIntervals;
  const shortWords = `${countWord(settings.subIntervals)} ${formatNumber(shortMinutes, Number.isInteger(shortMinutes) ? 0 : 1)}-minute`;
  const changes: Record<string, number | null> = {};
  const told: string[] = [];
  for (const flux of fluxKeys) {
    const { x, y, scalar, valueKey, words } = tested[flux];
    const first = state.series[x];
    const second = state.series[y];
    const lag = scalar === null ? 0 : state.lags[scalar]?.lagSamples;
    if (!first || !second || lag === undefined) continue;
    const aligned = alignByLag(first, second, lag);
    const found = steadyState(
      aligned.wind,
      aligned.scalar,
      settings.subIntervals,
      aligned.offset,
      first.length,
      { x: state.moments?.means[x] ?? Number.NaN, y: state.moments?.means[y] ?? Number.NaN },
    );
    const percent = found.deviation * 100;
    const key = `steadyState.${flux}`;
    state.values[key] = found.deviation;
    changes[`shortCovariance.${flux}`] = finiteOrNull(found.shortCovariance);
    changes[`wholeCovariance.${flux}`] = finiteOrNull(found.wholeCovariance);
    const { symbol } = fluxLabels[flux];
    told.push(`${symbol} ${Number.isFinite(percent) ? `${formatNumber(percent)} %` : 'not testable'}`);
    const limits = { softHigh: settings.goodPercent, hardHigh: settings.usablePercent };
    if (!Number.isFinite(percent)) {
      addReason(state, {
        key,
        step: 'steadyState',
        fluxes: [flux],
        series: y === 'windW' ? x : y,
        grade: 0,
        statistic: { label: 'steady-state deviation', value: null, unit: '%' },
        limits,
        finding: 'Steady state not testable',
        sentence:
          found.wholeCovariance === 0
            ? `The covariance of ${words} is exactly zero, so a deviation from it has no meaning.`
            : `Only ${countWord(found.used)} of the ${shortWords} intervals have enough samples of ${words}, so the test says nothing.`,
      });
      continue;
    }
    const grade = gradeAbove(percent, settings.goodPercent, settings.usablePercent);
    if (grade > 0) {
      const average = quantityText(valueKey, found.shortCovariance);
      const whole = quantityText(valueKey, found.wholeCovariance);
      addReason(state, {
        key,
        step: 'steadyState',
        fluxes: [flux],
        series: y === 'windW' ? x : y,
        grade,
        statistic: { label: 'steady-state deviation', value: percent, unit: '%' },
        limits,
        finding: `Steady-state deviation ${formatNumber(percent)} %`,
        sentence: `The ${shortWords} covariances of ${words} average ${average}; the ${periodWord(minutes)} as a whole gives ${whole}. The flux changed within the period, so one number does not describe it.`,
      });
    }
    if (Math.abs(found.correlation) < nearZeroCorrelation) {
      addReason(state, {
        key: `steadyState.nearZero.${flux}`,
        step: 'steadyState',
        fluxes: [flux],
        series: y === 'windW' ? x : y,
        grade: 0,
        statistic: { label: 'correlation coefficient', value: Math.abs(found.correlation), unit: '1' },
        limits: { softLow: nearZeroCorrelation },
        finding: 'Flux close to zero',
        sentence: `${words[0].toUpperCase()}${words.slice(1)} are hardly correlated (${formatNumber(found.correlation, 4)}), as around sunrise and sunset. A deviation in per cent of almost nothing says little.`,
      });
    }
  }
  return addLedger(state, {
    step: 'steadyState',
    version,
    parameters,
    changes,
    summary:
      told.length > 0
        ? `Deviation of the ${shortWords} covariances from the whole: ${told.join(', ')}.`
        : 'No covariance to test.',
  });
}

function finiteOrNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
