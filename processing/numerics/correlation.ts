import type { LaggedSeries } from './lagged-products';
import { laggedProducts } from './lagged-products';
import { countValid, mean, pairMoments } from './moments';

/**
 * Covariances of two series at many lags, exact over the samples that are valid at each lag.
 */

export interface LaggedCovariances {
  maxLag: number;
  /** cov(L) at index L + maxLag, 2·maxLag + 1 values; NaN where no pair is valid. */
  covariances: Float64Array;
  /** Valid pairs behind each covariance. */
  pairs: Float64Array;
}

/** A series, its mean, and where it has gaps. */
interface Centred extends LaggedSeries {
  /** Runs of missing samples: first of each, and first behind it. */
  gaps: [number, number][];
}

function centre(values: Float64Array): Centred {
  const taken = mean(values);
  const gaps: [number, number][] = [];
  for (let i = 0, left = values.length - countValid(values); left > 0; i++) {
    if (values[i] === values[i]) continue;
    const from = i;
    while (i < values.length && values[i] !== values[i]) i++;
    gaps.push([from, i]);
    left -= i - from;
  }
  return { values, mean: taken, mask: null, gaps };
}

/** Running sums over the first i samples: of the values less their mean, and of how many of them are there. */
interface RunningSums {
  sum: Float64Array;
  valid: Int32Array;
}

function runningSums({ values, mean: taken }: Centred): RunningSums {
  const n = values.length;
  const sum = new Float64Array(n + 1);
  const valid = new Int32Array(n + 1);
  for (let i = 0; i < n; i++) {
    const deviation = values[i] - taken;
    const isThere = deviation === deviation;
    sum[i + 1] = isThere ? sum[i] + deviation : sum[i];
    valid[i + 1] = isThere ? valid[i] + 1 : valid[i];
  }
  return { sum, valid };
}

/** Sums of the first and of the last 0 … most samples less their mean, of a series without gaps. */
function endSums({ values, mean: taken }: Centred, most: number): { head: Float64Array; tail: Float64Array } {
  const n = values.length;
  const reach = Math.min(most, n);
  const head = new Float64Array(most + 1);
  const tail = new Float64Array(most + 1);
  for (let i = 0; i < reach; i++) {
    head[i + 1] = head[i] + (values[i] - taken);
    tail[i + 1] = tail[i] + (values[n - 1 - i] - taken);
  }
  return { head, tail };
}

/** What the valid pairs of every lag add up to, besides their products. */
interface PairSums {
  pairs: Float64Array;
  sumX: Float64Array;
  sumY: Float64Array;
}

function emptySums(maxLag: number): PairSums {
  const size = 2 * maxLag + 1;
  return { pairs: new Float64Array(size), sumX: new Float64Array(size), sumY: new Float64Array(size) };
}

/** Pair sums of series without gaps: a lag cuts off one end of either, and the whole adds up to 0 but for rounding. */
function pairSumsOfWhole(x: Centred, y: Centred, maxLag: number): PairSums {
  const n = x.values.length;
  const out = emptySums(maxLag);
  const ofX = endSums(x, maxLag);
  const ofY = endSums(y, maxLag);
  for (let shift = 0; shift <= Math.min(maxLag, n - 1); shift++) {
    const [later, earlier] = [maxLag + shift, maxLag - shift];
    out.pairs[later] = out.pairs[earlier] = n - shift;
    out.sumX[later] = -ofX.tail[shift];
    out.sumY[later] = -ofY.head[shift];
    out.sumX[earlier] = -ofX.head[shift];
    out.sumY[earlier] = -ofY.tail[shift];
  }
  return out;
}

/**
 * Pair sums lag by lag: what lies in range, less what meets a gap of the other series. Exact, and cheap while gaps are few; a long gap
 * costs no more than a short one.
 */
