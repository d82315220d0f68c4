import { nextSmoothLength, powerOfTwoNear, sharedFft } from './fft';

/**
 * Covariances of two series at many lags, exact over the samples that are valid at each lag.
 */

/** Working memory that a caller may keep so that repeated searches allocate nothing large. */
export class CorrelationScratch {
  private readonly kept = new Map<number, Float64Array[]>();

  /** Four arrays of `length` zeros. */
  zeroed(length: number): Float64Array[] {
    let arrays = this.kept.get(length);
    if (!arrays) {
      if (this.kept.size >= 4) this.kept.clear();
      arrays = [0, 1, 2, 3].map(() => new Float64Array(length));
      this.kept.set(length, arrays);
    } else {
      for (const array of arrays) array.fill(0);
    }
    return arrays;
  }
}

const sharedScratch = new CorrelationScratch();

export interface LaggedCovariances {
  maxLag: number;
  /** cov(L) at index L + maxLag, 2·maxLag + 1 values; NaN where no pair is valid. */
  covariances: Float64Array;
  /** Valid pairs behind each covariance. */
  pairs: Float64Array;
}

/** Series with its mean taken off, brought to a size near 1, and gaps as zeros, as the sums need it. */
interface Centred {
  /** (x − mean) / size */
  values: Float64Array;
  size: number;
  /** Positions of missing samples. */
  missing: Int32Array;
}

function centre(series: Float64Array): Centred {
  const n = series.length;
  let sum = 0;
  let count = 0;
  for (let i = 0; i < n; i++) {
    const value = series[i];
    if (value === value) {
      sum += value;
      count++;
    }
  }
  const mean = count > 0 ? sum / count : 0;
  const values = new Float64Array(n);
  const missing = new Int32Array(n - count);
  let sumOfSquares = 0;
  for (let i = 0, m = 0; i < n; i++) {
    const value = series[i];
    if (value === value) {
      const deviation = value - mean;
      values[i] = deviation;
      sumOfSquares += deviation * deviation;
    } else {
      missing[m++] = i;
    }
  }
  const size = powerOfTwoNear(Math.sqrt(sumOfSquares / count));
  const scale = 1 / size;
  for (let i = 0; i < n; i++) values[i] *= scale;
  return { values, size, missing };
}

/**
 * Σ x(i) y(i + L) for every lag, directly. Four lags at a time: one running sum alone would wait for each addition to end.
 */
function directSums(x: Float64Array, y: Float64Array, maxLag: number): Float64Array {
  const n = x.length;
  const lags = 2 * maxLag + 1;
  const sums = new Float64Array(lags);
  for (let at = 0; at < lags; at += 4) {
    const lag = at - maxLag;
    const first = Math.min(n, Math.max(0, -lag));
    const end = Math.max(first, Math.min(n, n - lag - 3));
    let s0 = 0;
    let s1 = 0;
    let s2 = 0;
    let s3 = 0;
    for (let i = first; i < end; i++) {
      const value = x[i];
      const j = i + lag;
      s0 += value * y[j];
      s1 += value * y[j + 1];
      s2 += value * y[j + 2];
      s3 += value * y[j + 3];
    }
    const four = [s0, s1, s2, s3];
    for (let more = 0; more < 4 && at + more < lags; more++) {
      const own = lag + more;
      const ownFirst = Math.max(0, -own);
      const ownEnd = Math.min(n, n - own);
      let sum = four[more];
      for (let i = ownFirst; i < Math.min(first, ownEnd); i++) sum += x[i] * y[i + own];
      for (let i = Math.max(end, ownFirst); i < ownEnd; i++) sum += x[i] * y[i + own];
      sums[at + more] = sum;
    }
  }
  return sums;
}

