import { fluxLabels } from '../catalogue';
import { gasConstant, gravity, molarMassWater, vonKarman } from '../constants';
import { defaultValue } from '../defaults';
import type { RecipeSettings } from '../schemas/recipe';
import type { AirState, FluxKey, FluxState, GasKey, Grade, PeriodState, ScalarKey } from '../state';
import {
  airStateFrom,
  latentHeatOfVaporisation,
  moistAir,
  pressureFromElevationPa,
  relativeHumidity,
  specificHeat,
  vapourPressureDeficitPa,
  virtualTemperatureK,
} from '../thermodynamics';
import type { DensityFluxes } from './density';
import { solveDensity } from './density';
import {
  addLedger,
  addReason,
  addSkipped,
  alreadyStopped,
  everyFlux,
  formatNumber,
  gradeAbove,
} from './ledger';
import { frictionVelocity } from './moments';
import { doubtfulWindMs, lossGeometry, lowestFactor, prepareFactors } from './spectral-loss';
import { quantityText } from './wording';

const version = 1;

const smallestUstarMs = defaultValue('scales.smallestUstarMs');
const largestObukhovLengthM = defaultValue('scales.largestObukhovLengthM');
const smallestLatentHeat = defaultValue('scales.smallestLatentHeatForBowen');
const dampingAfterPass = defaultValue('fluxes.dampingAfterPass');
const damping = defaultValue('fluxes.damping');
const clipHumidityAbove = defaultValue('thermo.relativeHumidity.clipAbove');
const invalidHumidityAbove = defaultValue('thermo.relativeHumidity.invalidAbove');

// ------------------------------------------------------------------------------------------------------------ air state

/**
 * Mean state of the air from the cleaned means, replacing the first estimate.
 *
 * Pressure as an earlier step found it, else of the standard atmosphere. Without H2O the air counts as dry at the sonic temperature: its
 * density then is P/(R_d Ts), close to that of the moist air because sonic is close to virtual temperature.
 *
 * @param state after the moments
 * @returns the same state with `air` and the air's values filled; untouched when the period was stopped
 */
export function airStateStep(state: PeriodState): PeriodState {
  const sonicK = state.moments?.means.sonicTemperature ?? NaN;
  if (state.stopped || !state.moments) return state;
  const measuredPa = state.values.airPressure;
  const pressurePa = Number.isFinite(measuredPa)
    ? measuredPa
    : pressureFromElevationPa(state.setUp.elevationM);
  const pressureSource =
    state.air?.pressureSource ?? (Number.isFinite(measuredPa) ? 'measured' : 'elevation');
  const vapour = state.moments.means.h2o ?? NaN;
  const hasVapour = Number.isFinite(vapour);
  const air = hasVapour
    ? airStateFrom({ sonicTemperatureK: sonicK, vapourMolarDensity: vapour, pressurePa })
    : moistAir(sonicK, 0, pressurePa);
  state.air = {
    pressurePa,
    pressureSource,
    temperatureK: air.temperatureK,
    temperatureSource: hasVapour ? 'sonic-and-humidity' : 'sonic',
    vapourPressurePa: air.vapourPressurePa,
    specificHumidity: air.specificHumidity,
    dryAirDensity: air.dryAirDensity,
    vapourDensity: air.vapourDensity,
    airDensity: air.airDensity,
    dryAirMolarDensity: air.dryAirMolarDensity,
  };
  const { values } = state;
  values.airPressure = pressurePa;
  values.airTemperature = air.temperatureK;
  values.airDensity = air.airDensity;
  const total = pressurePa / (gasConstant * air.temperatureK);
  const co2 = state.moments.means.co2 ?? NaN;
  values.co2MolarDensity = co2;
  values.co2MoleFraction = co2 / total;
  values.h2oMolarDensity = vapour;
  if (!hasVapour) return state;
  values.h2oMoleFraction = vapour / total;
  values.co2DryMoleFraction = co2 / air.dryAirMolarDensity;
  values.vapourPressure = air.vapourPressurePa;
  values.specificHumidity = air.specificHumidity;
  fillHumidity(state, air.vapourPressurePa, air.temperatureK);
  return state;
}

