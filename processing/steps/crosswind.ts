import { defaultValue } from '../defaults';
import type { RecipeSettings } from '../schemas/recipe';
import type { Step } from '../state';
import { addLedger, addReason, addSkipped, alreadyStopped, formatNumber } from './ledger';

const version = 1;

/** γ R_d of dry air [m2 s-2 K-1]: c² = 403 Ts. */
const soundSpeedSquaredPerK = defaultValue('sonic.crosswindDivisor');

/**
 * Weights of u² and v² in the crosswind error of three paths spaced 120° about the vertical.
 *
 * A = B = 1 − ½ cos² φ
 *
 * @param pathElevationDeg elevation φ of the paths above the horizontal [deg]
 * @returns A and B [1]
 * @assumes temperature is the mean over all three paths
 * @reference Liu, Peters & Foken (2001), Boundary-Layer Meteorol. 100:459–468 (from memory; 7/8 at 60° and 3/4 at 45° derived from
 *   the geometry)
 * @deviates the small term of w² is left out, as the paper does
 */
export function crosswindWeights(pathElevationDeg: number): { a: number; b: number } {
  const cosine = Math.cos((pathElevationDeg * Math.PI) / 180);
  const weight = 1 - 0.5 * cosine * cosine;
  return { a: weight, b: weight };
}

/**
 * Sonic temperature freed from side wind, sample by sample.
 *
 * Ts = Ts,raw + (A u² + B v²) / 403
 *
 * @param sonicTemperatureK n samples, changed in place [K]; missing where u or v is
 * @param windU,windV in the axes of the instrument, before rotation, n samples, not mutated [m s⁻¹]
 * @param weights A and B
 * @returns mean rise [K] over the samples that have all three; NaN when there is none
 * @assumes the instrument has not corrected it already: applying it twice is an error
 * @reference Liu, Peters & Foken (2001), Boundary-Layer Meteorol. 100:459–468 (from memory)
 * @deviates none
 */
export function correctCrosswind(
  sonicTemperatureK: Float64Array,
  windU: Float64Array,
  windV: Float64Array,
  weights: { a: number; b: number },
): number {
  const a = weights.a / soundSpeedSquaredPerK;
  const b = weights.b / soundSpeedSquaredPerK;
  let n = 0;
  let sum = 0;
  for (let i = 0; i < sonicTemperatureK.length; i++) {
    const rise = a * windU[i] * windU[i] + b * windV[i] * windV[i];
    const corrected = sonicTemperatureK[i] + rise;
    sonicTemperatureK[i] = corrected;
    if (corrected === corrected) {
      n++;
      sum += rise;
    }
  }
  return n === 0 ? NaN : sum / n;
}

/**
 * What the crosswind correction adds to a covariance with w.
 *
 * (2/403) (A ū u'w' + B v̄ v'w')
 *
 * The pipeline corrects samples; this form shows the size of the effect, and serves where only covariances are kept.
 *
 * @param meanU,meanV in the axes of the instrument [m s⁻¹]
 * @param uw,vw covariances in the same axes [m² s⁻²]
 * @param weights A and B
 * @returns rise of w'Ts' [K m s⁻¹]
 * @assumes third moments are small
 * @reference Liu, Peters & Foken (2001), Boundary-Layer Meteorol. 100:459–468 (from memory)
 * @deviates none
 */
export function crosswindCovariance(
  meanU: number,
  meanV: number,
  uw: number,
  vw: number,
  weights: { a: number; b: number },
): number {
  return (2 / soundSpeedSquaredPerK) * (weights.a * meanU * uw + weights.b * meanV * vw);
}

/**
 * Corrects sonic temperature for side wind, only where the set-up says that the instrument has not.
 */
export const crosswindStep: Step<RecipeSettings['crosswind']> = (state, settings) => {
  if (state.stopped) return addSkipped(state, 'crosswind', version, {}, alreadyStopped);
  const { crosswindDone, pathElevationDeg } = state.setUp.sonic;
  const { sonicTemperature, windU, windV } = state.series;
  const parameters = { method: settings.method, crosswindDone, pathElevationDeg };
  const passOver = (why: string) => addSkipped(state, 'crosswind', version, parameters, why);

  if (settings.method === 'off') {
    return passOver('The crosswind correction is switched off in this recipe.');
  }
  if (!sonicTemperature || !windU || !windV) return passOver('No sonic temperature to correct.');
  if (crosswindDone === 'yes') return passOver('The sonic has corrected for side wind itself.');
  if (crosswindDone === 'unknown') {
    addReason(state, {
      key: 'crosswind.unknown',
      step: 'crosswind',
      fluxes: ['sensibleHeat'],
      series: 'sonicTemperature',
      grade: 0,
      statistic: { label: 'crosswind correction', value: null, unit: 'K' },
      finding: 'Crosswind correction unknown',
      sentence:
        'The set-up does not say whether the sonic corrects its temperature for side wind, so nothing was done. In strong wind this can shift the heat flux by a few W m-2; look it up in the manual and note it in the set-up.',
    });
    return passOver('Not applied: the set-up does not say whether the sonic has done it.');
  }

  const weights = crosswindWeights(pathElevationDeg);
  const meanRiseK = correctCrosswind(sonicTemperature, windU, windV, weights);
  return addLedger(state, {
    step: 'crosswind',
    version,
    parameters: { ...parameters, weight: weights.a },
    changes: { meanRiseK: Number.isNaN(meanRiseK) ? null : meanRiseK },
    summary: `Sonic temperature raised by ${formatNumber(meanRiseK, 3)} K on average for side wind.`,
  });
};
