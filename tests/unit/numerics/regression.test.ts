import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { leastSquaresLine, lineAt, removeLine } from '../../../processing/numerics/regression';
import { slowSeries, withGaps } from '../steps/recorded-state';

describe('least-squares line', () => {
  it('agrees with numpy.polyfit on a gappy record', () => {
    // numpy.polyfit(t − mean t, x, 1) over the 5938 valid samples.
    const line = leastSquaresLine(withGaps(slowSeries(42, 6000, 300), 5, 97));
    expect(line.n).toBe(5938);
    expect(line.slope / -1.5267397713320923e-5).toBeCloseTo(1, 9);
    expect(line.centre).toBeCloseTo(2999.8758841360727, 9);
    expect(line.valueAtCentre).toBeCloseTo(299.9939208609678, 10);
  });

  it('finds a pure line whatever is missing, and leaves nothing of it', () => {
    fc.assert(
      fc.property(
        fc.double({ min: -5, max: 5, noNaN: true }),
        fc.double({ min: -100, max: 100, noNaN: true }),
        fc.uniqueArray(fc.integer({ min: 0, max: 49 }), { maxLength: 40 }),
        (slope, start, gaps) => {
          const values = Float64Array.from({ length: 50 }, (_, i) => start + slope * i);
          for (const gap of gaps) values[gap] = NaN;
          const line = leastSquaresLine(values);
          expect(line.slope).toBeCloseTo(slope, 11);
          expect(lineAt(line, 0)).toBeCloseTo(start, 10);
          const rest = new Float64Array(50);
          removeLine(values, rest);
          rest.forEach((value, i) => {
            if (gaps.includes(i)) expect(value).toBeNaN();
            else expect(Math.abs(value)).toBeLessThan(1e-12 * Math.max(1, Math.abs(start) + 250));
          });
        },
      ),
    );
  });

  it('has no slope through one value and nothing through none', () => {
    const one = leastSquaresLine(Float64Array.of(NaN, 4, NaN));
    expect(one).toMatchObject({ n: 1, centre: 1, valueAtCentre: 4 });
    expect(one.slope).toBeNaN();
    const none = leastSquaresLine(Float64Array.of(NaN, NaN));
    expect(none.n).toBe(0);
    expect(none.valueAtCentre).toBeNaN();
  });

  it('works in place', () => {
    const values = Float64Array.of(1, 2, 3, 4.5);
    const line = removeLine(values, values);
    // Hand calculation: mean 2.625, Σtc·x = 1.5·(4.5 − 1) + 0.5·(3 − 2) = 5.75, Σtc² = 5, slope 1.15.
    expect(line.slope).toBeCloseTo(1.15, 14);
    expect(values[0]).toBeCloseTo(1 - (2.625 - 1.15 * 1.5), 14);
  });
});
