import { defaultValue } from '../../defaults';
import { isConstantSignal } from '../../numerics/moments';
import { quantileInPlace } from '../../numerics/selection';
import type { SeriesKernel } from '../../numerics/series-kernel';
import { seriesKernel } from '../../numerics/series-kernel';

/** Span of the histogram [σ], unless the range of the window is smaller. */
const spanSigma = defaultValue('screening.binSpanSigma');
const lowPercentile = defaultValue('screening.extremeLowPercentile') / 100;
const highPercentile = defaultValue('screening.extremeHighPercentile') / 100;
const minimumValidShare = defaultValue('screening.windowMinimumValidPercent') / 100;

export interface AmplitudeFindings {
  /** Windows judged; 0 when none had enough samples. */
  windows: number;
  /** Largest share of empty bins in a window [1], and where that window begins [samples]. NaN and −1 when no window was judged. */
  emptyShare: number;
  emptyAt: number;
  /** Longest run of consecutive samples in one interior bin, share of the window's samples [1]. */
  interiorShare: number;
  interiorAt: number;
  /** The same for bins whose centre lies outside of the 10th to 90th percentile of the window. */
  extremeShare: number;
  extremeAt: number;
  /** Share of all judged samples that have a neighbour in the same bin [1]: information only. */
  sameBinShare: number;
}

/**
 * Histogram tests of short windows: how many bins stay empty, and how long the signal stays in one bin.
 *
 * `bins` bins over min(7 σ, range) of each window: from mean − 3.5 σ, or from the minimum; values beyond fall into the end bins. Windows
 * follow each other by `stepPoints`. Missing samples are left out of a window; a window with fewer than half of its samples is skipped.
 * A constant window has one occupied bin and one run, its whole length.
 *
 * @param values n samples, not mutated; NaN = missing
 * @param windowPoints samples in a window
 * @param stepPoints samples from one window to the next
 * @param bins number of bins
 * @returns the worst window of each test; nothing judged where the record is shorter than a window
 * @assumes samples evenly spaced
 * @reference Vickers & Mahrt (1997), J. Atmos. Oceanic Technol. 14:512–526 (windows and bins from memory)
 * @deviates dropouts are the longest run in one bin instead of all consecutive samples in one bin: the latter are 8–22 % of perfect
 *   20 Hz turbulence, whose neighbouring samples often share a bin (project choice)
 */
