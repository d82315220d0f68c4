import { defaultValue } from '../defaults';

/**
 * How sensors and averaging change a covariance, frequency by frequency. Each function returns the factor by which the cospectral
 * density is multiplied; 1 means nothing is lost. Normalised frequency f_x = n × length / ū.
 */

const seriesBelow = defaultValue('transfer.path.seriesBelow');
const separationFactor = defaultValue('transfer.separation.factor');
const separationExponent = defaultValue('transfer.separation.exponent');
const laminarReynolds = defaultValue('transfer.tube.laminarReynolds');
const turbulentFactor = defaultValue('transfer.tube.turbulentFactor');
const turbulentExponent = defaultValue('transfer.tube.turbulentExponent');

/**
 * Power transfer of averaging vertical wind along a vertical sound path.
 *
 * T_w = (4/X) [1 + e^−X/2 − 3(1 − e^−X)/(2X)], X = 2π f_x
 *
 * @param fx n × path / ū [1]
 * @returns T_w of the power spectrum [1]; a covariance loses its square root
 * @assumes frozen turbulence, isotropic small scales
 * @reference Moore (1986), Boundary-Layer Meteorol. 37:17–35 (from memory; limit 1 for X → 0 derived)
 * @deviates series 1 − X²/12 + X³/30 below X = 0.02, where the closed form loses digits
 */
export function verticalPathPower(fx: number): number {
  const x = 2 * Math.PI * fx;
  if (x < seriesBelow) return 1 - (x * x) / 12 + (x * x * x) / 30;
  const e = Math.exp(-x);
  return (4 / x) * (1 + e / 2 - (3 * (1 - e)) / (2 * x));
}

/**
 * Power transfer of averaging a scalar along a path.
 *
 * T_s = (1/X) [3 + e^−X − 4(1 − e^−X)/X], X = 2π f_x
 *
 * @param fx n × path / ū [1]
 * @returns T_s of the power spectrum [1]; a covariance loses its square root
 * @assumes frozen turbulence, isotropic small scales
 * @reference Moore (1986), Boundary-Layer Meteorol. 37:17–35 (from memory; limit 1 for X → 0 derived)
 * @deviates series 1 − X/6 + X³/120 below X = 0.02
 */
export function scalarPathPower(fx: number): number {
  const x = 2 * Math.PI * fx;
  if (x < seriesBelow) return 1 - x / 6 + (x * x * x) / 120;
  const e = Math.exp(-x);
  return (3 + e - (4 * (1 - e)) / x) / x;
}

/**
 * Cospectral transfer of two sensors that stand apart.
 *
 * T = exp(−9.9 f_x^1.5)
 *
 * @param fx n × separation / ū [1]
 * @returns T of the cospectrum [1]
 * @assumes separation across the wind, or along it where no lag was allowed for
 * @reference Moore (1986), Boundary-Layer Meteorol. 37:17–35 (from memory)
 * @deviates none
 */
export function separationTransfer(fx: number): number {
  return Math.exp(-separationFactor * fx ** separationExponent);
}

/**
 * First-order response where the lag was chosen by maximum covariance, in the usual approximation.
 *
 * T = 1/√(1 + (2πnτ)²)
 *
 * @param frequencyHz n [Hz]
 * @param responseTimeS τ [s]
 * @returns T of the cospectrum [1]
 * @assumes that the lag removes the whole phase, which no one shift can do
 * @reference Moore (1986); Horst (2000); Peltola et al. (2021) on the lag
 * @deviates none
 */
export function responseSquareRoot(frequencyHz: number, responseTimeS: number): number {
  return 1 / Math.sqrt(1 + (2 * Math.PI * frequencyHz * responseTimeS) ** 2);
}

/**
 * First-order response after one shift of the series: the exact form.
 *
 * T = Re[H e^{iωL}], H = 1/(1 + iωτ)
 *
 * @param frequencyHz n [Hz]
 * @param responseTimeS τ [s]
 * @param shiftS L: how far the scalar was moved forward beyond its pure delay [s]; 0 gives 1/(1 + ω²τ²)
 * @returns T of the cospectrum [1]; may be negative at high frequencies
 * @assumes w and scalar in phase in the atmosphere
 * @reference derived from the definition of the cospectrum
 * @deviates none
 */
