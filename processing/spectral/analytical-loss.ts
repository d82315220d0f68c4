import { defaultValue } from '../defaults';

/** Closed formulae for spectral loss: cross-checks of the numerical integral, not used for results. */

/**
 * Attenuation of a flux by a first-order sensor.
 *
 * Fm/F = 1/[1 + (2π n_m τ ū/z)^α]
 *
 * @param responseTimeS τ [s]
 * @param windOverHeight ū/(z − d) [s⁻¹]
 * @param zeta z/L [1]
 * @returns measured over true flux [1]
 * @assumes no lag adjustment: corresponds to 1/(1 + ω²τ²)
 * @reference Horst (1997), Boundary-Layer Meteorol. 82:219–233 (from memory; continuity at z/L = 0 derived)
 * @deviates none
 */
export function horstAttenuation(responseTimeS: number, windOverHeight: number, zeta: number): number {
  const unstable = !(zeta > 0);
  const peak = unstable
    ? defaultValue('horst.unstable.nm')
    : defaultValue('horst.stable.nmA') -
      defaultValue('horst.stable.nmB') / (1 + defaultValue('horst.stable.nmC') * zeta);
  const alpha = defaultValue(unstable ? 'horst.unstable.alpha' : 'horst.stable.alpha');
  return 1 / (1 + (2 * Math.PI * peak * responseTimeS * windOverHeight) ** alpha);
}

/** Effects as equivalent first-order time constants [s]. */
export interface EquivalentTimes {
  windPathM: number;
  scalarPathM: number;
  separationM: number;
  responseTimeS: number;
  blockS: number;
}

/**
 * Equivalent time constants by the rule "transfer ½ at ωτ = 1": low-pass τe = √Σ τi², block average τb = T/2.783.
 *
 * @param effects lengths [m] and times [s]
 * @param windMs mean wind [m s⁻¹]
 * @returns τe, τb [s]
 * @assumes each effect acts like a first-order filter
 * @reference Massman (2000), Agric. For. Meteorol. 104:185–198; factors derived from the half points of the transfer functions
 * @deviates the paper prints rounded factors (from memory)
 */
export function equivalentTimes(
  effects: EquivalentTimes,
  windMs: number,
): { lowPassS: number; blockS: number } {
  const parts = [
    effects.windPathM / (defaultValue('massman.windPath') * windMs),
    effects.scalarPathM / (defaultValue('massman.scalarPath') * windMs),
    effects.separationM / (defaultValue('massman.separation') * windMs),
    effects.responseTimeS,
  ];
  return {
    lowPassS: Math.hypot(...parts),
    blockS: effects.blockS / defaultValue('massman.blockAverage'),
  };
}

/** Peak frequency of Horst's cospectrum, n_m = f at the peak [1]. */
function peakFrequency(zeta: number): number {
  if (!(zeta > 0)) return defaultValue('horst.unstable.nm');
  return (
    defaultValue('horst.stable.nmA') -
    defaultValue('horst.stable.nmB') / (1 + defaultValue('horst.stable.nmC') * zeta)
  );
}

/**
 * Attenuation of a flux by low-pass effects and block averaging together.
 *
 * Fm/F = [b/(b+1)] [b/(b+p)] [1/(p+1)], p = (2π f_x τe)^α, b = (2π f_x τb)^α, f_x = n_m ū/z
 *
 * @param times equivalent time constants [s]
 * @param windOverHeight ū/(z − d) [s⁻¹]
 * @param zeta z/L [1]
 * @returns measured over true flux [1]
 * @assumes no recursive high-pass filter
 * @reference Massman (2000), Agric. For. Meteorol. 104:185–198 (from memory; exact for α = 1, derived)
 * @deviates none
 */
export function massmanAttenuation(
  times: { lowPassS: number; blockS: number },
  windOverHeight: number,
  zeta: number,
): number {
  const alpha = defaultValue(zeta > 0 ? 'massman.stable.alpha' : 'massman.unstable.alpha');
  const angular = 2 * Math.PI * peakFrequency(zeta) * windOverHeight;
  return massmanProduct((angular * times.lowPassS) ** alpha, (angular * times.blockS) ** alpha);
}

/** [b/(b+1)] [b/(b+p)] [1/(p+1)]. */
export function massmanProduct(p: number, b: number): number {
  return (b / (b + 1)) * (b / (b + p)) * (1 / (p + 1));
}
