import { massRatioDryAirToWater, sonicHumidityFactor, virtualHumidityFactor } from '../constants';
import type { AirState } from '../state';

/** Parts of the air state that the density terms need. */
export type DensityAir = Pick<
  AirState,
  'temperatureK' | 'specificHumidity' | 'airDensity' | 'dryAirDensity' | 'vapourDensity'
>;

/** Covariances after spectral correction. */
export interface CorrectedCovariances {
  /** w'Ts' [K m s⁻¹]. */
  sonicTemperature: number;
  /** w'ρv' [kg m⁻² s⁻¹]; null where H2O is missing. */
  vapour: number | null;
  /** w'ρc' [mol m⁻² s⁻¹]; null where CO2 is missing. */
  co2: number | null;
}

export interface DensityFluxes {
  /** w'T' of true air temperature [K m s⁻¹]. */
  temperatureFlux: number;
  /** Water vapour flux [kg m⁻² s⁻¹]; NaN without H2O. */
  evaporation: number;
  /** CO2 flux [mol m⁻² s⁻¹] and its three parts; NaN without CO2 or without H2O. */
  co2Flux: number;
  co2Covariance: number;
  co2VapourTerm: number;
  co2HeatTerm: number;
  /** Mean vertical wind that zero dry-air flux implies [m s⁻¹]; NaN without H2O. */
  densityMeanW: number;
  /** w'Tv' [K m s⁻¹]; w'Ts' stands in without H2O. */
  buoyancyFlux: number;
}

/** γ = 1 + μσ, σ = ρ̄v/ρ̄d. */
function expansion(air: DensityAir): number {
  return 1 + (massRatioDryAirToWater * air.vapourDensity) / air.dryAirDensity;
}

/**
 * True temperature flux, evaporation and CO2 flux from covariances of sonic temperature and gas densities, solved together.
 *
 * w'T' = (A − κγB)/(1 + 0.51 q̄ + κγρ̄v/T̄), κ = 0.51 T̄ (1 − q̄)/ρ̄, γ = 1 + μσ
 * E = γ (B + ρ̄v w'T'/T̄)
 * Fc = C + μ (ρ̄c/ρ̄d) B + γ (ρ̄c/T̄) w'T'
 * w̄ = μ B/ρ̄d + γ w'T'/T̄
 *
 * @param covariances A, B, C, each already corrected for its own spectral loss
 * @param air mean state of the period
 * @param meanCo2 mean CO2 [mol m⁻³]; NaN when missing
 * @returns fluxes and the separate parts of the CO2 flux
 * @assumes no net flux of dry air through the surface; the pressure term is left out, as no fast pressure is recorded
 * @reference Webb, Pearman & Leuning (1980), Q. J. R. Meteorol. Soc. 106:85–100, eqs 24 and 25 (vapour verified, CO2 from memory and
 *   checked by a synthetic record); humidity part of sonic temperature after Schotanus et al. (1983); closed form derived
 * @deviates without H2O, w'T' = A/(1 + 0.51 q̄), and neither E nor Fc is given
 */
export function solveDensity(
  covariances: CorrectedCovariances,
  air: DensityAir,
  meanCo2: number,
): DensityFluxes {
  const a = covariances.sonicTemperature;
  const q = air.specificHumidity;
  const t = air.temperatureK;
  if (covariances.vapour === null) {
    return {
      temperatureFlux: a / (1 + sonicHumidityFactor * q),
      evaporation: NaN,
      co2Flux: NaN,
      co2Covariance: covariances.co2 ?? NaN,
      co2VapourTerm: NaN,
      co2HeatTerm: NaN,
      densityMeanW: NaN,
      buoyancyFlux: a,
    };
  }
  const b = covariances.vapour;
  const gamma = expansion(air);
  const kappa = (sonicHumidityFactor * t * (1 - q)) / air.airDensity;
  const temperatureFlux =
    (a - kappa * gamma * b) / (1 + sonicHumidityFactor * q + (kappa * gamma * air.vapourDensity) / t);
  const evaporation = gamma * (b + (air.vapourDensity / t) * temperatureFlux);
  const co2Covariance = covariances.co2 ?? NaN;
  const co2VapourTerm = massRatioDryAirToWater * (meanCo2 / air.dryAirDensity) * b;
  const co2HeatTerm = gamma * (meanCo2 / t) * temperatureFlux;
  return {
    temperatureFlux,
    evaporation,
    co2Flux: co2Covariance + co2VapourTerm + co2HeatTerm,
    co2Covariance,
    co2VapourTerm,
    co2HeatTerm,
    densityMeanW: (massRatioDryAirToWater * b) / air.dryAirDensity + (gamma * temperatureFlux) / t,
    buoyancyFlux: virtualTemperatureFlux(temperatureFlux, evaporation, air),
  };
}

/**
 * Flux of virtual temperature.
 *
 * w'Tv' = w'T' (1 + 0.61 q̄) + 0.61 T̄ (1 − q̄) E/ρ̄
 *
 * @param temperatureFlux w'T' [K m s⁻¹]
 * @param evaporation E [kg m⁻² s⁻¹]
 * @param air mean state
 * @returns w'Tv' [K m s⁻¹]
 * @assumes E = ρ̄ w'q'/(1 − q̄)
 * @reference derived from Tv = T (1 + 0.61 q)
 * @deviates none
 */
export function virtualTemperatureFlux(
  temperatureFlux: number,
  evaporation: number,
  air: DensityAir,
): number {
  const q = air.specificHumidity;
  return (
    temperatureFlux * (1 + virtualHumidityFactor * q) +
    (virtualHumidityFactor * air.temperatureK * (1 - q) * evaporation) / air.airDensity
  );
}

/**
 * CO2 flux from the corrected evaporation: the other form of the same equation.
 *
 * Fc = C + μ/(1 + μσ) (ρ̄c/ρ̄d) E + (ρ̄c/T̄) w'T'
 *
 * @param co2Covariance C [mol m⁻² s⁻¹]
 * @param evaporation E [kg m⁻² s⁻¹]
 * @param temperatureFlux w'T' [K m s⁻¹]
 * @param air mean state
 * @param meanCo2 mean CO2 [mol m⁻³]
 * @returns Fc [mol m⁻² s⁻¹]
 * @assumes as solveDensity
 * @reference Webb, Pearman & Leuning (1980), rearranged (derived)
 * @deviates none
 */
export function co2FluxFromEvaporation(
  co2Covariance: number,
  evaporation: number,
  temperatureFlux: number,
  air: DensityAir,
  meanCo2: number,
): number {
  return (
    co2Covariance +
    (massRatioDryAirToWater / expansion(air)) * (meanCo2 / air.dryAirDensity) * evaporation +
    (meanCo2 / air.temperatureK) * temperatureFlux
  );
}
