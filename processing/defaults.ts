import * as constants from './constants';

/**
 * Every threshold and coefficient of the chain in one table, with unit, source and how sure we are of it, so that a reviewer can
 * check or replace a number without reading code. Keys under `recipe.` are the default recipe's settings, path by path; a test holds
 * the two together. Everything else is a coefficient of a published formula or a limit that recipes do not carry.
 */

/**
 * verified: seen in a public document. derived: found by algebra and checked numerically. from-memory: of the named publication, not
 * reread. from-memory-doubtful: check against the original before quoting. project-choice: no publication claims it.
 */
export type DefaultTag = 'verified' | 'derived' | 'from-memory' | 'from-memory-doubtful' | 'project-choice';

export interface DefaultEntry {
  key: string;
  value: number;
  unit: string;
  meaning: string;
  source: string;
  tag: DefaultTag;
}

type Row = [key: string, value: number, unit: string, meaning: string, tag?: DefaultTag, source?: string];

/** A group of rows under one prefix; tag and source hold for every row that states none of its own. */
function group(prefix: string, source: string, tag: DefaultTag, rows: Row[]): DefaultEntry[] {
  return rows.map(([key, value, unit, meaning, ownTag, ownSource]) => ({
    key: prefix === '' ? key : `${prefix}.${key}`,
    value,
    unit,
    meaning,
    source: ownSource ?? source,
    tag: ownTag ?? tag,
  }));
}

const own = 'project choice';
const practice = 'common practice, no source';
const vickersMahrt = 'Vickers & Mahrt (1997), J. Atmos. Oceanic Technol. 14:512–526';
const moncrieff =
  'Kaimal et al. (1972), as parameterised by Moncrieff et al. (1997), J. Hydrol. 188–189:589–611';
const moore = 'Moore (1986), Boundary-Layer Meteorol. 37:17–35';
const fokenBook = 'Foken et al. (2004), Handbook of Micrometeorology, ch. 9';
const horst = 'Horst (1997), Boundary-Layer Meteorol. 82:219–233';
const massman = 'Massman (2000), Agric. For. Meteorol. 104:185–198';
const sonntag = 'Sonntag (1990, 1994)';
const wmo = 'WMO-No. 8, Annex 4.B';
const fao = 'Allen et al. (1998), FAO Irrigation and Drainage Paper 56';
const iso = 'ISO 2533:1975';

