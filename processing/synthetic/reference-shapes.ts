/**
 * Shapes of turbulence spectra and cospectra that the generator draws its series from, as f·S/variance or f·Co/covariance against
 * n = f (z − d) / U.
 *
 * They are written here a second time, apart from the spectral correction of the chain, so that a slip there shows up as a wrong flux
 * in the recovery tests and is not generated into the truth.
 */

/**
 * Which cospectra the synthetic series have.
 *
 * - `surface-layer`: neutral curves of Kaimal and Finnigan (1994) for every stability.
 * - `correction`: the stability-dependent forms that the spectral correction assumes (Kaimal et al. 1972 as parameterised by Moncrieff
 *   et al. 1997). The two families differ by some per cent in how much flux the small eddies carry; a correction judged against series
 *   of the other family would be blamed for that difference. Recovery tests and the demonstration day use `correction`, so that what
 *   is compared is the arithmetic and not the choice of curve.
 */
export type CospectrumFamily = 'surface-layer' | 'correction';

/** f S_u / σ_u², neutral. @reference Kaimal and Finnigan (1994), coefficients from memory; integral 4.63636 derived. */
export function uSpectrumShape(n: number): number {
  return (102 * n) / (1 + 33 * n) ** (5 / 3) / 4.636363636363637;
}

/** f S_v / σ_v², neutral. @reference Kaimal et al. (1972), as in Kaimal and Finnigan (1994); integral derived. */
export function vSpectrumShape(n: number): number {
  return (17 * n) / (1 + 9.5 * n) ** (5 / 3) / 2.684210526315789;
}

/** f S_w / σ_w², neutral. @reference Kaimal and Finnigan (1994), from memory; integral derived. */
export function wSpectrumShape(n: number): number {
  return (2.1 * n) / (1 + 5.3 * n ** (5 / 3)) / 1.530201314;
}

/** f S_T / σ_T², neutral; used for every scalar. @reference Kaimal et al. (1972), from memory; branch point confirmed at n = 0.15. */
export function scalarSpectrumShape(n: number): number {
  const value = n <= 0.15 ? (53.4 * n) / (1 + 24 * n) ** (5 / 3) : (24.4 * n) / (1 + 12.5 * n) ** (5 / 3);
  return value / 3.57899;
}

/** f Co_uw / uw, neutral. @reference Kaimal and Finnigan (1994), from memory; integral derived. */
export function neutralMomentumCospectrumShape(n: number): number {
  return (12 * n) / (1 + 9.6 * n) ** (7 / 3) / 0.9375;
}

/** f Co_wT / wT, neutral. @reference Kaimal and Finnigan (1994), from memory; integral derived. */
export function neutralScalarCospectrumShape(n: number): number {
  const value = n <= 1 ? (11 * n) / (1 + 13.3 * n) ** 1.75 : (4 * n) / (1 + 3.8 * n) ** (7 / 3);
  return value / 1.0503;
}

/** Stable side, f Co / cov = n / (A + B n^2.1), with z/L held to 0 … 2. */
function stableCospectrumShape(n: number, a: number): number {
  return n / (a + 2.34 * a ** -1.1 * n ** 2.1);
}

function unstableScalar(n: number): number {
  return n < 0.54 ? (12.92 * n) / (1 + 26.7 * n) ** 1.375 : (4.378 * n) / (1 + 3.8 * n) ** 2.4;
}

function unstableMomentum(n: number): number {
  return n < 0.24 ? (20.78 * n) / (1 + 31 * n) ** 1.575 : (12.66 * n) / (1 + 9.6 * n) ** 2.4;
}

/** Half-width of the span of z/L over which the unstable and the stable form are blended linearly (project choice). */
const blendZeta = 0.02;

function blended(zeta: number, unstable: (n: number) => number, stable: (n: number) => number) {
  if (zeta <= -blendZeta) return unstable;
  if (zeta >= blendZeta) return stable;
  const weight = (zeta + blendZeta) / (2 * blendZeta);
  return (n: number) => (1 - weight) * unstable(n) + weight * stable(n);
}

/** f Co_ws / ws as the spectral correction assumes it. @reference Kaimal et al. (1972) after Moncrieff et al. (1997), from memory, integral 1 derived. */
export function correctionScalarCospectrumShape(zeta: number): (n: number) => number {
  const a = 0.284 * (1 + 6.4 * Math.min(2, Math.max(0, zeta))) ** 0.75;
  return blended(zeta, unstableScalar, (n) => stableCospectrumShape(n, a));
}

/** f Co_uw / uw as the spectral correction assumes it. @reference Kaimal et al. (1972) after Moncrieff et al. (1997), from memory, integral 1 derived. */
export function correctionMomentumCospectrumShape(zeta: number): (n: number) => number {
  const a = 0.124 * (1 + 7.9 * Math.min(2, Math.max(0, zeta))) ** 0.75;
  return blended(zeta, unstableMomentum, (n) => stableCospectrumShape(n, a));
}

