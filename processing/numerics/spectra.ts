import { powerOfTwoNear, transformTwoReal } from './fft';
import { isConstantSignal, pairMoments } from './moments';

/** Spectra, cospectra and ogives of gap-free series. */

/**
 * Fills short gaps by straight lines between their neighbours, so that a series can be transformed.
 *
 * @param values n samples, NaN where missing (not changed)
 * @param longestGap longest gap that is filled [samples]; gaps at the ends take the nearest value and count the same
 * @param maximumGapShare missing share above which nothing is filled, 0 … 1
 * @returns a filled copy; null when a gap is longer, too much is missing, or nothing is there
 * @assumes gaps short against the motions of interest
 * @reference project choice
 * @deviates none
 */
export function fillShortGaps(
  values: Float64Array,
  longestGap: number,
  maximumGapShare: number,
): Float64Array | null {
  const n = values.length;
  const filled = values.slice();
  let missing = 0;
  let last = -1;
  for (let i = 0; i <= n; i++) {
    if (i < n && values[i] !== values[i]) continue;
    const gap = i - last - 1;
    if (gap > 0) {
      missing += gap;
      if (gap > longestGap || gap === n) return null;
      const before = last >= 0 ? values[last] : values[i];
      const after = i < n ? values[i] : values[last];
      for (let j = last + 1; j < i; j++) filled[j] = before + ((after - before) * (j - last)) / (i - last);
    }
    last = i;
  }
  return missing > maximumGapShare * n ? null : filled;
}

export type SpectralWindow = 'none' | 'hamming' | 'hann';

export interface CrossSpectrum {
  /** f_k = k f_s/N for k = 0 … ⌊N/2⌋ [Hz]. */
  frequenciesHz: Float64Array;
  /** Width of a line [Hz]. */
  lineWidthHz: number;
  /** One-sided cospectrum [unit of x × unit of y per Hz]; of a series with itself: its power spectrum. */
  cospectrum: Float64Array;
  /** One-sided quadrature spectrum. */
  quadrature: Float64Array;
  /** Covariance of the two series, before any window. */
  covariance: number;
  /** Factor by which windowed lines were multiplied to keep the covariance; 1 without a window or where the covariance is next to nothing. */
  rescale: number;
}

/** Correlation below which a windowed cospectrum is not rescaled to its covariance. */
const smallestRescaledCorrelation = 0.01;

function windowWeights(kind: SpectralWindow, n: number): Float64Array | null {
  if (kind === 'none' || n < 2) return null;
  const [offset, swing] = kind === 'hamming' ? [0.54, 0.46] : [0.5, 0.5];
  return Float64Array.from({ length: n }, (_, j) => offset - swing * Math.cos((2 * Math.PI * j) / (n - 1)));
}

/**
 * One-sided cospectrum and quadrature spectrum of two series.
 *
 * S_xy(f_k) = g_k Re(X_k* Y_k)/(N f_s), Q_xy = g_k Im(X_k* Y_k)/(N f_s); g = 2, but 1 at k = 0 and, for even N, at k = N/2.
 * Without a window the lines k ≥ 1 times their width add up to the covariance exactly (Parseval).
 *
 * @param x,y N samples without NaN (not changed); the same array twice gives a power spectrum
 * @param sampleRateHz f_s [Hz]
 * @param window taper; the result is divided by its mean square, then rescaled to the covariance
 * @returns lines from k = 0; null for fewer than two samples, or where either series is constant
 * @assumes stationary series
 * @reference Stull (1988), An Introduction to Boundary Layer Meteorology, ch. 8 (from memory); definitions checked with scipy
 * @deviates windowed lines are rescaled to integrate to the covariance, unless |correlation| < 0.01 (project choice)
 */
export function crossSpectrum(
  x: Float64Array,
  y: Float64Array,
  sampleRateHz: number,
  window: SpectralWindow = 'none',
): CrossSpectrum | null {
  const n = x.length;
  if (y.length !== n) throw new RangeError(`Series of ${n} and ${y.length} samples have no common spectrum`);
  if (n < 2) return null;
  const about = pairMoments(x, y);
  if (about.n < n) throw new RangeError('A series with gaps has no spectrum: fill or refuse it first');
  const varianceX = about.m2x / n;
  const varianceY = about.m2y / n;
  if (isConstantSignal(varianceX, about.meanX) || isConstantSignal(varianceY, about.meanY)) return null;
  const covariance = about.cxy / n;

  const weights = windowWeights(window, n);
  const sizeX = powerOfTwoNear(Math.sqrt(varianceX));
  const sizeY = powerOfTwoNear(Math.sqrt(varianceY));
  const a = x.map((value) => (value - about.meanX) / sizeX);
  const b = y.map((value) => (value - about.meanY) / sizeY);
  let meanSquare = 1;
  if (weights) {
    let sum = 0;
    for (let i = 0; i < n; i++) {
      a[i] *= weights[i];
      b[i] *= weights[i];
      sum += weights[i] * weights[i];
    }
    meanSquare = sum / n;
  }
  const [first, second] = transformTwoReal(a, b);
  const lines = (n >> 1) + 1;
  const frequenciesHz = new Float64Array(lines);
  const cospectrum = new Float64Array(lines);
  const quadrature = new Float64Array(lines);
  let sum = 0;
  const lineWidthHz = sampleRateHz / n;
  for (let k = 0; k < lines; k++) {
    const sides = k === 0 || 2 * k === n ? 1 : 2;
    const scale = (sides * sizeX * sizeY) / (n * sampleRateHz * meanSquare);
    frequenciesHz[k] = k * lineWidthHz;
    cospectrum[k] = scale * (first.re[k] * second.re[k] + first.im[k] * second.im[k]);
    quadrature[k] = scale * (first.re[k] * second.im[k] - first.im[k] * second.re[k]);
    if (k > 0) sum += cospectrum[k];
  }
  let rescale = 1;
  if (weights && Math.abs(covariance) >= smallestRescaledCorrelation * Math.sqrt(varianceX * varianceY)) {
    rescale = covariance / (sum * lineWidthHz);
    for (let k = 0; k < lines; k++) {
      cospectrum[k] *= rescale;
      quadrature[k] *= rescale;
    }
  }
  return { frequenciesHz, lineWidthHz, cospectrum, quadrature, covariance, rescale };
}

