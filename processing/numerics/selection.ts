/**
 * Medians and quantiles in linear time. Working memory is kept between calls, so a period of six series allocates nothing.
 */

const scratchBuffers: Float64Array[] = [];

/**
 * A reused work array of at least `length` values. What was in it is not cleared. Its owner must be done with it before it calls
 * anything else that asks for the same slot.
 *
 * @param length values needed
 * @param slot which of the work arrays; the functions of this file use slot 0
 */
export function scratch(length: number, slot = 0): Float64Array {
  let buffer = scratchBuffers[slot];
  if (!buffer || buffer.length < length) {
    buffer = new Float64Array(length);
    scratchBuffers[slot] = buffer;
  }
  return buffer;
}

/**
 * Copies the valid values of a series to the front of a work array.
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @param into at least as long
 * @returns how many were copied
 */
export function takeValid(values: Float64Array, into: Float64Array): number {
  let n = 0;
  for (let i = 0; i < values.length; i++) {
    const value = values[i];
    into[n] = value;
    if (value === value) n++;
  }
  return n;
}

/**
 * Puts the k-th smallest value at index k: smaller or equal ones before it, larger or equal ones after it.
 *
 * @param values work array, reordered between `left` and `right`; no NaN there
 * @param k index to be settled
 * @param left first index, @param right last index
 * @returns the k-th smallest value
 * @assumes left ≤ k ≤ right
 * @reference Floyd & Rivest (1975), Algorithm 489, Commun. ACM 18:173 (from memory)
 * @deviates none
 */
export function selectInPlace(values: Float64Array, k: number, left: number, right: number): number {
  while (right > left) {
    if (right - left > 600) {
      // A small sample narrows the range to where the k-th value very probably is.
      const n = right - left + 1;
      const i = k - left + 1;
      const z = Math.log(n);
      const s = 0.5 * Math.exp((2 * z) / 3);
      const spread = 0.5 * Math.sqrt((z * s * (n - s)) / n) * (i < n / 2 ? -1 : 1);
      const newLeft = Math.max(left, Math.floor(k - (i * s) / n + spread));
      const newRight = Math.min(right, Math.floor(k + ((n - i) * s) / n + spread));
      selectInPlace(values, k, newLeft, newRight);
    }
    const pivot = values[k];
    let i = left;
    let j = right;
    values[k] = values[left];
    values[left] = pivot;
    const rightIsLarger = values[right] > pivot;
    if (rightIsLarger) {
      values[left] = values[right];
      values[right] = pivot;
    }
    while (i < j) {
      const swap = values[i];
      values[i] = values[j];
      values[j] = swap;
      i++;
      j--;
      while (values[i] < pivot) i++;
      while (values[j] > pivot) j--;
    }
    if (values[left] === pivot) {
      const swap = values[left];
      values[left] = values[j];
      values[j] = swap;
    } else {
      j++;
      const swap = values[j];
      values[j] = values[right];
      values[right] = swap;
    }
    if (j <= k) left = j + 1;
    if (k <= j) right = j - 1;
  }
  return values[k];
}

/** Below this many values selecting at once is quicker than counting first. */
const worthCounting = 2000;
const bins = 1024;
const binCounts = new Int32Array(bins);
/** Work array that the values near an order statistic are gathered in. */
const gatherSlot = 6;

/** The k-th smallest of some values and the next one in order. */
interface OrderPair {
  lower: number;
  /** NaN behind the last. */
  upper: number;
}

/**
 * Two neighbouring order statistics. Values are counted in equal bins first; only the few of one bin are then set in order.
 *
 * @param values its first n values are looked at and may be reordered; no NaN among them
 * @param k 0 … n − 1
 * @param min,max extremes of these values
 */
function orderPair(values: Float64Array, n: number, k: number, min: number, max: number): OrderPair {
  const scale = bins / (max - min);
  if (n < worthCounting || !(scale > 0 && scale < Infinity)) return selectedPair(values, n, k);
  const last = bins - 1;
  binCounts.fill(0);
  for (let i = 0; i < n; i++) {
    const bin = ((values[i] - min) * scale) | 0;
    binCounts[bin > last ? last : bin]++;
  }
  let wanted = 0;
  let before = 0;
  while (before + binCounts[wanted] <= k) before += binCounts[wanted++];
  const inside = binCounts[wanted];
  if (inside > n / 4) return selectedPair(values, n, k);
  // The next one in order is in the same bin, or the smallest of those behind it.
  const isLastInside = k - before === inside - 1;
  const gathered = scratch(inside + 1, gatherSlot);
  let m = 0;
  let behind = Infinity;
  for (let i = 0; i < n; i++) {
    const value = values[i];
    const raw = ((value - min) * scale) | 0;
    const bin = raw > last ? last : raw;
    if (bin === wanted) gathered[m++] = value;
    else if (isLastInside && bin > wanted && value < behind) behind = value;
  }
  const pair = selectedPair(gathered, m, k - before);
  return isLastInside ? { lower: pair.lower, upper: k + 1 < n ? behind : NaN } : pair;
}

