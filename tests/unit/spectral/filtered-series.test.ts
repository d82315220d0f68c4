import { describe, expect, it } from 'vitest';
import { seriesOfHalfSpectrum } from '../../../processing/numerics/fft';
import { SplitMix64 } from '../../../processing/numerics/random';
import { lossFactor } from '../../../processing/spectral/loss-integral';
import { unstableCospectrum } from '../../../processing/spectral/reference-cospectra';

/**
 * A series is slowed in time, as a sensor does it, and its covariance with w measured at the lag where it is largest: no transfer function
 * takes part. z = 3 m, ū = 3 m/s, 50 Hz, 24 minutes.
 */
const length = 72_000;
const rateHz = 50;

function turbulence(seed: number): Float64Array {
  const random = new SplitMix64(seed);
  const re = new Float64Array(length / 2 + 1);
  const im = new Float64Array(length / 2 + 1);
  for (let k = 1; k < length / 2; k++) {
    const f = (k * rateHz) / length;
    const size = Math.sqrt(unstableCospectrum('scalar', f) / f);
    const phase = 2 * Math.PI * random.uniform();
    re[k] = size * Math.cos(phase);
    im[k] = size * Math.sin(phase);
  }
  return seriesOfHalfSpectrum({ re, im }, length);
}

/** First-order response, exact for an input that is straight between samples; the series is taken as periodic. */
function slowed(x: Float64Array, tau: number): Float64Array {
  const ratio = tau * rateHz;
  const keep = Math.exp(-1 / ratio);
  const now = 1 - (1 - keep) * ratio;
  const before = (1 - keep) * ratio - keep;
  const y = new Float64Array(x.length);
  let value = 0;
  for (let round = 0; round < 2; round++)
    for (let i = 0; i < x.length; i++) {
      value = keep * value + before * x[(i + x.length - 1) % x.length] + now * x[i];
      y[i] = value;
    }
  return y;
}

function covarianceAt(w: Float64Array, c: Float64Array, lag: number): number {
  let sum = 0;
  for (let i = 0; i < w.length; i++) sum += w[i] * c[(i + lag) % c.length];
  return sum / w.length;
}

describe('loss of a slowed series', () => {
  it.each([0.1, 0.3, 1])(
    'is what the exact form says at the best lag, and the full form without a lag, for %d s',
    (tau) => {
      const w = turbulence(11);
      const c = slowed(w, tau);
      const whole = covarianceAt(w, w, 0);
      let best = 0;
      for (let lag = 0; lag <= tau * rateHz; lag++) best = Math.max(best, covarianceAt(w, c, lag));
      const at = { heightM: 3, windMs: 3, zeta: -1 };
      const exact = lossFactor({ responseTimeS: tau }, at).factor;
      const full = lossFactor({ responseTimeS: tau, responseForm: 'unshifted' }, at).factor;
      // The record ends at 24 min and 25 Hz, which moves the loss by about 1 % of itself; whole samples by less.
      expect(Math.abs(whole / best - exact)).toBeLessThan(0.02 * (exact - 1) + 0.002);
      expect(Math.abs(whole / covarianceAt(w, c, 0) - full)).toBeLessThan(0.02 * (full - 1) + 0.002);
    },
  );
});
