import type { SeriesKernel } from './series-kernel';
import { seriesKernel } from './series-kernel';

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

/** The k-th smallest of some values and the next one in order; NaN behind the last. */
interface OrderPair {
  lower: number;
  upper: number;
}

/**
 * Two neighbouring order statistics of values without gaps that lie in the kernel's memory. They are counted in bins of equal width first;
 * only the few of one bin are then set in order.
 *
 * @param pointer where the values are; not in the second or third work array
 * @param k 0 … n − 1
 * @param min,max extremes of the values
 */
function orderPair(
  kernel: SeriesKernel,
  pointer: number,
  n: number,
  k: number,
  min: number,
  max: number,
): OrderPair {
  const { run, counts, countValues } = kernel;
  const scale = bins / (max - min);
  const isSpread = n >= worthCounting && scale > 0 && scale < Infinity;
  if (!isSpread) return selectedPair(kernel.valuesAt(pointer, n), n, k);
  const [, taken, noted] = kernel.work;
  run.countInBins(pointer, n, min, scale, bins, counts, noted);
  let wanted = 0;
  let before = 0;
  while (before + countValues[wanted] <= k) before += countValues[wanted++];
  const inside = countValues[wanted];
  let behind = wanted + 1;
  while (behind < bins && countValues[behind] === 0) behind++;
  run.takeBin(pointer, n, noted, wanted, taken);
  const pair = selectedPair(kernel.workValues[1], inside, k - before);
  if (k - before < inside - 1 || behind === bins) return pair;
  // The next one in order is the smallest of the next bin that holds any.
  const m = run.takeBin(pointer, n, noted, behind, taken);
  run.sums(taken, m, 0, kernel.out);
  return { lower: pair.lower, upper: kernel.results[3] };
}

function selectedPair(values: Float64Array, n: number, k: number): OrderPair {
  const lower = selectInPlace(values, k, 0, n - 1);
  let upper = Infinity;
  for (let i = k + 1; i < n; i++) if (values[i] < upper) upper = values[i];
  return { lower, upper: k + 1 < n ? upper : NaN };
}

function medianOf({ lower, upper }: OrderPair, n: number): number {
  // Half of each, so that two huge values do not overflow.
  return n % 2 === 1 ? lower : lower / 2 + upper / 2;
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
  if (n < worthCounting) return interpolated(n, p, (k) => selectedPair(values, n, k));
  return quantile(values.subarray(0, n), p);
}

function interpolated(n: number, p: number, pairAt: (k: number) => OrderPair): number {
  const position = p * (n - 1);
  const k = Math.floor(position);
  const { lower, upper } = pairAt(k);
  const fraction = position - k;
  return fraction === 0 ? lower : lower + fraction * (upper - lower);
}

/**
 * Median of the valid values of a series: the middle one, or the mean of the two in the middle.
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @returns median in the unit of the values; NaN when none is valid
 */
export function median(values: Float64Array): number {
  const kernel = seriesKernel(values.length);
  const [work] = kernel.work;
  const n = kernel.run.takeValid(kernel.pointerOf(values), values.length, work, kernel.out);
  if (n === 0) return NaN;
  const [min, max] = kernel.results;
  return medianOf(orderPair(kernel, work, n, (n - 1) >> 1, min, max), n);
}

/**
 * Quantile of the valid values of a series, interpolated linearly between order statistics.
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @param p 0 … 1
 * @returns quantile in the unit of the values; NaN when none is valid
 */
export function quantile(values: Float64Array, p: number): number {
  return quantiles(values, [p])[0];
}

/** Several quantiles of the same values; see `quantile`. */
export function quantiles(values: Float64Array, ps: readonly number[]): number[] {
  const kernel = seriesKernel(values.length);
  const [work] = kernel.work;
  const n = kernel.run.takeValid(kernel.pointerOf(values), values.length, work, kernel.out);
  if (n === 0) return ps.map(() => NaN);
  const [min, max] = kernel.results;
  return ps.map((p) => interpolated(n, p, (k) => orderPair(kernel, work, n, k, min, max)));
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
  const kernel = seriesKernel(values.length);
  const [work] = kernel.work;
  const n = kernel.run.takeValid(kernel.pointerOf(values), values.length, work, kernel.out);
  if (n === 0) return { n, median: NaN, mad: NaN, farthest: NaN };
  const [min, max] = kernel.results;
  const k = (n - 1) >> 1;
  const middle = medianOf(orderPair(kernel, work, n, k, min, max), n);
  const farthest = Math.max(max - middle, middle - min);
  kernel.run.deviations(work, n, middle);
  const mad = medianOf(orderPair(kernel, work, n, k, 0, farthest), n);
  return { n, median: middle, mad, farthest };
}
