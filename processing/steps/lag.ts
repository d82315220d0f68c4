import { seriesLabels } from '../catalogue';
import { defaultValue } from '../defaults';
import { laggedCovariancesOfAll } from '../numerics/correlation';
import type { LaggedCovariances } from '../numerics/correlation';
import { covariance } from '../numerics/moments';
import type { RecipeSettings } from '../schemas/recipe';
import type { GasKey, LagState, PeriodState } from '../state';
import { gasKeys } from '../state';
import { addLedger, addReason, addSkipped, fluxesOf, formatNumber } from './ledger';
import { separationComponents } from './separation';

const version = 1;

const noiseFromS = defaultValue('lag.noiseFromS');
const noiseToS = defaultValue('lag.noiseToS');
const minimumPairsPercent = defaultValue('lag.minimumPairsPercent');
const slowestTransportMs = defaultValue('lag.slowestTransportMs');

/** Points of the lag curve that is kept for plotting, and how far it reaches to either side [s]. */
const curvePoints = 400;
const curveReachS = 10;
/** Fewer covariances than this far away say nothing about noise. */
const fewestNoiseLags = 10;

export interface LagWindow {
  /** Lag expected from geometry and wind [s]. */
  expectedS: number;
  /** Half-width of the window around it [s]. */
  halfWidthS: number;
}

/**
 * Where the lag of an open-path gas is expected, and how far around it is looked.
 *
 * L₀ = along-wind separation / U, held to ± separation / 0.5 m s-1; half-width = max(windowS, separation / 0.5 m s-1)
 *
 * @param alongM along-wind separation, positive when the analyser stands downwind [m]; NaN when calm
 * @param distanceM horizontal distance of analyser and sonic [m]
 * @param meanSpeedMs mean wind speed [m s-1]
 * @param windowS half-width asked for by the recipe [s]
 * @returns expected lag and half-width [s]; an expected lag of 0 when the wind has no direction
 * @assumes frozen eddies carried by the mean wind, no delay in the electronics
 * @reference common practice, no source; the limits are project choices
 * @deviates none
 */
export function openPathLagWindow(
  alongM: number,
  distanceM: number,
  meanSpeedMs: number,
  windowS: number,
): LagWindow {
  const slowest = distanceM / slowestTransportMs;
  const travel = alongM / meanSpeedMs;
  return {
    expectedS: Number.isFinite(travel) ? Math.min(slowest, Math.max(-slowest, travel)) : 0,
    halfWidthS: Math.max(windowS, slowest),
  };
}

export type LagFallback = 'edge' | 'noise' | 'pairs' | 'no-data';

export interface LagChoice {
  lagSamples: number;
  source: 'maximum' | 'default';
  /** Why the expected lag was used; null when the maximum was. */
  fallback: LagFallback | null;
  edgeHit: boolean;
  /** Lag of the largest |cov| within the window. */
  peakSamples: number;
  peakCovariance: number;
  /** Standard deviation of cov at lags 30–60 s away; NaN when the record is too short to have any. */
  noiseLevel: number;
}

/**
 * Chooses a lag by covariance maximisation.
 *
 * The lag of the largest |cov| within the window is taken, unless it lies on the window's edge, does not exceed `noiseFactor` times the
 * noise level, or too few pairs remain: then the expected lag is.
 *
 * @param curve covariances by lag, wide enough to hold the window and lags 30–60 s away from the expected one
 * @param sampleRateHz [Hz]
 * @param window expected lag and half-width [s]
 * @param noiseFactor multiple of the noise level that the maximum must exceed
 * @param expectedPairs pairs of a complete period
 * @assumes the covariance has one peak within the window
 * @reference covariance maximisation is common practice; the rules for falling back are project choices
 * @deviates none
 */
export function chooseLag(
  curve: LaggedCovariances,
  sampleRateHz: number,
  window: LagWindow,
  noiseFactor: number,
  expectedPairs: number,
): LagChoice {
  const { maxLag, covariances, pairs } = curve;
  const expected = Math.max(-maxLag, Math.min(maxLag, Math.round(window.expectedS * sampleRateHz)));
  const half = Math.max(1, Math.round(window.halfWidthS * sampleRateHz));
  const first = Math.max(-maxLag, expected - half);
  const last = Math.min(maxLag, expected + half);
  let peakSamples = expected;
  let peakSize = -1;
  for (let lag = first; lag <= last; lag++) {
    const size = Math.abs(covariances[lag + maxLag]);
    if (size > peakSize) {
      peakSize = size;
      peakSamples = lag;
    }
  }
  const noiseLevel = noiseOf(curve, sampleRateHz, expected);
  const edgeHit = peakSamples === first || peakSamples === last;
  const fallback: LagFallback | null =
    peakSize < 0
      ? 'no-data'
      : pairs[peakSamples + maxLag] < (minimumPairsPercent / 100) * expectedPairs
        ? 'pairs'
        : edgeHit
          ? 'edge'
          : peakSize < noiseFactor * noiseLevel
            ? 'noise'
            : null;
  return {
    lagSamples: fallback === null ? peakSamples : expected,
    source: fallback === null ? 'maximum' : 'default',
    fallback,
    edgeHit: peakSize >= 0 && edgeHit,
    peakSamples,
    peakCovariance: covariances[peakSamples + maxLag],
    noiseLevel,
  };
}

