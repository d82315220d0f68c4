import type { TurbulenceTargets } from '../../../processing/synthetic/turbulence';

/** Reference parameters of the generator's acceptance tests: z = 3 m, U = 3 m/s, half an hour. */
export function referenceTargets(mode: TurbulenceTargets['mode'], sampleRateHz = 20): TurbulenceTargets {
  return {
    sampleRateHz,
    length: 1800 * sampleRateHz,
    heightM: 3,
    meanSpeedMs: 3,
    zeta: 0,
    variances: { w: 0.25, u: 1.2, v: 0.8, temperature: 0.16, vapour: 0.16, co2: 4 },
    covariances: { u: -0.09, temperature: 0.09, vapour: 0.08, co2: -0.4 },
    residualCorrelation: [
      [1, 0.5, -0.5],
      [0.5, 1, -0.6],
      [-0.5, -0.6, 1],
    ],
    cospectra: 'surface-layer',
    mode,
  };
}

export function mean(x: Float64Array): number {
  let sum = 0;
  for (const value of x) sum += value;
  return sum / x.length;
}

/** Population covariance in two passes. */
export function covariance(a: Float64Array, b: Float64Array): number {
  const [meanA, meanB] = [mean(a), mean(b)];
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += (a[i] - meanA) * (b[i] - meanB);
  return sum / a.length;
}
