import { molarMassWater } from '../constants';
import { biasedCovariances } from '../numerics/correlation';
import type { BiasedCovariances } from '../numerics/correlation';
import { seriesKernel } from '../numerics/series-kernel';
import type { RecipeSettings } from '../schemas/recipe';
import type { AirState, GasKey, PeriodState, ScalarKey } from '../state';
import { latentHeatOfVaporisation, specificHeat } from '../thermodynamics';
import { solveDensity } from './density';
import { addLedger, addSkipped } from './ledger';
import { quantityText } from './wording';

const version = 1;

/**
 * Random sampling error of a covariance.
 *
 * var(F) = (1/N) [Σ g_xx(p) g_yy(p) + Σ g_xy(p) g_yx(p)], both sums over p = −m … m; g_yx(p) = g_xy(−p)
 *
 * @param estimates biased auto- and cross-covariances of one aligned pair
 * @param maxLag m [samples]; cut to the lags that are there
 * @returns one standard deviation [unit of the covariance]; NaN with no pair
 * @assumes a stationary record, long against its integral scale
 * @reference Finkelstein & Sims (2001), J. Geophys. Res. 106(D4):3503–3509, eqs 8–10 (from memory); recommended as insensitive to m by
 *   Rannik et al. (2016), Atmos. Meas. Tech. 9:5163–5181, abstract
 * @deviates a negative variance, which short records can give, counts as 0
 */
export function finkelsteinSims(estimates: BiasedCovariances, maxLag: number): number {
  const { pairs, xx, yy, xy } = estimates;
  if (pairs === 0) return Number.NaN;
  const reach = xx.length - 1;
  const m = Math.min(maxLag, reach);
  let sum = xx[0] * yy[0] + xy[reach] * xy[reach];
  for (let p = 1; p <= m; p++) sum += 2 * (xx[p] * yy[p] + xy[reach + p] * xy[reach - p]);
  return Math.sqrt(Math.max(0, sum / pairs));
}

/** Fluxes that follow from covariances of w with scalars. */
type HeatOrGasFlux = 'sensibleHeat' | 'latentHeat' | 'co2Flux';

/** Change of a flux per change of a measured covariance; the covariances are w with Ts [K m s-1], with H2O and with CO2 [mol m-2 s-1]. */
export interface FluxSensitivity {
  sonicTemperature: number;
  h2o: number;
  co2: number;
}

/**
 * How the fluxes follow from the measured covariances while means and spectral factors hold still: the coupled solution of the density
 * terms is linear in them, so its answer to each covariance alone is the derivative.
 *
 * @param air mean state of the period
 * @param factors spectral factors
 * @param meanCo2 mean CO2 [mol m-3]; NaN when there is none
 * @param hasHumidity whether H2O was measured
 * @returns partial derivatives of H [W m-2], LE [W m-2] and FC [mol m-2 s-1]; NaN where the flux cannot be had
 * @assumes no error in means and spectral factors
 * @reference Webb, Pearman & Leuning (1980), Q. J. R. Meteorol. Soc. 106:85–100, as `solveDensity` has it
 * @deviates none
 */
export function fluxSensitivities(
  air: AirState,
  factors: { sonicTemperature: number } & Record<GasKey, number>,
  meanCo2: number,
  hasHumidity: boolean,
): Record<HeatOrGasFlux, FluxSensitivity> {
  const heat = air.airDensity * specificHeat(air.specificHumidity);
  const evaporationHeat = latentHeatOfVaporisation(air.temperatureK);
  const answerTo = (sonicTemperature: number, h2o: number, co2: number): Record<HeatOrGasFlux, number> => {
    const solved = solveDensity(
      {
        sonicTemperature: sonicTemperature * factors.sonicTemperature,
        vapour: hasHumidity ? (h2o === 0 ? 0 : h2o * molarMassWater * factors.h2o) : null,
        co2: co2 === 0 ? 0 : co2 * factors.co2,
      },
      air,
      meanCo2,
    );
    return {
      sensibleHeat: heat * solved.temperatureFlux,
      latentHeat: evaporationHeat * solved.evaporation,
      co2Flux: solved.co2Flux,
    };
  };
  const alone = { sonicTemperature: answerTo(1, 0, 0), h2o: answerTo(0, 1, 0), co2: answerTo(0, 0, 1) };
  const of = (flux: HeatOrGasFlux): FluxSensitivity => ({
    sonicTemperature: alone.sonicTemperature[flux],
    h2o: alone.h2o[flux],
    co2: alone.co2[flux],
  });
  return { sensibleHeat: of('sensibleHeat'), latentHeat: of('latentHeat'), co2Flux: of('co2Flux') };
}

/** One part of a combined scalar. */
export interface CombinedPart {
  values: Float64Array;
  /** Taken off before the factor, so that large means cost no digits. */
  mean: number;
  lagSamples: number;
  factor: number;
  /** Whether a sample without this part has no combined value; else the part counts as its mean there. */
  isRequired: boolean;
}

/**
 * A linear combination of scalars, each read at its own lag, sample by sample.
 *
 * @param length n
 * @param parts scalars of n samples with factors
 * @returns n samples, NaN where a required part is missing
 */
