import { defaultValue } from '../defaults';
import type { RecipeSettings } from '../schemas/recipe';
import type { FluxKey, PeriodState } from '../state';
import { addLedger, addReason, addSkipped, everyFlux, formatNumber, gradeAbove } from './ledger';

const version = 1;

const earthRotation = defaultValue('constant.earthRotation');

/** σ/x* = c1 |z/L|^c2 of one stability class. */
function powerLaw(key: string): (zeta: number) => number {
  const c1 = defaultValue(`itc.${key}.c1`);
  const c2 = defaultValue(`itc.${key}.c2`);
  return (zeta) => c1 * Math.abs(zeta) ** c2;
}

const table = {
  windU: { nearNeutral: powerLaw('windU.nearNeutral'), unstable: powerLaw('windU.unstable') },
  windW: { nearNeutral: powerLaw('windW.nearNeutral'), unstable: powerLaw('windW.unstable') },
  sonicTemperature: {
    stable: powerLaw('sonicTemperature.stable'),
    nearNeutral: powerLaw('sonicTemperature.nearNeutral'),
    unstable: powerLaw('sonicTemperature.unstable'),
    freeConvection: powerLaw('sonicTemperature.freeConvection'),
  },
};
const windUnstableBelow = defaultValue('itc.wind.unstableBelow');
const temperatureStableAbove = defaultValue('itc.sonicTemperature.stableAbove');
const temperatureUnstableBelow = defaultValue('itc.sonicTemperature.unstableBelow');
const freeConvectionBelow = defaultValue('itc.sonicTemperature.freeConvectionBelow');
const temperatureHighestZeta = defaultValue('itc.sonicTemperature.highestZeta');
const temperatureSmallestZeta = defaultValue('itc.sonicTemperature.smallestZeta');
const temperatureSmallestFlux = defaultValue('itc.sonicTemperature.smallestFlux');

const thomasFoken = {
  windU: {
    slope: defaultValue('itc.thomasFoken.windU.slope'),
    offset: defaultValue('itc.thomasFoken.windU.offset'),
  },
  windW: {
    slope: defaultValue('itc.thomasFoken.windW.slope'),
    offset: defaultValue('itc.thomasFoken.windW.offset'),
  },
  zPlusM: defaultValue('itc.thomasFoken.zPlusM'),
  zetaLow: defaultValue('itc.thomasFoken.zetaLow'),
  zetaHigh: defaultValue('itc.thomasFoken.zetaHigh'),
  smallestLatitudeDeg: defaultValue('itc.thomasFoken.smallestLatitudeDeg'),
};

/**
 * Coriolis parameter, as a magnitude.
 *
 * f = |2 Ω sin φ|
 *
 * @param latitudeDeg latitude φ [deg]
 * @returns f [s-1]
 */
export function coriolisParameter(latitudeDeg: number): number {
  return Math.abs(2 * earthRotation * Math.sin((latitudeDeg * Math.PI) / 180));
}

/**
 * Standard deviation of a wind component over friction velocity, by stability alone.
 *
 * σ/u* = c1 |z/L|^c2
 *
 * @param component along-wind or vertical
 * @param zeta z/L [1]
 * @returns σ/u* [1]; NaN for z/L ≥ 0, for which the table has no row
 * @assumes flat, homogeneous surface layer
 * @reference Foken et al. (2004), Handbook of Micrometeorology, ch. 9, after Foken, Skeib & Richter (1991) (from memory)
 * @deviates none
 */
export function windRatioByStability(component: 'windU' | 'windW', zeta: number): number {
  if (!(zeta < 0)) return Number.NaN;
  return zeta > windUnstableBelow ? table[component].nearNeutral(zeta) : table[component].unstable(zeta);
}

/**
 * Standard deviation of a wind component over friction velocity near neutral, with the depth of the boundary layer through f.
 *
 * σ/u* = slope · ln(z₊ f/u*) + offset
 *
 * @param component along-wind or vertical
 * @param coriolis f [s-1]
 * @param ustarMs friction velocity [m s-1]
 * @returns σ/u* [1]
 * @assumes −0.2 < z/L < 0.4, away from the equator
 * @reference Thomas & Foken (2002), 15th Symposium on Boundary Layers and Turbulence; cited in Foken et al. (2004) (from memory)
 * @deviates none
 */
export function windRatioNearNeutral(
  component: 'windU' | 'windW',
  coriolis: number,
  ustarMs: number,
): number {
  const { slope, offset } = thomasFoken[component];
  return slope * Math.log((thomasFoken.zPlusM * coriolis) / ustarMs) + offset;
}

/**
 * The model a wind component is compared with.
 *
 * Thomas & Foken inside of its range where |latitude| ≥ 10°, else the table by stability; nothing for z/L ≥ 0.4.
 *
 * @param component along-wind or vertical
 * @param zeta z/L [1]
 * @param ustarMs friction velocity [m s-1]
 * @param latitudeDeg latitude [deg]
 * @returns σ/u* [1]; NaN outside of both models
 * @reference the choice between the two models is a project choice
 */
export function windRatio(
  component: 'windU' | 'windW',
  zeta: number,
  ustarMs: number,
  latitudeDeg: number,
): number {
  if (!Number.isFinite(zeta) || !(ustarMs > 0)) return Number.NaN;
  const inRange = zeta > thomasFoken.zetaLow && zeta < thomasFoken.zetaHigh;
  if (inRange && Math.abs(latitudeDeg) >= thomasFoken.smallestLatitudeDeg) {
    return windRatioNearNeutral(component, coriolisParameter(latitudeDeg), ustarMs);
  }
  return windRatioByStability(component, zeta);
}