const recipeRows: DefaultEntry[] = [
  ...group('recipe.averaging', practice, 'project-choice', [['minutes', 30, 'min', 'Averaging period']]),
  ...group('recipe.completeness', own, 'project-choice', [
    [
      'softMissingPercent',
      10,
      '%',
      'Missing share above which a period is usable at best',
      'project-choice',
      'project choice; 10 % is common in networks',
    ],
    ['hardMissingPercent', 50, '%', 'Missing share above which a period is not processed'],
  ]),
  ...group('recipe.diagnostics', own, 'project-choice', [
    ['softRejectedPercent', 10, '%', 'Share rejected by status or signal strength, soft limit'],
    ['hardRejectedPercent', 30, '%', 'Share rejected by status or signal strength, hard limit'],
    [
      'signalStrength.relativeDropPoints',
      10,
      'percentage points',
      'Drop below the running reference at which samples are dropped',
    ],
    ['signalStrength.referenceDays', 7, 'd', 'Span of the running reference'],
    ['signalStrength.referencePercentile', 95, '%', 'Percentile that is the reference'],
  ]),
  ...group('recipe.plausibility', own, 'project-choice', [
    ['horizontalWindMaxMs', 50, 'm s-1', 'Largest horizontal wind component'],
    ['verticalWindMaxMs', 10, 'm s-1', 'Largest vertical wind component'],
    ['sonicTemperatureDegC.low', -40, '°C', 'Lowest sonic temperature'],
    ['sonicTemperatureDegC.high', 60, '°C', 'Highest sonic temperature'],
    ['co2MoleFraction.low', 150, 'µmol mol-1', 'Lowest CO2'],
    ['co2MoleFraction.high', 1500, 'µmol mol-1', 'Highest CO2'],
    ['h2oMoleFraction.low', -1, 'mmol mol-1', 'Lowest H2O; below zero for noise at frost'],
    ['h2oMoleFraction.high', 60, 'mmol mol-1', 'Highest H2O'],
    ['airPressureKPa.low', 50, 'kPa', 'Lowest pressure'],
    ['airPressureKPa.high', 110, 'kPa', 'Highest pressure'],
    ['hardRemovedPercent', 1, '%', 'Removed share above which the hard flag comes'],
  ]),
  ...group('recipe.despiking', 'Mauder et al. (2013), Agric. For. Meteorol. 169:122–135', 'from-memory', [
    ['threshold', 7, 'σ', 'Distance from the median in Gaussian-equivalent standard deviations'],
  ]),
  ...group('recipe.screening', vickersMahrt, 'from-memory', [
    ['spikeSharePercent.hard', 1, '%', 'Share of replaced points'],
    ['amplitudeResolution.windowPoints', 1000, '1', 'Points per window'],
    ['amplitudeResolution.bins', 100, '1', 'Histogram bins'],
    ['amplitudeResolution.emptyPercent.hard', 70, '%', 'Empty bins in any window'],
    [
      'dropouts.interiorPercent.hard',
      10,
      '%',
      'Longest run in one interior bin',
      'from-memory-doubtful',
      `${vickersMahrt}; the longest-run reading is a project choice`,
    ],
    [
      'dropouts.extremePercent.hard',
      6,
      '%',
      'Longest run in one extreme bin',
      'from-memory-doubtful',
      `${vickersMahrt}; the longest-run reading is a project choice`,
    ],
    ['skewness.soft.low', -1, '1', 'Skewness, soft'],
    ['skewness.soft.high', 1, '1', 'Skewness, soft'],
    ['skewness.hard.low', -2, '1', 'Skewness, hard'],
    ['skewness.hard.high', 2, '1', 'Skewness, hard'],
    ['kurtosis.soft.low', 2, '1', 'Kurtosis, soft'],
    ['kurtosis.soft.high', 5, '1', 'Kurtosis, soft'],
    ['kurtosis.hard.low', 1, '1', 'Kurtosis, hard'],
    ['kurtosis.hard.high', 8, '1', 'Kurtosis, hard'],
    ['discontinuities.windowS', 300, 's', 'Window of the Haar test'],
    ['discontinuities.mean.soft', 2, '1', 'Haar step in the mean, soft'],
    ['discontinuities.mean.hard', 3, '1', 'Haar step in the mean, hard'],
    ['discontinuities.variance.soft', 2, '1', 'Haar step in the variance, soft'],
    ['discontinuities.variance.hard', 3, '1', 'Haar step in the variance, hard'],
    [
      'lag.windowS',
      2,
      's',
      'Half-width of the lag window',
      'project-choice',
      `the test is in ${vickersMahrt}; the window is a placeholder`,
    ],
    [
      'lag.differencePercent.soft',
      30,
      '%',
      'Covariance gained by lag, soft; no hard limit',
      'project-choice',
      `the test is in ${vickersMahrt}, its limits are not known to us: see docs/decisions/0005`,
    ],
    [
      'angleOfAttack.sharePercent.soft',
      5,
      '%',
      'Samples beyond the acceptance angle, soft',
      'project-choice',
      own,
    ],
    [
      'angleOfAttack.sharePercent.hard',
      20,
      '%',
      'Samples beyond the acceptance angle, hard',
      'project-choice',
      own,
    ],
    ['windNonstationarity.ratio.soft', 0.5, '1', 'Change of the wind vector by its mean speed'],
    ['softGrade', 1, '1', 'Grade of a soft flag', 'project-choice', own],
    ['hardGrade', 2, '1', 'Grade of a hard flag', 'project-choice', own],
  ]),
  ...group('recipe.lag', own, 'project-choice', [
    ['windowS', 1, 's', 'Half-width of the search window, at least'],
    ['noiseFactor', 3, '1', 'Maximum must exceed this many times the noise level'],
  ]),
  ...group('recipe.spectralLoss', own, 'project-choice', [
    ['warnFactor', 2, '1', 'Spectral factor above which a flux is usable at best'],
    ['rejectFactor', 5, '1', 'Spectral factor above which a flux is rejected'],
  ]),
  ...group('recipe.stabilityIteration', own, 'project-choice', [
    ['maxPasses', 10, '1', 'Cap of the stability iteration'],
    ['relativeChange', 0.01, '1', 'Relative change of z/L that ends it'],
    ['absoluteChange', 0.001, '1', 'Absolute change of z/L that ends it'],
  ]),
  ...group('recipe.steadyState', 'Foken & Wichura (1996), Agric. For. Meteorol. 78:83–105', 'from-memory', [
    ['subIntervals', 6, '1', 'Short intervals in a period'],
    ['goodPercent', 30, '%', 'Deviation up to which a flux is good'],
    [
      'usablePercent',
      100,
      '%',
      'Deviation up to which a flux is usable',
      'from-memory',
      'Mauder & Foken (2004)',
    ],
  ]),
  ...group('recipe.integralTurbulence', 'Mauder & Foken (2004)', 'from-memory', [
    ['goodPercent', 30, '%', 'Deviation up to which a flux is good'],
    ['usablePercent', 100, '%', 'Deviation up to which a flux is usable'],
  ]),
  ...group('recipe.uncertainty', 'Rannik et al. (2016), Atmos. Meas. Tech. 9:5163, abstract', 'verified', [
    ['maxLagS', 200, 's', 'Largest lag of the covariance sums'],
  ]),
  ...group('recipe.storage', own, 'project-choice', [
    ['edgeMinutes', 5, 'min', 'Width of the short means centred on both ends'],
  ]),
];

