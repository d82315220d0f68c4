import { sharedFft } from '../numerics/fft';
import type { SplitMix64 } from '../numerics/random';
import {
  correctionMomentumCospectrumShape,
  correctionScalarCospectrumShape,
  neutralMomentumCospectrumShape,
  neutralScalarCospectrumShape,
  scalarSpectrumShape,
  spectralLines,
  uSpectrumShape,
  vSpectrumShape,
  wSpectrumShape,
} from './reference-shapes';
import type { CospectrumFamily } from './reference-shapes';

/**
 * Fluctuating series with known variances and covariances: w, u, v, air temperature and the dry mole fractions of vapour and CO₂, in
 * streamline axes. INVENTED data.
 */

/** Order of the six series everywhere in the generator. */
export const turbulenceKeys = ['w', 'u', 'v', 'temperature', 'vapour', 'co2'] as const;
export type TurbulenceKey = (typeof turbulenceKeys)[number];

/**
 * - `gauss`: Gaussian series; the realised covariances scatter about the targets as those of real half hours do.
 * - `matched`: such series mixed band by band, so that the sample covariance matrix equals the ensemble's in some twenty bands of
 *   frequency and therefore in total. Mixing whole series would do for the total, but it lends a scalar some of the spectrum of w and
 *   makes its cospectrum up to twice too high where sensors blur. w is also kept free of correlation to a straight line, so that slow
 *   means can be added without touching a flux.
 * - `quad`: random phases only; every spectral line has exactly the model's power and cospectrum.
 */
export type GeneratorMode = 'gauss' | 'matched' | 'quad';

/** Units: wind m s⁻¹, temperature K, vapour mmol mol⁻¹ dry, CO₂ µmol mol⁻¹ dry. */
export interface TurbulenceTargets {
  sampleRateHz: number;
  /** Number of samples, even. */
  length: number;
  /** Height above displacement [m]. */
  heightM: number;
  meanSpeedMs: number;
  /** (z − d)/L, for the `correction` cospectra. */
  zeta: number;
  variances: Record<TurbulenceKey, number>;
  /** cov(w, x). */
  covariances: { u: number; temperature: number; vapour: number; co2: number };
  /** Correlation of what is left of the scalars once the part that goes with w is taken out: temperature, vapour, CO₂. */
  residualCorrelation: readonly (readonly number[])[];
  cospectra: CospectrumFamily;
  mode: GeneratorMode;
  /** Fold what lies above half the sampling rate back below it, as sampling does; default: with `correction` cospectra. */
  folded?: boolean;
}

export interface Turbulence {
  series: Record<TurbulenceKey, Float64Array>;
  /** Normalised cospectra at the lines, summing to 1: of w with u and of w with every scalar. */
  cospectra: { u: Float64Array; temperature: Float64Array; vapour: Float64Array; co2: Float64Array };
  /** Covariances of the ensemble, in the order of `turbulenceKeys`; `matched` series have exactly these. */
  covarianceMatrix: number[][];
}

/**
 * Draws six series.
 *
 * Lines f_k = k f_s/N, k = 1 … N/2 − 1. W = √S_w Z_w and X = √S_x [ρ_x Z_w + √(1 − ρ_x²) Z_x] with ρ_x = Co_wx/√(S_w S_x), held to
 * ± 0.95 and rescaled on the lines that are free until the sum is the wanted covariance again; so every covariance matrix per line is
 * positive semidefinite by construction.
 *
 * @throws RangeError when a covariance is too high for its variances (programmer error: choose other targets)
 * @assumes even length; the record is periodic, as the lines are those of its own transform
 * @reference project's own construction; shapes from Kaimal and Finnigan (1994) or Moncrieff et al. (1997)
 */
