import { sonicHumidityFactor } from '../constants';
import { defaultValue } from '../defaults';
import { medianAbsoluteDeviation } from '../numerics/selection';
import type { RecipeSettings } from '../schemas/recipe';
import type { Block, GasKey, PeriodState } from '../state';
import {
  airStateFrom,
  latentHeatOfVaporisation,
  moistAir,
  specificHeat,
  specificHumidityFromDryRatio,
} from '../thermodynamics';
import { addLedger, addReason, addSkipped, alreadyStopped, formatNumber } from './ledger';
import { dryFromMoist } from './units';
import { quantityText } from './wording';

const version = 2;

const minimumEdgePercent = defaultValue('storage.minimumEdgePercent');
const madThreshold = defaultValue('recipe.despiking.threshold');
const madToSigma = defaultValue('despiking.madToSigma');

/** Layer of air with its own dry mole ratio, for a profile. */
export interface ProfileLevel {
  heightM: number;
  /** Change of dry mole ratio over the period [mol mol⁻¹]. */
  change: number;
  /** [mol m⁻³] */
  dryAirMolarDensity: number;
}

/**
 * Storage flux below the sensor from one level.
 *
 * SC = n̄d z Δχ/Δt
 *
 * @param dryAirMolarDensity n̄d [mol m⁻³]
 * @param heightM sensor above ground [m] (not above displacement)
 * @param change change of dry mole ratio over the period [mol mol⁻¹]
 * @param periodS [s]
 * @returns storage flux [mol m⁻² s⁻¹], positive when the gas piles up
 * @assumes that the whole layer changes as the sensor's level does
 * @reference common practice, no source; dry mole ratio after Lee & Massman (2011), Boundary-Layer Meteorol. 139
 * @deviates none
 */
export function singleLevelStorage(
  dryAirMolarDensity: number,
  heightM: number,
  change: number,
  periodS: number,
): number {
  return (dryAirMolarDensity * heightM * change) / periodS;
}

/**
 * Storage flux from a profile: layers meet half-way between levels, from the ground to the highest level.
 *
 * SC = Σ nd,i Δχi Δzi / Δt
 *
 * @param levels by height, lowest first
 * @param periodS [s]
 * @returns storage flux [mol m⁻² s⁻¹]; NaN without a level
 * @assumes each level stands for its layer
 * @reference common practice, no source
 * @deviates none
 */
export function profileStorage(levels: readonly ProfileLevel[], periodS: number): number {
  if (levels.length === 0) return NaN;
  let sum = 0;
  let bottom = 0;
  levels.forEach((level, i) => {
    const top = i === levels.length - 1 ? level.heightM : (level.heightM + levels[i + 1].heightM) / 2;
    sum += level.dryAirMolarDensity * level.change * (top - bottom);
    bottom = top;
  });
  return sum / periodS;
}

/**
 * Mean without spikes: values farther than 7 Gaussian-equivalent deviations from the median are left out.
 *
 * @param values NaN where missing; not mutated
 * @param minimumCount fewer valid values give NaN
 * @returns mean [unit of the values] and how many values it rests on
 * @assumes that most values are good
 * @reference Mauder et al. (2013), Agric. For. Meteorol. 169:122–135, for the rule (from memory)
 * @deviates none
 */
export function robustMean(values: Float64Array, minimumCount: number): { mean: number; count: number } {
  const { n, median: middle, mad, farthest } = medianAbsoluteDeviation(values);
  if (n > 0 && !Number.isFinite(farthest))
    return robustMean(
      values.filter((value) => Number.isFinite(value)),
      minimumCount,
    );
  if (n === 0 || n < minimumCount) return { mean: NaN, count: n };
  const limit = mad > 0 ? (madThreshold * mad) / madToSigma : Infinity;
  let sum = 0;
  let count = 0;
  for (let i = 0; i < values.length; i++) {
    const deviation = values[i] - middle;
    if (!(Math.abs(deviation) <= limit)) continue;
    sum += deviation;
    count++;
  }
  return { mean: middle + sum / count, count };
}

/** State of the air at one boundary of the period. */
export interface EdgeState {
  temperatureK: number;
  /** [mol mol⁻¹ dry air] */
  co2DryMoleFraction: number;
  /** [kg m⁻³] */
  vapourDensity: number;
}

type Measure = NonNullable<Block['gasMeasures'][GasKey]>;

/** Recorded means of one side of a boundary. */
export interface EdgeMeans {
  sonicTemperatureK: number;
  /** In the unit of its measure: mmol m⁻³, µmol mol⁻¹ (CO2) or mmol mol⁻¹ (H2O). */
  co2: number;
  h2o: number;
}

