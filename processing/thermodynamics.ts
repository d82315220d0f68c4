import {
  celsiusZeroK,
  gasConstant,
  gravity,
  latentHeatAtZeroC,
  latentHeatIce,
  latentHeatSlope,
  massRatioWaterToDryAir,
  molarMassDryAir,
  molarMassWater,
  sonicHumidityFactor,
  specificHeatDryAir,
  specificHeatHumidityFactor,
  virtualHumidityFactor,
} from './constants';
import { defaultValue } from './defaults';

/** Moist-air thermodynamics: one consistent set of functions for the whole chain. */

export type SaturationFormula = 'sonntag-1990' | 'wmo-8' | 'fao-56';

const sonntagWater = [0, 1, 2, 3, 4].map((i) => defaultValue(`saturation.sonntag.water.c${i}`));
const sonntagIce = [0, 1, 2, 3, 4].map((i) => defaultValue(`saturation.sonntag.ice.c${i}`));
const wmo8 = {
  e0: defaultValue('saturation.wmo8.e0'),
  waterA: defaultValue('saturation.wmo8.water.a'),
  waterB: defaultValue('saturation.wmo8.water.b'),
  iceA: defaultValue('saturation.wmo8.ice.a'),
  iceB: defaultValue('saturation.wmo8.ice.b'),
};
const fao56 = {
  e0: defaultValue('saturation.fao56.e0'),
  a: defaultValue('saturation.fao56.a'),
  b: defaultValue('saturation.fao56.b'),
};
const validTemperatureC = {
  low: defaultValue('thermo.temperature.low'),
  high: defaultValue('thermo.temperature.high'),
};

function sonntag(c: readonly number[], temperatureK: number): number {
  return Math.exp(
    c[0] / temperatureK +
      c[1] +
      c[2] * temperatureK +
      c[3] * temperatureK * temperatureK +
      c[4] * Math.log(temperatureK),
  );
}

/**
 * Saturation vapour pressure over liquid water (supercooled below 0 °C, as relative humidity is defined).
 *
 * @param temperatureK air temperature [K]
 * @param formula which published formula
 * @returns e_w [Pa]; NaN outside −60…60 °C
 * @assumes pure vapour: the enhancement factor of moist air (below 0.5 %) is left out
 * @reference Sonntag (1990, 1994); WMO-No. 8, Annex 4.B; Allen et al. (1998), FAO-56, eq. 11
 * @deviates none
 */
export function saturationVapourPressurePa(
  temperatureK: number,
  formula: SaturationFormula = 'sonntag-1990',
): number {
  const t = temperatureK - celsiusZeroK;
  if (!(t >= validTemperatureC.low && t <= validTemperatureC.high)) return NaN;
  if (formula === 'sonntag-1990') return sonntag(sonntagWater, temperatureK);
  if (formula === 'wmo-8') return wmo8.e0 * Math.exp((wmo8.waterA * t) / (wmo8.waterB + t));
  return fao56.e0 * Math.exp((fao56.a * t) / (t + fao56.b));
}

/**
 * Saturation vapour pressure over ice.
 *
 * @param temperatureK surface temperature [K]
 * @param formula Sonntag or WMO-8; FAO-56 gives none over ice
 * @returns e_i [Pa]; NaN outside −60…0.01 °C
 * @assumes pure vapour
 * @reference Sonntag (1990, 1994); WMO-No. 8, Annex 4.B
 * @deviates none
 */
export function saturationVapourPressureIcePa(
  temperatureK: number,
  formula: 'sonntag-1990' | 'wmo-8' = 'sonntag-1990',
): number {
  const t = temperatureK - celsiusZeroK;
  if (!(t >= validTemperatureC.low && t <= 0.01)) return NaN;
  if (formula === 'sonntag-1990') return sonntag(sonntagIce, temperatureK);
  return wmo8.e0 * Math.exp((wmo8.iceA * t) / (wmo8.iceB + t));
}

