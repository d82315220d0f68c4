import { defaultValue } from '../../defaults';
import { seriesKernel } from '../../numerics/series-kernel';
import type { RecordStatistics } from './record';

const rangeDivisor = defaultValue('screening.haarRangeDivisor');
const minimumValidShare = defaultValue('screening.windowMinimumValidPercent') / 100;

export interface DiscontinuityFindings {
  /** Largest |mean right − mean left| / min(σ, range/4) of the record [1]; NaN when not judged. */
  meanStep: number;
  /** Sample at which it lies; −1 when not judged. */
  meanStepAt: number;
  /** Largest |variance right − variance left| / variance of the record [1]; NaN when not judged. */
  varianceStep: number;
  varianceStepAt: number;
}

/**
 * Steps in mean and variance between the two halves of a window that slides by one sample (Haar transform).
 *
 * Sums run on, so that each place costs a few additions however long the window is. A place counts when at least half of the samples of
 * either half window are there.
 *
 * @param values n samples, not mutated; NaN = missing
 * @param windowPoints samples in the window; its halves are windowPoints/2 rounded down
 * @param record statistics of the same values
 * @returns the largest steps and where they are; NaN for a constant record or one shorter than the window
 * @assumes samples evenly spaced
 * @reference Vickers & Mahrt (1997), J. Atmos. Oceanic Technol. 14:512–526 (from memory)
 * @deviates none; a large step inflates its own normaliser, so that 10 σ in mid-record only just passes the soft limit
 */
export function discontinuities(
  values: Float64Array,
  windowPoints: number,
  record: RecordStatistics,
): DiscontinuityFindings {
  const nothing = { meanStep: NaN, meanStepAt: -1, varianceStep: NaN, varianceStepAt: -1 };
  const length = values.length;
  const half = Math.floor(windowPoints / 2);
  if (half < 1 || length < 2 * half || record.n === 0 || record.isConstant) return nothing;

  // Running sums of (x − mean) and its square; the offset keeps their digits.
  const isComplete = record.n === length;
  const offset = record.mean;
  let meanStep = -1;
  let meanStepAt = -1;
  let varianceStep = -1;
  let varianceStepAt = -1;
  const kernel = seriesKernel(length);
  if (isComplete) {
    const { run, work, out, results } = kernel;
    run.runningSums(kernel.pointerOf(values), length, offset, work[0], work[1]);
    run.largestSteps(work[0], work[1], length, half, out);
    meanStep = results[0] / half;
    meanStepAt = results[1];
    varianceStep = results[2] / half;
    varianceStepAt = results[3];
  } else {
    const [sums, squares, valid] = kernel.workValues;
    let sum = 0;
    let square = 0;
    let count = 0;
    sums[0] = 0;
    squares[0] = 0;
    valid[0] = 0;
    for (let i = 0; i < length; i++) {
      const d = values[i] - offset;
      if (d === d) {
        sum += d;
        square += d * d;
        count++;
      }
      sums[i + 1] = sum;
      squares[i + 1] = square;
      valid[i + 1] = count;
    }
    const fewest = minimumValidShare * half;
    for (let i = half; i <= length - half; i++) {
      const nLeft = valid[i] - valid[i - half];
      const nRight = valid[i + half] - valid[i];
      if (nLeft < fewest || nRight < fewest || nLeft === 0 || nRight === 0) continue;
      const left = (sums[i] - sums[i - half]) / nLeft;
      const right = (sums[i + half] - sums[i]) / nRight;
      const step = Math.abs(right - left);
      if (step > meanStep) {
        meanStep = step;
        meanStepAt = i;
      }
      const varianceLeft = Math.max(0, (squares[i] - squares[i - half]) / nLeft - left * left);
      const varianceRight = Math.max(0, (squares[i + half] - squares[i]) / nRight - right * right);
      const change = Math.abs(varianceRight - varianceLeft);
      if (change > varianceStep) {
        varianceStep = change;
        varianceStepAt = i;
      }
    }
  }
  if (meanStepAt < 0) return nothing;
  const normaliser = Math.min(Math.sqrt(record.variance), (record.max - record.min) / rangeDivisor);
  return {
    meanStep: meanStep / normaliser,
    meanStepAt,
    varianceStep: varianceStep / record.variance,
    varianceStepAt,
  };
}
