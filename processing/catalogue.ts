import type { FluxKey, SeriesKey } from './state';

/**
 * Every quantity that a period can hold: its key, how people see it, how it is exchanged. `PeriodResult.values` is keyed by these.
 * Inner units are SI (fluxes of CO2 in mol m-2 s-1); `display` and `exchange` convert linearly: shown = inner × factor + offset.
 */
export interface Quantity {
  key: string;
  /** Short trade symbol or abbreviation. */
  symbol: string;
  label: string;
  innerUnit: string;
  unit: string;
  factor: number;
  offset: number;
  decimals: number;
  /** Name in the flux networks' half-hourly exchange files, when it has one, and the unit they use. */
  exchange: { name: string; unit: string; factor: number; offset: number } | null;
  /** The flux whose grade this value carries. */
  gradedBy: FluxKey | null;
  /** Catalogue key of its random uncertainty (one standard deviation, same units). */
  uncertaintyKey: string | null;
  group: 'flux' | 'wind' | 'air' | 'turbulence' | 'gas' | 'correction' | 'test' | 'count' | 'screening';
  /** Two plain sentences at most. */
  meaning: string;
}

type Draft = Pick<Quantity, 'key' | 'symbol' | 'label' | 'innerUnit' | 'group' | 'meaning'> & Partial<Quantity>;

function q(draft: Draft): Quantity {
  return {
    unit: draft.innerUnit,
    factor: 1,
    offset: 0,
    decimals: 3,
    exchange: null,
    gradedBy: null,
    uncertaintyKey: null,
    ...draft,
  };
}

const degC = { unit: '°C', factor: 1, offset: -273.15 };

/** Labels of the working series, for messages and statistic names. */
export const seriesLabels: Record<SeriesKey, { symbol: string; label: string; unit: string }> = {
  windU: { symbol: 'u', label: 'wind u', unit: 'm s-1' },
  windV: { symbol: 'v', label: 'wind v', unit: 'm s-1' },
  windW: { symbol: 'w', label: 'vertical wind', unit: 'm s-1' },
  sonicTemperature: { symbol: 'Ts', label: 'sonic temperature', unit: 'K' },
  co2: { symbol: 'CO2', label: 'CO2', unit: 'mmol m-3' },
  h2o: { symbol: 'H2O', label: 'H2O', unit: 'mmol m-3' },
};

/** Names of the four graded fluxes. */
export const fluxLabels: Record<FluxKey, { symbol: string; label: string; valueKey: string }> = {
  co2Flux: { symbol: 'FC', label: 'CO2 flux', valueKey: 'co2Flux' },
  latentHeat: { symbol: 'LE', label: 'latent heat flux', valueKey: 'latentHeat' },
  sensibleHeat: { symbol: 'H', label: 'sensible heat flux', valueKey: 'sensibleHeat' },
  momentum: { symbol: 'u*', label: 'friction velocity', valueKey: 'ustar' },
};