/**
 * Slope of the saturation curve.
 *
 * Δ = 4098 e° / (t + 237.3)²
 *
 * @param temperatureK air temperature [K]
 * @returns Δ [Pa K⁻¹]
 * @assumes FAO-56 saturation formula; 4098 is the rounded product 17.27 × 237.3
 * @reference Allen et al. (1998), FAO-56, eq. 13
 * @deviates none
 */
export function saturationSlopePaPerK(temperatureK: number): number {
  const t = temperatureK - celsiusZeroK;
  return (
    (defaultValue('saturation.fao56.slope') * saturationVapourPressurePa(temperatureK, 'fao-56')) /
    (t + fao56.b) ** 2
  );
}

/**
 * Dew point over water by the closed inverse of the WMO-8 form.
 *
 * t_d = 243.12 L / (17.62 − L), L = ln(e / 611.2 Pa)
 *
 * @param vapourPressurePa vapour pressure [Pa]
 * @returns dew point [K]; NaN for e ≤ 0
 * @assumes no enhancement factor
 * @reference WMO-No. 8, Annex 4.B
 * @deviates none
 */
export function dewPointK(vapourPressurePa: number): number {
  if (!(vapourPressurePa > 0)) return NaN;
  const l = Math.log(vapourPressurePa / wmo8.e0);
  return celsiusZeroK + (wmo8.waterB * l) / (wmo8.waterA - l);
}

/** Everything about a parcel of moist air that follows from temperature, vapour pressure and pressure. */
export interface MoistAir {
  temperatureK: number;
  pressurePa: number;
  vapourPressurePa: number;
  /** Vapour density [kg m⁻³]. */
  vapourDensity: number;
  /** Dry-air density [kg m⁻³]. */
  dryAirDensity: number;
  /** Density of the moist air [kg m⁻³]. */
  airDensity: number;
  /** Specific humidity [kg kg⁻¹]. */
  specificHumidity: number;
  /** Mass mixing ratio r = σ [kg kg⁻¹ dry air]. */
  mixingRatio: number;
  /** Moles of vapour per mole of moist air, and of dry air [1]. */
  vapourMoleFraction: number;
  vapourDryMoleFraction: number;
  /** Moles of dry air and of vapour per volume [mol m⁻³]. */
  dryAirMolarDensity: number;
  vapourMolarDensity: number;
}

/**
 * State of moist air as a mixture of two ideal gases.
 *
 * ρv = e Mv / (R T), ρd = (P − e) Md / (R T)
 *
 * @param temperatureK true air temperature [K]
 * @param vapourPressurePa partial pressure of vapour [Pa]
 * @param pressurePa total pressure [Pa]
 * @returns the state; all members NaN where vapour would fill the whole pressure or an input is NaN
 * @assumes ideal gases
 * @reference Dalton's law; constants in constants.ts
 * @deviates none
 */
export function moistAir(temperatureK: number, vapourPressurePa: number, pressurePa: number): MoistAir {
  const usable = temperatureK > 0 && pressurePa > 0 && vapourPressurePa < pressurePa;
  const e = usable ? vapourPressurePa : NaN;
  const rt = gasConstant * temperatureK;
  const vapourMolarDensity = e / rt;
  const dryAirMolarDensity = (pressurePa - e) / rt;
  const vapourDensity = vapourMolarDensity * molarMassWater;
  const dryAirDensity = dryAirMolarDensity * molarMassDryAir;
  const airDensity = dryAirDensity + vapourDensity;
  return {
    temperatureK,
    pressurePa,
    vapourPressurePa: e,
    vapourDensity,
    dryAirDensity,
    airDensity,
    specificHumidity: vapourDensity / airDensity,
    mixingRatio: vapourDensity / dryAirDensity,
    vapourMoleFraction: e / pressurePa,
    vapourDryMoleFraction: e / (pressurePa - e),
    dryAirMolarDensity,
    vapourMolarDensity,
  };
}