/** How many images above the Nyquist frequency are folded back; beyond them lies less than 1e-4 of a covariance. */
const foldedImages = 24;
const foldNodes = 128;

/**
 * Density of a sampled series at its spectral lines f_k = k f_s / N, k = 1 … N/2 − 1.
 *
 * Sampling loses nothing: what lies above half the sampling rate is folded back below it, so that variance and covariance stay whole.
 * With `folded` the line at f carries shape(f) plus the images at m f_s ± f; a correction that integrates over all frequencies then
 * meets exactly the record it assumes. Without it the shape is cut off at f_s/2.
 *
 * @param shape f·S(f) against n
 * @param toN n per hertz, (z − d)/U [s]
 * @returns S at the lines, up to a common factor [1/Hz]; element 0 is 0
 */
export function spectralLines(
  shape: (n: number) => number,
  n: number,
  sampleRateHz: number,
  toN: number,
  folded: boolean,
): Float64Array {
  const lines = new Float64Array(n / 2);
  const df = sampleRateHz / n;
  for (let k = 1; k < n / 2; k++) lines[k] = shape(k * df * toN) / (k * df);
  if (!folded) return lines;
  const images = onFoldNodes(sampleRateHz, (f) => {
    let sum = 0;
    for (let m = 1; m <= foldedImages; m++) {
      const above = m * sampleRateHz + f;
      const below = m * sampleRateHz - f;
      sum += shape(above * toN) / above + shape(below * toN) / below;
    }
    return sum;
  });
  for (let k = 1; k < n / 2; k++) lines[k] += images(k * df);
  return lines;
}

/** Complex gain at the spectral lines of a sampled series. */
export interface LineGain {
  re: Float64Array;
  im: Float64Array;
}

/**
 * Gain of a sensor at the spectral lines of a sampled series, for a covariance with the given cospectrum: the gain of each image
 * weighted by the cospectrum there, so that Σ Co·gain over the lines equals the integral of Co·T over all frequencies.
 *
 * @param gain covariance transfer function at a frequency [Hz], complex where the sensor is late
 */
export function lineGain(
  gain: (frequencyHz: number) => { re: number; im: number },
  cospectrumShape: (n: number) => number,
  n: number,
  sampleRateHz: number,
  toN: number,
  folded: boolean,
): LineGain {
  const re = new Float64Array(n / 2);
  const im = new Float64Array(n / 2);
  const df = sampleRateHz / n;
  if (!folded) {
    for (let k = 1; k < n / 2; k++) {
      const g = gain(k * df);
      re[k] = g.re;
      im[k] = g.im;
    }
    return { re, im };
  }
  const images = (f: number): [number, number, number] => {
    let weight = 0;
    let sumRe = 0;
    let sumIm = 0;
    for (let m = 1; m <= foldedImages; m++) {
      for (const sign of [1, -1]) {
        const at = m * sampleRateHz + sign * f;
        const density = cospectrumShape(at * toN) / at;
        const g = gain(at);
        weight += density;
        sumRe += density * g.re;
        // The image below m·f_s appears mirrored: its phase changes sign.
        sumIm += sign * density * g.im;
      }
    }
    return [weight, sumRe, sumIm];
  };
  const nodes: [number, number, number][] = [];
  const step = sampleRateHz / 2 / foldNodes;
  for (let i = 0; i <= foldNodes; i++) nodes.push(images(i * step));
  const weights = onFoldNodes(sampleRateHz, (_, i) => nodes[i][0]);
  const res = onFoldNodes(sampleRateHz, (_, i) => nodes[i][1]);
  const ims = onFoldNodes(sampleRateHz, (_, i) => nodes[i][2]);
  for (let k = 1; k < n / 2; k++) {
    const f = k * df;
    const base = cospectrumShape(f * toN) / f;
    const g = gain(f);
    const total = base + weights(f);
    re[k] = (base * g.re + res(f)) / total;
    im[k] = (base * g.im + ims(f)) / total;
  }
  return { re, im };
}

/** Tabulates a smooth function of frequency on 0 … f_s/2 and returns its linear interpolation. */
function onFoldNodes(
  sampleRateHz: number,
  value: (f: number, node: number) => number,
): (f: number) => number {
  const step = sampleRateHz / 2 / foldNodes;
  const table = new Float64Array(foldNodes + 2);
  for (let i = 0; i <= foldNodes; i++) table[i] = value(i * step, i);
  table[foldNodes + 1] = table[foldNodes];
  return (f) => {
    const position = f / step;
    const i = Math.floor(position);
    return table[i] + (position - i) * (table[i + 1] - table[i]);
  };
}
