import { seriesLabels } from '../catalogue';
import { isConstantSignal, meanVariance, pairMoments } from '../numerics/moments';
import type { RecipeSettings } from '../schemas/recipe';
import type { MomentState, PeriodState, ScalarKey, SeriesKey } from '../state';
import { seriesKeys } from '../state';
import { alignByLag } from './lag';
import { addLedger, addReason, addSkipped, countOf, fluxesOf, formatNumber } from './ledger';

const version = 1;

const scalarKeys: readonly ScalarKey[] = ['sonicTemperature', 'co2', 'h2o'];

/**
 * Friction velocity from rotated kinematic momentum fluxes.
 *
 * u* = (uw² + vw²)^¼
 *
 * @param uw covariance of u and w [m2 s-2]
 * @param vw covariance of v and w [m2 s-2]
 * @returns u* [m s-1]; NaN if either input is NaN
 * @assumes stationary record, coordinates already rotated
 * @reference common definition; both components (Stull 1988, An Introduction to Boundary Layer Meteorology, ch. 2, from memory)
 * @deviates none
 */
export function frictionVelocity(uw: number, vw: number): number {
  return Math.sqrt(Math.hypot(uw, vw));
}

/**
 * Turbulent kinetic energy per mass.
 *
 * @param uu,vv,ww variances of the wind components [m2 s-2]
 * @returns half their sum [m2 s-2]; the same in any axes, because the trace of a covariance matrix is
 */
export function turbulentKineticEnergy(uu: number, vv: number, ww: number): number {
  return 0.5 * (uu + vv + ww);
}

/**
 * Covariance over the pairs that are valid after a lag; a series that only carries rounding has none but zero.
 *
 * @param x,y n samples, NaN where missing (not changed)
 * @param lagSamples y(i + lag) belongs to x(i)
 * @param near means of the two series if they are known, which saves a pass
 * @returns population covariance and its number of pairs; NaN with no pair
 */
export function alignedCovariance(
  x: Float64Array,
  y: Float64Array,
  lagSamples: number,
  near?: { x: number; y: number },
): { covariance: number; pairs: number } {
  const aligned = alignByLag(x, y, lagSamples);
  const found = pairMoments(aligned.wind, aligned.scalar, 0, aligned.wind.length, 0, near);
  if (found.n === 0) return { covariance: Number.NaN, pairs: 0 };
  const constant =
    isConstantSignal(found.m2x / found.n, found.meanX) || isConstantSignal(found.m2y / found.n, found.meanY);
  return { covariance: constant ? 0 : found.cxy / found.n, pairs: found.n };
}

const covarianceKeys: Record<ScalarKey, string> = {
  sonicTemperature: 'covWTs',
  co2: 'covWCo2',
  h2o: 'covWH2o',
};

const sigmaKeys: Record<SeriesKey, string> = {
  windU: 'uSigma',
  windV: 'vSigma',
  windW: 'wSigma',
  sonicTemperature: 'sonicTemperatureSigma',
  co2: 'co2Sigma',
  h2o: 'h2oSigma',
};

/**
 * Means, variances and covariances after rotation and lag: population moments over pairwise valid samples, means over exactly those pairs.
 */
export function momentsStep(state: PeriodState, settings: Pick<RecipeSettings, 'detrending'>): PeriodState {
  const parameters = { detrending: settings.detrending.method };
  const { windU, windV, windW } = state.series;
  if (state.stopped || !windU || !windV || !windW) {
    return addSkipped(state, 'moments', version, parameters, 'Not done: the period was stopped before.');
  }
  const means: MomentState['means'] = {};
  const variances: MomentState['variances'] = {};
  for (const key of seriesKeys) {
    const series = state.series[key];
    if (!series) continue;
    const { mean, variance, isConstant } = meanVariance(series);
    means[key] = mean;
    variances[key] = variance;
    if (isConstant) addConstantReason(state, key);
    state.values[sigmaKeys[key]] = Math.sqrt(variance);
  }
  state.values.sonicTemperatureMean = means.sonicTemperature ?? Number.NaN;
  const near = (x: SeriesKey, y: SeriesKey) => ({ x: means[x] ?? Number.NaN, y: means[y] ?? Number.NaN });
  const uw = alignedCovariance(windU, windW, 0, near('windU', 'windW'));
  const vw = alignedCovariance(windV, windW, 0, near('windV', 'windW')).covariance;
  const uv = alignedCovariance(windU, windV, 0, near('windU', 'windV')).covariance;
  const wScalar: MomentState['wScalar'] = {};
  const uScalar: MomentState['uScalar'] = {};
  const pairs: MomentState['pairs'] = { uw: uw.pairs };
  for (const key of scalarKeys) {
    const series = state.series[key];
    const lag = state.lags[key];
    if (!series || !lag) continue;
    const withW = alignedCovariance(windW, series, lag.lagSamples, near('windW', key));
    wScalar[key] = withW.covariance;
    uScalar[key] = alignedCovariance(windU, series, lag.lagSamples, near('windU', key)).covariance;
    pairs[key] = withW.pairs;
    state.values[covarianceKeys[key]] = withW.covariance;
  }
  state.values.covUW = uw.covariance;
  state.values.covVW = vw;
  state.values.turbulentKineticEnergy = turbulentKineticEnergy(
    variances.windU ?? Number.NaN,
    variances.windV ?? Number.NaN,
    variances.windW ?? Number.NaN,
  );
  const ustarMs = frictionVelocity(uw.covariance, vw);
  state.moments = { means, variances, uw: uw.covariance, vw, uv, wScalar, uScalar, pairs, ustarMs };
  const changes: Record<string, number | null> = {
    ustarUncorrectedMs: finiteOrNull(ustarMs),
    'pairs.uw': uw.pairs,
  };
  for (const key of scalarKeys) if (pairs[key] !== undefined) changes[`pairs.${key}`] = pairs[key];
  return addLedger(state, {
    step: 'moments',
    version,
    parameters,
    changes,
    summary: `Covariances over ${countOf(uw.pairs, 'wind sample')}; friction velocity ${formatNumber(ustarMs, 3)} m s-1 before spectral correction.`,
  });
}

/** A frozen series takes with it every flux that cannot be had without it: the heat term of a gas flux too. */
function addConstantReason(state: PeriodState, key: SeriesKey): void {
  const { label } = seriesLabels[key];
  const name = `${label[0].toUpperCase()}${label.slice(1)}`;
  addReason(state, {
    key: `moments.constant.${key}`,
    step: 'moments',
    fluxes: fluxesOf(key, 'absent'),
    series: key,
    grade: 2,
    statistic: { label: 'standard deviation', value: 0, unit: seriesLabels[key].unit },
    limits: { hardLow: 0 },
    finding: `${name} does not vary`,
    sentence: `${name} has one single value throughout the period. Moving air does not stand still: the signal is frozen, and every flux that needs it is wrong.`,
  });
}

function finiteOrNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