/** Puts the product conj(X)·Y of the spectra of x and y, packed as Z = X + iY, in the place of Z. */
function crossInPlace(re: Float64Array, im: Float64Array): void {
  const n = re.length;
  for (let k = 0; k <= n >> 1; k++) {
    const mirror = k === 0 ? 0 : n - k;
    const zr = re[k];
    const zi = im[k];
    const mr = re[mirror];
    const mi = im[mirror];
    const productRe = 0.5 * (zr * mi + zi * mr);
    const productIm = 0.25 * (mr * mr + mi * mi - zr * zr - zi * zi);
    re[k] = productRe;
    im[k] = productIm;
    re[mirror] = productRe;
    im[mirror] = -productIm;
  }
}

/** Σ x(i) y(i + L) for every lag, through the transform: zeros up to n + maxLag keep the ends from meeting. */
function transformedSums(
  x: Float64Array,
  y: Float64Array,
  maxLag: number,
  scratch: CorrelationScratch,
): Float64Array {
  const length = nextSmoothLength(x.length + maxLag);
  const [re, im] = scratch.zeroed(length);
  re.set(x);
  im.set(y);
  const fft = sharedFft(length);
  fft.forward(re, im);
  crossInPlace(re, im);
  fft.inverse(re, im);
  const sums = new Float64Array(2 * maxLag + 1);
  for (let lag = -maxLag; lag <= maxLag; lag++) sums[lag + maxLag] = re[lag < 0 ? length + lag : lag];
  return sums;
}

/** What the valid pairs of every lag add up to, besides their products. */
interface PairSums {
  pairs: Float64Array;
  sumX: Float64Array;
  sumY: Float64Array;
}

/** Pair sums by running from lag to lag and taking off what meets a gap: exact, and cheap while gaps are few. */
function pairSumsByGaps(x: Centred, y: Centred, maxLag: number): PairSums {
  const n = x.values.length;
  const size = 2 * maxLag + 1;
  const out: PairSums = {
    pairs: new Float64Array(size),
    sumX: new Float64Array(size),
    sumY: new Float64Array(size),
  };
  const isMissingX = new Uint8Array(n);
  for (let m = 0; m < x.missing.length; m++) isMissingX[x.missing[m]] = 1;
  let totalX = 0;
  let totalY = 0;
  for (let i = 0; i < n; i++) {
    totalX += x.values[i];
    totalY += y.values[i];
  }
  for (const sign of [1, -1]) {
    // Positive lags lose the end of x and the beginning of y, negative ones the other way round.
    let offX = 0;
    let offY = 0;
    let offMissingX = 0;
    for (let shift = 0; shift <= maxLag; shift++) {
      if (shift > 0) {
        const fromEnd = n - shift;
        const fromStart = shift - 1;
        if (fromEnd >= 0) {
          const lostX = sign > 0 ? fromEnd : fromStart;
          offX += x.values[lostX];
          offY += y.values[sign > 0 ? fromStart : fromEnd];
          offMissingX += isMissingX[lostX];
        }
      }
      const lag = sign * shift;
      const inRange = Math.max(0, n - shift);
      let pairs = inRange - (x.missing.length - offMissingX);
      let sumX = totalX - offX;
      let sumY = totalY - offY;
      if (inRange > 0) {
        for (let m = 0; m < y.missing.length; m++) {
          const i = y.missing[m] - lag;
          if (i >= 0 && i < n) {
            sumX -= x.values[i];
            if (isMissingX[i] === 0) pairs--;
          }
        }
        for (let m = 0; m < x.missing.length; m++) {
          const j = x.missing[m] + lag;
          if (j >= 0 && j < n) sumY -= y.values[j];
        }
      }
      const at = lag + maxLag;
      out.pairs[at] = Math.max(0, pairs);
      out.sumX[at] = sumX;
      out.sumY[at] = sumY;
    }
  }
  return out;
}

