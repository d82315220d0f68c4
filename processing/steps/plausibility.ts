import { seriesLabels } from '../catalogue';
import { celsiusZeroK, gasConstant } from '../constants';
import { defaultValue } from '../defaults';
import { median } from '../numerics/selection';
import { seriesKernel } from '../numerics/series-kernel';
import type { RecipeSettings } from '../schemas/recipe';
import type { Block, GasKey, PeriodState, SeriesKey, Step } from '../state';
import { seriesKeys } from '../state';
import { airStateFrom, moistAir, pressureFromElevationPa } from '../thermodynamics';
import {
  addLedger,
  addReason,
  addSkipped,
  alreadyStopped,
  capitalised,
  countOf,
  everyFlux,
  fluxesOf,
  formatNumber,
  formatPercent,
  gradeAbove,
} from './ledger';

const version = 1;

/**
 * Samples are stored in single precision: a value written exactly on a limit may come back one rounding beyond it, and is accepted.
 */
const storageRounding = 2 ** -23;

/** Only to turn gas limits into densities when no temperature was recorded at all [K]. ISO 2533, sea level. */
const fallbackTemperatureK = defaultValue('standardAtmosphere.temperature');

export interface Limits {
  low: number;
  high: number;
}

/**
 * Leaves out the values outside of limits.
 *
 * @param values changed in place: NaN where outside; NaN stays NaN, infinities are outside
 * @param limits both ends belong to the allowed span [unit of the values]
 * @returns how many were below and above
 * @assumes values that may have been stored once in single precision (limits are widened by 2⁻²³ of their size)
 * @reference project choice; Vickers & Mahrt (1997) also use fixed absolute limits
 * @deviates none
 */
export function leaveOutOutside(values: Float64Array, limits: Limits): { low: number; high: number } {
  const bottom = limits.low - Math.abs(limits.low) * storageRounding;
  const top = limits.high + Math.abs(limits.high) * storageRounding;
  const kernel = seriesKernel(values.length);
  kernel.run.leaveOutOutside(kernel.pointerOf(values), values.length, bottom, top, kernel.out);
  const [low, high] = kernel.results;
  if (low + high > 0) kernel.bringBack(values);
  return { low, high };
}

/**
 * Limits of a gas in the measure it was recorded in.
 *
 * Limits are stated as mole fraction in moist air; converting the two limits once replaces converting every sample. Molar density:
 * 10³ n x; dry mole fraction: x/(1 − x_v), for H2O itself with x_v = x.
 *
 * @param gas which gas
 * @param moleFraction limits in moist air [µmol mol⁻¹ CO2, mmol mol⁻¹ H2O]
 * @param measure how the gas was recorded
 * @param molarDensity n = p/(R T) of the period [mol m⁻³]
 * @param vapourMoleFraction x_v of the period [1]; only for dry CO2
 * @returns limits in the recorded unit [mmol m⁻³, µmol mol⁻¹ or mmol mol⁻¹]
 * @assumes one density for the whole period: its few per cent of change do not matter to limits this wide
 * @reference ideal gas law
 * @deviates none
 */
export function gasLimits(
  gas: GasKey,
  moleFraction: Limits,
  measure: NonNullable<Block['gasMeasures'][GasKey]>,
  molarDensity: number,
  vapourMoleFraction: number,
): Limits {
  const perUnit = gas === 'co2' ? 1e-6 : 1e-3;
  const convert = (value: number): number => {
    if (measure === 'molar-density') return 1e3 * molarDensity * (value * perUnit);
    if (measure === 'mole-fraction') return value;
    return value / (1 - (gas === 'h2o' ? value * perUnit : vapourMoleFraction));
  };
  return { low: convert(moleFraction.low), high: convert(moleFraction.high) };
}

/**
 * Mean pressure of the period: the median of what was measured within the limits, else that of the standard atmosphere.
 *
 * @param measured pressure channel [Pa], changed in place: values outside become NaN; undefined when not recorded
 * @param limits plausible pressure [Pa]
 * @param elevationM of the station [m]
 * @returns pressure [Pa], where it comes from, and how many values were left out
 * @assumes pressure changes little within a period
 * @reference ISO 2533:1975 for the fallback
 * @deviates none
 */
