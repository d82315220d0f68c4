import { defaultValue } from '../defaults';
import type { CospectrumKind } from './reference-cospectra';
import {
  stableCoefficients,
  stableFrequencyExponent,
  stableShare,
  unstableCospectrum,
} from './reference-cospectra';
import {
  blockAverageTransfer,
  scalarPathPower,
  separationTransfer,
  verticalPathPower,
} from './transfer-functions';

/** What happens to one covariance between the atmosphere and its number. Lengths of 0 and times of 0 switch an effect off. */
export interface LossEffects {
  kind: CospectrumKind;
  /** Vertical sound path [m], and how many of the two series were measured by it. */
  windPathM: number;
  windPaths: 0 | 1 | 2;
  /** Path along which the scalar is averaged [m]. */
  scalarPathM: number;
  /** Separation of the two sensors that no lag can undo [m]. */
  separationM: number;
  /** First-order response time of the scalar [s]. */
  responseTimeS: number;
  /** exact: one shift, found by maximum covariance; square-root: 1/√(1+ω²τ²); unshifted: 1/(1+ω²τ²). */
  responseForm: 'exact' | 'square-root' | 'unshifted';
  /** Averaging period of the block average [s]; 0: left out. */
  blockS: number;
}

export const noLoss: LossEffects = {
  kind: 'scalar',
  windPathM: 0,
  windPaths: 0,
  scalarPathM: 0,
  separationM: 0,
  responseTimeS: 0,
  responseForm: 'exact',
  blockS: 0,
};

interface Grid {
  points: number;
  logStep: number;
  f: Float64Array;
  /** f^2.1 for the stable form. */
  fPower: Float64Array;
  /** Unstable forms, times the trapezoid weight. */
  unstable: Record<CospectrumKind, Float64Array>;
  weight: Float64Array;
}

const grids = new Map<number, Grid>();

/** Logarithmic grid over normalised frequency; made once for each number of points. */
function gridOf(points: number): Grid {
  const known = grids.get(points);
  if (known) return known;
  const low = Math.log(defaultValue('lossIntegral.lowestF'));
  const high = Math.log(defaultValue('lossIntegral.highestF'));
  const logStep = (high - low) / (points - 1);
  const grid: Grid = {
    points,
    logStep,
    f: new Float64Array(points),
    fPower: new Float64Array(points),
    unstable: { scalar: new Float64Array(points), momentum: new Float64Array(points) },
    weight: new Float64Array(points),
  };
  for (let i = 0; i < points; i++) {
    const f = Math.exp(low + i * logStep);
    const weight = i === 0 || i === points - 1 ? logStep / 2 : logStep;
    grid.f[i] = f;
    grid.fPower[i] = f ** stableFrequencyExponent;
    grid.weight[i] = weight;
    grid.unstable.scalar[i] = weight * unstableCospectrum('scalar', f);
    grid.unstable.momentum[i] = weight * unstableCospectrum('momentum', f);
  }
  grids.set(points, grid);
  return grid;
}

/** Fills `into` with the weighted reference cospectrum at z/L and returns its integral. */
function fillCospectrum(grid: Grid, kind: CospectrumKind, zeta: number, into: Float64Array): number {
  const share = stableShare(zeta);
  const unstable = grid.unstable[kind];
  const { a, b } = stableCoefficients(kind, Number.isFinite(zeta) ? zeta : 0);
  let sum = 0;
  for (let i = 0; i < grid.points; i++) {
    let value = 0;
    if (share < 1) value += (1 - share) * unstable[i];
    if (share > 0) value += share * ((grid.weight[i] * grid.f[i]) / (a + b * grid.fPower[i]));
    into[i] = value;
    sum += value;
  }
  return sum;
}

export interface LossFactor {
  /** True over measured covariance [1]. */
  factor: number;
  /** Shift that maximises the attenuated covariance [s]; 0 where the response is not treated exactly. */
  shiftS: number;
}