export function generateTurbulence(targets: TurbulenceTargets, random: SplitMix64): Turbulence {
  const { length: n, sampleRateHz, mode } = targets;
  if (n < 8 || n % 2 !== 0) throw new RangeError('generateTurbulence: an even number of samples is needed');
  const df = sampleRateHz / n;
  const toN = targets.heightM / targets.meanSpeedMs;
  const folded = targets.folded ?? targets.cospectra === 'correction';
  const lines = (shape: (x: number) => number, total: number) =>
    scaledTo(spectralLines(shape, n, sampleRateHz, toN, folded), total / df);

  const scalarLines = lines(scalarSpectrumShape, 1);
  const power: Record<TurbulenceKey, Float64Array> = {
    w: lines(wSpectrumShape, targets.variances.w),
    u: lines(uSpectrumShape, targets.variances.u),
    v: lines(vSpectrumShape, targets.variances.v),
    temperature: scalarLines.map((s) => s * targets.variances.temperature),
    vapour: scalarLines.map((s) => s * targets.variances.vapour),
    co2: scalarLines.map((s) => s * targets.variances.co2),
  };
  const corrected = targets.cospectra === 'correction';
  const momentumShape = corrected
    ? correctionMomentumCospectrumShape(targets.zeta)
    : neutralMomentumCospectrumShape;
  const scalarShape = corrected
    ? correctionScalarCospectrumShape(targets.zeta)
    : neutralScalarCospectrumShape;
  const scalarCospectrum = lines(scalarShape, 1);
  const coherence = {
    u: lineCorrelation(lines(momentumShape, 1), power.w, power.u, targets.covariances.u, df),
    temperature: lineCorrelation(
      scalarCospectrum,
      power.w,
      power.temperature,
      targets.covariances.temperature,
      df,
    ),
    vapour: lineCorrelation(scalarCospectrum, power.w, power.vapour, targets.covariances.vapour, df),
    co2: lineCorrelation(scalarCospectrum, power.w, power.co2, targets.covariances.co2, df),
  };
  const mixing = cholesky(targets.residualCorrelation);

  const re = turbulenceKeys.map(() => new Float64Array(n / 2));
  const im = turbulenceKeys.map(() => new Float64Array(n / 2));
  const zRe = new Float64Array(6);
  const zIm = new Float64Array(6);
  for (let k = 1; k < n / 2; k++) {
    if (mode === 'quad') {
      const angle = 2 * Math.PI * random.uniform();
      zRe[0] = Math.cos(angle);
      zIm[0] = Math.sin(angle);
      for (let s = 1; s < 6; s++) {
        const side = random.uniform() < 0.5 ? -1 : 1;
        zRe[s] = -side * zIm[0];
        zIm[s] = side * zRe[0];
      }
    } else {
      for (let s = 0; s < 6; s++) {
        zRe[s] = random.normal() * Math.SQRT1_2;
        zIm[s] = random.normal() * Math.SQRT1_2;
      }
      // Correlate what is left of the scalars, last row first so that each reads unmixed numbers.
      for (let row = 2; row >= 0; row--) {
        let sumRe = 0;
        let sumIm = 0;
        for (let column = 0; column <= row; column++) {
          sumRe += mixing[row][column] * zRe[3 + column];
          sumIm += mixing[row][column] * zIm[3 + column];
        }
        zRe[3 + row] = sumRe;
        zIm[3 + row] = sumIm;
      }
    }
    for (let s = 0; s < 6; s++) {
      const key = turbulenceKeys[s];
      const amplitude = Math.sqrt((power[key][k] * df) / 2);
      if (key === 'w') {
        re[s][k] = amplitude * zRe[0];
        im[s][k] = amplitude * zIm[0];
        continue;
      }
      const rho = key === 'v' ? 0 : coherence[key][k];
      const rest = Math.sqrt(1 - rho * rho);
      re[s][k] = amplitude * (rho * zRe[0] + rest * zRe[s]);
      im[s][k] = amplitude * (rho * zIm[0] + rest * zIm[s]);
    }
  }
  const correlation = (key: TurbulenceKey, k: number) =>
    key === 'w' ? 1 : key === 'v' ? 0 : coherence[key][k];
  /** Adds the ensemble's covariance matrix of the lines [from, to). */
  const ensemble = (from: number, to: number): number[][] => {
    const matrix = turbulenceKeys.map(() => [0, 0, 0, 0, 0, 0]);
    for (let k = from; k < to; k++) {
      for (let i = 0; i < 6; i++) {
        const [a, rhoA] = [turbulenceKeys[i], correlation(turbulenceKeys[i], k)];
        for (let j = 0; j <= i; j++) {
          const [b, rhoB] = [turbulenceKeys[j], correlation(turbulenceKeys[j], k)];
          const left = i === j ? 1 : i > 2 && j > 2 ? targets.residualCorrelation[i - 3][j - 3] : 0;
          const shared = rhoA * rhoB + left * Math.sqrt((1 - rhoA * rhoA) * (1 - rhoB * rhoB));
          matrix[i][j] += shared * Math.sqrt(power[a][k] * power[b][k]) * df;
        }
      }
    }
    for (let i = 0; i < 6; i++) for (let j = i + 1; j < 6; j++) matrix[i][j] = matrix[j][i];
    return matrix;
  };
  const covarianceMatrix = turbulenceKeys.map(() => [0, 0, 0, 0, 0, 0]);
  for (const [from, to] of bands(n)) {
    const wanted = ensemble(from, to);
    wanted.forEach((row, i) => row.forEach((value, j) => (covarianceMatrix[i][j] += value)));
    if (mode === 'matched') matchBand(re, im, from, to, n, wanted);
  }
  const columns = turbulenceKeys.map(() => new Float64Array(n));
  for (let s = 0; s < 6; s += 2)
    linesToSeries(re[s], im[s], re[s + 1], im[s + 1], columns[s], columns[s + 1]);

  const cospectrum = (key: 'u' | 'temperature' | 'vapour' | 'co2') => {
    const out = new Float64Array(n / 2);
    for (let k = 1; k < n / 2; k++) out[k] = coherence[key][k] * Math.sqrt(power.w[k] * power[key][k]);
    return targets.covariances[key] === 0 ? out : scaledTo(out, 1);
  };
  return {
    series: {
      w: columns[0],
      u: columns[1],
      v: columns[2],
      temperature: columns[3],
      vapour: columns[4],
      co2: columns[5],
    },
    cospectra: {
      u: cospectrum('u'),
      temperature: cospectrum('temperature'),
      vapour: cospectrum('vapour'),
      co2: cospectrum('co2'),
    },
    covarianceMatrix,
  };
}

