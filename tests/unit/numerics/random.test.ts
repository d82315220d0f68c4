import { describe, expect, it } from 'vitest';
import { SplitMix64, derivedSeed } from '../../../processing/numerics/random';

const hex = ([hi, lo]: [number, number]) =>
  hi.toString(16).padStart(8, '0') + lo.toString(16).padStart(8, '0');

describe('SplitMix64', () => {
  // Check values computed with an independent program (Python integers modulo 2^64).
  it('gives the known first output for seed 0', () => {
    expect(hex(new SplitMix64(0).nextBits())).toBe('e220a8397b1dcdaf');
  });

  it('gives the known first four outputs for seed 42', () => {
    const random = new SplitMix64(42);
    expect([1, 2, 3, 4].map(() => hex(random.nextBits()))).toEqual([
      'bdd732262feb6e95',
      '28efe333b266f103',
      '47526757130f9f52',
      '581ce1ff0e4ae394',
    ]);
  });

  it('agrees with 64-bit integer arithmetic over ten thousand draws from a seed above 32 bits', () => {
    const mask = (1n << 64n) - 1n;
    let state = BigInt(7_012_345_678_901);
    const random = new SplitMix64(7_012_345_678_901);
    for (let i = 0; i < 10_000; i++) {
      state = (state + 0x9e3779b97f4a7c15n) & mask;
      let z = state;
      z = ((z ^ (z >> 30n)) * 0xbf58476d1ce4e5b9n) & mask;
      z = ((z ^ (z >> 27n)) * 0x94d049bb133111ebn) & mask;
      z ^= z >> 31n;
      const [hi, lo] = random.nextBits();
      if ((BigInt(hi) << 32n) + BigInt(lo) !== z) throw new Error(`differs at draw ${i}`);
    }
  });

  it('gives the known uniforms for seed 42', () => {
    const random = new SplitMix64(42);
    expect([1, 2, 3, 4].map(() => random.uniform())).toEqual([
      0.7415648787718233, 0.1599103928769201, 0.27860113025513866, 0.34419071652363753,
    ]);
  });

  it('gives the known first normal pair for seed 42', () => {
    const random = new SplitMix64(42);
    // Tolerance: log, sin and cos may differ in the last digit between engines.
    expect(random.normal()).toBeCloseTo(0.8822489062222688, 14);
    expect(random.normal()).toBeCloseTo(1.388473285287707, 14);
  });

  it('gives normals with the moments of a standard normal', () => {
    const random = new SplitMix64(5);
    const n = 200_000;
    const moments = [0, 0, 0, 0];
    for (let i = 0; i < n; i++) {
      const x = random.normal();
      moments[0] += x / n;
      moments[1] += (x * x) / n;
      moments[2] += x ** 3 / n;
      moments[3] += x ** 4 / n;
    }
    // Four standard errors of each moment: sqrt(1, 2, 15, 96)/sqrt(n).
    [0, 1, 0, 3].forEach((expected, k) => {
      expect(Math.abs(moments[k] - expected)).toBeLessThan((4 * Math.sqrt([1, 2, 15, 96][k])) / Math.sqrt(n));
    });
  });

  it('refuses seeds that are not whole numbers from 0', () => {
    expect(() => new SplitMix64(-1)).toThrow(RangeError);
    expect(() => new SplitMix64(0.5)).toThrow(RangeError);
  });
});

describe('derived seeds', () => {
  it('differ by every name and by the order of names', () => {
    const seeds = new Set<number>();
    for (let a = 0; a < 40; a++) for (let b = 0; b < 40; b++) seeds.add(derivedSeed(1, a, b));
    expect(seeds.size).toBe(1600);
    expect([...seeds].every((s) => Number.isSafeInteger(s) && s >= 0)).toBe(true);
  });
});