const fluxes: Quantity[] = [
  q({ key: 'co2Flux', symbol: 'FC', label: 'CO2 flux', innerUnit: 'mol m-2 s-1', unit: 'µmol m-2 s-1', factor: 1e6, decimals: 2, group: 'flux', gradedBy: 'co2Flux', uncertaintyKey: 'co2FluxRandom', exchange: { name: 'FC', unit: 'umolCO2 m-2 s-1', factor: 1e6, offset: 0 }, meaning: 'Turbulent CO2 flux at the sensor, positive upward. Minus means the surface takes CO2 in.' }),
  q({ key: 'co2Storage', symbol: 'SC', label: 'CO2 storage flux', innerUnit: 'mol m-2 s-1', unit: 'µmol m-2 s-1', factor: 1e6, decimals: 2, group: 'flux', gradedBy: 'co2Flux', exchange: { name: 'SC', unit: 'umolCO2 m-2 s-1', factor: 1e6, offset: 0 }, meaning: 'Change of CO2 held in the air below the sensor, from one level.' }),
  q({ key: 'netExchange', symbol: 'NEE', label: 'net ecosystem exchange', innerUnit: 'mol m-2 s-1', unit: 'µmol m-2 s-1', factor: 1e6, decimals: 2, group: 'flux', gradedBy: 'co2Flux', exchange: { name: 'NEE', unit: 'umolCO2 m-2 s-1', factor: 1e6, offset: 0 }, meaning: 'CO2 flux plus storage.' }),
  q({ key: 'latentHeat', symbol: 'LE', label: 'latent heat flux', innerUnit: 'W m-2', decimals: 1, group: 'flux', gradedBy: 'latentHeat', uncertaintyKey: 'latentHeatRandom', exchange: { name: 'LE', unit: 'W m-2', factor: 1, offset: 0 }, meaning: 'Heat carried by evaporated water, positive upward.' }),
  q({ key: 'sensibleHeat', symbol: 'H', label: 'sensible heat flux', innerUnit: 'W m-2', decimals: 1, group: 'flux', gradedBy: 'sensibleHeat', uncertaintyKey: 'sensibleHeatRandom', exchange: { name: 'H', unit: 'W m-2', factor: 1, offset: 0 }, meaning: 'Heat carried by warm air, positive upward.' }),
  q({ key: 'evaporation', symbol: 'ET', label: 'evaporation', innerUnit: 'kg m-2 s-1', unit: 'mm h-1', factor: 3600, decimals: 3, group: 'flux', gradedBy: 'latentHeat', meaning: 'Water leaving the surface; 1 kg per square metre is 1 mm.' }),
  q({ key: 'waterVapourFlux', symbol: 'FH2O', label: 'water vapour flux', innerUnit: 'mol m-2 s-1', unit: 'mmol m-2 s-1', factor: 1e3, decimals: 3, group: 'flux', gradedBy: 'latentHeat', exchange: { name: 'FH2O', unit: 'mmolH2O m-2 s-1', factor: 1e3, offset: 0 }, meaning: 'Evaporation in moles.' }),
  q({ key: 'ustar', symbol: 'u*', label: 'friction velocity', innerUnit: 'm s-1', decimals: 3, group: 'flux', gradedBy: 'momentum', uncertaintyKey: 'ustarRandom', exchange: { name: 'USTAR', unit: 'm s-1', factor: 1, offset: 0 }, meaning: 'How strongly the wind drags on the surface, as a speed.' }),
  q({ key: 'tau', symbol: 'τ', label: 'momentum flux', innerUnit: 'kg m-1 s-2', decimals: 4, group: 'flux', gradedBy: 'momentum', exchange: { name: 'TAU', unit: 'kg m-1 s-2', factor: -1, offset: 0 }, meaning: 'Downward momentum flux, shown positive; exchange files carry it negative.' }),
  q({ key: 'sensibleHeatStorage', symbol: 'SH', label: 'heat storage in air', innerUnit: 'W m-2', decimals: 1, group: 'flux', gradedBy: 'sensibleHeat', exchange: { name: 'SH', unit: 'W m-2', factor: 1, offset: 0 }, meaning: 'Change of heat held in the air below the sensor.' }),
  q({ key: 'latentHeatStorage', symbol: 'SLE', label: 'latent heat storage in air', innerUnit: 'W m-2', decimals: 1, group: 'flux', gradedBy: 'latentHeat', exchange: { name: 'SLE', unit: 'W m-2', factor: 1, offset: 0 }, meaning: 'Change of water vapour held in the air below the sensor, as heat.' }),
  q({ key: 'bowenRatio', symbol: 'β', label: 'Bowen ratio', innerUnit: '1', decimals: 2, group: 'flux', meaning: 'Sensible over latent heat flux; left out when LE is below 1 W m-2.' }),
  q({ key: 'co2FluxRandom', symbol: '± FC', label: 'random uncertainty of FC', innerUnit: 'mol m-2 s-1', unit: 'µmol m-2 s-1', factor: 1e6, decimals: 2, group: 'flux', meaning: 'One standard deviation of sampling error (Finkelstein & Sims).' }),
  q({ key: 'latentHeatRandom', symbol: '± LE', label: 'random uncertainty of LE', innerUnit: 'W m-2', decimals: 1, group: 'flux', meaning: 'One standard deviation of sampling error (Finkelstein & Sims).' }),
  q({ key: 'sensibleHeatRandom', symbol: '± H', label: 'random uncertainty of H', innerUnit: 'W m-2', decimals: 1, group: 'flux', meaning: 'One standard deviation of sampling error (Finkelstein & Sims).' }),
  q({ key: 'ustarRandom', symbol: '± u*', label: 'random uncertainty of u*', innerUnit: 'm s-1', decimals: 3, group: 'flux', meaning: 'One standard deviation of sampling error (Finkelstein & Sims).' }),
];