/** Products and pair sums together through four transforms, when gaps are many. */
function allSumsByMasks(
  x: Centred,
  y: Centred,
  maxLag: number,
  scratch: CorrelationScratch,
): PairSums & { products: Float64Array } {
  const n = x.values.length;
  const length = nextSmoothLength(n + maxLag);
  const [xr, xi, yr, yi] = scratch.zeroed(length);
  xr.set(x.values);
  yr.set(y.values);
  xi.fill(1, 0, n);
  yi.fill(1, 0, n);
  for (let m = 0; m < x.missing.length; m++) xi[x.missing[m]] = 0;
  for (let m = 0; m < y.missing.length; m++) yi[y.missing[m]] = 0;
  const fft = sharedFft(length);
  fft.forward(xr, xi);
  fft.forward(yr, yi);
  for (let k = 0; k <= length >> 1; k++) {
    const mirror = k === 0 ? 0 : length - k;
    // Spectra of the values (V) and masks (M) of x and y at k; at the mirrored frequency they are the complex conjugates.
    const xvR = 0.5 * (xr[k] + xr[mirror]);
    const xvI = 0.5 * (xi[k] - xi[mirror]);
    const xmR = 0.5 * (xi[k] + xi[mirror]);
    const xmI = 0.5 * (xr[mirror] - xr[k]);
    const yvR = 0.5 * (yr[k] + yr[mirror]);
    const yvI = 0.5 * (yi[k] - yi[mirror]);
    const ymR = 0.5 * (yi[k] + yi[mirror]);
    const ymI = 0.5 * (yr[mirror] - yr[k]);
    const productR = xvR * yvR + xvI * yvI;
    const productI = xvR * yvI - xvI * yvR;
    const countR = xmR * ymR + xmI * ymI;
    const countI = xmR * ymI - xmI * ymR;
    const sumXR = xvR * ymR + xvI * ymI;
    const sumXI = xvR * ymI - xvI * ymR;
    const sumYR = xmR * yvR + xmI * yvI;
    const sumYI = xmR * yvI - xmI * yvR;
    // Two real results share each inverse: first + i·second.
    xr[k] = productR - countI;
    xi[k] = productI + countR;
    xr[mirror] = productR + countI;
    xi[mirror] = countR - productI;
    yr[k] = sumXR - sumYI;
    yi[k] = sumXI + sumYR;
    yr[mirror] = sumXR + sumYI;
    yi[mirror] = sumYR - sumXI;
  }
  fft.inverse(xr, xi);
  fft.inverse(yr, yi);
  const size = 2 * maxLag + 1;
  const out = {
    products: new Float64Array(size),
    pairs: new Float64Array(size),
    sumX: new Float64Array(size),
    sumY: new Float64Array(size),
  };
  for (let lag = -maxLag; lag <= maxLag; lag++) {
    const from = lag < 0 ? length + lag : lag;
    const at = lag + maxLag;
    out.products[at] = xr[from];
    // A count is a whole number; the transform leaves it 1e-9 beside one.
    out.pairs[at] = Math.round(xi[from]);
    out.sumX[at] = yr[from];
    out.sumY[at] = yi[from];
  }
  return out;
}

// Measured on one core of 2.6 GHz: two transforms of a sample cost about as much as its products at this many lags, and visiting this
// many gaps as much as the two transforms of the masks.
const lagsWorthTransforming = 80;
const gapVisitsLimit = 400_000;

/**
 * Covariance of two series for every whole lag from −maxLag to maxLag.
 *
 * cov(L) = mean over pairs of [x(i) − x̄][y(i + L) − ȳ], with the pairs that are both valid at that lag and both means over exactly those
 * pairs; L > 0: y was recorded later than x. Population moments (divided by the number of pairs). The series do not wrap around.
 *
 * @param x n samples, NaN where missing (not changed)
 * @param y n samples, NaN where missing (not changed)
 * @param maxLag largest lag [samples], below n
 * @param scratch working memory to reuse; one of its own per thread when left out
 * @returns covariances [unit of x × unit of y] and pair counts by lag
 * @assumes nothing of the series; offsets are removed before products are summed, so that a large mean costs no digits
 * @reference definition; zero-padded transform with validity masks (derived)
 * @deviates none: direct sums and transforms give the same numbers to rounding, whichever is quicker is taken
 */
