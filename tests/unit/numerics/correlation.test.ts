import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { biasedCovariances, laggedCovariances } from '../../../processing/numerics/correlation';
import { SplitMix64 } from '../../../processing/numerics/random';

/** The definition, pair by pair. */
function definition(x: Float64Array, y: Float64Array, lag: number): { covariance: number; pairs: number } {
  const a: number[] = [];
  const b: number[] = [];
  for (let i = 0; i < x.length; i++) {
    const j = i + lag;
    if (j < 0 || j >= y.length || Number.isNaN(x[i]) || Number.isNaN(y[j])) continue;
    a.push(x[i]);
    b.push(y[j]);
  }
  if (a.length === 0) return { covariance: Number.NaN, pairs: 0 };
  const meanA = a.reduce((sum, v) => sum + v, 0) / a.length;
  const meanB = b.reduce((sum, v) => sum + v, 0) / b.length;
  return {
    covariance: a.reduce((sum, v, i) => sum + (v - meanA) * (b[i] - meanB), 0) / a.length,
    pairs: a.length,
  };
}

function series(n: number, seed: number, missingShare: number, offset = 0): Float64Array {
  const random = new SplitMix64(seed);
  return Float64Array.from({ length: n }, () =>
    random.uniform() < missingShare ? Number.NaN : offset + random.normal(),
  );
}

function expectDefinition(x: Float64Array, y: Float64Array, maxLag: number, tolerance = 1e-11): void {
  const found = laggedCovariances(x, y, maxLag);
  expect(found.covariances).toHaveLength(2 * maxLag + 1);
  for (let lag = -maxLag; lag <= maxLag; lag++) {
    const expected = definition(x, y, lag);
    expect(found.pairs[lag + maxLag]).toBe(expected.pairs);
    const value = found.covariances[lag + maxLag];
    if (expected.pairs === 0) expect(value).toBeNaN();
    else expect(Math.abs(value - expected.covariance)).toBeLessThan(tolerance);
  }
}

describe('laggedCovariances', () => {
  it('equals the definition by direct sums, with and without gaps', () => {
    expectDefinition(series(500, 1, 0), series(500, 2, 0), 20);
    expectDefinition(series(500, 1, 0.1), series(500, 2, 0.2), 20);
    expectDefinition(series(7, 1, 0.2), series(7, 2, 0.2), 12);
  });

  it('equals the definition through the transform, without gaps and with few', () => {
    expectDefinition(series(900, 3, 0), series(900, 4, 0), 150);
    expectDefinition(series(900, 3, 0.02), series(900, 4, 0.05), 150);
  });

  it('equals the definition through the transform of masks, with many gaps', () => {
    // More than 400 000 visits of gaps: 1 800 gaps × 301 lags.
    expectDefinition(series(4000, 5, 0.25), series(4000, 6, 0.2), 150);
  });

  it('keeps its digits on a large offset (kelvin, absolute densities)', () => {
    expectDefinition(series(900, 7, 0.02, 300), series(900, 8, 0, 1e4), 60, 1e-9);
  });

  it('equals the definition for any small length, lag and pattern of gaps', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 60 }),
        fc.integer({ min: 0, max: 70 }),
        fc.integer({ min: 0, max: 1e6 }),
        fc.double({ min: 0, max: 1, noNaN: true }),
        (n, maxLag, seed, share) =>
          expectDefinition(series(n, seed, share), series(n, seed + 1, share / 2), maxLag),
      ),
      { numRuns: 150 },
    );
  });

  it('keeps the digits of a series that is a thousand million times smaller than the other', () => {
    for (const share of [0, 0.3]) {
      const x = series(4000, 13, share);
      const y = series(4000, 14, share);
      const tiny = y.map((value) => value * 1e-9);
      const { covariances } = laggedCovariances(x, tiny, 150);
      for (const lag of [-150, -3, 0, 77]) {
        expect(Math.abs(covariances[lag + 150] / definition(x, tiny, lag).covariance - 1)).toBeLessThan(
          1e-10,
        );
      }
    }
  });

  it('is linear in either series', () => {
    const x = series(2000, 9, 0);
    const y = series(2000, 10, 0);
    const z = series(2000, 11, 0);
    const mixed = y.map((value, i) => 3 * value - 2 * z[i]);
    const whole = laggedCovariances(x, mixed, 200).covariances;
    const first = laggedCovariances(x, y, 200).covariances;
    const second = laggedCovariances(x, z, 200).covariances;
    for (let at = 0; at < whole.length; at++)
      expect(whole[at]).toBeCloseTo(3 * first[at] - 2 * second[at], 11);
  });

  it('puts a series that was recorded 7 samples later at lag 7', () => {
    const x = series(1000, 12, 0);
    const later = Float64Array.from(x, (_, i) => (i < 7 ? Number.NaN : x[i - 7]));
    const { covariances } = laggedCovariances(x, later, 50);
    expect(covariances.indexOf(Math.max(...covariances)) - 50).toBe(7);
  });

  it('gives no covariance, but a count of zero, for a series without values', () => {
    const found = laggedCovariances(series(100, 1, 0), new Float64Array(100).fill(Number.NaN), 5);
    expect([...found.pairs]).toEqual(new Array(11).fill(0));
    expect(found.covariances.every(Number.isNaN)).toBe(true);
    expect(
      laggedCovariances(new Float64Array(0), new Float64Array(0), 2).covariances.every(Number.isNaN),
    ).toBe(true);
  });

  it('refuses series of different lengths', () => {
    expect(() => laggedCovariances(new Float64Array(3), new Float64Array(4), 1)).toThrow(RangeError);
  });
});

