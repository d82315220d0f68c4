import { seriesKernel } from './series-kernel';

/**
 * Means, variances and covariances that keep their digits: always two passes, never mean(x²) − mean(x)², which loses six or more
 * digits for temperatures in kelvin.
 *
 * All moments are population moments (divided by the number of valid values). Missing values are NaN and are left out.
 */

export interface Moments {
  /** Valid values. */
  n: number;
  /** NaN when there is no valid value. */
  mean: number;
  variance: number;
  /** m₃ / m₂^1.5; NaN for a constant series. */
  skewness: number;
  /** m₄ / m₂², 3 for a Gaussian; NaN for a constant series. */
  kurtosis: number;
  min: number;
  max: number;
  /** The values differ by no more than rounding; the variance is then 0. */
  isConstant: boolean;
}

/**
 * Whether a standard deviation is nothing but rounding.
 *
 * σ ≤ 10⁻¹² max(1, |mean|)
 *
 * @param variance population variance [unit²]
 * @param mean mean [unit]
 * @returns true when the series counts as constant; its variance is then taken as 0 and nothing is divided by it
 * @assumes double precision
 * @reference project choice
 * @deviates none
 */
export function isConstantSignal(variance: number, mean: number): boolean {
  return Math.sqrt(variance) <= 1e-12 * Math.max(1, Math.abs(mean));
}

/**
 * Mean, variance, skewness and kurtosis of one series.
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @param from first index, @param to one past the last
 * @returns population moments; everything NaN when no value is valid
 * @assumes finite values or NaN
 * @reference definitions; second pass corrected by the mean of the deviations (Chan, Golub & LeVeque 1983, Am. Stat. 37:242–247;
 *   from memory)
 * @deviates none
 */
export function moments(values: Float64Array, from = 0, to = values.length): Moments {
  let n = 0;
  let sum = 0;
  let min = Infinity;
  let max = -Infinity;
  // Sums of differences from one value of the series: small numbers keep their digits.
  let origin = NaN;
  for (let i = from; i < to; i++) {
    const value = values[i];
    if (value !== value) continue;
    if (n === 0) origin = value;
    n++;
    sum += value - origin;
    if (value < min) min = value;
    if (value > max) max = value;
  }
  if (n === 0) {
    return {
      n,
      mean: NaN,
      variance: NaN,
      skewness: NaN,
      kurtosis: NaN,
      min: NaN,
      max: NaN,
      isConstant: false,
    };
  }
  const rough = origin + sum / n;
  let d1 = 0;
  let d2 = 0;
  let d3 = 0;
  let d4 = 0;
  for (let i = from; i < to; i++) {
    const d = values[i] - rough;
    if (d !== d) continue;
    const square = d * d;
    d1 += d;
    d2 += square;
    d3 += square * d;
    d4 += square * square;
  }
  const shift = d1 / n;
  const mean = rough + shift;
  const m2 = Math.max(0, d2 / n - shift * shift);
  if (isConstantSignal(m2, mean)) {
    return { n, mean, variance: 0, skewness: NaN, kurtosis: NaN, min, max, isConstant: true };
  }
  const raw2 = d2 / n;
  const m3 = d3 / n - 3 * shift * raw2 + 2 * shift * shift * shift;
  const m4 = d4 / n - (4 * shift * d3) / n + 6 * shift * shift * raw2 - 3 * shift * shift * shift * shift;
  return {
    n,
    mean,
    variance: m2,
    skewness: m3 / (m2 * Math.sqrt(m2)),
    kurtosis: m4 / (m2 * m2),
    min,
    max,
    isConstant: false,
  };
}

/** Number, mean and variance, where shape and extremes are not asked for. */
export interface MeanVariance {
  n: number;
  /** NaN when there is no valid value. */
  mean: number;
  variance: number;
  /** The values differ by no more than rounding; the variance is then 0. */
  isConstant: boolean;
}

/**
 * Mean and variance of one series; the same numbers as `moments` gives.
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @param near mean of the series if it is known, which saves a pass
 * @returns population moments; NaN when no value is valid
 * @assumes finite values or NaN
 * @reference definitions, as `moments`
 * @deviates none
 */
export function meanVariance(values: Float64Array, near = mean(values)): MeanVariance {
  const kernel = seriesKernel(values.length);
  const { results } = kernel;
  kernel.run.sums(kernel.pointerOf(values), values.length, near, kernel.out);
  const n = results[0];
  const d1 = results[1];
  const d2 = results[2];
  if (n === 0) return { n, mean: NaN, variance: NaN, isConstant: false };
  const shift = d1 / n;
  const variance = Math.max(0, d2 / n - shift * shift);
  const isConstant = isConstantSignal(variance, near + shift);
  return { n, mean: near + shift, variance: isConstant ? 0 : variance, isConstant };
}

/**
 * Mean of the valid values.
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @returns mean in the unit of the values; NaN when none is valid
 */
export function mean(values: Float64Array): number {
  const kernel = seriesKernel(values.length);
  // Sums of differences from one value of the series: small numbers keep their digits.
  const origin = firstValid(values);
  kernel.run.sums(kernel.pointerOf(values), values.length, origin, kernel.out);
  return kernel.results[0] === 0 ? NaN : origin + kernel.results[1] / kernel.results[0];
}