function noiseOf({ maxLag, covariances }: LaggedCovariances, sampleRateHz: number, expected: number): number {
  const from = Math.ceil(noiseFromS * sampleRateHz);
  const to = Math.floor(noiseToS * sampleRateHz);
  let count = 0;
  let sum = 0;
  let sumOfSquares = 0;
  for (const side of [-1, 1]) {
    for (let away = from; away <= to; away++) {
      const lag = expected + side * away;
      if (lag < -maxLag || lag > maxLag) break;
      const value = covariances[lag + maxLag];
      if (value !== value) continue;
      count++;
      sum += value;
      sumOfSquares += value * value;
    }
  }
  if (count < fewestNoiseLags) return Number.NaN;
  return Math.sqrt(Math.max(0, sumOfSquares / count - (sum / count) ** 2));
}

/**
 * Views of two series of which sample i of one belongs to sample i of the other, after a lag.
 *
 * @param wind n samples
 * @param scalar n samples, recorded `lagSamples` later than the wind
 * @returns views (not copies) of n − |lag| samples, and the index in `wind` at which they begin
 */
export function alignByLag(
  wind: Float64Array,
  scalar: Float64Array,
  lagSamples: number,
): { wind: Float64Array; scalar: Float64Array; offset: number } {
  const overlap = Math.max(0, wind.length - Math.abs(lagSamples));
  const windFrom = lagSamples < 0 ? Math.min(-lagSamples, wind.length) : 0;
  const scalarFrom = lagSamples > 0 ? Math.min(lagSamples, scalar.length) : 0;
  return {
    wind: wind.subarray(windFrom, windFrom + overlap),
    scalar: scalar.subarray(scalarFrom, scalarFrom + overlap),
    offset: windFrom,
  };
}

/** The lag curve around the chosen lag, thinned evenly to what a plot needs; the chosen lag is always one of its points. */
function plottedCurve(
  curve: LaggedCovariances,
  chosen: number,
  sampleRateHz: number,
  unit: string,
): PeriodState['curves'][string] {
  const perSide = Math.floor((curvePoints - 1) / 2);
  const reach = Math.min(curve.maxLag, Math.round(curveReachS * sampleRateHz));
  const stride = Math.max(1, Math.ceil(reach / perSide));
  const x: number[] = [];
  const y: number[] = [];
  for (let step = -perSide; step <= perSide; step++) {
    const lag = chosen + step * stride;
    if (Math.abs(step * stride) > reach || Math.abs(lag) > curve.maxLag) continue;
    const value = curve.covariances[lag + curve.maxLag];
    if (!Number.isFinite(value)) continue;
    x.push(lag / sampleRateHz);
    y.push(value);
  }
  return { x, y, xUnit: 's', yUnit: unit };
}

const lagValueKeys: Record<GasKey, string> = { co2: 'lagCo2', h2o: 'lagH2o' };

/**
 * Pairs each sample of gas with the gust that carried it. The series stay as they are; the lag is applied where pairs are formed.
 */