/** Relative humidity and deficit, clipped just above saturation and left out beyond. */
function fillHumidity(state: PeriodState, vapourPressurePa: number, temperatureK: number): void {
  const formula = state.settings.saturationVapourPressure;
  const humidity = relativeHumidity(vapourPressurePa, temperatureK, formula);
  const deficit = vapourPressureDeficitPa(vapourPressurePa, temperatureK, formula);
  if (humidity >= 0 && humidity <= clipHumidityAbove) {
    state.values.relativeHumidity = humidity;
    state.values.vapourPressureDeficit = deficit;
    return;
  }
  const isInvalid = !(humidity >= 0 && humidity <= invalidHumidityAbove);
  if (!isInvalid) {
    state.values.relativeHumidity = clipHumidityAbove;
    state.values.vapourPressureDeficit = 0;
  }
  if (!Number.isFinite(humidity)) return;
  const percent = formatNumber(humidity * 100, 1);
  addReason(state, {
    key: 'density.relativeHumidity',
    step: 'density',
    fluxes: ['latentHeat'],
    series: 'h2o',
    grade: 0,
    statistic: { label: 'relative humidity', value: humidity * 100, unit: '%' },
    limits: { softHigh: clipHumidityAbove * 100, hardLow: 0, hardHigh: invalidHumidityAbove * 100 },
    finding: `Relative humidity ${percent} %`,
    sentence: isInvalid
      ? `H2O and temperature together give a relative humidity of ${percent} %, which cannot be; it and the vapour pressure deficit are left out. The analyser may need calibrating.`
      : `H2O and temperature together give a relative humidity of ${percent} %; it is shown as 100 % and the vapour pressure deficit as 0.`,
  });
}

// ------------------------------------------------------------------------------------------------------------ scales

/**
 * Obukhov length.
 *
 * L = −Tv u*³ / (κ g w'Tv')
 *
 * @param ustarMs friction velocity [m s⁻¹]
 * @param virtualK mean virtual temperature [K]
 * @param buoyancyFlux w'Tv' [K m s⁻¹]
 * @returns L [m], positive when stable, held to ±1e5 (neutral); NaN for u* below 0.01 m s⁻¹ or a NaN input
 * @assumes fluxes as at the surface
 * @reference Obukhov (1946); American Meteorological Society, Glossary of Meteorology
 * @deviates held to ±1e5 m (project choice)
 */
export function obukhovLength(ustarMs: number, virtualK: number, buoyancyFlux: number): number {
  if (!(ustarMs >= smallestUstarMs)) return NaN;
  const length = (-virtualK * ustarMs ** 3) / (vonKarman * gravity * buoyancyFlux);
  if (Number.isNaN(length)) return NaN;
  return Math.min(largestObukhovLengthM, Math.max(-largestObukhovLengthM, length));
}

// ------------------------------------------------------------------------------------------------------------ solution

/** Measured covariances and means that the solution starts from. */
export interface FluxInputs {
  uw: number;
  vw: number;
  /** w'Ts' [K m s⁻¹]. */
  wSonicTemperature: number;
  /** w'ρv' and w'ρc' [mol m⁻² s⁻¹]; NaN when missing. */
  wH2o: number;
  wCo2: number;
  /** Mean CO2 [mol m⁻³]; NaN when missing. */
  meanCo2: number;
  sonicTemperatureK: number;
  /** z − d [m]. */
  heightM: number;
  air: AirState;
}

export type FactorsAt = (zeta: number) => {
  factors: { momentum: number; sonicTemperature: number } & Record<GasKey, number>;
};

export interface FluxSolution {
  fluxes: FluxState;
  /** Stability at which the factors were taken; NaN where there is none and they are neutral. */
  factorZeta: number;
  hasConverged: boolean;
}

/**
 * Spectral factors, density terms and stability, solved together.
 *
 * A first z/L from the measured w'Ts'; then factors at z/L, coupled density solution, new z/L, until it changes by less than the given
 * share or amount. From the fourth pass on z/L moves only half of the way, so that it cannot swing.
 *
 * @param inputs measured covariances and means
 * @param factorsAt spectral factors as a function of z/L; NaN z/L means neutral
 * @param iteration limits of the recipe
 * @returns fluxes in SI at the last factors
 * @assumes each raw covariance has its own loss; density terms after spectral correction
 * @reference Webb, Pearman & Leuning (1980); order of corrections after Massman (2004), Handbook of Micrometeorology, ch. 4
 * @deviates damping is a project choice
 */
