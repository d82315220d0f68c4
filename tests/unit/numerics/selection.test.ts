import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  median,
  medianAbsoluteDeviation,
  quantile,
  selectInPlace,
} from '../../../processing/numerics/selection';
import { slowSeries, withGaps } from '../steps/recorded-state';

describe('selection', () => {
  it('puts the k-th smallest value in its place with smaller before and larger after it', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -20, max: 20 }), { minLength: 1, maxLength: 200 }),
        fc.nat(),
        (values, pick) => {
          const k = pick % values.length;
          const work = Float64Array.from(values);
          const found = selectInPlace(work, k, 0, work.length - 1);
          const sorted = [...values].sort((a, b) => a - b);
          expect(found).toBe(sorted[k]);
          expect(Array.from(work).sort((a, b) => a - b)).toEqual(sorted);
          for (let i = 0; i < k; i++) expect(work[i]).toBeLessThanOrEqual(found);
          for (let i = k + 1; i < work.length; i++) expect(work[i]).toBeGreaterThanOrEqual(found);
        },
      ),
    );
  });

  it('selects in long arrays, where a sample narrows the range first', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 4999 }), fc.integer({ min: 1, max: 1e6 }), (k, seed) => {
        const values = slowSeries(seed, 5000);
        const sorted = values.slice().sort();
        expect(selectInPlace(values.slice(), k, 0, 4999)).toBe(sorted[k]);
      }),
      { numRuns: 50 },
    );
  });

  it('copes with sorted, reversed and all-equal values', () => {
    const n = 4001;
    const rising = Float64Array.from({ length: n }, (_, i) => i);
    const falling = Float64Array.from({ length: n }, (_, i) => n - 1 - i);
    expect(median(rising)).toBe(2000);
    expect(median(falling)).toBe(2000);
    expect(median(new Float64Array(n).fill(7))).toBe(7);
  });
});

describe('median, quantiles and MAD', () => {
  it('agrees with numpy on a gappy record', () => {
    // numpy.median and numpy.quantile (linear) of the same 5938 valid numbers.
    const values = withGaps(slowSeries(42, 6000, 300), 5, 97);
    const before = values.slice();
    expect(median(values)).toBeCloseTo(300.0302804494879, 12);
    const spread = medianAbsoluteDeviation(values);
    expect(spread.n).toBe(5938);
    expect(spread.mad).toBeCloseTo(0.6408408364394234, 12);
    expect(quantile(values, 0.01)).toBeCloseTo(297.83100356045253, 12);
    expect(quantile(values, 0.1)).toBeCloseTo(298.788079411828, 12);
    expect(quantile(values, 0.5)).toBeCloseTo(300.0302804494879, 12);
    expect(quantile(values, 0.9)).toBeCloseTo(301.1476230714502, 12);
    expect(quantile(values, 0.975)).toBeCloseTo(301.7426510880035, 12);
    expect(values).toEqual(before);
  });

  it('takes the mean of the two in the middle of an even count', () => {
    expect(median(Float64Array.of(4, 1, 3, 2))).toBe(2.5);
    expect(median(Float64Array.of(5, NaN, 1, 3))).toBe(3);
    expect(median(Float64Array.of(9))).toBe(9);
  });

  it('is NaN where nothing is valid', () => {
    expect(median(Float64Array.of(NaN, NaN))).toBeNaN();
    expect(quantile(new Float64Array(0), 0.5)).toBeNaN();
    expect(medianAbsoluteDeviation(Float64Array.of(NaN)).mad).toBeNaN();
  });

  it('gives minimum and maximum at 0 and 1', () => {
    const values = slowSeries(3, 501);
    expect(quantile(values, 0)).toBe(Math.min(...values));
    expect(quantile(values, 1)).toBe(Math.max(...values));
  });

  it('moves with a shift and stretches with a factor', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -1000, max: 1000 }), { minLength: 1, maxLength: 80 }),
        fc.integer({ min: -50, max: 50 }),
        fc.integer({ min: 1, max: 9 }),
        (values, shift, factor) => {
          // Whole numbers and halves: exact in double precision.
          const a = medianAbsoluteDeviation(Float64Array.from(values));
          const b = medianAbsoluteDeviation(Float64Array.from(values, (value) => value * factor + shift));
          expect(b.median).toBe(a.median * factor + shift);
          expect(b.mad).toBe(a.mad * factor);
        },
      ),
    );
  });
});
