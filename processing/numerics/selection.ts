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

/**
 * Quantile of the first `n` values of a work array, interpolated between order statistics.
 *
 * position = p (n − 1), linear between the two neighbours
 *
 * @param values work array, its first n values are reordered; no NaN among them
 * @param n number of values
 * @param p 0 … 1
 * @returns the quantile; NaN for n = 0
 * @assumes nothing about the distribution
 * @reference Hyndman & Fan (1996), Am. Stat. 50:361–365, type 7 (from memory)
 * @deviates none
 */
export function quantileInPlace(values: Float64Array, n: number, p: number): number {
  if (n === 0) return NaN;
  const position = p * (n - 1);
  const k = Math.floor(position);
  const low = selectInPlace(values, k, 0, n - 1);
  const fraction = position - k;
  if (fraction === 0) return low;
  let high = Infinity;
  for (let i = k + 1; i < n; i++) if (values[i] < high) high = values[i];
  return low + fraction * (high - low);
}

/**
 * Median of the first `n` values of a work array: the middle one, or the mean of the two in the middle.
 *
 * @param values work array, its first n values are reordered; no NaN among them
 * @returns median; NaN for n = 0
 */
export function medianInPlace(values: Float64Array, n: number): number {
  if (n === 0) return NaN;
  const k = n >> 1;
  const upper = selectInPlace(values, k, 0, n - 1);
  if (n % 2 === 1) return upper;
  let lower = -Infinity;
  for (let i = 0; i < k; i++) if (values[i] > lower) lower = values[i];
  // Half of each, so that two huge values do not overflow.
  return lower / 2 + upper / 2;
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

/**
 * Median and median absolute deviation of the valid values.
 *
 * MAD = median |xᵢ − median x|
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @returns both in the unit of the values, and the number of valid values; NaN when none is valid
 * @assumes nothing about the distribution
 * @reference definition
 * @deviates none
 */
export function medianAbsoluteDeviation(values: Float64Array): { n: number; median: number; mad: number } {
  const work = scratch(values.length);
  const n = takeValid(values, work);
  const middle = medianInPlace(work, n);
  for (let i = 0; i < n; i++) work[i] = Math.abs(work[i] - middle);
  return { n, median: middle, mad: medianInPlace(work, n) };
}