const wind: Quantity[] = [
  q({ key: 'windSpeed', symbol: 'U', label: 'wind speed', innerUnit: 'm s-1', decimals: 2, group: 'wind', exchange: { name: 'WS', unit: 'm s-1', factor: 1, offset: 0 }, meaning: 'Mean horizontal wind speed at the sonic, from the vector mean.' }),
  q({ key: 'windDirection', symbol: 'WD', label: 'wind direction', innerUnit: 'deg', unit: '°', decimals: 0, group: 'wind', exchange: { name: 'WD', unit: 'deg', factor: 1, offset: 0 }, meaning: 'Where the wind comes from, clockwise from true north.' }),
  q({ key: 'windDirectionSpread', symbol: 'σθ', label: 'spread of wind direction', innerUnit: 'deg', unit: '°', decimals: 1, group: 'wind', meaning: 'Standard deviation of direction within the period (Yamartino).' }),
  q({ key: 'uSigma', symbol: 'σu', label: 'standard deviation of u', innerUnit: 'm s-1', group: 'wind', exchange: { name: 'U_SIGMA', unit: 'm s-1', factor: 1, offset: 0 }, meaning: 'Along-wind turbulence after rotation.' }),
  q({ key: 'vSigma', symbol: 'σv', label: 'standard deviation of v', innerUnit: 'm s-1', group: 'wind', exchange: { name: 'V_SIGMA', unit: 'm s-1', factor: 1, offset: 0 }, meaning: 'Cross-wind turbulence after rotation.' }),
  q({ key: 'wSigma', symbol: 'σw', label: 'standard deviation of w', innerUnit: 'm s-1', group: 'wind', exchange: { name: 'W_SIGMA', unit: 'm s-1', factor: 1, offset: 0 }, meaning: 'Vertical turbulence after rotation.' }),
  q({ key: 'yawAngle', symbol: 'η', label: 'yaw rotation', innerUnit: 'rad', unit: '°', factor: 180 / Math.PI, decimals: 1, group: 'wind', meaning: 'Angle turned about the vertical so that mean v vanishes.' }),
  q({ key: 'pitchAngle', symbol: 'θ', label: 'pitch rotation', innerUnit: 'rad', unit: '°', factor: 180 / Math.PI, decimals: 2, group: 'wind', meaning: 'Angle turned so that mean w vanishes.' }),
  q({ key: 'meanWUnrotated', symbol: 'w̄', label: 'mean w before rotation', innerUnit: 'm s-1', decimals: 3, group: 'wind', meaning: 'Mean vertical wind in the axes of the instrument.' }),
  q({ key: 'turbulentKineticEnergy', symbol: 'TKE', label: 'turbulent kinetic energy', innerUnit: 'm2 s-2', decimals: 3, group: 'turbulence', meaning: 'Half the sum of the three wind variances.' }),
];