export function solveFluxes(
  inputs: FluxInputs,
  factorsAt: FactorsAt,
  iteration: RecipeSettings['stabilityIteration'],
): FluxSolution {
  const { air, heightM } = inputs;
  const hasVapour = Number.isFinite(inputs.wH2o);
  const hasCo2 = Number.isFinite(inputs.wCo2);
  const virtualK = hasVapour
    ? virtualTemperatureK(air.temperatureK, air.specificHumidity)
    : inputs.sonicTemperatureK;
  const stressMs = frictionVelocity(inputs.uw, inputs.vw);
  let zeta = heightM / obukhovLength(stressMs, inputs.sonicTemperatureK, inputs.wSonicTemperature);
  let passes = 0;
  for (;;) {
    const { factors } = factorsAt(zeta);
    passes++;
    const ustarMs = stressMs * Math.sqrt(factors.momentum);
    const density = solveDensity(
      {
        sonicTemperature: inputs.wSonicTemperature * factors.sonicTemperature,
        vapour: hasVapour ? inputs.wH2o * molarMassWater * factors.h2o : null,
        co2: hasCo2 ? inputs.wCo2 * factors.co2 : null,
      },
      air,
      inputs.meanCo2,
    );
    const obukhovLengthM = obukhovLength(ustarMs, virtualK, density.buoyancyFlux);
    const found = heightM / obukhovLengthM;
    const change = Math.abs(found - zeta);
    const hasConverged =
      !Number.isFinite(found) ||
      change < iteration.absoluteChange ||
      change < iteration.relativeChange * Math.abs(found);
    if (hasConverged || passes >= iteration.maxPasses) {
      return {
        fluxes: {
          ...fluxState(density, air, ustarMs),
          obukhovLengthM,
          zeta: found,
          passes,
          humidityMissing: !hasVapour,
        },
        factorZeta: zeta,
        hasConverged,
      };
    }
    zeta = Number.isFinite(zeta) && passes > dampingAfterPass ? zeta + damping * (found - zeta) : found;
  }
}

function fluxState(
  density: DensityFluxes,
  air: AirState,
  ustarMs: number,
): Omit<FluxState, 'obukhovLengthM' | 'zeta' | 'passes' | 'humidityMissing'> {
  return {
    ustarMs,
    tau: air.airDensity * ustarMs ** 2,
    temperatureFlux: density.temperatureFlux,
    sensibleHeat: air.airDensity * specificHeat(air.specificHumidity) * density.temperatureFlux,
    evaporation: density.evaporation,
    latentHeat: latentHeatOfVaporisation(air.temperatureK) * density.evaporation,
    co2Flux: density.co2Flux,
    co2Covariance: density.co2Covariance,
    co2VapourTerm: density.co2VapourTerm,
    co2HeatTerm: density.co2HeatTerm,
    densityMeanW: density.densityMeanW,
  };
}

// ------------------------------------------------------------------------------------------------------------ the step

type FactorKey = 'momentum' | ScalarKey;

const factorFlux: Record<FactorKey, FluxKey> = {
  momentum: 'momentum',
  sonicTemperature: 'sensibleHeat',
  h2o: 'latentHeat',
  co2: 'co2Flux',
};
const factorValueKey: Record<FactorKey, string> = {
  momentum: 'spectralFactorMomentum',
  sonicTemperature: 'spectralFactorHeat',
  h2o: 'spectralFactorH2o',
  co2: 'spectralFactorCo2',
};
const factorKeys: readonly FactorKey[] = ['momentum', 'sonicTemperature', 'h2o', 'co2'];

/**
 * Solves spectral loss, density terms and stability together, and writes a ledger line for each of the three.
 *
 * Fills `spectralLoss`, `fluxes` and their values. Call `airStateStep` before.
 */