/**
 * Standard deviation of temperature over the temperature scale.
 *
 * σT/|T*| = c1 |z/L|^c2
 *
 * @param zeta z/L [1]
 * @returns ratio [1]; NaN for z/L > 1 or |z/L| < 0.001, where it is not tested
 * @assumes flat, homogeneous surface layer
 * @reference Foken et al. (2004), Handbook of Micrometeorology, ch. 9 (from memory)
 * @deviates the classes jump by 5 % at z/L = 0.02, as the table has it
 */
export function temperatureRatio(zeta: number): number {
  if (!Number.isFinite(zeta) || zeta > temperatureHighestZeta || Math.abs(zeta) < temperatureSmallestZeta)
    return Number.NaN;
  const classes = table.sonicTemperature;
  if (zeta > temperatureStableAbove) return classes.stable(zeta);
  if (zeta > temperatureUnstableBelow) return classes.nearNeutral(zeta);
  if (zeta > freeConvectionBelow) return classes.unstable(zeta);
  return classes.freeConvection(zeta);
}

/**
 * Deviation of a measured characteristic from its model.
 *
 * ITC = |model − measured| / model
 *
 * @returns deviation [1]; NaN if either is NaN
 * @reference Foken & Wichura (1996), Agric. For. Meteorol. 78:83–105 (from memory)
 */
export function characteristicDeviation(model: number, measured: number): number {
  return Math.abs(model - measured) / model;
}

const componentWords = { windU: 'along-wind', windW: 'vertical' } as const;
const componentSymbols = { windU: 'u', windW: 'w' } as const;

/**
 * Compares the strength of turbulence with what similarity theory expects. Scalars stand on w alone, momentum on w and u; temperature is
 * recorded and lowers no grade.
 */
export function integralTurbulenceStep(
  state: PeriodState,
  settings: RecipeSettings['integralTurbulence'],
): PeriodState {
  const parameters = { ...settings, latitudeDeg: state.setUp.latitudeDeg };
  const skip = (why: string): PeriodState =>
    addSkipped(state, 'integralTurbulence', version, parameters, why);
  if (state.stopped) return skip('Not done: the period was stopped before.');
  if (!state.moments || !state.fluxes) return skip('Not done: there is no friction velocity.');
  const { variances } = state.moments;
  const { zeta, ustarMs, temperatureFlux } = state.fluxes;
  const changes: Record<string, number | null> = {};
  const told: string[] = [];
  const fluxesOfComponent: Record<'windU' | 'windW', FluxKey[]> = { windW: everyFlux(), windU: ['momentum'] };
  let tested = 0;
  for (const component of ['windW', 'windU'] as const) {
    const measured = Math.sqrt(variances[component] ?? Number.NaN) / ustarMs;
    const model = windRatio(component, zeta, ustarMs, state.setUp.latitudeDeg);
    const deviation = characteristicDeviation(model, measured);
    const symbol = componentSymbols[component];
    state.values[`integralTurbulence.${component}`] = deviation;
    changes[`measured.${component}`] = finiteOrNull(measured);
    changes[`model.${component}`] = finiteOrNull(model);
    if (!Number.isFinite(deviation)) continue;
    tested++;
    const percent = deviation * 100;
    told.push(`${symbol} ${formatNumber(percent)} %`);
    const grade = gradeAbove(percent, settings.goodPercent, settings.usablePercent);
    if (grade === 0) continue;
    const stronger = measured > model;
    addReason(state, {
      key: `integralTurbulence.${component}`,
      step: 'integralTurbulence',
      fluxes: fluxesOfComponent[component],
      series: component,
      grade,
      statistic: { label: 'integral turbulence deviation', value: percent, unit: '%' },
      limits: { softHigh: settings.goodPercent, hardHigh: settings.usablePercent },
      finding: `Turbulence ${stronger ? 'too strong' : 'too weak'}: ${symbol} ${formatNumber(percent)} %`,
      sentence: `The ${componentWords[component]} turbulence is ${formatNumber(measured, 2)} times the friction velocity; theory expects ${formatNumber(model, 2)} at this stability. ${
        stronger
          ? 'Obstacles, uneven ground or slow motions may add to it.'
          : 'Turbulence is not fully developed, or the sonic smooths it.'
      }`,
    });
  }
  if (tested === 0) {
    addReason(state, {
      key: 'integralTurbulence.untested',
      step: 'integralTurbulence',
      fluxes: everyFlux(),
      grade: 0,
      statistic: { label: 'z/L', value: zeta, unit: '1' },
      limits: { softHigh: thomasFoken.zetaHigh },
      finding: 'Integral turbulence not testable',
      sentence: Number.isFinite(zeta)
        ? `There is no model of turbulence at z/L = ${formatNumber(zeta, 2)}, so the grades rest on the steady-state test without it.`
        : 'Without a stability there is no model to compare turbulence with, so the grades rest on the steady-state test without it.',
    });
  }
  const temperatureScale = Math.abs(temperatureFlux) / ustarMs;
  const measuredT = Math.sqrt(variances.sonicTemperature ?? Number.NaN) / temperatureScale;
  const modelT = Math.abs(temperatureFlux) < temperatureSmallestFlux ? Number.NaN : temperatureRatio(zeta);
  state.values['integralTurbulence.sonicTemperature'] = characteristicDeviation(modelT, measuredT);
  changes['measured.sonicTemperature'] = finiteOrNull(measuredT);
  changes['model.sonicTemperature'] = finiteOrNull(modelT);
  return addLedger(state, {
    step: 'integralTurbulence',
    version,
    parameters,
    changes,
    summary:
      told.length > 0
        ? `Turbulence against theory: deviation of ${told.join(', of ')}.`
        : 'Not testable at this stability.',
  });
}

function finiteOrNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
