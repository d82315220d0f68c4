/**
 * How the invented instruments blur small eddies: transfer functions for covariances, after Moore (1986). Written apart from the
 * spectral correction of the chain on purpose (see reference-shapes.ts).
 */

/** Vertical path of the sonic, for a power spectrum of w. @reference Moore (1986), from memory; limit 1 derived. */
export function verticalPathPower(frequencyHz: number, pathM: number, speedMs: number): number {
  const x = (2 * Math.PI * frequencyHz * pathM) / speedMs;
  if (x < 0.02) return 1 - (x * x) / 12 + (x * x * x) / 30;
  const e = Math.exp(-x);
  return (4 / x) * (1 + e / 2 - (3 * (1 - e)) / (2 * x));
}

/** Line averaging of a scalar, for its power spectrum. @reference Moore (1986), from memory; limit 1 derived. */
export function scalarPathPower(frequencyHz: number, pathM: number, speedMs: number): number {
  const x = (2 * Math.PI * frequencyHz * pathM) / speedMs;
  if (x < 0.02) return 1 - x / 6 + (x * x * x) / 120;
  const e = Math.exp(-x);
  return (3 + e - (4 * (1 - e)) / x) / x;
}

/** Sensors side by side, for a cospectrum. @reference Moore (1986), from memory. */
export function lateralSeparation(frequencyHz: number, separationM: number, speedMs: number): number {
  return Math.exp(-9.9 * ((frequencyHz * separationM) / speedMs) ** 1.5);
}

/** Facts of the set-up that decide what the sensors lose. */
export interface SensorGeometry {
  /** Measuring path of the sonic, for w, u and sonic temperature [m]. */
  sonicPathM: number;
  /** Optical path of the gas analyser [m]. */
  analyserPathM: number;
  /** Distance of the sensors across the wind [m]; lost in the covariance. */
  lateralSeparationM: number;
  /** Time by which the air reaches the analyser later than the sonic [s]; a pure delay. */
  alongWindLagS: number;
  /** First-order response time of the analyser [s]. */
  analyserResponseTimeS: number;
}

/** Series that lose something; w itself is left whole and every loss of a covariance is carried by the other series. */
export type BlurredSeries = 'u' | 'sonicTemperature' | 'gas';

/**
 * Complex transfer function of the covariance of w with one series.
 *
 * - u: vertical path power (both components share the path)
 * - sonic temperature: √(vertical path) · √(scalar path), both with the sonic's path
 * - gas: √(vertical path) · √(scalar path of the analyser) · lateral separation, times the first-order response 1/(1 + i2πfτ) and the
 *   along-wind delay e^(−i2πf lag)
 */
export function covarianceTransfer(
  series: BlurredSeries,
  frequencyHz: number,
  speedMs: number,
  geometry: SensorGeometry,
): { re: number; im: number } {
  const wPath = verticalPathPower(frequencyHz, geometry.sonicPathM, speedMs);
  if (series === 'u') return { re: wPath, im: 0 };
  if (series === 'sonicTemperature') {
    return { re: Math.sqrt(wPath * scalarPathPower(frequencyHz, geometry.sonicPathM, speedMs)), im: 0 };
  }
  const size =
    Math.sqrt(wPath * scalarPathPower(frequencyHz, geometry.analyserPathM, speedMs)) *
    lateralSeparation(frequencyHz, geometry.lateralSeparationM, speedMs);
  const omega = 2 * Math.PI * frequencyHz;
  const x = omega * geometry.analyserResponseTimeS;
  const responseRe = 1 / (1 + x * x);
  const responseIm = -x / (1 + x * x);
  const c = Math.cos(omega * geometry.alongWindLagS);
  const s = -Math.sin(omega * geometry.alongWindLagS);
  return { re: size * (responseRe * c - responseIm * s), im: size * (responseRe * s + responseIm * c) };
}
