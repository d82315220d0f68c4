import { gasConstant, sonicHumidityFactor } from '../constants';
import type { RecipeSettings } from '../schemas/recipe';
import type { Block, GasKey, PeriodState, Step } from '../state';
import { airTemperatureFromSonicK, specificHumidityFromDryRatio } from '../thermodynamics';
import { addLedger, addReason, addSkipped, alreadyStopped, countOf, fluxesOf, formatNumber } from './ledger';

const version = 1;

export type GasMeasure = NonNullable<Block['gasMeasures'][GasKey]>;

/**
 * Total molar density of air.
 *
 * n = p / (R T)
 *
 * @param pressurePa pressure [Pa]
 * @param temperatureK true air temperature [K]
 * @returns n [mol m⁻³]
 * @assumes ideal gas
 * @reference ideal gas law
 * @deviates none
 */
export function molarDensityOfAir(pressurePa: number, temperatureK: number): number {
  return pressurePa / (gasConstant * temperatureK);
}

/**
 * Dry mole fraction (mixing ratio by moles) from mole fraction in moist air.
 *
 * χ = x / (1 − x_v)
 *
 * @param moleFraction x of the gas, or x_v itself for vapour [mol mol⁻¹]
 * @param vapourMoleFraction x_v [mol mol⁻¹]
 * @returns χ [mol mol⁻¹ dry air]; NaN where vapour would be all of the air (x_v ≥ 1)
 * @assumes both fractions at the same instant
 * @reference definition
 * @deviates none
 */
export function dryFromMoist(moleFraction: number, vapourMoleFraction: number): number {
  return vapourMoleFraction < 1 ? moleFraction / (1 - vapourMoleFraction) : NaN;
}

/**
 * Mole fraction in moist air from dry mole fraction.
 *
 * x = χ / (1 + χ_v)
 *
 * @param dryMoleFraction χ of the gas, or χ_v itself for vapour [mol mol⁻¹ dry air]
 * @param vapourDryMoleFraction χ_v [mol mol⁻¹ dry air]
 * @returns x [mol mol⁻¹]
 * @assumes χ_v > −1
 * @reference definition
 * @deviates none
 */
export function moistFromDry(dryMoleFraction: number, vapourDryMoleFraction: number): number {
  return vapourDryMoleFraction > -1 ? dryMoleFraction / (1 + vapourDryMoleFraction) : NaN;
}

/**
 * Mass density from molar density: ρ = c M.
 *
 * @param molarDensity c [mol m⁻³]
 * @param molarMass M [kg mol⁻¹]
 * @returns ρ [kg m⁻³]
 */
export function massDensityFromMolar(molarDensity: number, molarMass: number): number {
  return molarDensity * molarMass;
}

/**
 * Molar density from mass density: c = ρ / M.
 *
 * @param massDensity ρ [kg m⁻³]
 * @param molarMass M [kg mol⁻¹]
 * @returns c [mol m⁻³]
 */
export function molarDensityFromMass(massDensity: number, molarMass: number): number {
  return massDensity / molarMass;
}

/**
 * H2O as molar density, sample by sample.
 *
 * With x_v known the true temperature follows directly: T = Ts/(1 + 0.51 q), n = p/(R T), n_v = x_v n.
 *
 * @param values recorded H2O, changed in place to [mol m⁻³]; NaN stays NaN
 * @param measure how it was recorded [mmol m⁻³, or mmol mol⁻¹ in moist or dry air]
 * @param sonicTemperatureK per sample [K], same length; not mutated. A sample without it has no density
 * @param pressurePa of the period [Pa]
 * @returns number of samples lost because vapour would be all of the air, and because there was no temperature
 * @assumes ideal gas; one pressure for the period, so that noise of the barometer makes no flux
 * @reference Schotanus et al. (1983), Boundary-Layer Meteorol. 26:81–93, for Ts
 * @deviates none
 */
export function h2oToMolarDensity(
  values: Float64Array,
  measure: GasMeasure,
  sonicTemperatureK: Float64Array,
  pressurePa: number,
): { impossible: number; withoutTemperature: number } {
  let impossible = 0;
  let withoutTemperature = 0;
  if (measure === 'molar-density') {
    for (let i = 0; i < values.length; i++) values[i] *= 1e-3;
    return { impossible, withoutTemperature };
  }
  const isDry = measure === 'dry-mole-fraction';
  for (let i = 0; i < values.length; i++) {
    const value = values[i] * 1e-3;
    if (value !== value) continue;
    const dry = isDry ? value : dryFromMoist(value, value);
    const moist = isDry ? moistFromDry(value, value) : value;
    const temperatureK = sonicTemperatureK[i] / (1 + sonicHumidityFactor * specificHumidityFromDryRatio(dry));
    if (dry !== dry || moist !== moist) impossible++;
    else if (temperatureK !== temperatureK) withoutTemperature++;
    values[i] = moist * molarDensityOfAir(pressurePa, temperatureK);
  }
  return { impossible, withoutTemperature };
}

/**
 * CO2 as molar density, sample by sample.
 *
 * From mole fraction x: c = x n; from dry mole fraction χ: c = χ (n − n_v); n = p/(R T), T from sonic temperature and vapour.
 *
 * @param values recorded CO2, changed in place to [mol m⁻³]; NaN stays NaN
 * @param measure how it was recorded [mmol m⁻³, or µmol mol⁻¹ in moist or dry air]
 * @param sonicTemperatureK per sample [K], same length; not mutated. A sample without it has no density
 * @param vapourMolarDensity per sample [mol m⁻³], same length, not mutated; undefined when not recorded
 * @param meanVapourMolarDensity stands in where a sample has no vapour [mol m⁻³]
 * @param pressurePa of the period [Pa]
 * @returns number of samples lost because there was no temperature
 * @assumes ideal gas; one pressure for the period; vapour and CO2 at the same instant
 * @reference ideal gas law; Schotanus et al. (1983), Boundary-Layer Meteorol. 26:81–93, for Ts
 * @deviates none
 */
