import { describe, expect, it } from 'vitest';
import { moments, pairMoments } from '../../processing/numerics/moments';
import { removeBlockMean } from '../../processing/steps/detrending';

/**
 * Rannik & Vesala (1999), Boundary-Layer Meteorol. 91:259–280: power transfer of block averaging, 1 − [sin(πfT)/(πfT)]² (formula from
 * memory). Expected numbers are that formula in numpy; ours come from averaging sinusoids over their phase.
 */
function transmittedPower(cyclesPerPeriod: number): number {
  const n = 36_000;
  const phases = 8;
  let power = 0;
  const series = new Float64Array(n);
  for (let p = 0; p < phases; p++) {
    for (let i = 0; i < n; i++) {
      series[i] = Math.cos((2 * Math.PI * cyclesPerPeriod * (i + 0.5)) / n + (2 * Math.PI * p) / phases);
    }
    removeBlockMean(series, series);
    power += moments(series).variance;
  }
  // A sinusoid of amplitude 1 carries a variance of ½.
  return power / phases / 0.5;
}

describe('block averaging', () => {
  it.each([
    [0.25, 0.1894305308612979],
    [0.5, 0.5947152654306489],
    [1, 1],
    [1.5, 0.9549683628256277],
    [3, 1],
  ])('lets pass the known share of a motion with fT = %f', (cycles, expected) => {
    // 36 000 samples against the continuous formula: the midpoint sum is off by about (π fT/n)²/6, below 1e-8.
    expect(Math.abs(transmittedPower(cycles) - expected)).toBeLessThan(1e-8);
  });

  it('leaves a covariance of R²/12 in two straight lines of rise R', () => {
    const n = 36_000;
    const rise = 4;
    const line = Float64Array.from({ length: n }, (_, i) => 290 + (rise * i) / (n - 1));
    removeBlockMean(line, line);
    const { cxy } = pairMoments(line, line);
    // Exactly R²/12 · (n + 1)/(n − 1) for n samples.
    expect(Math.abs(cxy / n / (((rise * rise) / 12) * ((n + 1) / (n - 1))) - 1)).toBeLessThan(1e-12);
  });
});