const air: Quantity[] = [
  q({ key: 'airTemperature', symbol: 'Ta', label: 'air temperature', innerUnit: 'K', ...degC, decimals: 2, group: 'air', exchange: { name: 'TA', unit: 'deg C', factor: 1, offset: -273.15 }, meaning: 'Mean air temperature from the sonic, corrected for humidity.' }),
  q({ key: 'sonicTemperatureMean', symbol: 'Ts', label: 'sonic temperature', innerUnit: 'K', ...degC, decimals: 2, group: 'air', exchange: { name: 'T_SONIC', unit: 'deg C', factor: 1, offset: -273.15 }, meaning: 'Mean sonic temperature; moist air reads warmer than it is.' }),
  q({ key: 'sonicTemperatureSigma', symbol: 'σTs', label: 'standard deviation of sonic temperature', innerUnit: 'K', decimals: 3, group: 'air', exchange: { name: 'T_SONIC_SIGMA', unit: 'deg C', factor: 1, offset: 0 }, meaning: 'Temperature turbulence.' }),
  q({ key: 'airPressure', symbol: 'PA', label: 'air pressure', innerUnit: 'Pa', unit: 'hPa', factor: 0.01, decimals: 1, group: 'air', exchange: { name: 'PA', unit: 'kPa', factor: 0.001, offset: 0 }, meaning: 'Mean air pressure, measured, or from elevation where it says so.' }),
  q({ key: 'relativeHumidity', symbol: 'RH', label: 'relative humidity', innerUnit: '1', unit: '%', factor: 100, decimals: 1, group: 'air', exchange: { name: 'RH', unit: '%', factor: 100, offset: 0 }, meaning: 'Vapour pressure over saturation above water.' }),
  q({ key: 'vapourPressureDeficit', symbol: 'VPD', label: 'vapour pressure deficit', innerUnit: 'Pa', unit: 'hPa', factor: 0.01, decimals: 2, group: 'air', exchange: { name: 'VPD', unit: 'hPa', factor: 0.01, offset: 0 }, meaning: 'How far the air is from saturation.' }),
  q({ key: 'vapourPressure', symbol: 'e', label: 'vapour pressure', innerUnit: 'Pa', unit: 'hPa', factor: 0.01, decimals: 2, group: 'air', meaning: 'Partial pressure of water vapour.' }),
  q({ key: 'airDensity', symbol: 'ρ', label: 'air density', innerUnit: 'kg m-3', decimals: 4, group: 'air', meaning: 'Density of the moist air.' }),
  q({ key: 'specificHumidity', symbol: 'q', label: 'specific humidity', innerUnit: '1', unit: 'g kg-1', factor: 1e3, decimals: 2, group: 'air', meaning: 'Mass of vapour per mass of moist air.' }),
];

const gas: Quantity[] = [
  q({ key: 'co2MoleFraction', symbol: 'CO2', label: 'CO2 mole fraction', innerUnit: '1', unit: 'µmol mol-1', factor: 1e6, decimals: 1, group: 'gas', exchange: { name: 'CO2', unit: 'umolCO2 mol-1', factor: 1e6, offset: 0 }, meaning: 'Mean CO2 per mole of moist air.' }),
  q({ key: 'co2DryMoleFraction', symbol: 'χc', label: 'CO2 dry mole fraction', innerUnit: '1', unit: 'µmol mol-1', factor: 1e6, decimals: 1, group: 'gas', meaning: 'Mean CO2 per mole of dry air.' }),
  q({ key: 'h2oMoleFraction', symbol: 'H2O', label: 'H2O mole fraction', innerUnit: '1', unit: 'mmol mol-1', factor: 1e3, decimals: 2, group: 'gas', exchange: { name: 'H2O', unit: 'mmolH2O mol-1', factor: 1e3, offset: 0 }, meaning: 'Mean H2O per mole of moist air.' }),
  q({ key: 'co2MolarDensity', symbol: 'ρc', label: 'CO2 molar density', innerUnit: 'mol m-3', unit: 'mmol m-3', factor: 1e3, decimals: 3, group: 'gas', meaning: 'Mean CO2 in the optical path.' }),
  q({ key: 'h2oMolarDensity', symbol: 'ρv', label: 'H2O molar density', innerUnit: 'mol m-3', unit: 'mmol m-3', factor: 1e3, decimals: 1, group: 'gas', meaning: 'Mean H2O in the optical path.' }),
  q({ key: 'co2Sigma', symbol: 'σCO2', label: 'standard deviation of CO2', innerUnit: 'mol m-3', unit: 'mmol m-3', factor: 1e3, decimals: 4, group: 'gas', meaning: 'CO2 fluctuations in the path.' }),
  q({ key: 'h2oSigma', symbol: 'σH2O', label: 'standard deviation of H2O', innerUnit: 'mol m-3', unit: 'mmol m-3', factor: 1e3, decimals: 2, group: 'gas', meaning: 'H2O fluctuations in the path.' }),
  q({ key: 'signalStrength', symbol: 'SS', label: 'mean signal strength', innerUnit: '%', decimals: 1, group: 'gas', meaning: 'How clean the analyser windows are, as the instrument reports it.' }),
  q({ key: 'signalStrengthMin', symbol: 'SS min', label: 'lowest signal strength', innerUnit: '%', decimals: 1, group: 'gas', meaning: 'Lowest signal strength within the period.' }),
];