export function co2ToMolarDensity(
  values: Float64Array,
  measure: GasMeasure,
  sonicTemperatureK: Float64Array,
  vapourMolarDensity: Float64Array | undefined,
  meanVapourMolarDensity: number,
  pressurePa: number,
): { withoutTemperature: number } {
  let withoutTemperature = 0;
  if (measure === 'molar-density') {
    for (let i = 0; i < values.length; i++) values[i] *= 1e-3;
    return { withoutTemperature };
  }
  const isDry = measure === 'dry-mole-fraction';
  for (let i = 0; i < values.length; i++) {
    const value = values[i] * 1e-6;
    if (value !== value) continue;
    let vapour = vapourMolarDensity ? vapourMolarDensity[i] : meanVapourMolarDensity;
    if (vapour !== vapour) vapour = meanVapourMolarDensity;
    const temperatureK = airTemperatureFromSonicK(sonicTemperatureK[i], vapour, pressurePa);
    if (temperatureK !== temperatureK) withoutTemperature++;
    const n = molarDensityOfAir(pressurePa, temperatureK);
    values[i] = value * (isDry ? n - vapour : n);
  }
  return { withoutTemperature };
}

const measureWords: Record<GasMeasure, string> = {
  'molar-density': 'recorded as molar density',
  'mole-fraction': 'from mole fraction in moist air',
  'dry-mole-fraction': 'from dry mole fraction',
};

/**
 * Turns every gas into molar density [mol m⁻³], the measure in which the density terms are written.
 */
export const unitsStep: Step<RecipeSettings> = (state) => {
  if (state.stopped) return addSkipped(state, 'units', version, {}, alreadyStopped);
  const { block } = state;
  const pressurePa = state.air ? state.air.pressurePa : NaN;
  const vapourOfPeriod =
    state.air && state.air.vapourPressurePa === state.air.vapourPressurePa
      ? state.air.vapourPressurePa / (gasConstant * state.air.temperatureK)
      : 0;
  const sonicTemperatureK = state.series.sonicTemperature ?? new Float64Array(block.length).fill(NaN);
  const words: string[] = [];
  const changes: Record<string, number | string | null> = {};
  const counts: Partial<Record<GasKey, { before: number; after: number }>> = {};

  // H2O first: CO2 needs it.
  for (const gas of ['h2o', 'co2'] as const) {
    const values = state.series[gas];
    const own = state.counts[gas];
    if (!values || !own) continue;
    const measure = block.gasMeasures[gas] ?? 'molar-density';
    const before = own.valid;
    const lost =
      gas === 'h2o'
        ? h2oToMolarDensity(values, measure, sonicTemperatureK, pressurePa)
        : {
            impossible: 0,
            ...co2ToMolarDensity(
              values,
              measure,
              sonicTemperatureK,
              state.series.h2o,
              vapourOfPeriod,
              pressurePa,
            ),
          };
    own.valid -= lost.impossible + lost.withoutTemperature;
    counts[gas] = { before, after: own.valid };
    changes[`${gas}Measure`] = measure;
    if (measure !== 'molar-density') changes[`${gas}WithoutTemperature`] = lost.withoutTemperature;
    words.push(`${gas === 'co2' ? 'CO2' : 'H2O'} ${measureWords[measure]}`);
    noteLost(state, gas, lost, before);
  }

  return addLedger(state, {
    step: 'units',
    version,
    parameters: { pressurePa: Number.isNaN(pressurePa) ? null : pressurePa },
    counts,
    changes,
    summary: words.length === 0 ? 'No gas to convert.' : `${words.reverse().join(', ')}.`,
  });
};

function noteLost(
  state: PeriodState,
  gas: GasKey,
  lost: { impossible: number; withoutTemperature: number },
  before: number,
): void {
  const name = gas === 'co2' ? 'CO2' : 'H2O';
  if (lost.impossible > 0) {
    addReason(state, {
      key: `units.${gas}`,
      step: 'units',
      fluxes: fluxesOf(gas),
      series: gas,
      grade: 1,
      statistic: { label: 'impossible mole fractions', value: lost.impossible, unit: '1' },
      limits: { softHigh: 0 },
      finding: `${name} fraction impossible ${countOf(lost.impossible, 'time')}`,
      sentence: `${countOf(lost.impossible, 'sample')} of ${name} would make vapour all of the air and cannot be converted; they are left out. Check the unit of the column in the layout.`,
    });
  }
  if (lost.withoutTemperature > 0) {
    addReason(state, {
      key: `units.${gas}WithoutTemperature`,
      step: 'units',
      fluxes: fluxesOf(gas),
      series: gas,
      grade: 0,
      statistic: {
        label: 'samples without temperature',
        value: (lost.withoutTemperature / before) * 100,
        unit: '%',
      },
      finding: `${name} lost with temperature`,
      sentence: `${countOf(lost.withoutTemperature, 'sample')} of ${formatNumber(before)} of ${name} were recorded as mole fraction while the sonic gave no temperature; without it they have no density and are left out.`,
    });
  }
}