export function solveFluxesStep(
  state: PeriodState,
  settings: Pick<RecipeSettings, 'spectralLoss' | 'density' | 'stabilityIteration'>,
): PeriodState {
  const { moments, air } = state;
  if (state.stopped || !moments || !air) {
    for (const step of ['spectralLoss', 'density', 'fluxes'] as const)
      addSkipped(state, step, version, {}, alreadyStopped);
    return state;
  }
  const geometry = lossGeometry(state);
  const prepared = prepareFactors(settings.spectralLoss, geometry, state.lags);
  const inputs: FluxInputs = {
    uw: moments.uw,
    vw: moments.vw,
    wSonicTemperature: moments.wScalar.sonicTemperature ?? NaN,
    // A covariance without a mean cannot be used: the density terms need both.
    wH2o: Number.isFinite(moments.means.h2o) ? (moments.wScalar.h2o ?? NaN) : NaN,
    wCo2: Number.isFinite(moments.means.co2) ? (moments.wScalar.co2 ?? NaN) : NaN,
    meanCo2: moments.means.co2 ?? NaN,
    sonicTemperatureK: moments.means.sonicTemperature ?? NaN,
    heightM: geometry.heightM,
    air,
  };
  const solution = solveFluxes(inputs, (zeta) => prepared.at(zeta), settings.stabilityIteration);
  const { fluxes } = solution;
  const loss = prepared.at(solution.factorZeta);
  state.fluxes = fluxes;
  state.spectralLoss = loss;
  fillValues(state, inputs);

  const has: Record<FactorKey, boolean> = {
    momentum: true,
    sonicTemperature: Number.isFinite(inputs.wSonicTemperature),
    h2o: Number.isFinite(inputs.wH2o),
    co2: Number.isFinite(inputs.wCo2),
  };
  for (const key of factorKeys) state.values[factorValueKey[key]] = has[key] ? loss.factors[key] : NaN;

  const corrects = settings.spectralLoss.method !== 'none';
  if (corrects) {
    if (geometry.windMs < doubtfulWindMs) noteCalm(state, geometry.windMs);
    for (const key of factorKeys)
      if (has[key]) judgeFactor(state, settings.spectralLoss, key, loss.factors[key]);
  }
  noteMissing(state, inputs, fluxes);
  if (!solution.hasConverged) noteUnsettled(state, fluxes);

  addLedger(state, {
    step: 'spectralLoss',
    version,
    parameters: {
      ...settings.spectralLoss,
      heightM: geometry.heightM,
      sonicPathM: geometry.sonicPathM,
      analyserPathM: geometry.analyserPathM,
      responseTimeS: geometry.responseTimeS,
    },
    changes: {
      'factor.momentum': finiteOrNull(loss.factors.momentum),
      'factor.sonicTemperature': finiteOrNull(loss.factors.sonicTemperature),
      'factor.co2': has.co2 ? finiteOrNull(loss.factors.co2) : null,
      'factor.h2o': has.h2o ? finiteOrNull(loss.factors.h2o) : null,
      windMs: finiteOrNull(geometry.windMs),
      separationM: geometry.separationM,
      alongWindTravelS: finiteOrNull(geometry.alongWindTravelS),
      responseShiftS: prepared.shiftS(),
      residualLagS: loss.residualLagS,
      zeta: finiteOrNull(solution.factorZeta),
    },
    summary: corrects
      ? `Lost covariance is made good: ${factorKeys
          .filter((key) => has[key])
          .map((key) => `${fluxLabels[factorFlux[key]].symbol} × ${formatNumber(loss.factors[key], 3)}`)
          .join(', ')}.`
      : 'Nothing is corrected for lost frequencies.',
  });
  addLedger(state, {
    step: 'density',
    version,
    parameters: {
      method: settings.density.method,
      pressureSource: air.pressureSource,
      temperatureSource: air.temperatureSource,
    },
    changes: {
      temperatureFlux: finiteOrNull(fluxes.temperatureFlux),
      co2Covariance: finiteOrNull(fluxes.co2Covariance),
      co2VapourTerm: finiteOrNull(fluxes.co2VapourTerm),
      co2HeatTerm: finiteOrNull(fluxes.co2HeatTerm),
      densityMeanW: finiteOrNull(fluxes.densityMeanW),
    },
    summary: densitySummary(fluxes),
  });
  return addLedger(state, {
    step: 'fluxes',
    version,
    parameters: {
      ...settings.stabilityIteration,
      heightM: geometry.heightM,
      saturationVapourPressure: state.settings.saturationVapourPressure,
    },
    changes: {
      passes: fluxes.passes,
      obukhovLengthM: finiteOrNull(fluxes.obukhovLengthM),
      zeta: finiteOrNull(fluxes.zeta),
      ustarMs: finiteOrNull(fluxes.ustarMs),
      sensibleHeat: finiteOrNull(fluxes.sensibleHeat),
      latentHeat: finiteOrNull(fluxes.latentHeat),
      co2Flux: finiteOrNull(fluxes.co2Flux),
    },
    summary: `H ${quantityText('sensibleHeat', fluxes.sensibleHeat)}, LE ${quantityText('latentHeat', fluxes.latentHeat)}, FC ${quantityText('co2Flux', fluxes.co2Flux)}, u* ${quantityText('ustar', fluxes.ustarMs)}; z/L ${formatNumber(fluxes.zeta, 3)} after ${formatNumber(fluxes.passes)} ${fluxes.passes === 1 ? 'pass' : 'passes'}.`,
  });
}

