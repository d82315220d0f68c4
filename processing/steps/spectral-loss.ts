import { defaultValue } from '../defaults';
import type { RecipeSettings } from '../schemas/recipe';
import type { LossEffects, PreparedLoss } from '../spectral/loss-integral';
import { noLoss, prepareLoss } from '../spectral/loss-integral';
import type { GasKey, LagState, PeriodState, SpectralLossState } from '../state';
import { gasKeys } from '../state';
import { separationComponents } from './separation';

/** Geometry and times that decide what is lost in this period. */
export interface LossGeometry {
  /** z − d [m]. */
  heightM: number;
  windMs: number;
  sonicPathM: number;
  analyserPathM: number;
  responseTimeS: number;
  /** Separation that no lag can undo: across the wind and vertical [m]. */
  separationM: number;
  /** Travel time from sonic to analyser along the wind [s]; NaN when calm. */
  alongWindTravelS: number;
  periodS: number;
  sampleIntervalS: number;
}

/**
 * Geometry of the period's losses from its set-up and wind.
 *
 * Across the wind and vertically the separation is lost for good, and enters as one distance √(across² + up²) (project choice); without a
 * wind direction the whole distance does. Along the wind it is a travel time, which the lag undoes.
 *
 * @param state after wind direction
 * @returns lengths [m], times [s]
 * @assumes frozen eddies carried by the mean wind
 * @reference Moore (1986), Boundary-Layer Meteorol. 37:17–35, for the separation across the wind
 * @deviates vertical and lateral separation are treated alike (project choice)
 */
export function lossGeometry(state: PeriodState): LossGeometry {
  const { setUp, block, wind, moments } = state;
  const windMs = wind?.meanSpeedMs ?? moments?.means.windU ?? NaN;
  const { alongM, acrossM, upM } = separationComponents(setUp.separation, wind?.directionDeg ?? NaN);
  const hasDirection = Number.isFinite(acrossM);
  const { northM, eastM } = setUp.separation;
  return {
    heightM: setUp.sonicHeightM - setUp.displacementM,
    windMs,
    sonicPathM: setUp.sonic.pathLengthM,
    analyserPathM: setUp.analyser.pathLengthM,
    responseTimeS: setUp.analyser.responseTimeS,
    separationM: hasDirection ? Math.hypot(acrossM, upM) : Math.hypot(northM, eastM, upM),
    alongWindTravelS: hasDirection ? alongM / windMs : NaN,
    periodS: (block.endMs - block.startMs) / 1000,
    sampleIntervalS: 1 / block.sampleRateHz,
  };
}

/**
 * Part of the delay that whole samples could not undo.
 *
 * delay = along-wind travel + best shift of the response; rest = delay − lag
 *
 * @param travelS along-wind travel time [s]; NaN when calm: only the response then counts
 * @param shiftS best shift of the response [s]
 * @param lag lag that was applied; undefined: none was
 * @param sampleIntervalS [s]
 * @returns rest [s]. Where the lag was chosen by maximum covariance it is within half a sample: a constant delay of whole samples, which
 *   electronics add, is not a loss. Where a default or fixed lag was used the rest is taken as it is.
 * @assumes further delays are whole samples
 * @reference derived
 * @deviates none
 */
export function residualLagS(
  travelS: number,
  shiftS: number,
  lag: Pick<LagState, 'lagSamples' | 'source'> | undefined,
  sampleIntervalS: number,
): number {
  const delayS = (Number.isFinite(travelS) ? travelS : 0) + shiftS;
  if (!lag) return 0;
  const rest = delayS - lag.lagSamples * sampleIntervalS;
  if (lag.source !== 'maximum') return rest;
  return rest - Math.round(rest / sampleIntervalS) * sampleIntervalS;
}

export interface PreparedFactors {
  /** Factors and the rest of the lag at a stability. */
  at(zeta: number): SpectralLossState;
  /** Best shift of the response at the last stability asked for [s]. */
  shiftS(): number;
}