export function responseShifted(frequencyHz: number, responseTimeS: number, shiftS: number): number {
  const omega = 2 * Math.PI * frequencyHz;
  const x = omega * responseTimeS;
  return (Math.cos(omega * shiftS) + x * Math.sin(omega * shiftS)) / (1 + x * x);
}

/** Two first-order sensors [1]: (1 + x₁x₂)/√((1 + x₁²)(1 + x₂²)), x = 2πnτ. Moore (1986). */
export function twoResponses(frequencyHz: number, firstS: number, secondS: number): number {
  const x1 = 2 * Math.PI * frequencyHz * firstS;
  const x2 = 2 * Math.PI * frequencyHz * secondS;
  return (1 + x1 * x2) / Math.sqrt((1 + x1 * x1) * (1 + x2 * x2));
}

/**
 * Block average: motions slower than the period are left out.
 *
 * T = 1 − sin²(πnT)/(πnT)²
 *
 * @param frequencyHz n [Hz]
 * @param periodS averaging period [s]
 * @returns T of the cospectrum [1]
 * @assumes means removed over the whole period
 * @reference Kaimal & Finnigan (1994); Moncrieff et al. (2004) (from memory; half point ωT = 5.566 = 2 × 2.783 derived)
 * @deviates series y²/3 − 2y⁴/45 below y = 0.02, where the closed form loses digits
 */
export function blockAverageTransfer(frequencyHz: number, periodS: number): number {
  const y = Math.PI * frequencyHz * periodS;
  if (y < 0.02) return (y * y) / 3 - (2 * y ** 4) / 45;
  const s = Math.sin(y) / y;
  return 1 - s * s;
}

/**
 * Linear detrending.
 *
 * T = 1 − s² − 3 [(s − cos y)/y]², y = πnT, s = sin y / y
 *
 * @param frequencyHz n [Hz]
 * @param periodS averaging period [s]
 * @returns T of the cospectrum [1]
 * @assumes least-squares line over the whole period
 * @reference Rannik & Vesala (1999), Boundary-Layer Meteorol. 91:259–280 (from memory; half point ωT = 10.704 = 2 × 5.352 derived)
 * @deviates series y⁴/45 below y = 0.05
 */
export function linearDetrendTransfer(frequencyHz: number, periodS: number): number {
  const y = Math.PI * frequencyHz * periodS;
  if (y < 0.05) return y ** 4 / 45;
  const s = Math.sin(y) / y;
  return 1 - s * s - 3 * ((s - Math.cos(y)) / y) ** 2;
}

/** Recursive running mean [1]: (2πnτ)²/(1 + (2πnτ)²). Moore (1986). */
export function runningMeanTransfer(frequencyHz: number, timeConstantS: number): number {
  const x2 = (2 * Math.PI * frequencyHz * timeConstantS) ** 2;
  return x2 / (1 + x2);
}

/** Flow in a sampling tube. */
export interface Tube {
  radiusM: number;
  lengthM: number;
  flowM3S: number;
  /** Kinematic viscosity of air [m² s⁻¹]. */
  viscosityM2S: number;
  /** Molecular diffusivity of the gas [m² s⁻¹]. */
  diffusivityM2S: number;
}

/**
 * Damping of a gas in a sampling tube: laminar below Re 2300, else turbulent.
 *
 * laminar exp(−π² a² n² L / (6 D U)), turbulent exp(−160 Re^(−1/8) π² a n² L / U²)
 *
 * @param frequencyHz n [Hz]
 * @param tube geometry and flow
 * @returns T of the cospectrum [1]
 * @assumes fully developed flow, no sorption
 * @reference Lenschow & Raupach (1991), J. Geophys. Res. 96:15259, as in Moncrieff et al. (1997) (from memory)
 * @deviates none
 */
export function tubeTransfer(frequencyHz: number, tube: Tube): number {
  const speed = tube.flowM3S / (Math.PI * tube.radiusM ** 2);
  const reynolds = (2 * tube.radiusM * speed) / tube.viscosityM2S;
  const squared = Math.PI ** 2 * frequencyHz ** 2 * tube.radiusM * tube.lengthM;
  if (reynolds < laminarReynolds)
    return Math.exp((-squared * tube.radiusM) / (6 * tube.diffusivityM2S * speed));
  return Math.exp((-turbulentFactor * reynolds ** turbulentExponent * squared) / speed ** 2);
}
