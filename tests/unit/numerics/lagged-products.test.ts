import { describe, expect, it } from 'vitest';
import { createFft, nextSmoothLength } from '../../../processing/numerics/fft';
import { laggedProducts as productsOf } from '../../../processing/numerics/lagged-products';
import { SplitMix64 } from '../../../processing/numerics/random';

function noise(n: number, seed: number): Float64Array {
  const random = new SplitMix64(seed);
  return Float64Array.from({ length: n }, () => random.normal());
}

/** Products of series without gaps that keep their mean. */
function laggedProducts(
  series: readonly Float64Array[],
  pairs: readonly (readonly [number, number])[],
  maxLag: number,
): Float64Array[] {
  return productsOf(
    series.map((values) => ({ values, mean: 0, mask: null })),
    pairs,
    maxLag,
  );
}

/** The definition, product by product. */
function definition(x: Float64Array, y: Float64Array, lag: number): number {
  let sum = 0;
  for (let i = Math.max(0, -lag); i < Math.min(x.length, y.length - lag); i++) sum += x[i] * y[i + lag];
  return sum;
}

/** The same through one transform over the whole record, in plain TypeScript. */
function throughOneTransform(x: Float64Array, y: Float64Array, maxLag: number): Float64Array {
  const length = nextSmoothLength(x.length + maxLag);
  const fft = createFft(length);
  const [xr, xi, yr, yi] = [0, 1, 2, 3].map(() => new Float64Array(length));
  xr.set(x);
  yr.set(y);
  fft.forward(xr, xi);
  fft.forward(yr, yi);
  for (let k = 0; k < length; k++) {
    const re = xr[k] * yr[k] + xi[k] * yi[k];
    xi[k] = xr[k] * yi[k] - xi[k] * yr[k];
    xr[k] = re;
  }
  fft.inverse(xr, xi);
  return Float64Array.from({ length: 2 * maxLag + 1 }, (_, at) =>
    at < maxLag ? xr[length + at - maxLag] : xr[at - maxLag],
  );
}

/** Largest difference, by the largest sum. */
function worst(found: Float64Array, expected: Float64Array): number {
  const size = expected.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  return found.reduce((most, value, at) => Math.max(most, Math.abs(value - expected[at])), 0) / size;
}

describe('laggedProducts', () => {
  it('equals the definition for records shorter and longer than a block, and for every size of block', () => {
    // Blocks of 256, 512, 1024 and 2048: odd and even powers of two end in different last stages.
    for (const [n, maxLag] of [
      [1, 0],
      [5, 4],
      [256, 30],
      [700, 255],
      [513, 256],
      [1500, 700],
      [3000, 1030],
    ]) {
      const [x, y] = [noise(n, 1), noise(n, 2)];
      const [auto, cross] = laggedProducts(
        [x, y],
        [
          [0, 0],
          [0, 1],
        ],
        maxLag,
      );
      const lags = Float64Array.from({ length: 2 * maxLag + 1 }, (_, at) => at - maxLag);
      expect(
        worst(
          auto,
          lags.map((lag) => definition(x, x, lag)),
        ),
      ).toBeLessThan(1e-14);
      // Sums of independent noise are about 1/√n of the largest one there could be.
      expect(
        worst(
          cross,
          lags.map((lag) => definition(x, y, lag)),
        ),
      ).toBeLessThan(2e-13);
    }
  });

  it('equals one transform over the whole record for half an hour at 20 Hz', () => {
    const x = noise(36_000, 3);
    const y = noise(36_000, 4).map((value, i) => value + 0.3 * (x[i - 7] ?? 0));
    for (const maxLag of [1241, 4000]) {
      const [found] = laggedProducts([x, y], [[0, 1]], maxLag);
      expect(worst(found, throughOneTransform(x, y, maxLag))).toBeLessThan(1e-14);
    }
  });

  it('takes off means, and counts as nothing what is missing in a series or its mask', () => {
    const gappy = (n: number, seed: number, every: number, offset: number): Float64Array =>
      noise(n, seed).map((value, i) => (i % every === 2 ? Number.NaN : offset + value));
    // An odd count, so that the last block ends on half a pair.
    const [x, y] = [gappy(777, 11, 7, 300), gappy(777, 12, 5, -4)];
    const [found] = productsOf(
      [
        { values: x, mean: 300.25, mask: y },
        { values: y, mean: -4, mask: null },
      ],
      [[0, 1]],
      60,
    );
    const dx = x.map((value, i) => (Number.isNaN(value) || Number.isNaN(y[i]) ? 0 : value - 300.25));
    const dy = y.map((value) => (Number.isNaN(value) ? 0 : value + 4));
    const expected = Float64Array.from({ length: 121 }, (_, at) => definition(dx, dy, at - 60));
    expect(worst(found, expected)).toBeLessThan(1e-13);
  });

  it('is zero beyond the record', () => {
    const [found] = laggedProducts([noise(10, 5), noise(10, 6)], [[0, 1]], 14);
    const beyond = [...found.subarray(0, 5), ...found.subarray(24)];
    expect(beyond.every((sum) => Math.abs(sum) < 1e-14)).toBe(true);
  });

  it('keeps the digits of a series that is a million million times smaller than another', () => {
    const [x, large] = [noise(2000, 7).map((value) => value * 1e-12), noise(2000, 8)];
    const alone = laggedProducts([x], [[0, 0]], 300)[0];
    const beside = laggedProducts(
      [large, x],
      [
        [1, 1],
        [0, 1],
      ],
      300,
    )[0];
    expect(beside).toEqual(alone);
  });

  it('gives the same bits whatever was asked before', () => {
    const [x, y] = [noise(5000, 9), noise(5000, 10)];
    const first = laggedProducts([x, y], [[0, 1]], 600)[0];
    // More sizes than are kept, the largest of which makes the memory grow.
    for (const maxLag of [100, 300, 1500, 3000, 4900, 9000, 20_000]) laggedProducts([y], [[0, 0]], maxLag);
    expect(laggedProducts([x, y], [[0, 1]], 600)[0]).toEqual(first);
  });
});
