import { isConstantSignal } from '../../numerics/moments';
import { leastSquaresLine } from '../../numerics/regression';
import type { Line } from '../../numerics/regression';

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
  const mean = line.valueAtCentre;
  const slope = line.n < 2 ? 0 : line.slope;
  let min = Infinity;
  let max = -Infinity;
  let d1 = 0;
  let d2 = 0;
  let r1 = 0;
  let r2 = 0;
  let r3 = 0;
  let r4 = 0;
  for (let i = 0; i < values.length; i++) {
    const value = values[i];
    if (value !== value) continue;
    if (value < min) min = value;
    if (value > max) max = value;
    const d = value - mean;
    d1 += d;
    d2 += d * d;
    const r = d - slope * (i - line.centre);
    const square = r * r;
    r1 += r;
    r2 += square;
    r3 += square * r;
    r4 += square * square;
  }
  const { n } = line;
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
  const shift = d1 / n;
  const variance = Math.max(0, d2 / n - shift * shift);
  const isConstant = isConstantSignal(variance, mean);
  const c = r1 / n;
  const raw2 = r2 / n;
  const m2 = Math.max(0, raw2 - c * c);
  const m3 = r3 / n - 3 * c * raw2 + 2 * c * c * c;
  const m4 = r4 / n - (4 * c * r3) / n + 6 * c * c * raw2 - 3 * c * c * c * c;
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