/**
 * Ogive: how much of a covariance comes from frequencies at and above f.
 *
 * Og(f_k) = Σ_{j ≥ k} Co_j Δf, summed from high to low frequency; Og(f_1) = covariance
 *
 * @param cospectrum lines k = 0 … ⌊N/2⌋ (not changed)
 * @param lineWidthHz Δf [Hz]
 * @returns ogive at k = 1 … ⌊N/2⌋, index k − 1 [unit of the covariance]
 * @reference Desjardins et al. (1989), Boundary-Layer Meteorol. 47:55–69 (from memory)
 * @deviates none
 */
export function ogive(cospectrum: Float64Array, lineWidthHz: number): Float64Array {
  const lines = cospectrum.length - 1;
  const out = new Float64Array(Math.max(0, lines));
  let sum = 0;
  for (let k = lines; k >= 1; k--) {
    sum += cospectrum[k] * lineWidthHz;
    out[k - 1] = sum;
  }
  return out;
}

export interface OgiveFindings {
  /** Og(3 f_1)/Og(f_1): near 1 when the slowest motions add little; NaN when the covariance is next to nothing. */
  convergence: number;
  /** max |Og| / |Og(f_1)|: above 1 when slow motions carry the opposite sign. */
  overshoot: number;
}

/**
 * Whether an ogive levels off within the period.
 *
 * @param values ogive at k = 1 …
 * @param standardDeviations product σ_x σ_y, for telling a covariance from nothing
 * @returns ratios; NaN for |covariance| < 0.01 σ_x σ_y
 * @reference project choice
 */
export function ogiveFindings(values: Float64Array, standardDeviations: number): OgiveFindings {
  const whole = values[0];
  if (values.length < 3 || !(Math.abs(whole) >= smallestRescaledCorrelation * standardDeviations)) {
    return { convergence: Number.NaN, overshoot: Number.NaN };
  }
  let largest = 0;
  for (let k = 0; k < values.length; k++) largest = Math.max(largest, Math.abs(values[k]));
  return { convergence: values[2] / whole, overshoot: largest / Math.abs(whole) };
}

export interface SpectralBin {
  /** Mean frequency of the lines in the bin [Hz]. */
  frequencyHz: number;
  /** Mean of the lines [unit of the lines]. */
  value: number;
  /** Σ line × Δf: what the bin adds to the covariance. */
  contribution: number;
  lines: number;
}

/**
 * Averages lines into logarithmically spaced bins from f_1 to f_s/2. Empty bins are left out; every line k ≥ 1 is in exactly one bin.
 *
 * @param frequenciesHz,lines from k = 0 (not changed)
 * @param bins number of bins
 * @returns bins that hold a line, from low to high frequency
 * @assumes evenly spaced lines
 * @reference common practice, no source
 * @deviates none
 */
export function logarithmicBins(
  frequenciesHz: Float64Array,
  lines: Float64Array,
  bins: number,
): SpectralBin[] {
  const count = lines.length - 1;
  if (count < 1) return [];
  const width = frequenciesHz[1];
  const span = Math.log(frequenciesHz[count] / width);
  const out: SpectralBin[] = [];
  let current: SpectralBin & { index: number } = {
    frequencyHz: 0,
    value: 0,
    contribution: 0,
    lines: 0,
    index: 0,
  };
  const close = (): void => {
    if (current.lines === 0) return;
    out.push({
      frequencyHz: current.frequencyHz / current.lines,
      value: current.value / current.lines,
      contribution: current.value * width,
      lines: current.lines,
    });
  };
  for (let k = 1; k <= count; k++) {
    const position = span > 0 ? Math.log(frequenciesHz[k] / width) / span : 0;
    const index = Math.min(bins - 1, Math.floor(position * bins));
    if (index !== current.index) {
      close();
      current = { frequencyHz: 0, value: 0, contribution: 0, lines: 0, index };
    }
    current.frequencyHz += frequenciesHz[k];
    current.value += lines[k];
    current.lines++;
  }
  close();
  return out;
}

/**
 * Slope of a spectrum in log-log coordinates, by least squares over the bins within a range of frequency.
 *
 * @param bins averaged spectrum
 * @param fromHz,toHz range [Hz]
 * @returns exponent p of S ~ f^p and its coefficient of determination; NaN with fewer than three positive bins
 * @reference inertial subrange S ~ f^(−5/3): Kolmogorov (1941), Dokl. Akad. Nauk SSSR 30:301–305 (from memory)
 * @deviates none
 */
export function spectralSlope(
  bins: readonly SpectralBin[],
  fromHz: number,
  toHz: number,
): { slope: number; determination: number } {
  const used = bins.filter((bin) => bin.frequencyHz >= fromHz && bin.frequencyHz <= toHz && bin.value > 0);
  if (used.length < 3) return { slope: Number.NaN, determination: Number.NaN };
  const x = Float64Array.from(used, (bin) => Math.log(bin.frequencyHz));
  const y = Float64Array.from(used, (bin) => Math.log(bin.value));
  const { m2x, m2y, cxy } = pairMoments(x, y);
  return { slope: cxy / m2x, determination: m2y > 0 ? (cxy * cxy) / (m2x * m2y) : Number.NaN };
}