export interface PreparedLoss {
  /**
   * @param zeta z/L [1]
   * @param residualLagS rest of the delay that is left after the series were aligned, beyond or short of the best shift [s]; a function
   *   where it depends on the best shift itself
   */
  factorAt(zeta: number, residualLagS?: number | ((shiftS: number) => number)): LossFactor;
}

/** Share of the attenuated covariance that the high end of the integral may leave out. */
const negligible = 1e-7;

/**
 * Prepares the loss of one covariance at one height and wind, so that further stabilities cost little.
 *
 * CF = ∫ Co dn / ∫ T Co dn, over ln f with the trapezoid rule; both integrals on the same grid, so that the reference's own 0.03–0.08 %
 * cancels.
 *
 * @param effects what takes part
 * @param heightM z − d [m]
 * @param windMs mean wind speed [m s⁻¹]
 * @param points grid points; the default agrees with 4001 points to better than 1e-4
 * @returns function of z/L; its factor is NaN when height or wind is not positive
 * @assumes frozen turbulence
 * @reference Moore (1986); Moncrieff et al. (1997); exact response derived (see transfer-functions.ts)
 * @deviates frequencies beyond the Nyquist frequency take part: aliasing moves covariance but does not lose it
 */
export function prepareLoss(
  effects: LossEffects,
  heightM: number,
  windMs: number,
  points: number = defaultValue('lossIntegral.points'),
): PreparedLoss {
  if (!(heightM > 0 && windMs > 0 && Number.isFinite(heightM) && Number.isFinite(windMs))) {
    return { factorAt: () => ({ factor: NaN, shiftS: NaN }) };
  }
  const grid = gridOf(points);
  const real = new Float64Array(points);
  const omega = new Float64Array(points);
  const { responseTimeS: tau, responseForm } = effects;
  const exact = responseForm === 'exact';
  const windPathF = effects.windPathM / heightM;
  const scalarPathF = effects.scalarPathM / heightM;
  const separationF = effects.separationM / heightM;
  for (let i = 0; i < points; i++) {
    const f = grid.f[i];
    const n = (f * windMs) / heightM;
    omega[i] = 2 * Math.PI * n;
    let gain = 1;
    if (effects.windPaths > 0 && windPathF > 0) {
      const power = verticalPathPower(f * windPathF);
      gain *= effects.windPaths === 2 ? power : Math.sqrt(power);
    }
    if (scalarPathF > 0) gain *= Math.sqrt(scalarPathPower(f * scalarPathF));
    if (separationF > 0) gain *= separationTransfer(f * separationF);
    if (effects.blockS > 0) gain *= blockAverageTransfer(n, effects.blockS);
    if (tau > 0) {
      const x2 = (omega[i] * tau) ** 2;
      gain /= responseForm === 'square-root' ? Math.sqrt(1 + x2) : 1 + x2;
    }
    real[i] = gain;
  }
  const density = new Float64Array(points);
  let known: { key: number; whole: number; plain: number; last: number; shiftS: number } | null = null;

  /** Covariance after a further shift of the scalar, over the density filled last. */
  const covarianceAt = (shiftS: number, plain: number, last: number): number => {
    if (shiftS === 0) return plain;
    // Below ωL = 1e-4 the shift changes nothing in the eighth digit.
    const slow = Math.floor(Math.log(1e-4 / Math.abs(shiftS) / omega[0]) / grid.logStep);
    const first = Math.min(last, Math.max(0, slow));
    let sum = 0;
    for (let i = 0; i < first; i++) sum += density[i];
    for (let i = first; i <= last; i++) {
      const phase = omega[i] * shiftS;
      sum += density[i] * (Math.cos(phase) + omega[i] * tau * Math.sin(phase));
    }
    return sum;
  };

  return {
    factorAt(zeta, residualLagS = 0) {
      // Below the blend the reference does not depend on z/L.
      const key = stableShare(zeta) === 0 ? -1 : zeta;
      if (known === null || known.key !== key) {
        const whole = fillCospectrum(grid, effects.kind, zeta, density);
        let plain = 0;
        for (let i = 0; i < points; i++) {
          density[i] *= real[i];
          plain += density[i];
        }
        // Beyond `last` nothing that matters is left; |1 + iωτ| bounds what any shift makes of the density.
        let last = points - 1;
        let left = 0;
        while (exact && last > 0) {
          left += density[last] * Math.sqrt(1 + (omega[last] * tau) ** 2);
          if (left > negligible * plain) break;
          last--;
        }
        const shiftS =
          exact && tau > 0 ? bestShift((shift) => covarianceAt(shift, plain, last), tau, known?.shiftS) : 0;
        known = { key, whole, plain, last, shiftS };
      }
      const { whole, plain, last, shiftS } = known;
      if (!exact) return { factor: whole / plain, shiftS: 0 };
      const rest = typeof residualLagS === 'function' ? residualLagS(shiftS) : residualLagS;
      return { factor: whole / covarianceAt(shiftS - rest, plain, last), shiftS };
    },
  };
}