function firstValid(values: Float64Array): number {
  let first = 0;
  while (first < values.length && values[first] !== values[first]) first++;
  return first < values.length ? values[first] : NaN;
}

/** Number of values that are not NaN. */
export function countValid(values: Float64Array): number {
  const kernel = seriesKernel(values.length);
  kernel.run.sums(kernel.pointerOf(values), values.length, 0, kernel.out);
  return kernel.results[0];
}

/** What two parts of a record add up to: number, means, sums of squared and crossed deviations. */
export interface PartialMoments {
  n: number;
  meanX: number;
  meanY: number;
  /** Σ(x − x̄)² */
  m2x: number;
  /** Σ(y − ȳ)² */
  m2y: number;
  /** Σ(x − x̄)(y − ȳ) */
  cxy: number;
}

/**
 * Moments of two parts of a record taken together.
 *
 * D = m̄B − m̄A, m̄ = m̄A + D nB/n, M₂ = M₂A + M₂B + D² nA nB/n, Cxy = CA + CB + Dx Dy nA nB/n
 *
 * @param a,b the parts; a part without values leaves the other as it is
 * @returns moments of the whole
 * @assumes the parts do not overlap
 * @reference Chan, Golub & LeVeque (1983), Am. Stat. 37:242–247 (from memory; identity checked)
 * @deviates none
 */
export function mergeMoments(a: PartialMoments, b: PartialMoments): PartialMoments {
  if (a.n === 0) return { ...b };
  if (b.n === 0) return { ...a };
  const n = a.n + b.n;
  const dx = b.meanX - a.meanX;
  const dy = b.meanY - a.meanY;
  const weight = (a.n * b.n) / n;
  return {
    n,
    meanX: a.meanX + (dx * b.n) / n,
    meanY: a.meanY + (dy * b.n) / n,
    m2x: a.m2x + b.m2x + dx * dx * weight,
    m2y: a.m2y + b.m2y + dy * dy * weight,
    cxy: a.cxy + b.cxy + dx * dy * weight,
  };
}

/**
 * Moments of the pairs in which both values are there.
 *
 * Both means are taken over exactly these pairs: with the means of all values a spurious product of mean differences would appear.
 *
 * @param x,y Float64Array of the same length, not mutated; NaN = missing
 * @param from first index, @param to one past the last
 * @param lag y is read at index + lag: a positive lag pairs x with a y recorded later; pairs that leave [from, to) are left out
 * @param near means of the series if they are known: values near those of the pairs, which saves a pass
 * @returns pair count, means, and sums of squares and products about those means; means NaN when there is no pair
 * @assumes finite values or NaN
 * @reference definition
 * @deviates none
 */
export function pairMoments(
  x: Float64Array,
  y: Float64Array,
  from = 0,
  to = Math.min(x.length, y.length),
  lag = 0,
  near?: { x: number; y: number },
): PartialMoments {
  const first = Math.max(from, from - lag);
  const length = Math.max(0, Math.min(to, to - lag) - first);
  const a = x.subarray(first, first + length);
  const b = y.subarray(first + lag, first + lag + length);
  const kernel = seriesKernel(length);
  const { run, results, out } = kernel;
  const atA = kernel.pointerOf(a, 0);
  const atB = kernel.pointerOf(b, 1);
  let roughX = near ? near.x : NaN;
  let roughY = near ? near.y : NaN;
  if (roughX !== roughX || roughY !== roughY) {
    const originX = firstValid(a);
    const originY = firstValid(b);
    run.pairSums(atA, atB, length, originX, originY, out);
    roughX = originX + results[1] / results[0];
    roughY = originY + results[2] / results[0];
  }
  run.pairSums(atA, atB, length, roughX, roughY, out);
  const n = results[0];
  const d1x = results[1];
  const d1y = results[2];
  if (n === 0) return { n, meanX: NaN, meanY: NaN, m2x: 0, m2y: 0, cxy: 0 };
  return {
    n,
    meanX: roughX + d1x / n,
    meanY: roughY + d1y / n,
    m2x: Math.max(0, results[3] - (d1x * d1x) / n),
    m2y: Math.max(0, results[4] - (d1y * d1y) / n),
    cxy: results[5] - (d1x * d1y) / n,
  };
}

/**
 * Population covariance over the pairs in which both values are there.
 *
 * @param x,y Float64Array of the same length, not mutated; NaN = missing
 * @param lag y is read at index + lag
 * @returns covariance [unit of x × unit of y] and its number of pairs; NaN when there is no pair
 * @assumes finite values or NaN
 * @reference definition
 * @deviates none
 */
export function covariance(x: Float64Array, y: Float64Array, lag = 0): { covariance: number; pairs: number } {
  const pairs = pairMoments(x, y, 0, Math.min(x.length, y.length), lag);
  return { covariance: pairs.n === 0 ? NaN : pairs.cxy / pairs.n, pairs: pairs.n };
}
