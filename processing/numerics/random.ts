/**
 * Portable pseudo-random numbers: the same seed gives the same numbers in every language and on every machine.
 *
 * SplitMix64 with the 64-bit state held in two 32-bit halves, because BigInt arithmetic is some fifty times slower. Only the uniform
 * numbers are the same bit for bit everywhere; normal deviates go through log, cos and sin, whose last digit may differ between
 * engines.
 *
 * @reference Steele, Lea and Flood (2014), Fast splittable pseudorandom number generators, OOPSLA '14 (from memory; check values in the
 *   tests were made by an independent program)
 */
export class SplitMix64 {
  private hi: number;
  private lo: number;
  /** Halves of the last output; kept as fields so that a draw allocates nothing. */
  private outHi = 0;
  private outLo = 0;
  private spare = 0;
  private hasSpare = false;

  /**
   * @param seed whole number, 0 … 2⁵³ − 1
   */
  constructor(seed: number) {
    if (!Number.isSafeInteger(seed) || seed < 0)
      throw new RangeError('SplitMix64: seed must be a whole number from 0');
    this.hi = Math.floor(seed / 4294967296) >>> 0;
    this.lo = seed >>> 0;
  }

  private step(): void {
    const sum = (this.lo >>> 0) + 0x7f4a7c15;
    this.lo = sum >>> 0;
    this.hi = (this.hi + 0x9e3779b9 + (sum > 0xffffffff ? 1 : 0)) >>> 0;
    // z ^= z >> 30; z *= 0xBF58476D1CE4E5B9
    let zlo = this.lo ^ ((this.lo >>> 30) | (this.hi << 2));
    let zhi = this.hi ^ (this.hi >>> 30);
    let high = highProduct(zlo >>> 0, 0x1ce4e5b9);
    zhi = (high + Math.imul(zhi, 0x1ce4e5b9) + Math.imul(zlo, 0xbf58476d)) | 0;
    zlo = Math.imul(zlo, 0x1ce4e5b9);
    // z ^= z >> 27; z *= 0x94D049BB133111EB
    zlo ^= (zlo >>> 27) | (zhi << 5);
    zhi ^= zhi >>> 27;
    high = highProduct(zlo >>> 0, 0x133111eb);
    zhi = (high + Math.imul(zhi, 0x133111eb) + Math.imul(zlo, 0x94d049bb)) | 0;
    zlo = Math.imul(zlo, 0x133111eb);
    // z ^= z >> 31
    this.outLo = (zlo ^ ((zlo >>> 31) | (zhi << 1))) >>> 0;
    this.outHi = (zhi ^ (zhi >>> 31)) >>> 0;
  }

  /** Next 64 bits as two unsigned 32-bit halves, high half first. */
  nextBits(): [number, number] {
    this.step();
    return [this.outHi, this.outLo];
  }

  /** Uniform on [0, 1): the top 53 bits times 2⁻⁵³. */
  uniform(): number {
    this.step();
    return this.outHi * 2.3283064365386963e-10 + (this.outLo >>> 11) * 1.1102230246251565e-16;
  }

  /** Whole number from 0 to `below` − 1. */
  integer(below: number): number {
    return Math.floor(this.uniform() * below);
  }

  /**
   * Standard normal deviate by the Box–Muller transform; deviates come in pairs (cosine first), the second is kept for the next call.
   *
   * @reference Box and Muller (1958), Ann. Math. Statist. 29:610–611 (from memory)
   */
  normal(): number {
    if (this.hasSpare) {
      this.hasSpare = false;
      return this.spare;
    }
    const r = Math.sqrt(-2 * Math.log(1 - this.uniform()));
    const angle = 2 * Math.PI * this.uniform();
    this.spare = r * Math.sin(angle);
    this.hasSpare = true;
    return r * Math.cos(angle);
  }

  /** Fills an array with standard normal deviates. */
  fillNormal(into: Float64Array): void {
    for (let i = 0; i < into.length; i++) into[i] = this.normal();
  }
}

/** High 32 bits of the product of two unsigned 32-bit numbers. */
function highProduct(a: number, b: number): number {
  const a0 = a & 0xffff;
  const a1 = a >>> 16;
  const b0 = b & 0xffff;
  const b1 = b >>> 16;
  const middle = a1 * b0 + ((a0 * b0) >>> 16);
  const middleToo = (middle & 0xffff) + a0 * b1;
  // (2¹⁶ − 1)² + 2¹⁶ − 1 < 2³²: neither middle sum overflows 32 bits, so the unsigned shifts are exact.
  return (a1 * b1 + (middle >>> 16) + (middleToo >>> 16)) | 0;
}

/**
 * A seed for an independent stream, from a base seed and any whole numbers that name the stream (day, period, purpose).
 *
 * @returns whole number below 2⁵³
 */
export function derivedSeed(seed: number, ...names: number[]): number {
  let current = seed;
  for (const name of names) {
    const [hi, lo] = new SplitMix64(current).nextBits();
    const [nameHi, nameLo] = new SplitMix64(name).nextBits();
    current = ((hi ^ nameLo) & 0x1fffff) * 4294967296 + ((lo ^ nameHi) >>> 0);
  }
  const [hi, lo] = new SplitMix64(current).nextBits();
  return (hi & 0x1fffff) * 4294967296 + lo;
}