const physicalRows: DefaultEntry[] = [
  ...group('constant', 'CODATA 2018', 'from-memory', [
    ['gasConstant', constants.gasConstant, 'J mol-1 K-1', 'Molar gas constant'],
    [
      'molarMassDryAir',
      constants.molarMassDryAir,
      'kg mol-1',
      'Molar mass of dry air',
      'project-choice',
      'project choice; ISO 2533 has 0.028964420',
    ],
    [
      'molarMassWater',
      constants.molarMassWater,
      'kg mol-1',
      'Molar mass of water',
      'from-memory',
      'standard atomic weights',
    ],
    [
      'molarMassCo2',
      constants.molarMassCo2,
      'kg mol-1',
      'Molar mass of CO2',
      'from-memory',
      'standard atomic weights',
    ],
    [
      'molarMassCarbon',
      constants.molarMassCarbon,
      'kg mol-1',
      'Molar mass of carbon',
      'from-memory',
      'standard atomic weights',
    ],
    ['gravity', constants.gravity, 'm s-2', 'Standard gravity', 'verified', iso],
    ['vonKarman', constants.vonKarman, '1', 'Von Kármán constant', 'project-choice', practice],
    ['stefanBoltzmann', constants.stefanBoltzmann, 'W m-2 K-4', 'Stefan-Boltzmann constant'],
    [
      'celsiusZero',
      constants.celsiusZeroK,
      'K',
      'Zero of the Celsius scale',
      'from-memory',
      'International System of Units',
    ],
    [
      'specificHeatDryAir',
      constants.specificHeatDryAir,
      'J kg-1 K-1',
      'Specific heat of dry air',
      'from-memory',
      'Stull (1988)',
    ],
    [
      'specificHeatHumidityFactor',
      constants.specificHeatHumidityFactor,
      '1',
      'Rise of specific heat with specific humidity',
      'from-memory',
      'Stull (1988)',
    ],
    [
      'sonicHumidityFactor',
      constants.sonicHumidityFactor,
      '1',
      'Sonic temperature: T (1 + 0.51 q)',
      'verified',
      'Schotanus et al. (1983); Kaimal & Gaynor (1991)',
    ],
    [
      'virtualHumidityFactor',
      constants.virtualHumidityFactor,
      '1',
      'Virtual temperature: T (1 + 0.61 q)',
      'from-memory',
      'general meteorology',
    ],
    [
      'latentHeatAtZeroC',
      constants.latentHeatAtZeroC,
      'J kg-1',
      'Latent heat at 0 °C',
      'from-memory',
      `${fao}, Annex 3, eq. 3-1`,
    ],
    [
      'latentHeatSlope',
      constants.latentHeatSlope,
      'J kg-1 K-1',
      'Fall of latent heat per kelvin',
      'from-memory',
      `${fao}, Annex 3, eq. 3-1`,
    ],
    [
      'latentHeatIce',
      constants.latentHeatIce,
      'J kg-1',
      'Latent heat of sublimation',
      'from-memory',
      'general meteorology',
    ],
    [
      'earthRotation',
      7.2921159e-5,
      's-1',
      'Angular speed of the Earth',
      'from-memory',
      'standard reference value',
    ],
  ]),
  ...group('saturation.sonntag', sonntag, 'verified', [
    ['water.c0', -6096.9385, 'K', 'Coefficient of 1/T over water'],
    ['water.c1', 21.2409642, '1', 'Constant over water (e in Pa)'],
    ['water.c2', -0.02711193, 'K-1', 'Coefficient of T over water'],
    ['water.c3', 1.673952e-5, 'K-2', 'Coefficient of T² over water'],
    ['water.c4', 2.433502, '1', 'Coefficient of ln T over water'],
    ['ice.c0', -6024.5282, 'K', 'Coefficient of 1/T over ice'],
    ['ice.c1', 29.32707, '1', 'Constant over ice (e in Pa)'],
    ['ice.c2', 0.010613868, 'K-1', 'Coefficient of T over ice'],
    ['ice.c3', -1.3198825e-5, 'K-2', 'Coefficient of T² over ice'],
    ['ice.c4', -0.49382577, '1', 'Coefficient of ln T over ice'],
  ]),
  ...group('saturation.wmo8', wmo, 'verified', [
    ['e0', 611.2, 'Pa', 'Saturation vapour pressure at 0 °C'],
    ['water.a', 17.62, '1', 'Magnus factor over water'],
    ['water.b', 243.12, '°C', 'Magnus temperature over water'],
    ['ice.a', 22.46, '1', 'Magnus factor over ice', 'from-memory'],
    ['ice.b', 272.62, '°C', 'Magnus temperature over ice', 'from-memory'],
  ]),
  ...group('saturation.fao56', `${fao}, eqs 11 and 13`, 'verified', [
    ['e0', 610.8, 'Pa', 'Saturation vapour pressure at 0 °C'],
    ['a', 17.27, '1', 'Tetens factor'],
    ['b', 237.3, '°C', 'Tetens temperature'],
    ['slope', 4098, '°C', 'Factor of the slope, 17.27 × 237.3 rounded'],
  ]),
  ...group('thermo', own, 'project-choice', [
    ['temperature.low', -60, '°C', 'Lowest temperature for which humidity is computed'],
    ['temperature.high', 60, '°C', 'Highest temperature for which humidity is computed'],
    ['pressure.low', 50_000, 'Pa', 'Lowest pressure used'],
    ['pressure.high', 110_000, 'Pa', 'Highest pressure used'],
    ['relativeHumidity.clipAbove', 1, '1', 'Relative humidity above which it is clipped'],
    ['relativeHumidity.invalidAbove', 1.05, '1', 'Relative humidity above which it is invalid'],
  ]),
  ...group('standardAtmosphere', iso, 'verified', [
    ['pressure', 101_325, 'Pa', 'Pressure at sea level'],
    ['temperature', 288.15, 'K', 'Temperature at sea level'],
    ['lapseRate', 0.0065, 'K m-1', 'Fall of temperature in the troposphere'],
    ['gasConstant', 287.05287, 'J kg-1 K-1', 'Specific gas constant of dry air', 'from-memory'],
    ['earthRadius', 6_356_766, 'm', 'Radius for geopotential altitude'],
  ]),
  ...group('psychrometer.fao56', fao, 'verified', [
    ['ventilated', 0.000662, 'K-1', 'Psychrometer coefficient, ventilated (eq. 16)'],
    ['constant', 0.665e-3, 'K-1', 'Psychrometric constant over pressure (eq. 8)'],
  ]),
];