const turbulence: Quantity[] = [
  q({ key: 'obukhovLength', symbol: 'L', label: 'Obukhov length', innerUnit: 'm', decimals: 1, group: 'turbulence', exchange: { name: 'MO_LENGTH', unit: 'm', factor: 1, offset: 0 }, meaning: 'Height scale of stability: negative when the surface heats the air.' }),
  q({ key: 'zeta', symbol: 'z/L', label: 'stability parameter', innerUnit: '1', decimals: 3, group: 'turbulence', exchange: { name: 'ZL', unit: 'nondimensional', factor: 1, offset: 0 }, meaning: 'Measuring height over Obukhov length: below zero unstable, above zero stable.' }),
  q({ key: 'temperatureScale', symbol: 'T*', label: 'temperature scale', innerUnit: 'K', decimals: 3, group: 'turbulence', meaning: 'Heat flux over friction velocity, with opposite sign.' }),
  q({ key: 'covUW', symbol: "u'w'", label: 'covariance of u and w', innerUnit: 'm2 s-2', decimals: 4, group: 'turbulence', meaning: 'Along-wind momentum flux, kinematic, before spectral correction.' }),
  q({ key: 'covVW', symbol: "v'w'", label: 'covariance of v and w', innerUnit: 'm2 s-2', decimals: 4, group: 'turbulence', meaning: 'Cross-wind momentum flux, kinematic, before spectral correction.' }),
  q({ key: 'covWTs', symbol: "w'Ts'", label: 'covariance of w and sonic temperature', innerUnit: 'K m s-1', decimals: 4, group: 'turbulence', meaning: 'Kinematic buoyancy-like flux, before spectral correction.' }),
  q({ key: 'covWCo2', symbol: "w'ρc'", label: 'covariance of w and CO2 density', innerUnit: 'mol m-2 s-1', unit: 'µmol m-2 s-1', factor: 1e6, decimals: 2, group: 'turbulence', meaning: 'What the sensor saw before spectral and density corrections.' }),
  q({ key: 'covWH2o', symbol: "w'ρv'", label: 'covariance of w and H2O density', innerUnit: 'mol m-2 s-1', unit: 'mmol m-2 s-1', factor: 1e3, decimals: 3, group: 'turbulence', meaning: 'What the sensor saw before spectral and density corrections.' }),
  q({ key: 'covWT', symbol: "w'T'", label: 'kinematic heat flux', innerUnit: 'K m s-1', decimals: 4, group: 'turbulence', meaning: 'After spectral and humidity corrections.' }),
];

const corrections: Quantity[] = [
  q({ key: 'spectralFactorMomentum', symbol: 'CF τ', label: 'spectral factor of momentum', innerUnit: '1', group: 'correction', meaning: 'True over measured covariance: losses of path averaging and block averaging.' }),
  q({ key: 'spectralFactorHeat', symbol: 'CF H', label: 'spectral factor of sonic temperature', innerUnit: '1', group: 'correction', meaning: 'True over measured covariance.' }),
  q({ key: 'spectralFactorCo2', symbol: 'CF FC', label: 'spectral factor of CO2', innerUnit: '1', group: 'correction', meaning: 'True over measured covariance: path, separation, response, block average.' }),
  q({ key: 'spectralFactorH2o', symbol: 'CF LE', label: 'spectral factor of H2O', innerUnit: '1', group: 'correction', meaning: 'True over measured covariance: path, separation, response, block average.' }),
  q({ key: 'co2CovarianceTerm', symbol: 'FC₁', label: 'CO2 flux: corrected covariance', innerUnit: 'mol m-2 s-1', unit: 'µmol m-2 s-1', factor: 1e6, decimals: 2, group: 'correction', meaning: 'First part of the CO2 flux.' }),
  q({ key: 'co2VapourTerm', symbol: 'FC₂', label: 'CO2 flux: vapour dilution', innerUnit: 'mol m-2 s-1', unit: 'µmol m-2 s-1', factor: 1e6, decimals: 2, group: 'correction', meaning: 'Second part: water vapour displaces dry air.' }),
  q({ key: 'co2HeatTerm', symbol: 'FC₃', label: 'CO2 flux: thermal expansion', innerUnit: 'mol m-2 s-1', unit: 'µmol m-2 s-1', factor: 1e6, decimals: 2, group: 'correction', meaning: 'Third part: warm air is thinner.' }),
  q({ key: 'densityMeanW', symbol: 'w̄d', label: 'vertical wind implied by zero dry-air flux', innerUnit: 'm s-1', unit: 'mm s-1', factor: 1e3, decimals: 3, group: 'correction', meaning: 'Too small to measure; density terms stand for it.' }),
  q({ key: 'lagSonicTemperature', symbol: 'lag Ts', label: 'lag of sonic temperature', innerUnit: 's', decimals: 2, group: 'correction', meaning: 'Always 0: same instrument.' }),
  q({ key: 'lagCo2', symbol: 'lag CO2', label: 'lag of CO2', innerUnit: 's', decimals: 2, group: 'correction', meaning: 'How much later than the wind the gas was recorded.' }),
  q({ key: 'lagH2o', symbol: 'lag H2O', label: 'lag of H2O', innerUnit: 's', decimals: 2, group: 'correction', meaning: 'How much later than the wind the vapour was recorded.' }),
  q({ key: 'stabilityPasses', symbol: 'n', label: 'passes of the stability iteration', innerUnit: '1', decimals: 0, group: 'correction', meaning: 'How often the corrections were repeated until z/L settled.' }),
];