/**
 * Air and gas ratios from recorded means.
 *
 * @param means of a few minutes
 * @param measures how each gas was recorded
 * @param pressurePa around the boundary: a density that only follows the pressure is no storage
 * @returns state; NaN where something needed is missing
 * @assumes ideal gas; means stand for samples (non-linear parts are below 1e-4 of the ratio)
 * @reference definitions
 * @deviates none
 */
export function edgeState(
  means: EdgeMeans,
  measures: { co2: Measure; h2o: Measure },
  pressurePa: number,
): EdgeState {
  const { sonicTemperatureK } = means;
  const vapour = means.h2o * 1e-3;
  const air =
    measures.h2o === 'molar-density'
      ? airStateFrom({ sonicTemperatureK, vapourMolarDensity: vapour, pressurePa })
      : airFromRatio(
          sonicTemperatureK,
          measures.h2o === 'dry-mole-fraction' ? vapour : dryFromMoist(vapour, vapour),
          pressurePa,
        );
  const { temperatureK, dryAirMolarDensity, vapourDensity, vapourMoleFraction } = air;
  const co2DryMoleFraction =
    measures.co2 === 'molar-density'
      ? (means.co2 * 1e-3) / dryAirMolarDensity
      : measures.co2 === 'mole-fraction'
        ? dryFromMoist(means.co2 * 1e-6, vapourMoleFraction)
        : means.co2 * 1e-6;
  return { temperatureK, co2DryMoleFraction, vapourDensity };
}

function airFromRatio(sonicTemperatureK: number, dryMoleFraction: number, pressurePa: number) {
  const q = specificHumidityFromDryRatio(dryMoleFraction);
  const temperatureK = sonicTemperatureK / (1 + sonicHumidityFactor * q);
  return moistAir(temperatureK, (pressurePa * dryMoleFraction) / (1 + dryMoleFraction), pressurePa);
}

/**
 * What piled up in the air below the sensor, and net exchange.
 *
 * Means of a few minutes centred on both boundaries of the period are taken half from inside and half from the margins; without a margin
 * there is no storage, and net exchange is the turbulent flux alone.
 */
export function storageStep(state: PeriodState, settings: RecipeSettings['storage']): PeriodState {
  const parameters = { ...settings };
  if (state.stopped || !state.fluxes || !state.air) {
    return addSkipped(state, 'storage', version, parameters, alreadyStopped);
  }
  state.values.netExchange = state.fluxes.co2Flux;
  if (settings.method === 'none')
    return addSkipped(
      state,
      'storage',
      version,
      parameters,
      'Not asked for: net exchange is the CO2 flux alone.',
    );

  const { block, air } = state;
  const halfSamples = Math.round((settings.edgeMinutes * 60 * block.sampleRateHz) / 2);
  const start = boundaryState(state, 'before', halfSamples);
  const end = boundaryState(state, 'after', halfSamples);
  const periodS = (block.endMs - block.startMs) / 1000;
  const heightM = state.setUp.sonicHeightM;
  const change = (key: keyof EdgeState): number => (start && end ? end[key] - start[key] : NaN);

  const co2Storage = singleLevelStorage(
    air.dryAirMolarDensity,
    heightM,
    change('co2DryMoleFraction'),
    periodS,
  );
  const temperatureChange = change('temperatureK');
  const heatStorage =
    (air.airDensity * specificHeat(air.specificHumidity) * heightM * temperatureChange) / periodS;
  const latentStorage =
    (latentHeatOfVaporisation(air.temperatureK) * heightM * change('vapourDensity')) / periodS;
  state.values.co2Storage = co2Storage;
  state.values.sensibleHeatStorage = heatStorage;
  state.values.latentHeatStorage = latentStorage;
  const hasStorage = Number.isFinite(co2Storage);
  if (hasStorage) state.values.netExchange = state.fluxes.co2Flux + co2Storage;
  else if (Number.isFinite(state.fluxes.co2Flux))
    noteMissing(state, start === null, end === null, settings.edgeMinutes);

  return addLedger(state, {
    step: 'storage',
    version,
    parameters: { ...parameters, heightM, minimumEdgePercent },
    changes: {
      co2Storage: finiteOrNull(co2Storage),
      sensibleHeatStorage: finiteOrNull(heatStorage),
      latentHeatStorage: finiteOrNull(latentStorage),
      co2DryRatioChange: finiteOrNull(change('co2DryMoleFraction')),
      temperatureChangeK: finiteOrNull(temperatureChange),
      netExchange: finiteOrNull(state.values.netExchange),
    },
    summary: hasStorage
      ? `CO2 stored below ${formatNumber(heightM, 1)} m: ${quantityText('co2Storage', co2Storage)}; net exchange ${quantityText('netExchange', state.values.netExchange)}.`
      : 'No storage: net exchange is the CO2 flux alone.',
  });
}