const recordRows: DefaultEntry[] = [
  ...group('clock', own, 'project-choice', [
    ['jumpS', 0.5, 's', 'Step of the clock that is a jump, at least'],
    ['jumpScans', 5, '1', 'Step of the clock that is a jump, in scans'],
    ['rateDriftPercent', 0.1, '%', 'Fitted rate off nominal that is warned of'],
    ['countPercent', 1, '%', 'Scan count off expectation that is warned of'],
    ['outagePercent', 1, '%', 'Missing share below which a clock jump was a correction, not an outage'],
    ['extraLossPercent', 1, '%', 'Loss beyond missing scans from which a series is told apart'],
  ]),
  ...group('screening', vickersMahrt, 'from-memory', [
    ['binSpanSigma', 7, 'σ', 'Span of the histogram, unless the range is smaller'],
    ['windowStepPoints', 500, '1', 'Step of the resolution and dropout windows'],
    ['haarRangeDivisor', 4, '1', 'Normaliser of the Haar mean: min(σ, range/4)'],
    ['extremeLowPercentile', 10, '%', 'Bins below it are extreme'],
    ['extremeHighPercentile', 90, '%', 'Bins above it are extreme'],
    [
      'windowMinimumValidPercent',
      50,
      '%',
      'Valid share below which a window is skipped',
      'project-choice',
      own,
    ],
    [
      'acceptanceAngleFallbackDeg',
      25,
      'deg',
      'Acceptance angle where the set-up has none',
      'project-choice',
      own,
    ],
    [
      'calmForNonstationarityMs',
      0.1,
      'm s-1',
      'Wind below which nonstationarity is not tested',
      'project-choice',
      own,
    ],
  ]),
  ...group('despiking', 'definition of the Gaussian quantile', 'derived', [
    [
      'madToSigma',
      0.6745,
      '1',
      'Median absolute deviation of a unit Gaussian',
      'from-memory',
      'Mauder et al. (2013), Agric. For. Meteorol. 169:122–135',
    ],
    ['madToSigmaExact', 1.482602218505602, '1', 'Reciprocal of the exact Gaussian quantile'],
  ]),
  ...group('sonic', 'Liu, Peters & Foken (2001), Boundary-Layer Meteorol. 100:459–468', 'from-memory', [
    ['crosswindDivisor', 403, 'm2 s-2 K-1', 'γ R_d of the crosswind term'],
  ]),
  ...group('wind', own, 'project-choice', [
    ['calmMs', 0.1, 'm s-1', 'Wind below which it has no direction'],
    ['yamartino', 0.1547, '1', 'Coefficient of the direction spread', 'verified', 'Yamartino (1984)'],
    [
      'mastSectorHalfWidthDeg',
      45,
      'deg',
      'Suggested half-width behind the mast',
      'project-choice',
      'project choice; practice ranges from 15 to 60',
    ],
  ]),
  ...group('lag', own, 'project-choice', [
    ['noiseFromS', 30, 's', 'Nearest lag used for the noise level'],
    ['noiseToS', 60, 's', 'Farthest lag used for the noise level'],
    ['minimumPairsPercent', 50, '%', 'Share of pairs below which the default lag is used'],
    ['slowestTransportMs', 0.5, 'm s-1', 'Wind that sets the widest window from the separation'],
  ]),
  ...group('spectra', own, 'project-choice', [
    ['bins', 50, '1', 'Logarithmic frequency bins'],
    ['longestInterpolatedGapS', 2, 's', 'Longest gap filled for spectra'],
    ['maximumGapPercent', 10, '%', 'Missing share above which there is no spectrum'],
  ]),
  ...group('scales', own, 'project-choice', [
    ['smallestUstarMs', 0.01, 'm s-1', 'Friction velocity below which z/L and T* are left out'],
    ['largestObukhovLengthM', 1e5, 'm', 'Magnitude at which the Obukhov length is stored as neutral'],
    ['smallestLatentHeatForBowen', 1, 'W m-2', 'Magnitude of LE below which the Bowen ratio is left out'],
  ]),
];