export function periodPressurePa(
  measured: Float64Array | undefined,
  limits: Limits,
  elevationM: number,
): { pressurePa: number; source: 'measured' | 'elevation'; removed: number } {
  let removed = 0;
  if (measured) {
    const { low, high } = leaveOutOutside(measured, limits);
    removed = low + high;
    const middle = median(measured);
    if (middle === middle) return { pressurePa: middle, source: 'measured', removed };
  }
  return { pressurePa: pressureFromElevationPa(elevationM), source: 'elevation', removed };
}

const unitWords: Record<SeriesKey, string> = {
  windU: 'm s-1',
  windV: 'm s-1',
  windW: 'm s-1',
  sonicTemperature: '°C',
  co2: 'µmol mol-1',
  h2o: 'mmol mol-1',
};

/**
 * Leaves out values that cannot be, and finds the period's pressure and first air state.
 *
 * The air state rests on medians, so that neither spikes nor gaps bear on it; a later step replaces it by that of the cleaned means.
 */
export const plausibilityStep: Step<RecipeSettings['plausibility']> = (state, settings) => {
  if (state.stopped) return addSkipped(state, 'plausibility', version, {}, alreadyStopped);
  const { block, setUp } = state;

  const pressure = periodPressurePa(
    block.values.airPressure,
    { low: settings.airPressureKPa.low * 1000, high: settings.airPressureKPa.high * 1000 },
    setUp.elevationM,
  );
  state.values.airPressure = pressure.pressurePa;

  const counts: Partial<Record<SeriesKey, { before: number; after: number }>> = {};
  const remove = (key: SeriesKey, limits: Limits, stated: Limits): void => {
    const values = state.series[key];
    const own = state.counts[key];
    if (!values || !own) return;
    const before = own.valid;
    const { low, high } = leaveOutOutside(values, limits);
    own.outLow += low;
    own.outHigh += high;
    own.valid -= low + high;
    counts[key] = { before, after: own.valid };
    state.values[`implausible.${key}`] = before === 0 ? NaN : (low + high) / before;
    judge(state, settings, key, low, high, before, stated);
  };

  const horizontal = { low: -settings.horizontalWindMaxMs, high: settings.horizontalWindMaxMs };
  const vertical = { low: -settings.verticalWindMaxMs, high: settings.verticalWindMaxMs };
  remove('windU', horizontal, horizontal);
  remove('windV', horizontal, horizontal);
  remove('windW', vertical, vertical);
  const { low: coldest, high: hottest } = settings.sonicTemperatureDegC;
  remove(
    'sonicTemperature',
    { low: coldest + celsiusZeroK, high: hottest + celsiusZeroK },
    settings.sonicTemperatureDegC,
  );

  const sonicK = state.series.sonicTemperature ? median(state.series.sonicTemperature) : NaN;
  const measuredK = block.values.airTemperature ? median(block.values.airTemperature) : NaN;
  const anyK = sonicK === sonicK ? sonicK : measuredK;
  const molarDensity = pressure.pressurePa / (gasConstant * (anyK === anyK ? anyK : fallbackTemperatureK));

  const h2oMeasure = block.gasMeasures.h2o ?? 'molar-density';
  remove(
    'h2o',
    gasLimits('h2o', settings.h2oMoleFraction, h2oMeasure, molarDensity, 0),
    settings.h2oMoleFraction,
  );
  const h2oMedian = state.series.h2o ? median(state.series.h2o) : NaN;
  const vapourMoleFraction = vapourMoleFractionOf(h2oMedian, h2oMeasure, molarDensity);
  const knowsVapour = vapourMoleFraction === vapourMoleFraction;
  remove(
    'co2',
    gasLimits(
      'co2',
      settings.co2MoleFraction,
      block.gasMeasures.co2 ?? 'molar-density',
      molarDensity,
      knowsVapour ? vapourMoleFraction : 0,
    ),
    settings.co2MoleFraction,
  );

  const air =
    sonicK === sonicK
      ? airStateFrom({
          sonicTemperatureK: sonicK,
          vapourMolarDensity: knowsVapour ? vapourMoleFraction * molarDensity : 0,
          pressurePa: pressure.pressurePa,
        })
      : moistAir(measuredK, knowsVapour ? vapourMoleFraction * pressure.pressurePa : 0, pressure.pressurePa);
  state.air = {
    pressurePa: pressure.pressurePa,
    pressureSource: pressure.source,
    temperatureK: air.temperatureK,
    temperatureSource: sonicK !== sonicK ? 'measured' : knowsVapour ? 'sonic-and-humidity' : 'sonic',
    vapourPressurePa: air.vapourPressurePa,
    specificHumidity: air.specificHumidity,
    dryAirDensity: air.dryAirDensity,
    vapourDensity: air.vapourDensity,
    airDensity: air.airDensity,
    dryAirMolarDensity: air.dryAirMolarDensity,
  };

  if (pressure.source === 'elevation') {
    const recorded = block.values.airPressure !== undefined;
    addReason(state, {
      key: 'plausibility.airPressure',
      step: 'plausibility',
      fluxes: everyFlux(),
      series: 'airPressure',
      grade: 0,
      statistic: { label: 'assumed pressure', value: pressure.pressurePa / 100, unit: 'hPa' },
      limits: {
        hardLow: settings.airPressureKPa.low * 10,
        hardHigh: settings.airPressureKPa.high * 10,
      },
      finding: `Pressure assumed ${formatNumber(pressure.pressurePa / 100)} hPa`,
      sentence: `${
        recorded ? 'The pressure channel holds no plausible value in this period' : 'No pressure was recorded'
      }, so that of the standard atmosphere at ${formatNumber(setUp.elevationM)} m is used. Weather moves the true one by some 2 %, and the fluxes by about as much.`,
    });
  }

  const removedTotal = seriesKeys.reduce((sum, key) => {
    const own = state.counts[key];
    return sum + (own ? own.outLow + own.outHigh : 0);
  }, 0);
  return addLedger(state, {
    step: 'plausibility',
    version,
    parameters: {
      horizontalWindMaxMs: settings.horizontalWindMaxMs,
      verticalWindMaxMs: settings.verticalWindMaxMs,
      sonicTemperatureLowDegC: coldest,
      sonicTemperatureHighDegC: hottest,
      co2MoleFractionLow: settings.co2MoleFraction.low,
      co2MoleFractionHigh: settings.co2MoleFraction.high,
      h2oMoleFractionLow: settings.h2oMoleFraction.low,
      h2oMoleFractionHigh: settings.h2oMoleFraction.high,
      airPressureLowKPa: settings.airPressureKPa.low,
      airPressureHighKPa: settings.airPressureKPa.high,
      elevationM: setUp.elevationM,
    },
    counts,
    changes: {
      removed: removedTotal,
      pressureRemoved: pressure.removed,
      pressurePa: pressure.pressurePa,
      pressureSource: pressure.source,
      molarDensity,
    },
    summary: `${removedTotal === 0 ? 'No value' : countOf(removedTotal, 'value')} outside the limits; pressure ${formatNumber(
      pressure.pressurePa / 100,
      1,
    )} hPa ${pressure.source === 'measured' ? 'as measured' : 'from elevation'}.`,
  });
};