export function laggedCovariances(
  x: Float64Array,
  y: Float64Array,
  maxLag: number,
  scratch: CorrelationScratch = sharedScratch,
): LaggedCovariances {
  const n = x.length;
  if (y.length !== n) throw new RangeError(`Series of ${n} and ${y.length} samples have no common time axis`);
  if (!Number.isInteger(maxLag) || maxLag < 0) throw new RangeError(`No lag search out to ${maxLag} samples`);
  const lags = 2 * maxLag + 1;
  const covariances = new Float64Array(lags).fill(Number.NaN);
  if (n === 0) return { maxLag, covariances, pairs: new Float64Array(lags) };

  const first = centre(x);
  const second = centre(y);
  const size = first.size * second.size;
  const fewGaps = (first.missing.length + second.missing.length) * lags <= gapVisitsLimit;
  let products: Float64Array;
  let sums: PairSums;
  if (lags < lagsWorthTransforming && fewGaps) {
    products = directSums(first.values, second.values, maxLag);
    sums = pairSumsByGaps(first, second, maxLag);
  } else if (fewGaps) {
    products = transformedSums(first.values, second.values, maxLag, scratch);
    sums = pairSumsByGaps(first, second, maxLag);
  } else {
    const all = allSumsByMasks(first, second, maxLag, scratch);
    products = all.products;
    sums = all;
  }
  for (let at = 0; at < lags; at++) {
    const pairs = sums.pairs[at];
    if (pairs > 0)
      covariances[at] = ((products[at] - (sums.sumX[at] * sums.sumY[at]) / pairs) / pairs) * size;
  }
  return { maxLag, covariances, pairs: sums.pairs };
}

/** Auto- and cross-covariances of one aligned pair, biased (divided by the number of valid pairs at every lag). */
export interface BiasedCovariances {
  pairs: number;
  /** Autocovariance of x at lags 0 … maxLag. */
  xx: Float64Array;
  /** Autocovariance of y at lags 0 … maxLag. */
  yy: Float64Array;
  /** cov of x(i) and y(i + p), index p + maxLag. */
  xy: Float64Array;
}

/**
 * Biased auto- and cross-covariances of several pairs of series, as sampling errors need them.
 *
 * g(p) = (1/N) Σ x'(i) y'(i + p), with N the pairs valid at lag 0, means over those pairs, and zeros where either sample is missing.
 *
 * @param series pairs of aligned series of the same length, NaN where missing (not changed)
 * @param maxLag largest lag p [samples]; cut to n − 1
 * @param scratch working memory to reuse
 * @returns one result per pair; with no valid pair all values are NaN
 * @reference Finkelstein & Sims (2001), J. Geophys. Res. 106(D4):3503–3509 (definition of the estimates; from memory)
 * @deviates none
 */
export function biasedCovariances(
  series: readonly { x: Float64Array; y: Float64Array }[],
  maxLag: number,
  scratch: CorrelationScratch = sharedScratch,
): BiasedCovariances[] {
  const results: BiasedCovariances[] = [];
  for (let from = 0; from < series.length; from += 2)
    results.push(...biasedOfTwo(series.slice(from, from + 2), maxLag, scratch));
  return results;
}