/** Scales an array in place so that it sums to `total`. */
function scaledTo(values: Float64Array, total: number): Float64Array {
  let sum = 0;
  for (const value of values) sum += value;
  for (let k = 0; k < values.length; k++) values[k] *= total / sum;
  return values;
}

const highestCorrelation = 0.95;

/** ρ(f_k) of one series with w whose lines add up to the wanted covariance. */
function lineCorrelation(
  shape: Float64Array,
  powerW: Float64Array,
  powerX: Float64Array,
  covariance: number,
  df: number,
): Float64Array {
  const rho = new Float64Array(shape.length);
  if (covariance === 0) return rho;
  const size = Math.abs(covariance);
  let factor = size;
  for (let pass = 0; pass < 50; pass++) {
    let held = 0;
    let free = 0;
    let newlyHeld = false;
    for (let k = 1; k < shape.length; k++) {
      const reach = Math.sqrt(powerW[k] * powerX[k]) * df;
      const wanted = (factor * shape[k] * df) / reach;
      if (wanted > highestCorrelation) {
        held += highestCorrelation * reach;
        if (rho[k] < highestCorrelation) newlyHeld = true;
        rho[k] = highestCorrelation;
      } else {
        free += shape[k] * df;
        rho[k] = wanted;
      }
    }
    if (!newlyHeld && pass > 0) {
      if (covariance < 0) for (let k = 1; k < rho.length; k++) rho[k] = -rho[k];
      return rho;
    }
    if (free <= 0 || held >= size) break;
    factor = (size - held) / free;
  }
  throw new RangeError('generateTurbulence: correlation too high for these variances');
}

