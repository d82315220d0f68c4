import { describe, expect, it } from 'vitest';
import { biasedCovariances } from '../../processing/numerics/correlation';
import { SplitMix64 } from '../../processing/numerics/random';
import { finkelsteinSims } from '../../processing/steps/uncertainty';

/** Finkelstein & Sims (2001), J. Geophys. Res. 106(D4):3503–3509 (formula from memory; checked by Monte Carlo in an independent program). */
function sigma(x: Float64Array, y: Float64Array, maxLag: number): number {
  return finkelsteinSims(biasedCovariances([{ x, y }], maxLag)[0], maxLag);
}

describe('sampling error of a covariance', () => {
  const x = Float64Array.of(1, 2, 0, -1, -2, 1, 3, -4);
  const y = Float64Array.of(2, 1, -1, 0, -3, 2, 1, -2);

  // Direct double sums in numpy.
  it.each([
    [0, 1.649455402549581],
    [1, 1.6577234012343556],
    [2, 1.8682168972043904],
    [3, 1.8461319359677413],
  ])('matches the eight-sample example for m = %i', (m, expected) => {
    expect(Math.abs(sigma(x, y, m) - expected)).toBeLessThan(1e-12);
    // Lags beyond m that happen to be there are not used.
    expect(Math.abs(finkelsteinSims(biasedCovariances([{ x, y }], 7)[0], m) - expected)).toBeLessThan(1e-12);
  });

  it('tends to σx σy/√N for white independent series', () => {
    const n = 36_000;
    const random = new SplitMix64(11);
    const a = new Float64Array(n);
    const b = new Float64Array(n);
    random.fillNormal(a);
    random.fillNormal(b);
    // Both variances scatter by √(2/N) = 0.75 %, the sum of 4000 chance products by 2 √4000/N = 0.35 %; half of that in σ: 0.6 %.
    expect(Math.abs(sigma(a, b, 4000) / (1 / Math.sqrt(n)) - 1)).toBeLessThan(0.03);
  });

  it('recovers the error of two coupled autoregressive series', () => {
    // φ 0.95 and 0.9, innovations correlated by 0.5, n = 4000. Theory: √({(1+P)/(1−P) + ρ0² [1 + 2P/(1−P)]}/n) = 0.06247 with
    // P = φ1 φ2; in an independent program the mean estimate was 0.0615 and the true scatter 0.0593.
    const n = 4000;
    const runs = 40;
    const random = new SplitMix64(5);
    let sum = 0;
    for (let run = 0; run < runs; run++) {
      const a = new Float64Array(n);
      const b = new Float64Array(n);
      let stateA = random.normal();
      let stateB = random.normal();
      for (let i = 0; i < n; i++) {
        const first = random.normal();
        const second = 0.5 * first + Math.sqrt(0.75) * random.normal();
        stateA = 0.95 * stateA + Math.sqrt(1 - 0.95 ** 2) * first;
        stateB = 0.9 * stateB + Math.sqrt(1 - 0.9 ** 2) * second;
        a[i] = stateA;
        b[i] = stateB;
      }
      sum += sigma(a, b, 200);
    }
    // One estimate scatters by 10–15 %; the mean of 40 by 2 %.
    expect(Math.abs(sum / runs / 0.0615 - 1)).toBeLessThan(0.06);
  });
});
