import type { RecipeSettings } from './schemas/recipe';
import type { SetUp } from './schemas/set-up';
import { residentSeries } from './numerics/series-kernel';
import type {
  Block,
  FluxGrade,
  FluxKey,
  PeriodContext,
  PeriodResult,
  PeriodState,
  SeriesKey,
  StepKey,
} from './state';
import { fluxKeys, seriesKeys } from './state';
import { completenessStep, finalCompleteness } from './steps/completeness';
import { crosswindStep } from './steps/crosswind';
import { despikingStep } from './steps/despiking';
import { detrendingStep } from './steps/detrending';
import { diagnosticsStep } from './steps/diagnostics';
import { airStateStep, solveFluxesStep } from './steps/fluxes';
import { gradePeriod, gradesStep } from './steps/grades';
import { integralTurbulenceStep } from './steps/integral-turbulence';
import { lagStep } from './steps/lag';
import { momentsStep } from './steps/moments';
import { plausibilityStep } from './steps/plausibility';
import { screeningStep } from './steps/screening';
import { steadyStateStep } from './steps/steady-state';
import { storageStep } from './steps/storage';
import { tiltStep } from './steps/tilt';
import { uncertaintyStep } from './steps/uncertainty';
import { unitsStep } from './steps/units';
import { windDirectionStep } from './steps/wind-direction';

/**
 * The chain from the samples of one averaging period to its graded fluxes, in order. Read it like the methods section of a paper.
 */
export const pipeline: readonly { key: StepKey; run: (state: PeriodState) => PeriodState }[] = [
  // Which samples belong to the period, and are there enough of them?
  { key: 'completeness', run: (s) => completenessStep(s, s.settings.completeness) },
  // Samples the instruments themselves call bad, or that were seen through a dirty window, are left out.
  { key: 'diagnostics', run: (s) => diagnosticsStep(s, s.settings.diagnostics) },
  // Values outside of what can be are left out.
  { key: 'plausibility', run: (s) => plausibilityStep(s, s.settings.plausibility) },
  // Gases become molar densities.
  { key: 'units', run: (s) => unitsStep(s, s.settings) },
  // Lone impossible values are left out; what remains must still be enough.
  { key: 'despiking', run: (s) => finalCompleteness(despikingStep(s, s.settings.despiking)) },
  // Instrument faults and unusual records are looked for, in the axes of the instrument.
  { key: 'screening', run: (s) => screeningStep(s, s.settings.screening) },
  // Side wind bends the sound paths: corrected only where the sonic has not done so.
  { key: 'crosswind', run: (s) => crosswindStep(s, s.settings.crosswind) },
  // Where the wind came from, and whether it had passed the mast.
  { key: 'windDirection', run: (s) => windDirectionStep(s, s.settings.sectors) },
  // The axes follow the mean flow.
  { key: 'tilt', run: (s) => tiltStep(s, s.settings.tilt) },
  // Turbulence is what is left after the slow part is taken out.
  { key: 'detrending', run: (s) => detrendingStep(s, s.settings.detrending) },
  // Each puff of gas is paired with its gust.
  { key: 'lag', run: (s) => lagStep(s, s.settings.lag) },
  // Variances and covariances over the pairs that remain.
  { key: 'moments', run: (s) => momentsStep(s, s.settings) },
  // Spectral losses, density terms and stability depend on each other and are solved together; three ledger lines.
  { key: 'fluxes', run: (s) => solveFluxesStep(airStateStep(s), s.settings) },
  // Do six short answers agree with the long one?
  { key: 'steadyState', run: (s) => steadyStateStep(s, s.settings.steadyState) },
  // Is the turbulence as strong as theory expects?
  { key: 'integralTurbulence', run: (s) => integralTurbulenceStep(s, s.settings.integralTurbulence) },
  // How much would another half hour of the same weather differ?
  { key: 'uncertainty', run: (s) => uncertaintyStep(s, s.settings.uncertainty) },
  // What piled up below the sensor.
  { key: 'storage', run: (s) => storageStep(s, s.settings.storage) },
  // The worst finding against a flux is its grade.
  { key: 'grades', run: (s) => gradesStep(s, s.settings) },
];

