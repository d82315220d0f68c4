import { describe, expect, it } from 'vitest';
import { moments } from '../../processing/numerics/moments';
import { SplitMix64 } from '../../processing/numerics/random';
import { defaultRecipe } from '../../processing/schemas/recipe';
import { flagAbove } from '../../processing/steps/screening';
import { amplitudeTests } from '../../processing/steps/screening/amplitude';
import { angleOfAttack } from '../../processing/steps/screening/angle-of-attack';
import { discontinuities } from '../../processing/steps/screening/discontinuities';
import { recordStatistics } from '../../processing/steps/screening/record';
import { windNonstationarity } from '../../processing/steps/screening/wind-nonstationarity';
import { turbulentSeries } from '../unit/steps/turbulent-state';

/**
 * Vickers & Mahrt (1997), Quality control and flux sampling problems for tower and aircraft data, J. Atmos. Oceanic Technol.
 * 14:512–526. The tests are theirs; exact numbers follow from their definitions by hand or from an independent numpy program, ranges
 * are what that program found in thirty synthetic records.
 */
const limits = defaultRecipe.settings.screening;
const amplitude = (values: Float64Array) => amplitudeTests(values, 1000, 500, 100);
const haar = (values: Float64Array, windowPoints = 6000) =>
  discontinuities(values, windowPoints, recordStatistics(values));
const sigmaOf = (values: Float64Array) => Math.sqrt(moments(values).variance);
const cleanRecords = [31, 32, 33, 34].flatMap((seed) => Object.values(turbulentSeries(seed)));

describe('amplitude resolution', () => {
  it('leaves no bin of a ramp empty', () => {
    expect(amplitude(Float64Array.from({ length: 1000 }, (_, k) => k / 999)).emptyShare).toBe(0);
  });

  it('leaves 90 of 100 bins empty for ten levels, which is hard', () => {
    const { emptyShare } = amplitude(Float64Array.from({ length: 1000 }, (_, k) => k % 10));
    expect(emptyShare).toBe(0.9);
    expect(flagAbove(emptyShare * 100, limits.amplitudeResolution.emptyPercent)).toBe(2);
  });

  it('finds about a fifth of the bins empty in clean turbulence, far from the limit', () => {
    // numpy found 0.16–0.25 in single records; the worst of 24 here is 0.29, the same in an independent program.
    const shares = cleanRecords.map((values) => amplitude(values).emptyShare).sort((x, y) => x - y);
    expect(shares[12]).toBeGreaterThan(0.16);
    expect(shares[12]).toBeLessThan(0.25);
    expect(shares[23]).toBeLessThan(0.35);
  });

  it('rejects steps of half a standard deviation and just passes an eighth', () => {
    // numpy found 0.90 and 0.67. Steps by the spread of the whole record; windows vary around it.
    const { windW } = turbulentSeries(31);
    const sigma = sigmaOf(windW);
    const quantised = (step: number) => amplitude(windW.map((x) => Math.round(x / step) * step)).emptyShare;
    expect(quantised(sigma / 2)).toBeGreaterThan(0.85);
    expect(quantised(sigma / 8)).toBeGreaterThan(0.55);
    expect(quantised(sigma / 8)).toBeLessThan(0.75);
  });
});

describe('dropouts', () => {
  it('finds longest runs of some four to eight points in clean turbulence, far from the limits', () => {
    // numpy found 4–8 points (0.4–0.8 %); the longest of 24 records here is 13, the same in an independent program.
    const found = cleanRecords.map((values) => amplitude(values));
    const longest = found.map((one) => Math.max(one.interiorShare, one.extremeShare)).sort((x, y) => x - y);
    expect(longest[0]).toBeGreaterThanOrEqual(0.004);
    expect(longest[12]).toBeLessThanOrEqual(0.008);
    expect(longest[23]).toBeLessThan(0.02);
  });

  it('counts 8 to 22 % of points beside one in the same bin there, so that the literal reading would reject it', () => {
    for (const values of cleanRecords) {
      const { sameBinShare } = amplitude(values);
      expect(sameBinShare).toBeGreaterThan(0.08);
      expect(sameBinShare).toBeLessThan(0.22);
    }
  });

  it('rejects 200 frozen points', () => {
    // 200 copies of the point before: a run of 201 in a window of 1000, or one more by chance.
    const { windW } = turbulentSeries(32);
    windW.fill(windW[9_299], 9_300, 9_500);
    const found = amplitude(windW);
    const share = Math.max(found.interiorShare, found.extremeShare);
    expect(share).toBeGreaterThanOrEqual(0.201);
    expect(share).toBeLessThanOrEqual(0.205);
    expect(flagAbove(share * 100, limits.dropouts.interiorPercent)).toBe(2);
  });
});