function densitySummary(fluxes: FluxState): string {
  if (fluxes.humidityMissing) return 'No H2O: the density terms cannot be had.';
  if (!Number.isFinite(fluxes.co2Flux)) return 'Evaporation includes its density term; no CO2.';
  return `CO2: ${quantityText('co2CovarianceTerm', fluxes.co2Covariance)} measured, ${quantityText('co2VapourTerm', fluxes.co2VapourTerm)} for vapour, ${quantityText('co2HeatTerm', fluxes.co2HeatTerm)} for heat.`;
}

function fillValues(state: PeriodState, inputs: FluxInputs): void {
  const fluxes = state.fluxes;
  if (!fluxes) return;
  const { values } = state;
  values.ustar = fluxes.ustarMs;
  values.tau = fluxes.tau;
  values.covWT = fluxes.temperatureFlux;
  values.sensibleHeat = fluxes.sensibleHeat;
  values.evaporation = fluxes.evaporation;
  values.waterVapourFlux = fluxes.evaporation / molarMassWater;
  values.latentHeat = fluxes.latentHeat;
  values.bowenRatio =
    Math.abs(fluxes.latentHeat) >= smallestLatentHeat ? fluxes.sensibleHeat / fluxes.latentHeat : NaN;
  values.co2Flux = fluxes.co2Flux;
  values.co2CovarianceTerm = Number.isFinite(inputs.wCo2) ? fluxes.co2Covariance : NaN;
  values.co2VapourTerm = fluxes.co2VapourTerm;
  values.co2HeatTerm = fluxes.co2HeatTerm;
  values.densityMeanW = fluxes.densityMeanW;
  values.obukhovLength = fluxes.obukhovLengthM;
  values.zeta = fluxes.zeta;
  values.temperatureScale =
    fluxes.ustarMs >= smallestUstarMs ? -fluxes.temperatureFlux / fluxes.ustarMs : NaN;
  values.stabilityPasses = fluxes.passes;
}

function finiteOrNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}

function noteCalm(state: PeriodState, windMs: number): void {
  addReason(state, {
    key: 'spectralLoss.calm',
    step: 'spectralLoss',
    fluxes: everyFlux(),
    grade: 1,
    statistic: { label: 'mean wind speed', value: windMs, unit: 'm s-1' },
    limits: { softLow: doubtfulWindMs },
    finding: `Wind only ${formatNumber(windMs, 2)} m s-1`,
    sentence: `At a mean wind of ${formatNumber(windMs, 2)} m s-1 eddies are hardly carried past the sensors, so the correction for lost frequencies is doubtful. It needs at least ${formatNumber(doubtfulWindMs, 1)} m s-1.`,
  });
}

