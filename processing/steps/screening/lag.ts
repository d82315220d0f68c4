import { defaultValue } from '../../defaults';
import { laggedCovariancesOfAll } from '../../numerics/correlation';
import type { LaggedCovariances } from '../../numerics/correlation';

const noiseFromS = defaultValue('lag.noiseFromS');
const noiseToS = defaultValue('lag.noiseToS');

export interface LagTest {
  /** |cov(L) − cov(0)| / |cov(L)| at the lag L of the largest |cov| [1]; NaN when not judged. */
  difference: number;
  /** L [samples]; positive: the scalar was recorded later than the wind. */
  lagSamples: number;
  covarianceAtZero: number;
  covarianceAtLag: number;
  /** Standard deviation of the covariance at lags where there is none [same unit]; NaN when the record is too short. */
  noise: number;
}

/**
 * How much covariance is lost by pairing wind and scalar at lag zero.
 *
 * Without a covariance that stands out of the noise there is no lag to judge: what lies at the largest of many random covariances
 * always exceeds that at zero.
 *
 * @param windW,scalar linearly detrended, n samples, not mutated; NaN = missing
 * @param windowPoints half-width of the search [samples]
 * @param sampleRateHz [Hz]
 * @param noiseFactor |cov(L)| must exceed this many times the noise
 * @returns the difference, or NaN with the covariances it would rest on
 * @assumes one lag for the whole period
 * @reference Vickers & Mahrt (1997), J. Atmos. Oceanic Technol. 14:512–526, have a lag test (from memory); window and limits are
 *   project choices
 * @deviates not judged where the covariance does not stand out of the noise (project choice)
 */
export function lagTest(
  windW: Float64Array,
  scalar: Float64Array,
  windowPoints: number,
  sampleRateHz: number,
  noiseFactor: number,
): LagTest {
  return lagTests(windW, [scalar], windowPoints, sampleRateHz, noiseFactor)[0];
}

/** The same for several scalars, for little more than for one. */
export function lagTests(
  windW: Float64Array,
  scalars: readonly Float64Array[],
  windowPoints: number,
  sampleRateHz: number,
  noiseFactor: number,
): LagTest[] {
  const farthest = Math.floor(noiseToS * sampleRateHz);
  const maxLag = Math.max(windowPoints, Math.min(farthest, Math.floor(windW.length / 2)));
  if (maxLag >= windW.length) {
    return scalars.map(() => ({
      difference: NaN,
      lagSamples: 0,
      covarianceAtZero: NaN,
      covarianceAtLag: NaN,
      noise: NaN,
    }));
  }
  return laggedCovariancesOfAll(windW, scalars, maxLag).map((curve) =>
    judgeCurve(curve, windowPoints, Math.ceil(noiseFromS * sampleRateHz), noiseFactor),
  );
}

function judgeCurve(
  { covariances, maxLag }: LaggedCovariances,
  windowPoints: number,
  nearest: number,
  noiseFactor: number,
): LagTest {
  const covarianceAtZero = covariances[maxLag];
  let lagSamples = 0;
  let covarianceAtLag = covarianceAtZero;
  for (let lag = -windowPoints; lag <= windowPoints; lag++) {
    const value = covariances[lag + maxLag];
    if (Math.abs(value) > Math.abs(covarianceAtLag)) {
      covarianceAtLag = value;
      lagSamples = lag;
    }
  }
  let n = 0;
  let sum = 0;
  let squares = 0;
  for (let lag = nearest; lag <= maxLag; lag++) {
    for (let side = -1; side <= 1; side += 2) {
      const value = covariances[maxLag + side * lag];
      if (value !== value) continue;
      n++;
      sum += value;
      squares += value * value;
    }
  }
  const noise = n < 2 ? NaN : Math.sqrt(Math.max(0, squares / n - (sum / n) ** 2));
  const standsOut = noise === noise ? Math.abs(covarianceAtLag) > noiseFactor * noise : true;
  const difference =
    standsOut && covarianceAtLag !== 0
      ? Math.abs(covarianceAtLag - covarianceAtZero) / Math.abs(covarianceAtLag)
      : NaN;
  return { difference, lagSamples, covarianceAtZero, covarianceAtLag, noise };
}