const qualityRows: DefaultEntry[] = [
  ...group('steadyState', own, 'project-choice', [
    ['minimumValidPercent', 50, '%', 'Valid share a short interval needs'],
    ['minimumSubIntervals', 4, '1', 'Short intervals needed'],
    ['nearZeroCorrelation', 1e-3, '1', 'Correlation below which the flux counts as near zero'],
  ]),
  ...group('itc', `${fokenBook}, after Foken, Skeib & Richter (1991)`, 'from-memory', [
    ['windW.nearNeutral.c1', 1.3, '1', 'σw/u*, −0.032 < z/L < 0'],
    ['windW.nearNeutral.c2', 0, '1', 'exponent'],
    ['windW.unstable.c1', 2.0, '1', 'σw/u*, z/L < −0.032'],
    ['windW.unstable.c2', 1 / 8, '1', 'exponent'],
    ['windU.nearNeutral.c1', 2.7, '1', 'σu/u*, −0.032 < z/L < 0'],
    ['windU.nearNeutral.c2', 0, '1', 'exponent'],
    ['windU.unstable.c1', 4.15, '1', 'σu/u*, z/L < −0.032'],
    ['windU.unstable.c2', 1 / 8, '1', 'exponent'],
    ['wind.unstableBelow', -0.032, '1', 'z/L between near-neutral and unstable forms'],
    ['sonicTemperature.stable.c1', 1.4, '1', 'σT/|T*|, 0.02 < z/L < 1'],
    ['sonicTemperature.stable.c2', -1 / 4, '1', 'exponent'],
    ['sonicTemperature.nearNeutral.c1', 0.5, '1', 'σT/|T*|, −0.062 < z/L < 0.02'],
    ['sonicTemperature.nearNeutral.c2', -1 / 2, '1', 'exponent'],
    ['sonicTemperature.unstable.c1', 1.0, '1', 'σT/|T*|, −1 < z/L < −0.062'],
    ['sonicTemperature.unstable.c2', -1 / 4, '1', 'exponent'],
    ['sonicTemperature.freeConvection.c1', 1.0, '1', 'σT/|T*|, z/L < −1'],
    ['sonicTemperature.freeConvection.c2', -1 / 3, '1', 'exponent'],
    ['sonicTemperature.stableAbove', 0.02, '1', 'z/L between near-neutral and stable forms'],
    ['sonicTemperature.unstableBelow', -0.062, '1', 'z/L between near-neutral and unstable forms'],
    ['sonicTemperature.freeConvectionBelow', -1, '1', 'z/L where free convection begins'],
    ['sonicTemperature.highestZeta', 1, '1', 'z/L above which T is not tested', 'project-choice', own],
    ['sonicTemperature.smallestZeta', 1e-3, '1', '|z/L| below which T is not tested', 'project-choice', own],
    [
      'sonicTemperature.smallestFlux',
      0.01,
      'K m s-1',
      "|w'T'| below which T is not tested",
      'project-choice',
      own,
    ],
  ]),
  ...group(
    'itc.thomasFoken',
    'Thomas & Foken (2002), 15th Symp. Boundary Layers & Turbulence',
    'from-memory',
    [
      ['windU.slope', 0.44, '1', 'Slope in ln(z+ f/u*)'],
      ['windU.offset', 6.3, '1', 'Offset'],
      ['windW.slope', 0.21, '1', 'Slope in ln(z+ f/u*)'],
      ['windW.offset', 3.1, '1', 'Offset'],
      ['zPlusM', 1, 'm', 'Normalising height z+'],
      ['zetaLow', -0.2, '1', 'Lowest z/L of its range'],
      ['zetaHigh', 0.4, '1', 'Highest z/L of its range'],
      [
        'smallestLatitudeDeg',
        10,
        'deg',
        'Latitude below which the table is used instead',
        'project-choice',
        own,
      ],
    ],
  ),
  ...group('class9', fokenBook, 'from-memory', [
    ['limit1', 15, '%', 'Class 1 up to'],
    ['limit2', 30, '%', 'Class 2 up to'],
    ['limit3', 50, '%', 'Class 3 up to'],
    ['limit4', 75, '%', 'Class 4 up to'],
    ['limit5', 100, '%', 'Class 5 up to'],
    ['limit6', 250, '%', 'Class 6 up to'],
    ['limit7', 500, '%', 'Class 7 up to'],
    ['limit8', 1000, '%', 'Class 8 up to'],
    ['orientation1Deg', 30, 'deg', 'Orientation class 1 up to', 'from-memory-doubtful'],
    ['orientation2Deg', 60, 'deg', 'Orientation class 2 up to', 'from-memory-doubtful'],
    ['orientation3Deg', 100, 'deg', 'Orientation class 3 up to', 'from-memory-doubtful'],
    ['orientation5Deg', 150, 'deg', 'Orientation classes 4 and 5 up to', 'from-memory-doubtful'],
    ['orientation8Deg', 170, 'deg', 'Orientation classes 6 to 8 up to', 'from-memory-doubtful'],
  ]),
  ...group('uncertainty', 'Finkelstein & Sims (2001), J. Geophys. Res. 106(D4):3503–3509', 'from-memory', [
    ['confidenceSigmas', 1, '1', 'Standard deviations reported as ±', 'project-choice', own],
  ]),
];

