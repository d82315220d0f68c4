import { isConstantSignal } from '../../numerics/moments';
import { leastSquaresLine } from '../../numerics/regression';
import type { Line } from '../../numerics/regression';
import { seriesKernel } from '../../numerics/series-kernel';

/** What several tests need to know of one whole record, found in two passes. */
export interface RecordStatistics {
  n: number;
  mean: number;
  /** Of the record as it is [unit²]. */
  variance: number;
  min: number;
  max: number;
  isConstant: boolean;
  line: Line;
  /** Of the linearly detrended record; NaN when nothing is left but rounding. */
  skewness: number;
  kurtosis: number;
}

/**
 * Moments of a record, and skewness and kurtosis after its least-squares line is taken out.
 *
 * S = m₃ / m₂^1.5, K = m₄ / m₂² (Gaussian: 3)
 *
 * @param values n samples, not mutated; NaN = missing
 * @returns population moments; NaN where there is no valid sample or nothing but a line
 * @assumes samples evenly spaced
 * @reference Vickers & Mahrt (1997), J. Atmos. Oceanic Technol. 14:512–526 (from memory)
 * @deviates none
 */
export function recordStatistics(values: Float64Array): RecordStatistics {
  const line = leastSquaresLine(values);
  const { n, centre } = line;
  const mean = line.valueAtCentre;
  const slope = n < 2 ? 0 : line.slope;
  if (n === 0) {
    return {
      n,
      mean: NaN,
      variance: NaN,
      min: NaN,
      max: NaN,
      isConstant: false,
      line,
      skewness: NaN,
      kurtosis: NaN,
    };
  }
  // Residuals of a least-squares line have the mean 0.
  const kernel = seriesKernel(values.length);
  kernel.run.residualSums(kernel.pointerOf(values), values.length, mean, slope, -centre, kernel.out);
  const [d2, r2, r3, r4, min, max] = kernel.results;
  const variance = d2 / n;
  const isConstant = isConstantSignal(variance, mean);
  const m2 = r2 / n;
  const m3 = r3 / n;
  const m4 = r4 / n;
  const nothingLeft = isConstantSignal(m2, mean);
  return {
    n,
    mean,
    variance: isConstant ? 0 : variance,
    min,
    max,
    isConstant,
    line,
    skewness: nothingLeft ? NaN : m3 / (m2 * Math.sqrt(m2)),
    kurtosis: nothingLeft ? NaN : m4 / (m2 * m2),
  };
}