describe('biasedCovariances', () => {
  function expectBiased(
    x: Float64Array,
    y: Float64Array,
    maxLag: number,
    found: ReturnType<typeof biasedCovariances>[number],
  ): void {
    const valid = x.map((value, i) => (Number.isNaN(value) || Number.isNaN(y[i]) ? 0 : 1));
    const pairs = valid.reduce((sum, v) => sum + v, 0);
    const mean = (values: Float64Array): number =>
      values.reduce((sum, v, i) => sum + (valid[i] ? v : 0), 0) / pairs;
    const [meanX, meanY] = [mean(x), mean(y)];
    const dx = x.map((value, i) => (valid[i] ? value - meanX : 0));
    const dy = y.map((value, i) => (valid[i] ? value - meanY : 0));
    const sum = (a: Float64Array, b: Float64Array, p: number): number =>
      a.reduce((total, value, i) => (i + p >= 0 && i + p < b.length ? total + value * b[i + p] : total), 0) /
      pairs;
    expect(found.pairs).toBe(pairs);
    for (let p = -maxLag; p <= maxLag; p++) {
      if (p >= 0) {
        expect(found.xx[p]).toBeCloseTo(sum(dx, dx, p), 11);
        expect(found.yy[p]).toBeCloseTo(sum(dy, dy, p), 11);
      }
      expect(found.xy[p + maxLag]).toBeCloseTo(sum(dx, dy, p), 11);
    }
  }

  it('equals its definition for three pairs at once, with gaps', () => {
    const w = series(400, 20, 0.05);
    const others = [series(400, 21, 0, 290), series(400, 22, 0.1), series(400, 23, 0.3)];
    const found = biasedCovariances(
      others.map((y) => ({ x: w, y })),
      90,
    );
    expect(found).toHaveLength(3);
    others.forEach((y, index) => expectBiased(w, y, 90, found[index]));
  });

  it('gives the same for a pair alone and beside one a thousand million times larger', () => {
    const [x, y] = [series(500, 24, 0), series(500, 25, 0).map((value) => value * 1e-9)];
    const large = { x: series(500, 26, 0).map((value) => value * 1e3), y: series(500, 27, 0) };
    const [alone] = biasedCovariances([{ x, y }], 40);
    const [, beside] = biasedCovariances([large, { x, y }], 40);
    for (let at = 0; at < alone.xy.length; at++)
      expect(Math.abs(beside.xy[at] - alone.xy[at]) * 1e9).toBeLessThan(1e-13);
    for (let p = 0; p < alone.yy.length; p++)
      expect(Math.abs(beside.yy[p] - alone.yy[p]) * 1e18).toBeLessThan(1e-13);
  });

  it('cuts the lags to the length of a short record', () => {
    const [found] = biasedCovariances([{ x: series(8, 1, 0), y: series(8, 2, 0) }], 50);
    expect(found.xx).toHaveLength(8);
    expect(found.xy).toHaveLength(15);
  });

  it('gives NaN when no pair is valid', () => {
    const [found] = biasedCovariances([{ x: series(8, 1, 0), y: new Float64Array(8).fill(Number.NaN) }], 3);
    expect(found.pairs).toBe(0);
    expect(found.xx.every(Number.isNaN)).toBe(true);
    expect(found.xy.every(Number.isNaN)).toBe(true);
  });
});
