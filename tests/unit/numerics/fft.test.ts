import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  createFft,
  isSmooth,
  nextSmoothLength,
  seriesOfHalfSpectrum,
  transformReal,
  transformTwoReal,
} from '../../../processing/numerics/fft';
import { SplitMix64 } from '../../../processing/numerics/random';

/** The definition itself, summed term by term: the independent answer. */
function definition(re: Float64Array, im: Float64Array): { re: Float64Array; im: Float64Array } {
  const n = re.length;
  const out = { re: new Float64Array(n), im: new Float64Array(n) };
  for (let k = 0; k < n; k++) {
    for (let j = 0; j < n; j++) {
      const angle = (-2 * Math.PI * ((j * k) % n)) / n;
      out.re[k] += re[j] * Math.cos(angle) - im[j] * Math.sin(angle);
      out.im[k] += re[j] * Math.sin(angle) + im[j] * Math.cos(angle);
    }
  }
  return out;
}

function noise(n: number, seed: number): Float64Array {
  const random = new SplitMix64(seed);
  return Float64Array.from({ length: n }, () => random.normal());
}

function largestDifference(a: Float64Array, b: Float64Array): number {
  let largest = 0;
  for (let i = 0; i < a.length; i++) largest = Math.max(largest, Math.abs(a[i] - b[i]));
  return largest;
}

describe('createFft', () => {
  // Every radix alone, mixed, and lengths that need the chirp (primes above 5, and their multiples). Rounding grows like sqrt(n) eps.
  const lengths = [
    1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 12, 13, 14, 15, 16, 20, 25, 27, 30, 31, 32, 36, 45, 49, 60, 64, 75, 97,
    100, 120, 121, 125, 180, 243, 360, 384, 509,
  ];
  it.each(lengths)('equals the term-by-term definition for length %i', (n) => {
    const re = noise(n, 1);
    const im = noise(n, 2);
    const expected = definition(re, im);
    createFft(n).forward(re, im);
    expect(largestDifference(re, expected.re)).toBeLessThan(2e-12);
    expect(largestDifference(im, expected.im)).toBeLessThan(2e-12);
  });

  it.each([36000, 36450, 40000, 17977])('returns the series after forward and inverse for length %i', (n) => {
    const re = noise(n, 3);
    const im = noise(n, 4);
    const keptRe = re.slice();
    const keptIm = im.slice();
    const fft = createFft(n);
    fft.forward(re, im);
    fft.inverse(re, im);
    expect(largestDifference(re, keptRe)).toBeLessThan(1e-12);
    expect(largestDifference(im, keptIm)).toBeLessThan(1e-12);
  });

  it('turns a unit impulse into ones and a constant into one line', () => {
    for (const n of [8, 15, 22, 36000]) {
      const fft = createFft(n);
      const re = new Float64Array(n);
      const im = new Float64Array(n);
      re[0] = 1;
      fft.forward(re, im);
      expect(largestDifference(re, new Float64Array(n).fill(1))).toBeLessThan(1e-12);
      re.fill(3);
      im.fill(0);
      fft.forward(re, im);
      expect(re[0]).toBeCloseTo(3 * n, 6);
      expect(Math.max(...re.slice(1).map(Math.abs))).toBeLessThan(1e-8);
    }
  });

  it('keeps the sum of squares (Parseval) and is linear', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 300 }),
        fc.integer({ min: 0, max: 1e6 }),
        fc.double({ min: -3, max: 3, noNaN: true }),
        (n, seed, factor) => {
          const a = noise(n, seed);
          const b = noise(n, seed + 1);
          const fft = createFft(n);
          const energy = a.reduce((sum, x, i) => sum + x * x + b[i] * b[i], 0);
          const fa = [a.slice(), b.slice()];
          fft.forward(fa[0], fa[1]);
          const transformed = fa[0].reduce((sum, x, i) => sum + x * x + fa[1][i] * fa[1][i], 0) / n;
          expect(Math.abs(transformed / energy - 1)).toBeLessThan(1e-11);

          const mixed = a.map((x, i) => x + factor * b[i]);
          const zero = new Float64Array(n);
          fft.forward(mixed, zero);
          const onlyA = [a.slice(), new Float64Array(n)];
          const onlyB = [b.slice(), new Float64Array(n)];
          fft.forward(onlyA[0], onlyA[1]);
          fft.forward(onlyB[0], onlyB[1]);
          const sum = onlyA[0].map((x, i) => x + factor * onlyB[0][i]);
          expect(largestDifference(mixed, sum)).toBeLessThan(1e-10);
        },
      ),
      { numRuns: 60 },
    );
  });

  it('refuses lengths that are no positive integers and arrays of another length', () => {
    expect(() => createFft(0)).toThrow(RangeError);
    expect(() => createFft(2.5)).toThrow(RangeError);
    expect(() => createFft(8).forward(new Float64Array(8), new Float64Array(7))).toThrow(RangeError);
  });
});

describe('nextSmoothLength', () => {
  it('finds the smallest length with factors 2, 3 and 5, checked by trying every integer', () => {
    for (let n = 1; n < 3000; n++) {
      let expected = n;
      while (!isSmooth(expected)) expected++;
      expect(nextSmoothLength(n)).toBe(expected);
    }
  });

  it('keeps half an hour at 20 Hz and at 10 Hz as it is', () => {
    expect(nextSmoothLength(36000)).toBe(36000);
    expect(nextSmoothLength(18000)).toBe(18000);
    expect(nextSmoothLength(36001)).toBe(36450);
  });
});

describe('real series', () => {
  it.each([1, 2, 3, 8, 15, 36, 77, 360])(
    'gives the half spectra of two series from one transform, length %i',
    (n) => {
      const a = noise(n, 5);
      const b = noise(n, 6);
      const [first, second] = transformTwoReal(a, b);
      for (const [series, spectrum] of [
        [a, first],
        [b, second],
      ] as const) {
        const expected = definition(series, new Float64Array(n));
        const alone = transformReal(series);
        const half = (n >> 1) + 1;
        expect(spectrum.re).toHaveLength(half);
        expect(largestDifference(spectrum.re, expected.re.slice(0, half))).toBeLessThan(1e-11);
        expect(largestDifference(spectrum.im, expected.im.slice(0, half))).toBeLessThan(1e-11);
        expect(largestDifference(alone.re, expected.re.slice(0, half))).toBeLessThan(1e-11);
        expect(largestDifference(alone.im, expected.im.slice(0, half))).toBeLessThan(1e-11);
        expect(largestDifference(seriesOfHalfSpectrum(spectrum, n), series)).toBeLessThan(1e-12);
      }
    },
  );
});