/** One or two pairs of one length: the cross-covariances of both share an inverse transform. */
function biasedOfTwo(
  series: readonly { x: Float64Array; y: Float64Array }[],
  maxLag: number,
  scratch: CorrelationScratch,
): BiasedCovariances[] {
  const n = Math.max(...series.map((pair) => pair.x.length));
  const reach = Math.max(0, Math.min(maxLag, n - 1));
  const length = nextSmoothLength(n + reach);
  const fft = sharedFft(length);
  const [re, im, crossRe, crossIm] = scratch.zeroed(length);
  const results: BiasedCovariances[] = [];
  const crossSizes: number[] = [];
  series.forEach(({ x, y }, index) => {
    if (index > 0) {
      re.fill(0);
      im.fill(0);
    }
    const { pairs, sizeX, sizeY } = fillCentredPairs(x, y, re, im);
    fft.forward(re, im);
    // Z = X + iY. Auto spectra of both, packed as |X|² + i|Y|², replace Z; conj(X)·Y is added to the crosses, turned by i the second time.
    for (let k = 0; k <= length >> 1; k++) {
      const mirror = k === 0 ? 0 : length - k;
      const zr = re[k];
      const zi = im[k];
      const mr = re[mirror];
      const mi = im[mirror];
      const here = zr * zr + zi * zi;
      const there = mr * mr + mi * mi;
      const mixed = 2 * (zr * mr - zi * mi);
      const crossR = 0.5 * (zr * mi + zi * mr);
      const crossI = 0.25 * (there - here);
      const autoX = 0.25 * (here + there + mixed);
      const autoY = 0.25 * (here + there - mixed);
      re[k] = autoX;
      im[k] = autoY;
      re[mirror] = autoX;
      im[mirror] = autoY;
      if (index === 0) {
        crossRe[k] = crossR;
        crossIm[k] = crossI;
        crossRe[mirror] = crossR;
        crossIm[mirror] = -crossI;
      } else {
        crossRe[k] -= crossI;
        crossIm[k] += crossR;
        if (mirror !== k) {
          crossRe[mirror] += crossI;
          crossIm[mirror] += crossR;
        }
      }
    }
    fft.inverse(re, im);
    const scale = pairs > 0 ? 1 / pairs : Number.NaN;
    const xx = new Float64Array(reach + 1);
    const yy = new Float64Array(reach + 1);
    for (let p = 0; p <= reach; p++) {
      xx[p] = re[p] * scale * sizeX * sizeX;
      yy[p] = im[p] * scale * sizeY * sizeY;
    }
    results.push({ pairs, xx, yy, xy: new Float64Array(2 * reach + 1) });
    crossSizes.push(sizeX * sizeY);
  });
  fft.inverse(crossRe, crossIm);
  results.forEach((result, index) => {
    const from = index === 0 ? crossRe : crossIm;
    const scale = result.pairs > 0 ? crossSizes[index] / result.pairs : Number.NaN;
    for (let p = -reach; p <= reach; p++) result.xy[p + reach] = from[p < 0 ? length + p : p] * scale;
  });
  return results;
}

/** Writes x' and y', each over a size near its root mean square, with zeros at missing pairs. */
function fillCentredPairs(
  x: Float64Array,
  y: Float64Array,
  intoX: Float64Array,
  intoY: Float64Array,
): { pairs: number; sizeX: number; sizeY: number } {
  const n = x.length;
  let pairs = 0;
  let sumX = 0;
  let sumY = 0;
  // Offsets near the mean keep the sums small, so that the means are good to the last digit.
  let offsetX = 0;
  let offsetY = 0;
  let hasOffset = false;
  for (let i = 0; i < n; i++) {
    const a = x[i];
    const b = y[i];
    if (a !== a || b !== b) continue;
    if (!hasOffset) {
      offsetX = a;
      offsetY = b;
      hasOffset = true;
    }
    sumX += a - offsetX;
    sumY += b - offsetY;
    pairs++;
  }
  if (pairs === 0) return { pairs, sizeX: 1, sizeY: 1 };
  const meanX = offsetX + sumX / pairs;
  const meanY = offsetY + sumY / pairs;
  let squaresX = 0;
  let squaresY = 0;
  for (let i = 0; i < n; i++) {
    const a = x[i];
    const b = y[i];
    if (a !== a || b !== b) continue;
    const dx = a - meanX;
    const dy = b - meanY;
    squaresX += dx * dx;
    squaresY += dy * dy;
    intoX[i] = dx;
    intoY[i] = dy;
  }
  const sizeX = powerOfTwoNear(Math.sqrt(squaresX / pairs));
  const sizeY = powerOfTwoNear(Math.sqrt(squaresY / pairs));
  const scaleX = 1 / sizeX;
  const scaleY = 1 / sizeY;
  for (let i = 0; i < n; i++) {
    intoX[i] *= scaleX;
    intoY[i] *= scaleY;
  }
  return { pairs, sizeX, sizeY };
}