const tests: Quantity[] = [
  ...(['momentum', 'sensibleHeat', 'latentHeat', 'co2Flux'] as const).flatMap((flux) => [
    q({ key: `steadyState.${flux}`, symbol: `RN ${fluxLabels[flux].symbol}`, label: `steady-state deviation, ${fluxLabels[flux].label}`, innerUnit: '1', unit: '%', factor: 100, decimals: 0, group: 'test', meaning: 'How far six short covariances are from the whole one.' }),
  ]),
  q({ key: 'integralTurbulence.windW', symbol: 'ITC w', label: 'integral turbulence deviation, w', innerUnit: '1', unit: '%', factor: 100, decimals: 0, group: 'test', meaning: 'How far σw/u* is from its model.' }),
  q({ key: 'integralTurbulence.windU', symbol: 'ITC u', label: 'integral turbulence deviation, u', innerUnit: '1', unit: '%', factor: 100, decimals: 0, group: 'test', meaning: 'How far σu/u* is from its model.' }),
  q({ key: 'integralTurbulence.sonicTemperature', symbol: 'ITC T', label: 'integral turbulence deviation, T', innerUnit: '1', unit: '%', factor: 100, decimals: 0, group: 'test', meaning: 'How far σT/T* is from its model; informative only.' }),
];

const seriesList = Object.keys(seriesLabels) as SeriesKey[];

const counts: Quantity[] = [
  q({ key: 'samplesExpected', symbol: 'n', label: 'samples expected', innerUnit: '1', decimals: 0, group: 'count', meaning: 'Rate × duration.' }),
  q({ key: 'samplesRead', symbol: 'n', label: 'samples recorded', innerUnit: '1', decimals: 0, group: 'count', meaning: 'Slots of the period that hold a scan.' }),
  q({ key: 'longestGap', symbol: 'gap', label: 'longest gap', innerUnit: 's', decimals: 2, group: 'count', meaning: 'Longest stretch without a scan.' }),
  q({ key: 'duplicates', symbol: 'dup', label: 'duplicate scans', innerUnit: '1', decimals: 0, group: 'count', meaning: 'Scans for a slot already taken.' }),
  q({ key: 'clockJumps', symbol: 'jumps', label: 'clock jumps', innerUnit: '1', decimals: 0, group: 'count', meaning: 'Steps of the clock beyond half a second or five scans.' }),
  q({ key: 'rejectedByStatus.sonic', symbol: 'status', label: 'samples with bad sonic status', innerUnit: '1', unit: '%', factor: 100, decimals: 2, group: 'count', meaning: 'Share of scans the sonic itself called bad.' }),
  q({ key: 'rejectedByStatus.analyser', symbol: 'status', label: 'samples with bad analyser status or low signal', innerUnit: '1', unit: '%', factor: 100, decimals: 2, group: 'count', meaning: 'Share of scans the analyser called bad, or with low signal strength.' }),
  ...seriesList.flatMap((s) => [
    q({ key: `missing.${s}`, symbol: 'missing', label: `missing samples, ${seriesLabels[s].label}`, innerUnit: '1', unit: '%', factor: 100, decimals: 2, group: 'count', meaning: 'Share of expected samples not usable in the end.' }),
    q({ key: `implausible.${s}`, symbol: 'out', label: `implausible samples, ${seriesLabels[s].label}`, innerUnit: '1', unit: '%', factor: 100, decimals: 3, group: 'count', meaning: 'Share removed by plausibility limits.' }),
    q({ key: `spikes.${s}`, symbol: 'spikes', label: `spikes, ${seriesLabels[s].label}`, innerUnit: '1', unit: '%', factor: 100, decimals: 3, group: 'count', meaning: 'Share removed as spikes.' }),
  ]),
];