/**
 * Specific humidity from the dry mole ratio of vapour.
 *
 * @param vapourDryMoleFraction χv [mol mol⁻¹ dry air]
 * @returns q [kg kg⁻¹]
 * @assumes none
 * @reference definition
 * @deviates none
 */
export function specificHumidityFromDryRatio(vapourDryMoleFraction: number): number {
  const vapour = vapourDryMoleFraction * molarMassWater;
  return vapour / (vapour + molarMassDryAir);
}

/**
 * True air temperature where only sonic temperature and the molar density of vapour are known.
 *
 * Ts = T (1 + 0.51 q), with q from n_v and T: five passes leave less than 1e-10 K.
 *
 * @param sonicTemperatureK sonic temperature, crosswind already corrected [K]
 * @param vapourMolarDensity n_v [mol m⁻³]
 * @param pressurePa pressure [Pa]
 * @returns T [K]; NaN where vapour would fill the whole pressure
 * @assumes ideal gas
 * @reference Schotanus et al. (1983), Boundary-Layer Meteorol. 26; Kaimal & Gaynor (1991), Boundary-Layer Meteorol. 56
 * @deviates none
 */
export function airTemperatureFromSonicK(
  sonicTemperatureK: number,
  vapourMolarDensity: number,
  pressurePa: number,
): number {
  let temperatureK = sonicTemperatureK;
  for (let pass = 0; pass < 5; pass++) {
    const moleFraction = (vapourMolarDensity * gasConstant * temperatureK) / pressurePa;
    if (!(moleFraction < 1)) return NaN;
    const q = specificHumidityFromDryRatio(moleFraction / (1 - moleFraction));
    temperatureK = sonicTemperatureK / (1 + sonicHumidityFactor * q);
  }
  return temperatureK;
}

/**
 * State of the air from what an open-path station measures.
 *
 * @param input.sonicTemperatureK mean sonic temperature [K]
 * @param input.vapourMolarDensity mean molar density of vapour [mol m⁻³]
 * @param input.pressurePa pressure [Pa]
 * @returns moist-air state at the true air temperature
 * @assumes ideal gas, sonic temperature without crosswind error
 * @reference as airTemperatureFromSonicK
 * @deviates none
 */
export function airStateFrom(input: {
  sonicTemperatureK: number;
  vapourMolarDensity: number;
  pressurePa: number;
}): MoistAir {
  const temperatureK = airTemperatureFromSonicK(
    input.sonicTemperatureK,
    input.vapourMolarDensity,
    input.pressurePa,
  );
  return moistAir(temperatureK, input.vapourMolarDensity * gasConstant * temperatureK, input.pressurePa);
}

/** Sonic temperature of air at T with specific humidity q [K]: T (1 + 0.51 q). Schotanus et al. 1983. */
export function sonicTemperatureK(temperatureK: number, specificHumidity: number): number {
  return temperatureK * (1 + sonicHumidityFactor * specificHumidity);
}

/** Virtual temperature [K]: T (1 + 0.61 q). */
export function virtualTemperatureK(temperatureK: number, specificHumidity: number): number {
  return temperatureK * (1 + virtualHumidityFactor * specificHumidity);
}

/** Specific heat of moist air at constant pressure [J kg⁻¹ K⁻¹]: cpd (1 + 0.84 q). Stull 1988. */
export function specificHeat(specificHumidity: number): number {
  return specificHeatDryAir * (1 + specificHeatHumidityFactor * specificHumidity);
}

/**
 * Latent heat of evaporation, or of sublimation where the surface is declared frozen.
 *
 * λ = 2.501 × 10⁶ − 2361 t
 *
 * @param temperatureK air temperature [K]
 * @param surface liquid (default) or ice
 * @returns λ [J kg⁻¹]
 * @assumes none
 * @reference Allen et al. (1998), FAO-56, Annex 3, eq. 3-1
 * @deviates none
 */
export function latentHeatOfVaporisation(temperatureK: number, surface: 'water' | 'ice' = 'water'): number {
  if (surface === 'ice') return latentHeatIce;
  return latentHeatAtZeroC - latentHeatSlope * (temperatureK - celsiusZeroK);
}