export function lagStep(state: PeriodState, settings: RecipeSettings['lag']): PeriodState {
  const parameters = { ...settings };
  const wind = state.series.windW;
  if (state.stopped || !wind)
    return addSkipped(state, 'lag', version, parameters, 'Not done: the period was stopped before.');
  const { sampleRateHz, length } = state.block;
  const { northM, eastM } = state.setUp.separation;
  const distanceM = Math.hypot(northM, eastM);
  const { alongM } = separationComponents(state.setUp.separation, state.wind?.directionDeg ?? Number.NaN);
  const window = openPathLagWindow(
    alongM,
    distanceM,
    state.wind?.meanSpeedMs ?? Number.NaN,
    settings.windowS,
  );
  const changes: Record<string, number | string | null> = {
    expectedLagS: window.expectedS,
    windowHalfWidthS: window.halfWidthS,
  };
  const told: string[] = [];

  const temperature = state.series.sonicTemperature;
  if (temperature) {
    const atZero = covariance(wind, temperature);
    state.lags.sonicTemperature = {
      lagSamples: 0,
      source: 'fixed',
      covarianceAtZero: atZero.covariance,
      covarianceAtLag: atZero.covariance,
      edgeHit: false,
      pairs: atZero.pairs,
    };
    state.values.lagSonicTemperature = 0;
  }

  const gases = gasKeys.filter((gas) => state.series[gas]);
  const reachS = Math.max(
    noiseToS + Math.abs(window.expectedS),
    window.halfWidthS + Math.abs(window.expectedS),
  );
  const maxLag = Math.max(1, Math.min(Math.floor(length / 2), Math.ceil(reachS * sampleRateHz) + 1));
  const curves = laggedCovariancesOfAll(
    wind,
    gases.map((gas) => state.series[gas] as Float64Array),
    maxLag,
  );
  gases.forEach((gas, index) => {
    const curve = curves[index];
    const choice = chooseLag(curve, sampleRateHz, window, settings.noiseFactor, length);
    const at = choice.lagSamples + maxLag;
    const lag: LagState = {
      lagSamples: choice.lagSamples,
      source: choice.source,
      covarianceAtZero: curve.covariances[maxLag],
      covarianceAtLag: curve.covariances[at],
      edgeHit: choice.edgeHit,
      pairs: curve.pairs[at],
    };
    state.lags[gas] = lag;
    const lagS = choice.lagSamples / sampleRateHz;
    state.values[lagValueKeys[gas]] = lag.pairs > 0 ? lagS : Number.NaN;
    state.curves[`lag.${gas}`] = plottedCurve(curve, choice.lagSamples, sampleRateHz, 'mol m-2 s-1');
    changes[`lagS.${gas}`] = lagS;
    changes[`source.${gas}`] = choice.source;
    changes[`covarianceAtZero.${gas}`] = finiteOrNull(lag.covarianceAtZero);
    changes[`covarianceAtLag.${gas}`] = finiteOrNull(lag.covarianceAtLag);
    changes[`noiseLevel.${gas}`] = finiteOrNull(choice.noiseLevel);
    changes[`pairs.${gas}`] = lag.pairs;
    const name = seriesLabels[gas].label;
    told.push(
      `${name} ${formatNumber(lagS, 2)} s (${choice.source === 'maximum' ? 'largest covariance' : 'expected lag'})`,
    );
    if (choice.fallback) addFallbackReason(state, gas, choice, lagS, settings.noiseFactor, sampleRateHz);
  });
  return addLedger(state, {
    step: 'lag',
    version,
    parameters,
    changes,
    summary:
      told.length > 0
        ? `Lags behind the wind: ${told.join(', ')}.`
        : 'No gas to align; sonic temperature has no lag.',
  });
}

function finiteOrNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}

function addFallbackReason(
  state: PeriodState,
  gas: GasKey,
  choice: LagChoice,
  lagS: number,
  noiseFactor: number,
  sampleRateHz: number,
): void {
  const name = seriesLabels[gas].label;
  const peakS = formatNumber(choice.peakSamples / sampleRateHz, 2);
  const used = `The expected lag of ${formatNumber(lagS, 2)} s is used.`;
  const overNoise = Math.abs(choice.peakCovariance) / choice.noiseLevel;
  const stories: Record<LagFallback, string> = {
    edge: `The covariance of w and ${name} is largest at the edge of the search window, at ${peakS} s, so it may go on growing outside. ${used}`,
    noise: `No lag of ${name} stands out: the largest covariance is ${formatNumber(overNoise, 1)} times the noise level, less than ${formatNumber(noiseFactor, 1)}. ${used}`,
    pairs: `Fewer than ${formatNumber(minimumPairsPercent)} % of the samples of w and ${name} pair up. ${used}`,
    'no-data': `No sample of w and ${name} pairs up, so there is no lag to find.`,
  };
  const findings: Record<LagFallback, string> = {
    edge: `${name} lag at edge of search`,
    noise: `${name} lag lost in noise`,
    pairs: `Few pairs of w and ${name}`,
    'no-data': `No pairs of w and ${name}`,
  };
  addReason(state, {
    key: `lag.${gas}`,
    step: 'lag',
    fluxes: fluxesOf(gas),
    series: gas,
    grade: 0,
    // a peak at the edge of the window stands out of the noise: what failed there is not the noise test
    ...(choice.fallback === 'noise'
      ? {
          statistic: { label: 'largest covariance over noise level', value: overNoise, unit: '1' },
          limits: { softLow: noiseFactor },
        }
      : {
          statistic: {
            label: 'lag of the largest covariance',
            value: choice.fallback === 'edge' ? choice.peakSamples / sampleRateHz : null,
            unit: 's',
          },
        }),
    finding: findings[choice.fallback ?? 'no-data'],
    sentence: choice.fallback ? stories[choice.fallback] : '',
  });
}