function judgeFactor(
  state: PeriodState,
  settings: Extract<RecipeSettings['spectralLoss'], { method: 'transfer-functions' }> | { method: 'none' },
  key: FactorKey,
  factor: number,
): void {
  if (settings.method === 'none') return;
  const { warnFactor, rejectFactor } = settings;
  const isUnusable = !(factor >= lowestFactor);
  const grade: Grade = isUnusable ? 2 : gradeAbove(factor, warnFactor, rejectFactor);
  if (grade === 0) return;
  const flux = factorFlux[key];
  const { symbol, label } = fluxLabels[flux];
  const limitText =
    grade === 2
      ? `Above ${formatNumber(rejectFactor, 1)} the correction does more of the work than the measurement.`
      : `Above ${formatNumber(warnFactor, 1)} the correction does too much of the work; raise the sensors or move them closer together.`;
  addReason(state, {
    key: `spectralLoss.${key}`,
    step: 'spectralLoss',
    fluxes: [flux],
    series: key === 'momentum' ? null : key,
    grade,
    statistic: { label: `spectral factor, ${label}`, value: factor, unit: '1' },
    limits: { hardLow: lowestFactor, softHigh: warnFactor, hardHigh: rejectFactor },
    finding: `Spectral factor of ${symbol} ${formatNumber(factor, 2)}`,
    sentence: isUnusable
      ? `The factor for lost frequencies comes out as ${formatNumber(factor, 3)}, which a loss cannot give. Check heights, separation and response time in the set-up.`
      : `The sensors lose so much of the small eddies that ${label} is multiplied by ${formatNumber(factor, 2)}. ${limitText}`,
  });
}

function noteMissing(state: PeriodState, inputs: FluxInputs, fluxes: FluxState): void {
  if (fluxes.humidityMissing) {
    addReason(state, {
      key: 'fluxes.noHumidity',
      step: 'fluxes',
      fluxes: ['sensibleHeat'],
      series: 'h2o',
      grade: 1,
      statistic: { label: 'pairs of w and H2O', value: state.moments?.pairs.h2o ?? 0, unit: '1' },
      finding: 'Sensible heat without humidity correction',
      sentence:
        'H2O is missing, so sonic temperature stands for air temperature. Over wet surfaces sensible heat is then some per cent too high, and stability rests on the sonic temperature flux.',
    });
    addReason(state, {
      key: 'fluxes.noDensityTerms',
      step: 'fluxes',
      fluxes: ['latentHeat', 'co2Flux'],
      series: 'h2o',
      grade: 2,
      statistic: { label: 'pairs of w and H2O', value: state.moments?.pairs.h2o ?? 0, unit: '1' },
      finding: 'No H2O, so no LE and FC',
      sentence:
        'H2O is missing. Without it there is no latent heat flux, and the CO2 flux lacks its density terms, which can be larger than the flux itself.',
    });
  } else if (!Number.isFinite(inputs.wCo2)) {
    addReason(state, {
      key: 'fluxes.noCo2',
      step: 'fluxes',
      fluxes: ['co2Flux'],
      series: 'co2',
      grade: 2,
      statistic: { label: 'pairs of w and CO2', value: state.moments?.pairs.co2 ?? 0, unit: '1' },
      finding: 'No CO2, so no FC',
      sentence: 'CO2 is missing in this period, so it has no CO2 flux.',
    });
  }
  if (!Number.isFinite(fluxes.zeta)) {
    addReason(state, {
      key: 'fluxes.noStability',
      step: 'fluxes',
      fluxes: everyFlux(),
      grade: 0,
      statistic: { label: 'friction velocity', value: fluxes.ustarMs, unit: 'm s-1' },
      limits: { hardLow: smallestUstarMs },
      finding: `No stability: u* ${formatNumber(fluxes.ustarMs, 3)} m s-1`,
      sentence: `Friction velocity is ${formatNumber(fluxes.ustarMs, 3)} m s-1; below ${formatNumber(smallestUstarMs, 2)} m s-1 stability has no meaning, and spectral factors are those of neutral air.`,
    });
  }
}

function noteUnsettled(state: PeriodState, fluxes: FluxState): void {
  addReason(state, {
    key: 'fluxes.unsettled',
    step: 'fluxes',
    fluxes: everyFlux(),
    grade: 1,
    statistic: { label: 'passes of the stability iteration', value: fluxes.passes, unit: '1' },
    limits: { softHigh: fluxes.passes },
    finding: `Stability unsettled after ${formatNumber(fluxes.passes)} passes`,
    sentence: `Stability and the corrections that depend on it still changed after ${formatNumber(fluxes.passes)} passes. The last ones are used.`,
  });
}