/** Vapour mole fraction in moist air from a recorded value of H2O. */
function vapourMoleFractionOf(
  value: number,
  measure: NonNullable<Block['gasMeasures'][GasKey]>,
  molarDensity: number,
): number {
  if (measure === 'molar-density') return (value * 1e-3) / molarDensity;
  if (measure === 'mole-fraction') return value * 1e-3;
  const dry = value * 1e-3;
  return dry / (1 + dry);
}

function judge(
  state: PeriodState,
  settings: RecipeSettings['plausibility'],
  key: SeriesKey,
  low: number,
  high: number,
  before: number,
  stated: Limits,
): void {
  const removed = low + high;
  if (removed === 0) return;
  const { softGrade, hardGrade } = state.settings.screening;
  const percent = (removed * 100) / before;
  const { label } = seriesLabels[key];
  const sides = low === 0 ? 'all above' : high === 0 ? 'all below' : `${formatNumber(low)} below`;
  addReason(state, {
    key: `plausibility.${key}`,
    step: 'plausibility',
    fluxes: fluxesOf(key, percent > settings.hardRemovedPercent ? 'absent' : 'doubtful'),
    series: key,
    grade: gradeAbove(percent, 0, settings.hardRemovedPercent, softGrade, hardGrade),
    statistic: { label: `implausible samples, ${label}`, value: percent, unit: '%' },
    limits: { softHigh: 0, hardHigh: settings.hardRemovedPercent },
    finding: `${capitalised(label)} implausible ${formatPercent(removed / before)}`,
    sentence: `${countOf(removed, 'sample')} of ${label} ${removed === 1 ? 'lies' : 'lie'} outside ${formatNumber(stated.low)} to ${formatNumber(stated.high)} ${unitWords[key]} (${sides}) and ${removed === 1 ? 'is' : 'are'} left out. Above ${formatNumber(settings.hardRemovedPercent)} % the instrument is not to be trusted.`,
  });
}
