import {
  celsiusZeroK,
  gasConstant,
  gravity,
  latentHeatAtZeroC,
  latentHeatSlope,
  molarMassDryAir,
  molarMassWater,
  sonicHumidityFactor,
  specificHeatDryAir,
  specificHeatHumidityFactor,
  virtualHumidityFactor,
  vonKarman,
} from '../constants';

/**
 * From true air (temperature, dry mole fractions, pressure) to what an open-path station would see, with the fluxes that are true by
 * definition. Constants are those of the chain; every formula is written out here so that the truth depends on no step that is to be
 * judged.
 */

/** Latent heat of vaporisation [J kg⁻¹] at a temperature in °C. @reference FAO-56 (1998) Annex 3 eq. 3-1, from memory. */
export function latentHeatOfVaporisation(temperatureC: number): number {
  return latentHeatAtZeroC - latentHeatSlope * temperatureC;
}

/** Specific heat of moist air [J kg⁻¹ K⁻¹]. @reference Stull (1988), from memory. */
export function moistAirHeatCapacity(specificHumidity: number): number {
  return specificHeatDryAir * (1 + specificHeatHumidityFactor * specificHumidity);
}

/** Specific humidity [kg kg⁻¹] from the dry mole fraction of vapour [mol mol⁻¹]. */
export function specificHumidityFromDryFraction(vapour: number): number {
  return (vapour * molarMassWater) / (vapour * molarMassWater + molarMassDryAir);
}

/** Mean state of a period in SI, from its mean vapour density, temperature and pressure. */
export interface AirMeans {
  temperatureK: number;
  pressurePa: number;
  vapourDensity: number;
  dryAirDensity: number;
  airDensity: number;
  specificHumidity: number;
  heatCapacity: number;
  latentHeat: number;
  dryAirMolarDensity: number;
}

/** @param vapourMolar mean molar density of vapour [mol m⁻³] */
export function airMeans(temperatureK: number, pressurePa: number, vapourMolar: number): AirMeans {
  const vapourPressurePa = vapourMolar * gasConstant * temperatureK;
  const vapourDensity = vapourMolar * molarMassWater;
  const dryAirMolarDensity = (pressurePa - vapourPressurePa) / (gasConstant * temperatureK);
  const dryAirDensity = dryAirMolarDensity * molarMassDryAir;
  const airDensity = vapourDensity + dryAirDensity;
  const specificHumidity = vapourDensity / airDensity;
  return {
    temperatureK,
    pressurePa,
    vapourDensity,
    dryAirDensity,
    airDensity,
    specificHumidity,
    heatCapacity: moistAirHeatCapacity(specificHumidity),
    latentHeat: latentHeatOfVaporisation(temperatureK - celsiusZeroK),
    dryAirMolarDensity,
  };
}

/**
 * Obukhov length [m] from the virtual heat flux, L = −T_v u*³ / (κ g w'T_v'), with w'T_v' = w'T'(1 + 0.61 q) + 0.61 T (1 − q) E/ρ.
 *
 * @param temperatureFlux w'T' [K m s⁻¹]
 * @param evaporation [kg m⁻² s⁻¹]
 * @reference AMS Glossary of Meteorology, "Obukhov length"; factor 0.61 from memory
 */
export function obukhovLength(
  ustar: number,
  temperatureFlux: number,
  evaporation: number,
  air: AirMeans,
): number {
  const q = air.specificHumidity;
  const virtualTemperature = air.temperatureK * (1 + virtualHumidityFactor * q);
  const virtualFlux =
    temperatureFlux * (1 + virtualHumidityFactor * q) +
    (virtualHumidityFactor * air.temperatureK * (1 - q) * evaporation) / air.airDensity;
  return (-virtualTemperature * ustar ** 3) / (vonKarman * gravity * virtualFlux);
}

/** Series of true air, all of one length. Arrays are not changed. */
export interface TrueAir {
  /** Vertical wind without mean [m s⁻¹]. */
  w: Float64Array;
  /** [K] */
  temperature: Float64Array;
  /** Dry mole fraction [mol mol⁻¹]. */
  vapour: Float64Array;
  /** Dry mole fraction [mol mol⁻¹]. */
  co2: Float64Array;
  /** [Pa] */
  pressure: Float64Array;
}

export interface SeenAir {
  /** w with the small mean that makes the flux of dry air zero [m s⁻¹]. */
  w: Float64Array;
  /** That mean [m s⁻¹]. */
  meanW: number;
  /** Sonic temperature [K]. */
  sonicTemperature: Float64Array;
  /** Molar densities [mol m⁻³]. */
  co2Density: Float64Array;
  vapourDensity: Float64Array;
  dryAirDensityMean: number;
  /** True fluxes: mean(n_d w χ) [mol m⁻² s⁻¹] and cov(w, T) [K m s⁻¹]. */
  co2Flux: number;
  vapourFlux: number;
  temperatureFlux: number;
}

/**
 * What a sonic and an open-path analyser would see in given air, and the true fluxes through the level.
 *
 * n_d = p / (R T (1 + χ_v)); w̄ = −mean(n_d′w′)/mean(n_d), so that no dry air passes; F = mean(n_d w χ).
 *
 * @assumes ideal gases; no source of dry air below the sensor
 * @reference Webb, Pearman and Leuning (1980), Q. J. R. Meteorol. Soc. 106:85–100, the premise (from memory); T_s = T(1 + 0.51 q)
 *   after Kaimal and Gaynor (1991)
 */
export function seenByOpenPath(air: TrueAir): SeenAir {
  const n = air.w.length;
  const dry = new Float64Array(n);
  let dryMean = 0;
  let wMean = 0;
  for (let i = 0; i < n; i++) {
    dry[i] = air.pressure[i] / (gasConstant * air.temperature[i] * (1 + air.vapour[i]));
    dryMean += dry[i] / n;
    wMean += air.w[i] / n;
  }
  let dryFlux = 0;
  for (let i = 0; i < n; i++) dryFlux += (dry[i] - dryMean) * (air.w[i] - wMean);
  const meanW = -dryFlux / n / dryMean;
  const w = new Float64Array(n);
  const sonicTemperature = new Float64Array(n);
  const co2Density = new Float64Array(n);
  const vapourDensity = new Float64Array(n);
  let co2Flux = 0;
  let vapourFlux = 0;
  let temperatureMean = 0;
  for (let i = 0; i < n; i++) temperatureMean += air.temperature[i] / n;
  let temperatureFlux = 0;
  for (let i = 0; i < n; i++) {
    w[i] = air.w[i] - wMean + meanW;
    co2Density[i] = air.co2[i] * dry[i];
    vapourDensity[i] = air.vapour[i] * dry[i];
    sonicTemperature[i] =
      air.temperature[i] * (1 + sonicHumidityFactor * specificHumidityFromDryFraction(air.vapour[i]));
    co2Flux += (w[i] * co2Density[i]) / n;
    vapourFlux += (w[i] * vapourDensity[i]) / n;
    temperatureFlux += ((air.w[i] - wMean) * (air.temperature[i] - temperatureMean)) / n;
  }
  return {
    w,
    meanW,
    sonicTemperature,
    co2Density,
    vapourDensity,
    dryAirDensityMean: dryMean,
    co2Flux,
    vapourFlux,
    temperatureFlux,
  };
}