function startState(
  block: Block,
  setUp: SetUp,
  settings: RecipeSettings,
  context: PeriodContext,
): PeriodState {
  const series: Partial<Record<SeriesKey, Float64Array>> = {};
  const recorded = seriesKeys.filter((key) => block.values[key] !== undefined);
  residentSeries(block.length, recorded.length).forEach((values, index) => {
    const key = recorded[index];
    values.set(block.values[key] as Float64Array);
    series[key] = values;
  });
  return {
    block,
    setUp,
    context,
    settings,
    series,
    counts: {},
    stopped: false,
    ledger: [],
    reasons: [],
    values: {},
    air: null,
    wind: null,
    tilt: null,
    lags: {},
    moments: null,
    spectralLoss: null,
    fluxes: null,
    curves: {},
  };
}

/**
 * Computes one averaging period.
 *
 * @param block the period's samples; its arrays are used as working memory and changed
 * @param setUp the set-up that holds for the whole period
 * @param settings a recipe's settings
 * @param context facts from outside the samples, all named in the input manifest
 * @returns values in the catalogue's inner units, null where not available, with grades, reasons and ledger
 */
export function computePeriod(
  block: Block,
  setUp: SetUp,
  settings: RecipeSettings,
  context: PeriodContext,
): PeriodResult {
  let state = startState(block, setUp, settings, context);
  for (const step of pipeline) state = step.run(state);
  return resultOf(state);
}

/** The keys by which the outcome is told. */
const fluxValueKeys: Record<FluxKey, string> = {
  momentum: 'ustar',
  sensibleHeat: 'sensibleHeat',
  latentHeat: 'latentHeat',
  co2Flux: 'co2Flux',
};

function resultOf(state: PeriodState): PeriodResult {
  const values: Record<string, number | null> = {};
  for (const [key, value] of Object.entries(state.values))
    values[key] = Number.isFinite(value) ? value : null;
  const available = fluxKeys.filter((flux) => values[fluxValueKeys[flux]] != null).length;
  const recorded = (values.samplesRead ?? 0) > 0;
  return {
    startMs: state.block.startMs,
    endMs: state.block.endMs,
    outcome: !recorded
      ? 'empty'
      : available === fluxKeys.length
        ? 'computed'
        : available > 0
          ? 'partial'
          : 'stopped',
    values,
    grades: gradePeriod(state),
    reasons: [...state.reasons].sort((a, b) => b.grade - a.grade),
    ledger: state.ledger,
    curves: state.curves,
    rawFiles: state.block.intake.rawFiles,
  };
}

const noGrade: FluxGrade = { grade: null, ssitc: null, class9: null, decidedBy: [] };

/** A period without a result, because something in it changed: the set-up or the sampling rate. */
export function crossingPeriod(startMs: number, endMs: number, what: string, atMs: number): PeriodResult {
  return {
    startMs,
    endMs,
    outcome: 'crossing',
    values: {},
    grades: {
      momentum: noGrade,
      sensibleHeat: noGrade,
      latentHeat: noGrade,
      co2Flux: noGrade,
    },
    reasons: [
      {
        key: 'completeness.crossing',
        step: 'completeness',
        fluxes: [...fluxKeys],
        series: null,
        grade: 2,
        statistic: { label: 'change within the period', value: (atMs - startMs) / 1000, unit: 's' },
        limits: { softLow: null, softHigh: null, hardLow: null, hardHigh: null },
        finding: `${what} within the period`,
        sentence: `${what} ${Math.round((atMs - startMs) / 60000)} min into this period. Two measurements would be mixed, so it has no result; the periods before and after do.`,
        atS: (atMs - startMs) / 1000,
      },
    ],
    ledger: [],
    curves: {},
    rawFiles: [],
  };
}
