import { sharedFft } from '../numerics/fft';
import type { SplitMix64 } from '../numerics/random';
import type { LineGain } from './reference-shapes';

/** What instruments and loggers do to series. Every function changes the arrays it is given. */

/**
 * Passes two series through their gains at the spectral lines of the record.
 *
 * A straight line is taken out first and put back after, so that a slow change of the mean across the record is not wrapped around.
 *
 * @param gains length n/2, lines k = 1 … n/2 − 1; null leaves the series alone
 */
export function blur(a: Float64Array, gainA: LineGain | null, b: Float64Array, gainB: LineGain | null): void {
  const n = a.length;
  const lineA = takeLine(a);
  const lineB = takeLine(b);
  const fft = sharedFft(n);
  fft.forward(a, b);
  for (let k = 1; k < n / 2; k++) {
    const m = n - k;
    // Unpack two half spectra from that of a + i b.
    let aRe = 0.5 * (a[k] + a[m]);
    let aIm = 0.5 * (b[k] - b[m]);
    let bRe = 0.5 * (b[k] + b[m]);
    let bIm = 0.5 * (a[m] - a[k]);
    if (gainA) [aRe, aIm] = [aRe * gainA.re[k] - aIm * gainA.im[k], aRe * gainA.im[k] + aIm * gainA.re[k]];
    if (gainB) [bRe, bIm] = [bRe * gainB.re[k] - bIm * gainB.im[k], bRe * gainB.im[k] + bIm * gainB.re[k]];
    a[k] = aRe - bIm;
    b[k] = aIm + bRe;
    a[m] = aRe + bIm;
    b[m] = bRe - aIm;
  }
  fft.inverse(a, b);
  putLine(a, lineA);
  putLine(b, lineB);
}

interface Line {
  mean: number;
  slope: number;
}

function takeLine(x: Float64Array): Line {
  const n = x.length;
  const middle = (n - 1) / 2;
  let mean = 0;
  let slope = 0;
  for (let i = 0; i < n; i++) {
    mean += x[i] / n;
    slope += x[i] * (i - middle);
  }
  slope /= (n * (n * n - 1)) / 12;
  putLine(x, { mean: -mean, slope: -slope });
  return { mean, slope };
}

function putLine(x: Float64Array, line: Line): void {
  const middle = (x.length - 1) / 2;
  for (let i = 0; i < x.length; i++) x[i] += line.mean + line.slope * (i - middle);
}

/** Delays a series by whole samples; what leaves at the end comes in at the beginning, apart from a straight line. */
export function delay(x: Float64Array, scans: number): void {
  if (scans === 0) return;
  const line = takeLine(x);
  const n = x.length;
  const copy = x.slice();
  for (let i = 0; i < n; i++) x[i] = copy[(((i - scans) % n) + n) % n];
  putLine(x, line);
}

export interface TiltAngles {
  /** Angle of the mean wind in the horizontal axes of the instrument [rad]. */
  yawRad: number;
  pitchRad: number;
  rollRad: number;
}

/**
 * Turns streamline components into those of an instrument that stands askew: the inverse of yaw, then pitch, then roll as the double
 * and triple rotation apply them (Kaimal and Finnigan 1994, ch. 6, from memory).
 */
export function tilt(u: Float64Array, v: Float64Array, w: Float64Array, angles: TiltAngles): void {
  const m = streamlineMatrix(angles);
  for (let i = 0; i < u.length; i++) {
    const [a, b, c] = [u[i], v[i], w[i]];
    u[i] = m[0][0] * a + m[1][0] * b + m[2][0] * c;
    v[i] = m[0][1] * a + m[1][1] * b + m[2][1] * c;
    w[i] = m[0][2] * a + m[1][2] * b + m[2][2] * c;
  }
}

/** Rows of the rotation from instrument to streamline axes. */
export function streamlineMatrix({ yawRad, pitchRad, rollRad }: TiltAngles): number[][] {
  const [cy, sy] = [Math.cos(yawRad), Math.sin(yawRad)];
  const [cp, sp] = [Math.cos(pitchRad), Math.sin(pitchRad)];
  const [cr, sr] = [Math.cos(rollRad), Math.sin(rollRad)];
  const first = [
    [cp * cy, cp * sy, sp],
    [-sy, cy, 0],
    [-sp * cy, -sp * sy, cp],
  ];
  return [
    first[0],
    first[1].map((x, j) => cr * x + sr * first[2][j]),
    first[1].map((x, j) => -sr * x + cr * first[2][j]),
  ];
}

export function addWhiteNoise(x: Float64Array, standardDeviation: number, random: SplitMix64): void {
  if (standardDeviation === 0) return;
  for (let i = 0; i < x.length; i++) x[i] += standardDeviation * random.normal();
}

export function gainAndOffset(x: Float64Array, gain: number, offset: number): void {
  if (gain === 1 && offset === 0) return;
  for (let i = 0; i < x.length; i++) x[i] = gain * x[i] + offset;
}

/** Rounds to whole multiples of a step. */
export function quantise(x: Float64Array, step: number, from = 0, to = x.length): void {
  for (let i = from; i < to; i++) x[i] = step * Math.round(x[i] / step);
}

/** Repeats the value at `from` up to before `to`. */
export function freeze(x: Float64Array, from: number, to: number): void {
  x.fill(x[from], from, to);
}

export function standardDeviation(x: Float64Array): number {
  let mean = 0;
  for (const value of x) mean += value / x.length;
  let sum = 0;
  for (const value of x) sum += (value - mean) ** 2;
  return Math.sqrt(sum / x.length);
}

/**
 * Adds single spikes of either sign, or runs of them, at random places that are at least five samples apart.
 *
 * @param count number of runs
 * @param sigmas height in standard deviations of the series as given
 * @returns touched samples, ascending
 */
export function addSpikes(
  x: Float64Array,
  count: number,
  sigmas: number,
  longestRun: number,
  random: SplitMix64,
): number[] {
  const height = sigmas * standardDeviation(x);
  const taken = new Set<number>();
  const touchedSamples: number[] = [];
  const reach = longestRun + 5;
  for (let made = 0, tries = 0; made < count && tries < 50 * count; tries++) {
    const start = reach + random.integer(x.length - 2 * reach);
    if (taken.has(Math.floor(start / reach))) continue;
    for (const near of [-1, 0, 1]) taken.add(Math.floor(start / reach) + near);
    const length = 1 + random.integer(longestRun);
    const sign = random.uniform() < 0.5 ? -1 : 1;
    for (let i = start; i < start + length; i++) {
      x[i] += sign * height;
      touchedSamples.push(i);
    }
    made++;
  }
  return touchedSamples.sort((a, b) => a - b);
}
