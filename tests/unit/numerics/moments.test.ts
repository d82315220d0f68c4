import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  countValid,
  covariance,
  isConstantSignal,
  mean,
  mergeMoments,
  moments,
  pairMoments,
} from '../../../processing/numerics/moments';
import { slowSeries, withGaps } from '../steps/recorded-state';

const finite = fc.double({ min: -1e3, max: 1e3, noNaN: true });
const list = fc.array(finite, { minLength: 3, maxLength: 60 });

describe('moments of one series', () => {
  it('agrees with numpy and scipy on a gappy record far from zero', () => {
    // numpy 1.x mean, var; scipy.stats.skew and kurtosis(fisher=False) of the same 6000 numbers with every 97th missing.
    const found = moments(withGaps(slowSeries(42, 6000, 300), 5, 97));
    expect(found.n).toBe(5938);
    expect(found.mean).toBeCloseTo(299.9939208609677, 10);
    expect(found.variance).toBeCloseTo(0.8510647499374577, 11);
    expect(found.skewness).toBeCloseTo(-0.1095323279197815, 10);
    expect(found.kurtosis).toBeCloseTo(2.9186219496651495, 10);
    expect(found.min).toBeCloseTo(296.6086125846868, 12);
    expect(found.max).toBeCloseTo(303.0487905499789, 12);
  });

  it('keeps the variance of small fluctuations on a large mean', () => {
    // ±1e-3 around 1e6: variance 1e-6. mean(x²) − mean(x)² at 1e12 has rounding of 1e-4 and would give nothing of it.
    const values = Float64Array.from({ length: 1000 }, (_, i) => 1e6 + (i % 2 === 0 ? 1e-3 : -1e-3));
    expect(moments(values).variance / 1e-6).toBeCloseTo(1, 6);
  });

  it('calls a series constant when it differs by rounding only, and has no shape then', () => {
    const found = moments(Float64Array.from({ length: 100 }, () => 0.1 + 0.2));
    expect(found.isConstant).toBe(true);
    expect(found.variance).toBe(0);
    expect(found.skewness).toBeNaN();
    expect(found.kurtosis).toBeNaN();
    // σ ≤ 1e-12 max(1, |mean|): at a mean of 300 the edge lies at 3e-10.
    expect(isConstantSignal(2.9e-10 ** 2, 300)).toBe(true);
    expect(isConstantSignal(3.1e-10 ** 2, 300)).toBe(false);
  });

  it('returns NaN and counts nothing where every value is missing', () => {
    const found = moments(new Float64Array(5).fill(NaN));
    expect(found.n).toBe(0);
    expect(found.mean).toBeNaN();
    expect(found.variance).toBeNaN();
    expect(mean(new Float64Array(0))).toBeNaN();
    expect(countValid(Float64Array.of(1, NaN, 3))).toBe(2);
  });

  it('takes a stretch of the series only', () => {
    // 3, 4, 5: mean 4, variance 2/3.
    const found = moments(Float64Array.of(100, 3, 4, 5, 100), 1, 4);
    expect(found.mean).toBe(4);
    expect(found.variance).toBeCloseTo(2 / 3, 15);
  });

  it('moves the mean and nothing else when all values shift', () => {
    fc.assert(
      fc.property(list, fc.integer({ min: -1000, max: 1000 }), (values, shift) => {
        const a = moments(Float64Array.from(values));
        const b = moments(Float64Array.from(values, (value) => value + shift));
        fc.pre(a.variance > 1e-3);
        // 1e3 values with 16 digits: 1e-10 of slack.
        expect(b.mean - a.mean).toBeCloseTo(shift, 9);
        expect(b.variance / a.variance).toBeCloseTo(1, 6);
        expect(b.kurtosis / a.kurtosis).toBeCloseTo(1, 5);
      }),
    );
  });

  it('scales mean by a factor, variance by its square, and leaves the shape', () => {
    fc.assert(
      fc.property(list, fc.double({ min: 0.1, max: 50, noNaN: true }), (values, factor) => {
        const a = moments(Float64Array.from(values));
        const b = moments(Float64Array.from(values, (value) => value * factor));
        fc.pre(a.variance > 1e-3);
        expect(b.variance / (a.variance * factor * factor)).toBeCloseTo(1, 9);
        expect(b.skewness).toBeCloseTo(a.skewness, 6);
        expect(b.kurtosis / a.kurtosis).toBeCloseTo(1, 9);
      }),
    );
  });
});

describe('moments of pairs', () => {
  it('agrees with numpy on gappy series at lags 0, 7 and −7', () => {
    // numpy: means over exactly the pairs valid at that lag.
    const x = withGaps(slowSeries(1, 2000), 3, 53);
    const y = withGaps(slowSeries(2, 2000), 10, 31);
    const expected: [number, number, number][] = [
      [0, 1898, -0.033179248728641406],
      [7, 1892, -0.06198172579489597],
      [-7, 1893, 0.02850283587553135],
    ];
    for (const [lag, pairs, value] of expected) {
      const found = covariance(x, y, lag);
      expect(found.pairs).toBe(pairs);
      expect(found.covariance).toBeCloseTo(value, 13);
    }
  });

  it('uses the means of the pairs, not of all values', () => {
    // Pairs (0,0), (1,1): covariance 1/4. The lone 100 has no partner and must not matter.
    const found = covariance(Float64Array.of(0, 1, 100), Float64Array.of(0, 1, NaN));
    expect(found).toEqual({ covariance: 0.25, pairs: 2 });
  });

  it('has no covariance without pairs', () => {
    const found = covariance(Float64Array.of(1, NaN), Float64Array.of(NaN, 1));
    expect(found.pairs).toBe(0);
    expect(found.covariance).toBeNaN();
  });

  it('merges two parts into the moments of the whole', () => {
    fc.assert(
      fc.property(list, list, (left, right) => {
        const x = Float64Array.from([...left, ...right]);
        const y = Float64Array.from(x, (value, i) => Math.sin(i) * 10 + value / 2);
        const cut = left.length;
        const merged = mergeMoments(pairMoments(x, y, 0, cut), pairMoments(x, y, cut));
        const whole = pairMoments(x, y);
        // Sums of up to 120 products of size 1e6: 1e-13 relative.
        const scale = Math.max(1, whole.m2x, whole.m2y);
        expect(merged.n).toBe(whole.n);
        expect(merged.meanX).toBeCloseTo(whole.meanX, 9);
        expect(Math.abs(merged.m2x - whole.m2x) / scale).toBeLessThan(1e-12);
        expect(Math.abs(merged.m2y - whole.m2y) / scale).toBeLessThan(1e-12);
        expect(Math.abs(merged.cxy - whole.cxy) / scale).toBeLessThan(1e-12);
      }),
    );
  });

  it('leaves one part as it is when the other is empty', () => {
    const empty = pairMoments(new Float64Array(0), new Float64Array(0));
    const part = pairMoments(Float64Array.of(1, 2, 4), Float64Array.of(3, 5, 4));
    expect(mergeMoments(empty, part)).toEqual(part);
    expect(mergeMoments(part, empty)).toEqual(part);
  });
});