function pairSumsByGaps(x: Centred, y: Centred, maxLag: number): PairSums {
  if (x.gaps.length + y.gaps.length === 0) return pairSumsOfWhole(x, y, maxLag);
  const out = emptySums(maxLag);
  sumByGaps(runningSums(x), runningSums(y), gapEnds(x), gapEnds(y), maxLag, out);
  return out;
}

/** First of each gap and first behind it, one after the other. */
function gapEnds({ gaps }: Centred): Int32Array {
  return Int32Array.from(gaps.flat());
}

function sumByGaps(
  ofX: RunningSums,
  ofY: RunningSums,
  gapsX: Int32Array,
  gapsY: Int32Array,
  maxLag: number,
  out: PairSums,
): void {
  const n = ofX.sum.length - 1;
  for (let lag = -maxLag; lag <= maxLag; lag++) {
    const at = lag + maxLag;
    const firstX = Math.min(n, Math.max(0, -lag));
    const endX = Math.min(n, Math.max(0, n - lag));
    out.pairs[at] = 0;
    if (endX <= firstX) continue;
    let pairs = ofX.valid[endX] - ofX.valid[firstX];
    let sumX = ofX.sum[endX] - ofX.sum[firstX];
    let sumY = ofY.sum[endX + lag] - ofY.sum[firstX + lag];
    for (let g = 0; g < gapsY.length; g += 2) {
      const from = Math.min(n, Math.max(0, gapsY[g] - lag));
      const to = Math.min(n, Math.max(0, gapsY[g + 1] - lag));
      sumX -= ofX.sum[to] - ofX.sum[from];
      pairs -= ofX.valid[to] - ofX.valid[from];
    }
    for (let g = 0; g < gapsX.length; g += 2) {
      const from = Math.min(n, Math.max(0, gapsX[g] + lag));
      const to = Math.min(n, Math.max(0, gapsX[g + 1] + lag));
      sumY -= ofY.sum[to] - ofY.sum[from];
    }
    out.pairs[at] = pairs;
    out.sumX[at] = sumX;
    out.sumY[at] = sumY;
  }
}

/** 1 where a sample is there, 0 where it is missing. */
function maskOf({ values, gaps }: Centred): LaggedSeries {
  const isThere = new Float64Array(values.length).fill(1);
  for (const [from, to] of gaps) isThere.fill(0, from, to);
  return { values: isThere, mean: 0, mask: null };
}

// Measured on one core of 2.6 GHz: visiting this many gaps takes about as long as the products with both masks.
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
 * @returns covariances [unit of x × unit of y] and pair counts by lag
 * @assumes nothing of the series; offsets are removed before products are summed, so that a large mean costs no digits
 * @reference definition; sums of products by lag with validity masks where gaps are many (derived)
 * @deviates none
 */
export function laggedCovariances(x: Float64Array, y: Float64Array, maxLag: number): LaggedCovariances {
  return laggedCovariancesOfAll(x, [y], maxLag)[0];
}

/**
 * The same of one series with several others, for little more than with one.
 *
 * @param x n samples, NaN where missing (not changed)
 * @param others series of n samples, NaN where missing (not changed)
 * @param maxLag largest lag [samples]
 * @returns one result per other series
 */