/**
 * State of the air around a boundary, half from inside and half from the margin.
 *
 * Inside, the cleaned series; outside, what was recorded, whose status was not looked at: spikes are left out by the rule of robustMean.
 */
function boundaryState(state: PeriodState, side: 'before' | 'after', halfSamples: number): EdgeState | null {
  const { block, air } = state;
  const margin = block.margins[side];
  if (!margin || !air) return null;
  const minimum = Math.max(1, (minimumEdgePercent / 100) * halfSamples);
  const inside = (values: Float64Array | undefined): number => {
    if (!values) return NaN;
    const part =
      side === 'before' ? values.subarray(0, halfSamples) : values.subarray(values.length - halfSamples);
    return robustMean(part, minimum).mean;
  };
  const outside = (values: Float64Array | undefined): number => {
    if (!values) return NaN;
    const part =
      side === 'before'
        ? values.subarray(Math.max(0, values.length - halfSamples))
        : values.subarray(0, halfSamples);
    return robustMean(part, minimum).mean;
  };
  const pressurePa = boundaryPressurePa(
    [inside(block.values.airPressure), outside(margin.values.airPressure)],
    air.pressurePa,
    state.settings.plausibility.airPressureKPa,
  );
  // The cleaned series hold gases as molar density [mol m⁻³].
  const density = { co2: 'molar-density', h2o: 'molar-density' } as const;
  const within = edgeState(
    {
      sonicTemperatureK: inside(state.series.sonicTemperature),
      co2: inside(state.series.co2) * 1e3,
      h2o: inside(state.series.h2o) * 1e3,
    },
    density,
    pressurePa,
  );
  const beyond = edgeState(
    {
      sonicTemperatureK: outside(margin.values.sonicTemperature),
      co2: outside(margin.values.co2),
      h2o: outside(margin.values.h2o),
    },
    { co2: block.gasMeasures.co2 ?? 'molar-density', h2o: block.gasMeasures.h2o ?? 'molar-density' },
    pressurePa,
  );
  return {
    temperatureK: (within.temperatureK + beyond.temperatureK) / 2,
    co2DryMoleFraction: (within.co2DryMoleFraction + beyond.co2DryMoleFraction) / 2,
    vapourDensity: (within.vapourDensity + beyond.vapourDensity) / 2,
  };
}

/**
 * Pressure around a boundary: means of both sides, or of the one that was measured, else that of the period.
 *
 * @param sides means of both sides [Pa]; NaN where not measured
 * @param periodPa pressure of the period [Pa]
 * @param limits plausible pressure [kPa]
 * @returns [Pa]
 * @assumes the two boundaries are told apart by weather, not by the noise of a barometer: means of minutes
 * @reference dry mole ratio instead of density, so that changes of pressure store nothing: Lee & Massman (2011), Boundary-Layer
 *   Meteorol. 139:37–59, abstract
 * @deviates none
 */
function boundaryPressurePa(
  sides: readonly number[],
  periodPa: number,
  limits: { low: number; high: number },
): number {
  const measured = sides.filter(
    (pressurePa) => pressurePa >= limits.low * 1000 && pressurePa <= limits.high * 1000,
  );
  if (measured.length === 0) return periodPa;
  return measured.reduce((sum, pressurePa) => sum + pressurePa, 0) / measured.length;
}

function noteMissing(state: PeriodState, noStart: boolean, noEnd: boolean, edgeMinutes: number): void {
  const half = formatNumber(edgeMinutes / 2, 1);
  const where =
    noStart && noEnd
      ? `The ${half} minutes before and after this period are not recorded`
      : noStart
        ? `The ${half} minutes before this period are not recorded`
        : noEnd
          ? `The ${half} minutes after this period are not recorded`
          : 'Too few samples are usable around the boundaries of this period';
  addReason(state, {
    key: 'storage.co2',
    step: 'storage',
    fluxes: ['co2Flux'],
    series: 'co2',
    grade: 0,
    statistic: { label: 'boundaries known', value: 2 - Number(noStart) - Number(noEnd), unit: '1' },
    finding: 'Net exchange without storage',
    sentence: `${where}, so what piled up below the sensor is unknown. Net exchange is the turbulent flux alone.`,
  });
}

function finiteOrNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