export function combineScalars(length: number, parts: readonly CombinedPart[]): Float64Array {
  const kernel = seriesKernel(length);
  const [into] = kernel.work;
  const out = kernel.workValues[0].subarray(0, length).fill(0);
  for (const { values, mean, lagSamples, factor, isRequired } of parts) {
    if (factor === 0) continue;
    const first = Math.max(0, -lagSamples);
    const end = Math.min(length, length - lagSamples);
    if (isRequired) {
      out.fill(Number.NaN, 0, Math.min(first, length));
      out.fill(Number.NaN, Math.max(0, end), length);
    }
    if (first >= end) continue;
    const overlap = values.subarray(first + lagSamples, end + lagSamples);
    const from = kernel.pointerOf(overlap);
    kernel.run.addScaled(
      from,
      end - first,
      mean,
      factor,
      isRequired ? 1 : 0,
      into + first * out.BYTES_PER_ELEMENT,
    );
  }
  return out.slice();
}

/** Scalars without which a flux's combined series has no value; the small humidity part of H may be missing. */
const requiredScalars: Record<HeatOrGasFlux, readonly ScalarKey[]> = {
  sensibleHeat: ['sonicTemperature'],
  latentHeat: ['sonicTemperature', 'h2o'],
  co2Flux: ['sonicTemperature', 'h2o', 'co2'],
};

const randomKeys: Record<HeatOrGasFlux, string> = {
  sensibleHeat: 'sensibleHeatRandom',
  latentHeat: 'latentHeatRandom',
  co2Flux: 'co2FluxRandom',
};

const scalarKeys: readonly ScalarKey[] = ['sonicTemperature', 'h2o', 'co2'];

/**
 * Random uncertainty of the final fluxes.
 *
 * Each flux is linear in the measured covariances, so it is the covariance of w with one combined scalar (for FC: CO2 + vapour term + heat
 * term). The sampling error of that covariance is the error of the flux, with all correlations between its parts; errors of means and
 * spectral factors are left out. For u*: σ(u*) = factor · σ(uw)/(2 u*), which neglects the lateral flux.
 */
export function uncertaintyStep(state: PeriodState, settings: RecipeSettings['uncertainty']): PeriodState {
  const parameters = { ...settings };
  const skip = (why: string): PeriodState => addSkipped(state, 'uncertainty', version, parameters, why);
  if (state.stopped) return skip('Not done: the period was stopped before.');
  const { series, moments, fluxes, air, spectralLoss, lags } = state;
  const { windU, windW } = series;
  if (!windU || !windW || !moments || !fluxes || !air || !spectralLoss)
    return skip('Not done: there are no fluxes.');
  const maxLag = Math.round(settings.maxLagS * state.block.sampleRateHz);
  const { factors } = spectralLoss;
  const sensitivities = fluxSensitivities(
    air,
    factors,
    moments.means.co2 ?? Number.NaN,
    !fluxes.humidityMissing,
  );

  const asked: { flux: HeatOrGasFlux | 'momentum'; x: Float64Array; y: Float64Array }[] = [
    { flux: 'momentum', x: windU, y: windW },
  ];
  for (const flux of ['sensibleHeat', 'latentHeat', 'co2Flux'] as const) {
    if (!Number.isFinite(fluxes[flux])) continue;
    const parts: CombinedPart[] = [];
    let isComplete = true;
    for (const key of scalarKeys) {
      const factor = sensitivities[flux][key];
      if (factor === 0) continue;
      const values = series[key];
      const lag = lags[key];
      const mean = moments.means[key];
      const isRequired = requiredScalars[flux].includes(key);
      if (!values || !lag || mean === undefined || !Number.isFinite(factor)) {
        if (isRequired) isComplete = false;
        continue;
      }
      parts.push({ values, mean, lagSamples: lag.lagSamples, factor, isRequired });
    }
    if (isComplete && parts.length > 0)
      asked.push({ flux, x: windW, y: combineScalars(windW.length, parts) });
  }

  const found = biasedCovariances(asked, maxLag);
  const changes: Record<string, number | null> = {};
  const told: string[] = [];
  asked.forEach(({ flux }, index) => {
    const sigma = finkelsteinSims(found[index], maxLag);
    changes[`pairs.${flux}`] = found[index].pairs;
    if (flux === 'momentum') {
      const ustarSigma = (factors.momentum * sigma) / (2 * fluxes.ustarMs);
      state.values.ustarRandom = ustarSigma;
      changes.covUWRandom = Number.isFinite(sigma) ? sigma : null;
      told.push(`u* ± ${quantityText('ustarRandom', ustarSigma)}`);
      return;
    }
    state.values[randomKeys[flux]] = sigma;
    const symbol = { sensibleHeat: 'H', latentHeat: 'LE', co2Flux: 'FC' }[flux];
    told.push(`${symbol} ± ${quantityText(randomKeys[flux], sigma)}`);
  });
  return addLedger(state, {
    step: 'uncertainty',
    version,
    parameters,
    changes,
    summary: `Sampling error, one standard deviation: ${told.join(', ')}.`,
  });
}
