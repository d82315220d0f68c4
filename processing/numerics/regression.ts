import { seriesKernel } from './series-kernel';

/** A straight line through a series: value at index i = valueAtCentre + slope × (i − centre). */
export interface Line {
  /** Valid values. */
  n: number;
  /** Unit of the values per sample. */
  slope: number;
  /** Mean index of the valid values. */
  centre: number;
  /** Value of the line there: the mean of the valid values. */
  valueAtCentre: number;
}

/**
 * Least-squares line of a series over its sample index.
 *
 * b = Σ(t − t̄)(x − x̄) / Σ(t − t̄)², a line through (t̄, x̄)
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @returns the line; slope NaN with fewer than two valid values, everything NaN with none
 * @assumes samples evenly spaced
 * @reference definition; time is centred first, so that line and mean are orthogonal
 * @deviates none
 */
export function leastSquaresLine(values: Float64Array): Line {
  const length = values.length;
  const middle = (length - 1) / 2;
  let first = 0;
  while (first < length && values[first] !== values[first]) first++;
  const origin = values[first];
  // Centred times of a complete record add up to 0, their squares to N (N² − 1)/12; the missing ones are taken off.
  const kernel = seriesKernel(length);
  kernel.run.lineSums(kernel.pointerOf(values), length, origin, -middle, kernel.out);
  const n = kernel.results[0];
  const sumX = kernel.results[1];
  const sumTX = kernel.results[2];
  const sumT = 0 - kernel.results[3];
  const sumTT = (length * (length * length - 1)) / 12 - kernel.results[4];
  if (n === 0) return { n, slope: NaN, centre: NaN, valueAtCentre: NaN };
  const spread = sumTT - (sumT * sumT) / n;
  return {
    n,
    slope: n < 2 ? NaN : (sumTX - (sumT * sumX) / n) / spread,
    centre: middle + sumT / n,
    valueAtCentre: origin + sumX / n,
  };
}

/** Value of a line at a sample index. */
export function lineAt(line: Line, index: number): number {
  return line.valueAtCentre + line.slope * (index - line.centre);
}

/**
 * Takes the least-squares line out of a series.
 *
 * @param values Float64Array, not mutated; NaN = missing
 * @param into receives the residuals, same length; NaN stays NaN. May be `values` itself
 * @param line the least-squares line if it is known
 * @returns the line that was taken out; with fewer than two valid values only the mean is
 * @assumes samples evenly spaced
 * @reference definition
 * @deviates none
 */
export function removeLine(
  values: Float64Array,
  into: Float64Array,
  line: Line = leastSquaresLine(values),
): Line {
  const slope = line.n < 2 ? 0 : line.slope;
  const kernel = seriesKernel(values.length);
  const [work] = kernel.work;
  const from = kernel.pointerOf(values);
  kernel.run.withoutLine(from, values.length, line.valueAtCentre, slope, -line.centre, work);
  into.set(kernel.valuesAt(work, values.length));
  return line;
}