const golden = (3 - Math.sqrt(5)) / 2;

/**
 * Shift with the largest covariance, between 0 and τ (the delay of the slowest motions), to τ × 1e-4: parabolas through the last three
 * points, golden section where a parabola does not help (Brent 1973, Algorithms for Minimization without Derivatives, ch. 5).
 */
function bestShift(covarianceAt: (shiftS: number) => number, tau: number, guessS = 0.7 * tau): number {
  const tolerance = 1e-4 * tau;
  let low = 0;
  let high = tau;
  let best = guessS;
  let second = best;
  let third = best;
  let atBest = covarianceAt(best);
  let atSecond = atBest;
  let atThird = atBest;
  let step = 0;
  let stepBefore = 0;
  for (let round = 0; round < 40; round++) {
    const middle = (low + high) / 2;
    if (Math.abs(best - middle) <= 2 * tolerance - (high - low) / 2) break;
    let next = NaN;
    if (Math.abs(stepBefore) > tolerance) {
      const r = (best - second) * (atThird - atBest);
      let q = (best - third) * (atSecond - atBest);
      let p = (best - third) * q - (best - second) * r;
      q = 2 * (q - r);
      if (q > 0) p = -p;
      q = Math.abs(q);
      if (Math.abs(p) < Math.abs(0.5 * q * stepBefore) && p > q * (low - best) && p < q * (high - best)) {
        stepBefore = step;
        step = p / q;
        next = best + step;
      }
    }
    if (Number.isNaN(next)) {
      stepBefore = best < middle ? high - best : low - best;
      step = golden * stepBefore;
    }
    next = best + (Math.abs(step) >= tolerance ? step : Math.sign(step) * tolerance);
    const at = covarianceAt(next);
    if (at >= atBest) {
      if (next >= best) low = best;
      else high = best;
      [third, atThird] = [second, atSecond];
      [second, atSecond] = [best, atBest];
      [best, atBest] = [next, at];
    } else {
      if (next < best) low = next;
      else high = next;
      if (at >= atSecond || second === best) {
        [third, atThird] = [second, atSecond];
        [second, atSecond] = [next, at];
      } else if (at >= atThird || third === best || third === second) {
        [third, atThird] = [next, at];
      }
    }
  }
  return best;
}

/** Loss factor of one covariance, once. */
export function lossFactor(
  effects: Partial<LossEffects>,
  at: { heightM: number; windMs: number; zeta: number; residualLagS?: number },
  points?: number,
): LossFactor {
  return prepareLoss({ ...noLoss, ...effects }, at.heightM, at.windMs, points).factorAt(
    at.zeta,
    at.residualLagS ?? 0,
  );
}

/** Integral over ln f of the reference cospectrum on the default grid [1]. */
export function cospectrumIntegral(
  kind: CospectrumKind,
  zeta: number,
  points: number = defaultValue('lossIntegral.points'),
): number {
  const grid = gridOf(points);
  return fillCospectrum(grid, kind, zeta, new Float64Array(points));
}