export function amplitudeTests(
  values: Float64Array,
  windowPoints: number,
  stepPoints: number,
  bins: number,
): AmplitudeFindings {
  const found: AmplitudeFindings = {
    windows: 0,
    emptyShare: NaN,
    emptyAt: -1,
    interiorShare: NaN,
    interiorAt: -1,
    extremeShare: NaN,
    extremeAt: -1,
    sameBinShare: NaN,
  };
  const kernel = seriesKernel(values.length);
  const { run } = kernel;
  const at = kernel.pointerOf(values);
  const counts = new Int32Array(bins);
  const longest = new Int32Array(bins);
  const longestAt = kernel.counts + counts.byteLength;
  const [work] = kernel.work;
  const [workValues] = kernel.workValues;
  let mostEmpty = -1;
  let bestInterior = -1;
  let bestExtreme = -1;
  let judged = 0;
  let same = 0;

  // Where windows overlap by whole steps, each step is summed once and windows are put together from steps.
  const whole = windowPoints % stepPoints === 0;
  const parts: Spread[] = [];
  for (let start = 0; whole && start + stepPoints <= values.length; start += stepPoints) {
    parts.push(spread(kernel, at, start, start + stepPoints));
  }

  for (let start = 0; start + windowPoints <= values.length; start += stepPoints) {
    const end = start + windowPoints;
    let part = whole ? parts[start / stepPoints] : spread(kernel, at, start, end);
    for (let k = 1; whole && k < windowPoints / stepPoints; k++) {
      part = joined(part, parts[start / stepPoints + k]);
    }
    const { n, mean, min, max } = part;
    if (n < minimumValidShare * windowPoints || n === 0) continue;
    found.windows++;
    judged += n;
    const variance = part.squares / n;
    const range = max - min;
    if (!(range > 0) || isConstantSignal(variance, mean)) {
      same += n;
      if ((bins - 1) / bins > mostEmpty) {
        mostEmpty = (bins - 1) / bins;
        found.emptyAt = start;
      }
      if (1 > bestInterior) {
        bestInterior = 1;
        found.interiorAt = start;
      }
      continue;
    }
    const span = spanSigma * Math.sqrt(variance);
    const isWide = span < range;
    const low = isWide ? mean - span / 2 : min;
    const width = (isWide ? span : range) / bins;

    // What is missing does not end a run.
    let from = at + start * values.BYTES_PER_ELEMENT;
    if (n < windowPoints) {
      run.takeValid(from, windowPoints, work, kernel.out);
      from = work;
    }
    same += run.runsInBins(from, n, low, width, bins, kernel.counts, longestAt);
    counts.set(kernel.countValues.subarray(0, bins));
    longest.set(kernel.countValues.subarray(bins, 2 * bins));

    let empty = 0;
    for (let bin = 0; bin < bins; bin++) if (counts[bin] === 0) empty++;
    if (empty / bins > mostEmpty) {
      mostEmpty = empty / bins;
      found.emptyAt = start;
    }

    // A bin wholly below the sample just under the 10th percentile is extreme, one wholly above the sample over it is not, and likewise
    // at the 90th. Only the one or two bins at each percentile need its exact value, and only when their run would count.
    const lowIndex = Math.floor(lowPercentile * (n - 1));
    const highIndex = Math.floor(highPercentile * (n - 1));
    let lowValue = NaN;
    let highValue = NaN;
    let before = 0;
    for (let bin = 0; bin < bins; bin++) {
      const through = before + counts[bin];
      const share = longest[bin] / n;
      if (share > bestInterior || share > bestExtreme) {
        let extreme: boolean;
        if (through <= lowIndex || before >= highIndex + 2) extreme = true;
        else if (before >= lowIndex + 2 && through <= highIndex) extreme = false;
        else {
          if (lowValue !== lowValue) {
            let m = 0;
            for (let i = start; i < end; i++) if (values[i] === values[i]) workValues[m++] = values[i];
            lowValue = quantileInPlace(workValues, n, lowPercentile);
            highValue = quantileInPlace(workValues, n, highPercentile);
          }
          const centre = low + (bin + 0.5) * width;
          extreme = centre < lowValue || centre > highValue;
        }
        if (extreme && share > bestExtreme) {
          bestExtreme = share;
          found.extremeAt = start;
        } else if (!extreme && share > bestInterior) {
          bestInterior = share;
          found.interiorAt = start;
        }
      }
      before = through;
    }
  }

  if (found.windows > 0) {
    found.emptyShare = Math.max(0, mostEmpty);
    found.interiorShare = Math.max(0, bestInterior);
    found.extremeShare = Math.max(0, bestExtreme);
    found.sameBinShare = same / judged;
  }
  return found;
}

/** Mean, squared deviations and extremes of a stretch of samples. */
interface Spread {
  n: number;
  mean: number;
  /** Σ(x − mean)² */
  squares: number;
  min: number;
  max: number;
}

function spread(kernel: SeriesKernel, at: number, from: number, to: number): Spread {
  const { run, results, out } = kernel;
  const pointer = at + from * Float64Array.BYTES_PER_ELEMENT;
  run.sums(pointer, to - from, 0, out);
  const n = results[0];
  const mean = n === 0 ? NaN : results[1] / n;
  const min = results[3];
  const max = results[4];
  run.sums(pointer, to - from, mean, out);
  return { n, mean, squares: results[2], min, max };
}

function joined(a: Spread, b: Spread): Spread {
  if (a.n === 0) return b;
  if (b.n === 0) return a;
  const n = a.n + b.n;
  const difference = b.mean - a.mean;
  return {
    n,
    mean: a.mean + (difference * b.n) / n,
    squares: a.squares + b.squares + (difference * difference * a.n * b.n) / n,
    min: Math.min(a.min, b.min),
    max: Math.max(a.max, b.max),
  };
}
