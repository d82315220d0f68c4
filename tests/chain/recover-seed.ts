import { computePeriod } from '../../processing/pipeline';
import { defaultRecipe } from '../../processing/schemas/recipe';
import type { RecipeSettings } from '../../processing/schemas/recipe';
import type { FluxKey, PeriodContext } from '../../processing/state';
import { demoPeriod, demoSetUp, demoStation } from '../../processing/synthetic/demo-scenario';
import { synthesisePeriod } from '../../processing/synthetic/period';
import { blockOfWritten } from '../../processing/synthetic/synthetic-block';
import type { FluxTruth } from '../../processing/synthetic/truth';

/** Computed against true for one seed of the demonstration day; runs in a worker thread. */

export interface Recovered {
  seed: number;
  halfHour: number;
  /** Kinds of the faults planted in this period. */
  faults: string[];
  /** Fluxes that a planted fault makes worthless. */
  spoiled: FluxKey[];
  fluxes: Record<
    FluxKey,
    { computed: number; realised: number; ensemble: number; uncertainty: number; grade: number | null }
  >;
  /** Keys of reasons with grade 1 or 2. */
  reasons: string[];
}

/** Block-average factor off: known-truth records contain only what their block holds. */
export function recoverySettings(): RecipeSettings {
  const settings = structuredClone(defaultRecipe.settings);
  if (settings.spectralLoss.method === 'transfer-functions') settings.spectralLoss.blockAverage = false;
  return settings;
}

const good = { codes: [0], mask: null, equals: null };
export const demoContext: PeriodContext = {
  utcOffsetMinutes: demoStation.utcOffsetMinutes,
  signalStrengthReference: 96,
  goodCodes: { sonicStatus: good, analyserStatus: good },
  signalHigherIsBetter: true,
};

const columns: Record<FluxKey, { value: string; random: string; truth: keyof FluxTruth; factor: number }> = {
  momentum: { value: 'ustar', random: 'ustarRandom', truth: 'ustarMs', factor: 1 },
  sensibleHeat: { value: 'sensibleHeat', random: 'sensibleHeatRandom', truth: 'sensibleHeat', factor: 1 },
  latentHeat: { value: 'latentHeat', random: 'latentHeatRandom', truth: 'latentHeat', factor: 1 },
  co2Flux: { value: 'co2Flux', random: 'co2FluxRandom', truth: 'co2Flux', factor: 1e6 },
};

export default function recoverSeed(seed: number): Recovered[] {
  const settings = recoverySettings();
  return Array.from({ length: 48 }, (_, halfHour) => {
    const { written, truth } = synthesisePeriod(
      demoPeriod(0, halfHour, { seed, sampleRateHz: 20, faults: 'demo', mode: 'gauss' }),
    );
    const result = computePeriod(blockOfWritten(written), demoSetUp, settings, demoContext);
    const fluxes = Object.fromEntries(
      Object.entries(columns).map(([flux, { value, random, truth: truthKey, factor }]) => [
        flux,
        {
          computed: (result.values[value] ?? NaN) * factor,
          realised: truth.realised[truthKey],
          ensemble: truth.ensemble[truthKey],
          uncertainty: (result.values[random] ?? NaN) * factor,
          grade: result.grades[flux as FluxKey].grade,
        },
      ]),
    ) as Recovered['fluxes'];
    return {
      seed,
      halfHour,
      faults: truth.faults.map((fault) => fault.kind),
      spoiled: truth.faults.flatMap((fault) => (fault.rejects ? fault.fluxes : [])),
      fluxes,
      reasons: result.reasons.filter((reason) => reason.grade > 0).map((reason) => reason.key),
    };
  });
}