/** Relative humidity referred to water [1]; may exceed 1. */
export function relativeHumidity(
  vapourPressurePa: number,
  temperatureK: number,
  formula: SaturationFormula = 'sonntag-1990',
): number {
  return vapourPressurePa / saturationVapourPressurePa(temperatureK, formula);
}

/** Vapour pressure deficit [Pa]; signed: below zero when supersaturated. */
export function vapourPressureDeficitPa(
  vapourPressurePa: number,
  temperatureK: number,
  formula: SaturationFormula = 'sonntag-1990',
): number {
  return saturationVapourPressurePa(temperatureK, formula) - vapourPressurePa;
}

const earthRadiusM = defaultValue('standardAtmosphere.earthRadius');
const seaLevelPa = defaultValue('standardAtmosphere.pressure');
const seaLevelK = defaultValue('standardAtmosphere.temperature');
const lapse = defaultValue('standardAtmosphere.lapseRate');
const standardGasConstant = defaultValue('standardAtmosphere.gasConstant');

/** Geopotential from geometric altitude [m]: r z / (r + z). ISO 2533. */
export function geopotentialAltitudeM(elevationM: number): number {
  return (earthRadiusM * elevationM) / (earthRadiusM + elevationM);
}

/**
 * Pressure of the standard atmosphere, troposphere.
 *
 * p = 101325 (1 − 0.0065 H / 288.15)^(g0 / (R* β))
 *
 * @param geopotentialM geopotential altitude H [m]
 * @returns p [Pa]; NaN above 11 km
 * @assumes standard temperature profile
 * @reference ISO 2533:1975; ICAO Doc 7488
 * @deviates none
 */
export function standardPressurePa(geopotentialM: number): number {
  if (!(geopotentialM <= 11_000)) return NaN;
  return seaLevelPa * (1 - (lapse * geopotentialM) / seaLevelK) ** (gravity / (standardGasConstant * lapse));
}

/** Mean pressure expected at an elevation above sea level [Pa]: ISO 2533, from geometric altitude. Only where none is measured. */
export function pressureFromElevationPa(elevationM: number): number {
  return standardPressurePa(geopotentialAltitudeM(elevationM));
}

/** Pressure from elevation as irrigation practice has it [Pa]: 101.3 ((293 − 0.0065 z)/293)^5.26 kPa. FAO-56, eq. 7. */
export function pressureFromElevationFao56Pa(elevationM: number): number {
  return 101_300 * ((293 - 0.0065 * elevationM) / 293) ** 5.26;
}

/** Psychrometric constant [Pa K⁻¹]: 0.665 × 10⁻³ P. FAO-56, eq. 8 (cp 1013 J kg⁻¹ K⁻¹, λ 2.45 MJ kg⁻¹, ε 0.622). */
export function psychrometricConstantPaPerK(pressurePa: number): number {
  return defaultValue('psychrometer.fao56.constant') * pressurePa;
}

/** Vapour pressure from a ventilated psychrometer [Pa]: e = e_w(t_wet) − a P (t − t_wet), a = 0.000662 K⁻¹. FAO-56, eqs 15–16. */
export function vapourPressureFromPsychrometerPa(dryK: number, wetK: number, pressurePa: number): number {
  return (
    saturationVapourPressurePa(wetK, 'fao-56') -
    defaultValue('psychrometer.fao56.ventilated') * pressurePa * (dryK - wetK)
  );
}

/** Density of moist air by its virtual temperature, with the exact factor [kg m⁻³]: an independent way to the same number. */
export function airDensityByVirtualTemperature(
  temperatureK: number,
  vapourPressurePa: number,
  pressurePa: number,
): number {
  const exactVirtualK = temperatureK / (1 - (1 - massRatioWaterToDryAir) * (vapourPressurePa / pressurePa));
  return (pressurePa * molarMassDryAir) / (gasConstant * exactVirtualK);
}