/** Effects on each covariance by recipe and geometry. */
export function lossEffects(
  settings: Extract<RecipeSettings['spectralLoss'], { method: 'transfer-functions' }>,
  geometry: LossGeometry,
): { momentum: LossEffects; sonicTemperature: LossEffects; gas: LossEffects } {
  const blockS = settings.blockAverage ? geometry.periodS : 0;
  const path = settings.pathAveraging;
  const wind = { windPathM: geometry.sonicPathM, windPaths: path ? 1 : 0 } as const;
  return {
    momentum: {
      ...noLoss,
      kind: 'momentum',
      windPathM: geometry.sonicPathM,
      windPaths: path ? 2 : 0,
      blockS,
    },
    sonicTemperature: { ...noLoss, ...wind, scalarPathM: path ? geometry.sonicPathM : 0, blockS },
    gas: {
      ...noLoss,
      ...wind,
      scalarPathM: path ? geometry.analyserPathM : 0,
      separationM: settings.separation ? geometry.separationM : 0,
      responseTimeS: geometry.responseTimeS,
      responseForm: settings.responseTime,
      blockS,
    },
  };
}

/** What stays of the factors when nothing is corrected. */
export const unitFactors: SpectralLossState['factors'] = { momentum: 1, sonicTemperature: 1, co2: 1, h2o: 1 };

/**
 * Prepares the spectral factors of one period, so that the stability iteration only pays for what stability changes.
 *
 * Momentum: the sonic's path for both components. Heat: path of w and path of sonic temperature. Gases: path of w, path of the analyser,
 * separation, response, and the part of the along-wind lag that whole samples leave over. All: block average.
 *
 * @param settings the recipe's block
 * @param geometry of the period
 * @param lags as applied
 * @returns factors as a function of z/L; NaN where they are not positive
 * @assumes both gases are measured by one analyser
 * @reference Moore (1986); Moncrieff et al. (1997); see loss-integral.ts
 * @deviates none
 */
export function prepareFactors(
  settings: RecipeSettings['spectralLoss'],
  geometry: LossGeometry,
  lags: PeriodState['lags'],
): PreparedFactors {
  if (settings.method === 'none') {
    return { at: (zeta) => ({ factors: { ...unitFactors }, zeta, residualLagS: 0 }), shiftS: () => 0 };
  }
  const effects = lossEffects(settings, geometry);
  const prepare = (one: LossEffects): PreparedLoss => prepareLoss(one, geometry.heightM, geometry.windMs);
  const momentum = prepare(effects.momentum);
  const heat = prepare(effects.sonicTemperature);
  const gas = prepare(effects.gas);
  const takesRest = settings.separation && settings.responseTime === 'exact';
  let lastShiftS = 0;
  return {
    at(zeta) {
      const rests: Partial<Record<GasKey, number>> = {};
      const gasFactor = (key: GasKey): number => {
        const { factor, shiftS } = gas.factorAt(zeta, (shift) => {
          const rest = takesRest
            ? residualLagS(geometry.alongWindTravelS, shift, lags[key], geometry.sampleIntervalS)
            : 0;
          rests[key] = rest;
          return rest;
        });
        lastShiftS = shiftS;
        return positive(factor);
      };
      const co2 = gasFactor('co2');
      const sameLag = lags.co2?.lagSamples === lags.h2o?.lagSamples && lags.co2?.source === lags.h2o?.source;
      const h2o = sameLag ? co2 : gasFactor('h2o');
      return {
        factors: {
          momentum: positive(momentum.factorAt(zeta).factor),
          sonicTemperature: positive(heat.factorAt(zeta).factor),
          co2,
          h2o,
        },
        zeta,
        residualLagS: gasKeys.map((key) => rests[key]).find((rest) => rest !== undefined) ?? 0,
      };
    },
    shiftS: () => lastShiftS,
  };
}

function positive(factor: number): number {
  return factor > 0 && Number.isFinite(factor) ? factor : NaN;
}

/** Factor below which a flux is rejected, and wind below which factors are doubtful. */
export const lowestFactor = defaultValue('spectralLoss.lowestFactor');
export const doubtfulWindMs = defaultValue('spectralLoss.doubtfulWindMs');