const spectralRows: DefaultEntry[] = [
  ...group('cospectra.scalar.unstable', moncrieff, 'from-memory', [
    ['low.a', 12.92, '1', 'f Co = a f / (1 + b f)^c below the join'],
    ['low.b', 26.7, '1', 'as above'],
    ['low.c', 1.375, '1', 'as above'],
    ['high.a', 4.378, '1', 'f Co = a f / (1 + b f)^c above the join'],
    ['high.b', 3.8, '1', 'as above'],
    ['high.c', 2.4, '1', 'as above'],
    ['join', 0.54, '1', 'f where the two branches meet'],
  ]),
  ...group('cospectra.momentum.unstable', moncrieff, 'from-memory', [
    ['low.a', 20.78, '1', 'f Co = a f / (1 + b f)^c below the join'],
    ['low.b', 31, '1', 'as above'],
    ['low.c', 1.575, '1', 'as above'],
    ['high.a', 12.66, '1', 'f Co = a f / (1 + b f)^c above the join'],
    ['high.b', 9.6, '1', 'as above'],
    ['high.c', 2.4, '1', 'as above'],
    ['join', 0.24, '1', 'f where the two branches meet'],
  ]),
  ...group('cospectra.stable', moncrieff, 'from-memory', [
    ['scalar.a', 0.284, '1', 'A = a (1 + b z/L)^c'],
    ['scalar.b', 6.4, '1', 'as above'],
    ['momentum.a', 0.124, '1', 'A = a (1 + b z/L)^c'],
    ['momentum.b', 7.9, '1', 'as above'],
    ['exponent', 0.75, '1', 'exponent c of A'],
    ['bFactor', 2.34, '1', 'B = 2.34 A^−1.1'],
    ['bExponent', -1.1, '1', 'as above'],
    ['fExponent', 2.1, '1', 'f Co = f / (A + B f^2.1)'],
    ['highestZeta', 2, '1', 'z/L is held to 0…2', 'project-choice', own],
  ]),
  ...group('cospectra', own, 'project-choice', [
    ['blendHalfWidth', 0.02, '1', '|z/L| below which stable and unstable forms are mixed linearly'],
  ]),
  ...group('transfer', moore, 'from-memory', [
    ['separation.factor', 9.9, '1', 'exp(−9.9 (n s/ū)^1.5)'],
    ['separation.exponent', 1.5, '1', 'as above'],
    [
      'path.seriesBelow',
      0.02,
      '1',
      'X below which path functions use their series',
      'derived',
      'rounding error of the closed forms',
    ],
    [
      'alias.exponent',
      3,
      '1',
      'Sampling alias, off: it does not change a covariance',
      'from-memory-doubtful',
    ],
    [
      'tube.laminarReynolds',
      2300,
      '1',
      'Reynolds number up to which tube flow is laminar',
      'from-memory',
      'Lenschow & Raupach (1991), J. Geophys. Res. 96:15259',
    ],
    [
      'tube.turbulentFactor',
      160,
      '1',
      'exp(−160 Re^(−1/8) π² a n² L / U²)',
      'from-memory',
      'Lenschow & Raupach (1991), J. Geophys. Res. 96:15259',
    ],
    [
      'tube.turbulentExponent',
      -1 / 8,
      '1',
      'as above',
      'from-memory',
      'Lenschow & Raupach (1991), J. Geophys. Res. 96:15259',
    ],
  ]),
  ...group('lossIntegral', own, 'project-choice', [
    ['lowestF', 1e-7, '1', 'Lowest normalised frequency of the integral'],
    ['highestF', 1e4, '1', 'Highest normalised frequency of the integral'],
    ['points', 801, '1', 'Points of the logarithmic grid'],
    ['referencePoints', 4001, '1', 'Points of the grid that tests compare with'],
  ]),
  ...group('spectralLoss', own, 'project-choice', [
    ['lowestFactor', 0.99, '1', 'Factor below which a flux is rejected'],
    ['doubtfulWindMs', 0.3, 'm s-1', 'Wind below which factors are doubtful'],
  ]),
  ...group('horst', horst, 'from-memory', [
    ['unstable.nm', 0.085, '1', 'Peak frequency, z/L ≤ 0'],
    ['unstable.alpha', 7 / 8, '1', 'Exponent, z/L ≤ 0'],
    ['stable.nmA', 2.0, '1', 'n_m = a − b/(1 + c z/L)'],
    ['stable.nmB', 1.915, '1', 'as above'],
    ['stable.nmC', 0.5, '1', 'as above'],
    ['stable.alpha', 1, '1', 'Exponent, z/L > 0'],
  ]),
  ...group('massman', massman, 'from-memory', [
    ['unstable.alpha', 0.925, '1', 'Exponent, z/L ≤ 0'],
    ['stable.alpha', 1, '1', 'Exponent, z/L > 0'],
    [
      'blockAverage',
      2.783,
      '1',
      'Time constant of a block average: T/2.783',
      'derived',
      'half point of the transfer function',
    ],
    [
      'linearDetrend',
      5.352,
      '1',
      'Time constant of linear detrending: T/5.352',
      'derived',
      'half point of the transfer function',
    ],
    [
      'separation',
      1.06733,
      '1',
      'Time constant of a separation: s/(1.06733 ū)',
      'derived',
      'half point of the transfer function',
    ],
    [
      'scalarPath',
      10.47,
      '1',
      'Time constant of scalar path averaging in a covariance: l/(10.47 ū)',
      'derived',
      'half point of the transfer function',
    ],
    [
      'windPath',
      14.32,
      '1',
      'Time constant of vertical path averaging in a covariance: l/(14.32 ū)',
      'derived',
      'half point of the transfer function',
    ],
  ]),
];

const fluxRows: DefaultEntry[] = [
  ...group('fluxes', own, 'project-choice', [
    ['dampingAfterPass', 3, '1', 'Pass after which z/L moves only part of the way'],
    ['damping', 0.5, '1', 'Part of the way it moves then'],
  ]),
  ...group('storage', own, 'project-choice', [
    ['minimumEdgePercent', 50, '%', 'Valid share each half of an edge window needs'],
  ]),
];

/** The whole table. */
export const defaults: readonly DefaultEntry[] = [
  ...recipeRows,
  ...physicalRows,
  ...recordRows,
  ...qualityRows,
  ...spectralRows,
  ...fluxRows,
];

const byKey = new Map(defaults.map((entry) => [entry.key, entry]));

/** The entry of a key; throws for an unknown key (programmer error). */
export function defaultEntry(key: string): DefaultEntry {
  const entry = byKey.get(key);
  if (!entry) throw new RangeError(`No default ${key}`);
  return entry;
}

/** The value of a key, in the unit its entry states. */
export function defaultValue(key: string): number {
  return defaultEntry(key).value;
}