function selectedPair(values: Float64Array, n: number, k: number): OrderPair {
  const lower = selectInPlace(values, k, 0, n - 1);
  let upper = Infinity;
  for (let i = k + 1; i < n; i++) if (values[i] < upper) upper = values[i];
  return { lower, upper: k + 1 < n ? upper : NaN };
}

function extremes(values: Float64Array, n: number): { min: number; max: number } {
  let min = Infinity;
  let max = -Infinity;
  for (let i = 0; i < n; i++) {
    const value = values[i];
    if (value < min) min = value;
    if (value > max) max = value;
  }
  return { min, max };
}

/**
 * Quantile of the first `n` values of a work array, interpolated between order statistics.
 *
 * position = p (n − 1), linear between the two neighbours
 *
 * @param values work array, its first n values may be reordered; no NaN among them
 * @param n number of values
 * @param p 0 … 1
 * @returns the quantile; NaN for n = 0
 * @assumes nothing about the distribution
 * @reference Hyndman & Fan (1996), Am. Stat. 50:361–365, type 7 (from memory)
 * @deviates none
 */
export function quantileInPlace(values: Float64Array, n: number, p: number): number {
  if (n === 0) return NaN;
  return quantilesInPlace(values, n, [p])[0];
}

/** Several quantiles of the same values; see `quantileInPlace`. */
export function quantilesInPlace(values: Float64Array, n: number, ps: readonly number[]): number[] {
  if (n === 0) return ps.map(() => NaN);
  const { min, max } = n < worthCounting ? { min: 0, max: 0 } : extremes(values, n);
  return ps.map((p) => {
    const position = p * (n - 1);
    const k = Math.floor(position);
    const { lower, upper } = orderPair(values, n, k, min, max);
    const fraction = position - k;
    return fraction === 0 ? lower : lower + fraction * (upper - lower);
  });
}

/**
 * Median of the first `n` values of a work array: the middle one, or the mean of the two in the middle.
 *
 * @param values work array, its first n values may be reordered; no NaN among them
 * @returns median; NaN for n = 0
 */
export function medianInPlace(values: Float64Array, n: number): number {
  if (n === 0) return NaN;
  const { min, max } = n < worthCounting ? { min: 0, max: 0 } : extremes(values, n);
  return medianBetween(values, n, min, max);
}

function medianBetween(values: Float64Array, n: number, min: number, max: number): number {
  if (n === 0) return NaN;
  const { lower, upper } = orderPair(values, n, (n - 1) >> 1, min, max);
  // Half of each, so that two huge values do not overflow.
  return n % 2 === 1 ? lower : lower / 2 + upper / 2;
}

/**
 * Median of the valid values of a series.
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @returns median in the unit of the values; NaN when none is valid
 */
export function median(values: Float64Array): number {
  const work = scratch(values.length);
  return medianInPlace(work, takeValid(values, work));
}

/**
 * Quantile of the valid values of a series, interpolated linearly between order statistics.
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @param p 0 … 1
 * @returns quantile in the unit of the values; NaN when none is valid
 */
export function quantile(values: Float64Array, p: number): number {
  const work = scratch(values.length);
  return quantileInPlace(work, takeValid(values, work), p);
}

/** Median, its absolute deviations' median, and how far the farthest value lies from it. */
export interface MedianDeviation {
  n: number;
  median: number;
  mad: number;
  farthest: number;
}

/**
 * Median and median absolute deviation of the valid values.
 *
 * MAD = median |xᵢ − median x|
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @returns both in the unit of the values, the largest |xᵢ − median x|, and the number of valid values; NaN when none is valid
 * @assumes nothing about the distribution
 * @reference definition
 * @deviates none
 */
export function medianAbsoluteDeviation(values: Float64Array): MedianDeviation {
  const work = scratch(values.length);
  let n = 0;
  let min = Infinity;
  let max = -Infinity;
  for (let i = 0; i < values.length; i++) {
    const value = values[i];
    work[n] = value;
    if (value < min) min = value;
    if (value > max) max = value;
    if (value === value) n++;
  }
  const middle = medianBetween(work, n, min, max);
  for (let i = 0; i < n; i++) work[i] = Math.abs(work[i] - middle);
  const farthest = Math.max(max - middle, middle - min);
  return { n, median: middle, mad: medianBetween(work, n, 0, farthest), farthest };
}