const screening: Quantity[] = [
  ...seriesList.flatMap((s) => [
    q({ key: `screening.emptyBins.${s}`, symbol: 'bins', label: `amplitude resolution, ${seriesLabels[s].label}`, innerUnit: '1', unit: '%', factor: 100, decimals: 0, group: 'screening', meaning: 'Largest share of empty histogram bins in a window.' }),
    q({ key: `screening.dropoutInterior.${s}`, symbol: 'run', label: `longest run in one bin, ${seriesLabels[s].label}`, innerUnit: '1', unit: '%', factor: 100, decimals: 1, group: 'screening', meaning: 'Longest run in an interior bin, share of the window.' }),
    q({ key: `screening.dropoutExtreme.${s}`, symbol: 'run', label: `longest run in an extreme bin, ${seriesLabels[s].label}`, innerUnit: '1', unit: '%', factor: 100, decimals: 1, group: 'screening', meaning: 'Longest run outside the 10th to 90th percentile, share of the window.' }),
    q({ key: `screening.skewness.${s}`, symbol: 'skew', label: `skewness, ${seriesLabels[s].label}`, innerUnit: '1', decimals: 2, group: 'screening', meaning: 'Asymmetry of the detrended record.' }),
    q({ key: `screening.kurtosis.${s}`, symbol: 'kurt', label: `kurtosis, ${seriesLabels[s].label}`, innerUnit: '1', decimals: 2, group: 'screening', meaning: 'Peakedness of the detrended record; 3 for a Gaussian.' }),
    q({ key: `screening.haarMean.${s}`, symbol: 'Haar', label: `step in the mean, ${seriesLabels[s].label}`, innerUnit: '1', decimals: 2, group: 'screening', meaning: 'Largest difference of means of neighbouring half windows, normalised.' }),
    q({ key: `screening.haarVariance.${s}`, symbol: 'Haar', label: `step in the variance, ${seriesLabels[s].label}`, innerUnit: '1', decimals: 2, group: 'screening', meaning: 'Largest difference of variances of neighbouring half windows, normalised.' }),
  ]),
  q({ key: 'screening.lag.co2', symbol: 'lag', label: 'covariance gained by lag, CO2', innerUnit: '1', unit: '%', factor: 100, decimals: 0, group: 'screening', meaning: 'Difference of the covariance at its best lag and at zero.' }),
  q({ key: 'screening.lag.h2o', symbol: 'lag', label: 'covariance gained by lag, H2O', innerUnit: '1', unit: '%', factor: 100, decimals: 0, group: 'screening', meaning: 'Difference of the covariance at its best lag and at zero.' }),
  q({ key: 'screening.angleOfAttack', symbol: 'α', label: 'samples beyond the acceptance angle', innerUnit: '1', unit: '%', factor: 100, decimals: 1, group: 'screening', meaning: 'Share of samples with a steeper wind than the sonic accepts.' }),
  q({ key: 'screening.windNonstationarity', symbol: 'RNS', label: 'nonstationarity of the horizontal wind', innerUnit: '1', decimals: 2, group: 'screening', meaning: 'Change of the wind vector over the record, by its mean speed.' }),
];

/** All quantities, in the order people expect them. */
export const catalogue: readonly Quantity[] = [...fluxes, ...wind, ...air, ...gas, ...turbulence, ...corrections, ...tests, ...counts, ...screening];

const byKey = new Map(catalogue.map((quantity) => [quantity.key, quantity]));

/** The catalogue entry of a key; throws for an unknown key (programmer error). */
export function quantity(key: string): Quantity {
  const found = byKey.get(key);
  if (!found) throw new RangeError(`No quantity ${key} in the catalogue`);
  return found;
}

export function isQuantity(key: string): boolean {
  return byKey.has(key);
}