/** Two real series from their lines by one complex transform. */
function linesToSeries(
  aRe: Float64Array,
  aIm: Float64Array,
  bRe: Float64Array,
  bIm: Float64Array,
  a: Float64Array,
  b: Float64Array,
): void {
  const n = a.length;
  a.fill(0);
  b.fill(0);
  for (let k = 1; k < n / 2; k++) {
    a[k] = n * (aRe[k] - bIm[k]);
    b[k] = n * (aIm[k] + bRe[k]);
    a[n - k] = n * (aRe[k] + bIm[k]);
    b[n - k] = n * (bRe[k] - aIm[k]);
  }
  sharedFft(n).inverse(a, b);
}

/** Bands of lines [from, to): the first holds enough lines for six series, the others widen by a half. */
function bands(n: number): [number, number][] {
  const last = n / 2;
  const edges = [1];
  for (let next = 9; next < last; next = Math.ceil(next * 1.5)) edges.push(next);
  // A short last band is joined to the one before.
  if (edges.length > 1 && last - edges[edges.length - 1] < 8) edges.pop();
  edges.push(last);
  return edges.slice(1).map((to, i) => [edges[i], to]);
}

/** Mixes the lines of one band so that their covariances are the wanted ones and w does not go with a straight line. */
function matchBand(
  re: Float64Array[],
  im: Float64Array[],
  from: number,
  to: number,
  n: number,
  wanted: number[][],
): void {
  // A rising line 0, 1, …, n − 1 has the transform −n/2 + i (n/2) cot(πk/n): take its part of the band out of w.
  let along = 0;
  let size = 0;
  for (let k = from; k < to; k++) {
    const cot = 1 / Math.tan((Math.PI * k) / n);
    along += -re[0][k] + im[0][k] * cot;
    size += 1 + cot * cot;
  }
  for (let k = from; k < to; k++) {
    const cot = 1 / Math.tan((Math.PI * k) / n);
    re[0][k] += along / size;
    im[0][k] -= (along / size) * cot;
  }
  const sample = re.map((_, i) =>
    re.map((__, j) => {
      let sum = 0;
      for (let k = from; k < to; k++) sum += re[i][k] * re[j][k] + im[i][k] * im[j][k];
      return 2 * sum;
    }),
  );
  const targetRoot = cholesky(wanted);
  const inverse = inverseLower(cholesky(sample));
  const mix = targetRoot.map((row) =>
    row.map((_, column) => {
      let sum = 0;
      for (let k = 0; k < row.length; k++) sum += row[k] * inverse[k][column];
      return sum;
    }),
  );
  for (let k = from; k < to; k++) {
    // Last row first: each reads rows above it that are still unmixed.
    for (let s = re.length - 1; s >= 0; s--) {
      let sumRe = 0;
      let sumIm = 0;
      for (let r = 0; r <= s; r++) {
        sumRe += mix[s][r] * re[r][k];
        sumIm += mix[s][r] * im[r][k];
      }
      re[s][k] = sumRe;
      im[s][k] = sumIm;
    }
  }
}

/** Lower triangular root of a symmetric positive definite matrix. */
function cholesky(matrix: readonly (readonly number[])[]): number[][] {
  const root = matrix.map((row) => row.map(() => 0));
  for (let i = 0; i < matrix.length; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i][j];
      for (let k = 0; k < j; k++) sum -= root[i][k] * root[j][k];
      if (i === j) {
        if (!(sum > 0))
          throw new RangeError('generateTurbulence: covariances and variances do not fit together');
        root[i][i] = Math.sqrt(sum);
      } else {
        root[i][j] = sum / root[j][j];
      }
    }
  }
  return root;
}

function inverseLower(root: number[][]): number[][] {
  const inverse = root.map((row) => row.map(() => 0));
  for (let j = 0; j < root.length; j++) {
    inverse[j][j] = 1 / root[j][j];
    for (let i = j + 1; i < root.length; i++) {
      let sum = 0;
      for (let k = j; k < i; k++) sum -= root[i][k] * inverse[k][j];
      inverse[i][j] = sum / root[i][i];
    }
  }
  return inverse;
}
