/**
 * Physical constants of the whole chain, each in one place with its unit and source. Tags as in `defaults.ts`.
 */

/** Molar gas constant [J mol-1 K-1]. CODATA 2018, exact. (from memory) */
export const gasConstant = 8.314462618;

/** Molar mass of dry air [kg mol-1]; one value everywhere (project choice; ISO 2533 has 0.028964420, from memory). */
export const molarMassDryAir = 0.0289652;

/** Molar mass of water [kg mol-1]. (from memory) */
export const molarMassWater = 0.01801528;

/** Molar mass of carbon dioxide [kg mol-1]. (from memory) */
export const molarMassCo2 = 0.0440095;

/** Molar mass of carbon [kg mol-1]. (from memory) */
export const molarMassCarbon = 0.012011;

/** Molar mass of dry air over that of water, μ [1]. (derived) */
export const massRatioDryAirToWater = molarMassDryAir / molarMassWater;

/** Molar mass of water over that of dry air, ε [1]. (derived) */
export const massRatioWaterToDryAir = molarMassWater / molarMassDryAir;

/** Standard acceleration of gravity [m s-2]. ISO 2533. (verified) */
export const gravity = 9.80665;

/** Von Kármán constant [1]. (project choice; the usual value of the flux literature) */
export const vonKarman = 0.4;

/** Specific heat of dry air at constant pressure [J kg-1 K-1]. Stull 1988. (from memory) */
export const specificHeatDryAir = 1004.67;

/** Rise of specific heat with specific humidity: cp = cpd (1 + 0.84 q) [1]. Stull 1988. (from memory) */
export const specificHeatHumidityFactor = 0.84;

/** Sonic temperature: Ts = T (1 + 0.51 q) [1]. Schotanus et al. 1983; Kaimal & Gaynor 1991. (verified) */
export const sonicHumidityFactor = 0.51;

/** Virtual temperature: Tv = T (1 + 0.61 q) [1]. (from memory) */
export const virtualHumidityFactor = 0.61;

/** Zero of the Celsius scale [K]. */
export const celsiusZeroK = 273.15;

/** Latent heat of vaporisation at 0 °C [J kg-1] and its fall per degree [J kg-1 K-1]. FAO-56 Annex 3, eq. 3-1. (from memory) */
export const latentHeatAtZeroC = 2.501e6;
export const latentHeatSlope = 2361;

/** Latent heat of sublimation [J kg-1]. (from memory) */
export const latentHeatIce = 2.834e6;

/** Stefan-Boltzmann constant [W m-2 K-4]. CODATA 2018. (from memory) */
export const stefanBoltzmann = 5.670374e-8;