export function laggedCovariancesOfAll(
  x: Float64Array,
  others: readonly Float64Array[],
  maxLag: number,
): LaggedCovariances[] {
  const n = x.length;
  for (const y of others)
    if (y.length !== n)
      throw new RangeError(`Series of ${n} and ${y.length} samples have no common time axis`);
  if (!Number.isInteger(maxLag) || maxLag < 0) throw new RangeError(`No lag search out to ${maxLag} samples`);
  const lags = 2 * maxLag + 1;
  const results = others.map((): LaggedCovariances => ({
    maxLag,
    covariances: new Float64Array(lags).fill(Number.NaN),
    pairs: new Float64Array(lags),
  }));
  if (n === 0) return results;

  const first = centre(x);
  const series: LaggedSeries[] = [first];
  const pairs: [number, number][] = [];
  const add = (one: LaggedSeries): number => series.push(one) - 1;
  let maskX = -1;
  const asked = others.map((y) => {
    const second = centre(y);
    const values = add(second);
    const at = pairs.length;
    pairs.push([0, values]);
    const byMasks = (first.gaps.length + second.gaps.length) * lags > gapVisitsLimit;
    if (byMasks) {
      if (maskX < 0) maskX = add(maskOf(first));
      const maskY = add(maskOf(second));
      pairs.push([maskX, maskY], [0, maskY], [maskX, values]);
    }
    return { second, at, byMasks };
  });
  const found = laggedProducts(series, pairs, maxLag);
  asked.forEach(({ second, at, byMasks }, index) => {
    const products = found[at];
    const { covariances } = results[index];
    const sums: PairSums = byMasks
      ? // A count is a whole number; the transform leaves it 1e-11 beside one.
        { pairs: found[at + 1].map(Math.round), sumX: found[at + 2], sumY: found[at + 3] }
      : pairSumsByGaps(first, second, maxLag);
    for (let lag = 0; lag < lags; lag++) {
      const count = sums.pairs[lag];
      if (count > 0) covariances[lag] = (products[lag] - (sums.sumX[lag] * sums.sumY[lag]) / count) / count;
    }
    results[index].pairs = sums.pairs;
  });
  return results;
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
 * @returns one result per pair; with no valid pair all values are NaN
 * @reference Finkelstein & Sims (2001), J. Geophys. Res. 106(D4):3503–3509 (definition of the estimates; from memory)
 * @deviates none
 */
export function biasedCovariances(
  series: readonly { x: Float64Array; y: Float64Array }[],
  maxLag: number,
): BiasedCovariances[] {
  const longest = series.reduce((most, { x }) => Math.max(most, x.length), 0);
  const reach = Math.max(0, Math.min(maxLag, longest - 1));
  const taking: LaggedSeries[] = [];
  const wanted: [number, number][] = [];
  // A series that comes out the same beside two partners is transformed once.
  const place = (one: LaggedSeries): number => {
    const known = taking.findIndex(
      (other) => other.values === one.values && other.mean === one.mean && hasSameGaps(other.mask, one.mask),
    );
    return known >= 0 ? known : taking.push(one) - 1;
  };
  const want = (x: number, y: number): number => {
    const known = wanted.findIndex((other) => other[0] === x && other[1] === y);
    return known >= 0 ? known : wanted.push([x, y]) - 1;
  };
  const asked = series.map(({ x, y }) => {
    const { n: pairs, meanX, meanY } = pairMoments(x, y);
    const maskX = pairs < countValid(x) ? y : null;
    const maskY = pairs < countValid(y) ? x : null;
    const atX = place({ values: x, mean: meanX, mask: maskX });
    const atY = place({ values: y, mean: meanY, mask: maskY });
    return { pairs, xx: want(atX, atX), yy: want(atY, atY), xy: want(atX, atY) };
  });
  const sums = laggedProducts(taking, wanted, reach);
  return asked.map(({ pairs, xx, yy, xy }) => ({
    pairs,
    xx: divided(sums[xx].subarray(reach), pairs),
    yy: divided(sums[yy].subarray(reach), pairs),
    xy: divided(sums[xy], pairs),
  }));
}

/** The values over the number of pairs; NaN without any. */
function divided(values: Float64Array, pairs: number): Float64Array {
  const scale = pairs > 0 ? 1 / pairs : Number.NaN;
  const out = new Float64Array(values.length);
  for (let i = 0; i < out.length; i++) out[i] = values[i] * scale;
  return out;
}

/** Whether two masks leave out the same samples. */
function hasSameGaps(a: Float64Array | null, b: Float64Array | null): boolean {
  if (a === b) return true;
  if (a === null || b === null) return false;
  for (let i = 0; i < a.length; i++) if ((a[i] === a[i]) !== (b[i] === b[i])) return false;
  return true;
}