describe('skewness and kurtosis', () => {
  it('match scipy.stats on eight points', () => {
    const found = moments(Float64Array.of(1, 2, 0, -1, -2, 1, 3, -4));
    expect(found.skewness).toBeCloseTo(-0.4714045207910316, 14);
    expect(found.kurtosis).toBeCloseTo(2.2962962962962963, 14);
  });

  it('of a Gaussian record are near 0 and 3', () => {
    // Standard errors √(6/n) = 0.0129 and √(24/n) = 0.0258 for n = 36,000: four of each.
    const values = new Float64Array(36_000);
    new SplitMix64(1).fillNormal(values);
    const found = recordStatistics(values);
    expect(Math.abs(found.skewness)).toBeLessThan(0.052);
    expect(Math.abs(found.kurtosis - 3)).toBeLessThan(0.103);
  });
});

describe('discontinuities', () => {
  it('gives exactly 4 for a record that steps from 0 to 4 in its middle', () => {
    // σ = 2, range/4 = 1: the smaller is the normaliser.
    for (const n of [6000, 6002, 36_000]) {
      const found = haar(Float64Array.from({ length: n }, (_, i) => (i < n / 2 ? 0 : 4)));
      expect(found.meanStep).toBe(4);
      expect(found.meanStepAt).toBe(n / 2);
      expect(flagAbove(found.meanStep, limits.discontinuities.mean)).toBe(2);
    }
  });

  it('gives 4 h/N for a ramp', () => {
    // Halves of h samples differ by R h/(N − 1) of the total rise R, over R/4: one third for 5 min in 30 min.
    const n = 36_000;
    const found = haar(Float64Array.from({ length: n }, (_, i) => i));
    expect(found.meanStep).toBeCloseTo((4 * 3000) / (n - 1), 9);
    expect(found.meanStep).toBeCloseTo(0.333, 3);
  });

  it('lets a step of ten standard deviations in mid-record pass with a soft flag, because it widens its own normaliser', () => {
    // numpy found 2.2 (soft), and 3.3 (hard) for forty.
    const { windW } = turbulentSeries(33);
    const sigma = sigmaOf(windW);
    const stepped = (sigmas: number, from: number) =>
      haar(windW.map((x, i) => (i < from ? x : x + sigmas * sigma)));
    expect(stepped(10, 18_000).meanStep).toBeCloseTo(2.2, 0);
    expect(flagAbove(stepped(10, 18_000).meanStep, limits.discontinuities.mean)).toBe(1);
    expect(stepped(40, 18_000).meanStep).toBeCloseTo(3.3, 0);
    expect(flagAbove(stepped(40, 18_000).meanStep, limits.discontinuities.mean)).toBe(2);
    // 2.5 min before the end: 3.5 in the mean and 3.2 in the variance.
    const late = stepped(10, 33_000);
    expect(late.meanStep).toBeGreaterThan(3.2);
    expect(late.meanStep).toBeLessThan(3.8);
    expect(late.varianceStep).toBeGreaterThan(2.9);
    expect(late.varianceStep).toBeLessThan(3.5);
  });

  it('finds no step in clean turbulence', () => {
    // numpy found 0.7–1.2 in the mean and about 0.6 in the variance; both limits are 2.
    for (const values of cleanRecords) {
      const found = haar(values);
      expect(found.meanStep).toBeLessThan(1.4);
      expect(found.varianceStep).toBeLessThan(1.4);
    }
  });
});

describe('nonstationarity of the horizontal wind', () => {
  const test = (u: (i: number) => number, v: (i: number) => number) => {
    const of = (f: (i: number) => number) =>
      recordStatistics(Float64Array.from({ length: 101 }, (_, i) => f(i)));
    return windNonstationarity(of(u), of(v), 101);
  };

  it('is 0.6 for a wind that rises by 3 around a mean of 5, which is soft', () => {
    const found = test(
      (i) => 5 + (3 * (i - 50)) / 100,
      () => 0,
    );
    expect(found.alongWind).toBeCloseTo(0.6, 13);
    expect(found.vector).toBeCloseTo(0.6, 13);
    expect(flagAbove(found.vector, limits.windNonstationarity.ratio)).toBe(1);
  });

  it('is 0.3 across for a cross-wind that changes by 1.5', () => {
    const found = test(
      (i) => 5 + (3 * (i - 50)) / 100,
      (i) => (1.5 * (i - 50)) / 100,
    );
    expect(found.crossWind).toBeCloseTo(0.3, 13);
    expect(found.alongWind).toBeCloseTo(0.6, 13);
    expect(found.vector).toBeCloseTo(Math.hypot(0.6, 0.3), 13);
  });
});

describe('angle of attack (project choice; motivated by Gash & Dolman 2003)', () => {
  it('flags 6 % of samples at 26° against an acceptance of 25° softly', () => {
    const n = 1000;
    const u = new Float64Array(n).fill(3);
    const v = new Float64Array(n).fill(4);
    const steep = 5 * Math.tan((26 * Math.PI) / 180);
    const w = Float64Array.from({ length: n }, (_, i) => (i % 100 < 6 ? steep : 0.1));
    const found = angleOfAttack(u, v, w, 25);
    expect(found.steepShare).toBeCloseTo(0.06, 13);
    expect(flagAbove(found.steepShare * 100, limits.angleOfAttack.sharePercent)).toBe(1);
    expect(angleOfAttack(u, v, w, 26).steepShare).toBe(0);
    expect(found.percentilesDeg[2]).toBeCloseTo(26, 9);
  });
});
