import type { ChannelKey } from './schemas/layout';
import type { RecipeSettings } from './schemas/recipe';
import type { SetUp } from './schemas/set-up';

/**
 * What travels down the pipeline for one averaging period, and what comes out of it.
 *
 * A step is a function `(state, settings) → state`. It may change the series of the state it was given (they belong to this one
 * computation), fills the part of the state that carries its name, and adds one ledger entry and any reasons. Bad data never throws:
 * a value that cannot be had is NaN inside and null in the result, with a reason.
 */

// ---------------------------------------------------------------------------------------------------------------- input

/** The samples of one averaging period, assembled from chunks, in inner linear units (see `channelUnits`, first unit's kind). */
export interface Block {
  /** ms UTC, half-open [startMs, endMs). */
  startMs: number;
  endMs: number;
  sampleRateHz: number;
  /** Expected number of samples: round(rate × duration). */
  length: number;
  /** Float64Array of `length` per recorded channel, NaN where missing, in the units below. Not shared between steps of other periods. */
  values: Partial<Record<ChannelKey, Float64Array>>;
  /** Unit each value channel is in: wind m s-1, sonicTemperature K, pressure Pa, temperature K; gases in the kind of `gasMeasures`. */
  status: Partial<Record<ChannelKey, Int32Array>>;
  /** 1 where a scan was recorded. */
  present: Uint8Array;
  /** How each gas was recorded: molar density [mmol m-3], mole fraction in moist air, or dry mole fraction [µmol mol-1 CO2, mmol mol-1 H2O]. */
  gasMeasures: Partial<Record<GasKey, 'molar-density' | 'mole-fraction' | 'dry-mole-fraction'>>;
  /** Clock findings summed over the chunks used. */
  intake: {
    rowsRead: number;
    duplicates: number;
    clockJumps: number;
    backwardSteps: number;
    largestJumpS: number;
    fittedRateHz: number | null;
    rawFiles: string[];
  };
  /** Samples just outside the period (last/first few minutes of the neighbours), same channels and units, for storage; null when not recorded. */
  margins: { before: MarginSamples | null; after: MarginSamples | null };
}

export interface MarginSamples {
  length: number;
  values: Partial<Record<ChannelKey, Float64Array>>;
}

export type GasKey = 'co2' | 'h2o';
export const gasKeys: readonly GasKey[] = ['co2', 'h2o'];

/** Facts about the period that come from outside its samples. All of it is named in the input manifest. */
export interface PeriodContext {
  utcOffsetMinutes: number;
  /** Running reference of signal strength [%], or null when unknown. */
  signalStrengthReference: number | null;
  /** Good-code rules of the layout, by status channel. */
  goodCodes: Partial<Record<ChannelKey, { codes: number[]; mask: number | null; equals: number | null }>>;
  signalHigherIsBetter: boolean;
}

// ---------------------------------------------------------------------------------------------------------------- series

/** Working series: the channels that carry turbulence. */
export type SeriesKey = 'windU' | 'windV' | 'windW' | 'sonicTemperature' | GasKey;
export const seriesKeys: readonly SeriesKey[] = ['windU', 'windV', 'windW', 'sonicTemperature', 'co2', 'h2o'];
export type ScalarKey = 'sonicTemperature' | GasKey;

/** Fluxes that are graded. */
export const fluxKeys = ['momentum', 'sensibleHeat', 'latentHeat', 'co2Flux'] as const;
export type FluxKey = (typeof fluxKeys)[number];

export type Grade = 0 | 1 | 2;

// ---------------------------------------------------------------------------------------------------------------- ledger, reasons

/** The steps in the order they run; `processing/pipeline.ts` binds each to its function. */
export const stepKeys = [
  'completeness',
  'diagnostics',
  'plausibility',
  'units',
  'despiking',
  'screening',
  'crosswind',
  'windDirection',
  'tilt',
  'detrending',
  'lag',
  'moments',
  'spectralLoss',
  'density',
  'fluxes',
  'steadyState',
  'integralTurbulence',
  'uncertainty',
  'storage',
  'grades',
] as const;
export type StepKey = (typeof stepKeys)[number];

/** One line of the step ledger: what a step did to this period. */
export interface LedgerEntry {
  step: StepKey;
  /** Raised whenever the step's numbers change. */
  version: number;
  /** The settings it used, as they stand in the recipe, plus facts of the set-up it read. */
  parameters: Record<string, number | string | boolean | null>;
  /** Valid samples entering and leaving, by series, where the step can remove any. */
  counts?: Partial<Record<SeriesKey, { before: number; after: number }>>;
  /** What changed, as numbers with their unit in the key's catalogue entry or in words. */
  changes: Record<string, number | string | null>;
  /** One plain sentence. */
  summary: string;
}

/**
 * One finding against a value. Text is composed here once, in English, from the numbers it carries; the client shows it as it stands.
 * Only findings that matter are kept (grade ≥ 1, or informative ones worth a look): what passed is in `statistics`.
 */
export interface Reason {
  /** Stable dotted key: step.test[.series], e.g. `steadyState.co2`, `screening.dropouts.windW`. */
  key: string;
  step: StepKey;
  fluxes: FluxKey[];
  series: SeriesKey | ChannelKey | null;
  /** Grade this finding leads to by the recipe; 0 = worth knowing, changes no grade. */
  grade: Grade;
  statistic: { label: string; value: number | null; unit: string };
  /** Limits drawn to scale: good inside [low, high] of soft, rejected outside hard. null = none on that side. */
  limits: {
    softLow: number | null;
    softHigh: number | null;
    hardLow: number | null;
    hardHigh: number | null;
  };
  /** About five words with the number: "Steady-state deviation 47 %". */
  finding: string;
  /** One or two plain sentences: what was seen, what it means. */
  sentence: string;
  /** Where in the period, seconds from its start, when that is known. */
  atS?: number | null;
}

// ---------------------------------------------------------------------------------------------------------------- state

export interface SeriesCounts {
  expected: number;
  valid: number;
  badStatus: number;
  lowSignal: number;
  outLow: number;
  outHigh: number;
  spikes: number;
}

/** Everything known about the period so far. Parts are null until their step has run. */
export interface PeriodState {
  readonly block: Block;
  readonly setUp: SetUp;
  readonly context: PeriodContext;
  readonly settings: RecipeSettings;
  /** Working series, length `block.length`; after `units`: wind m s-1, sonicTemperature K, gases molar density [mol m-3]. */
  series: Partial<Record<SeriesKey, Float64Array>>;
  counts: Partial<Record<SeriesKey, SeriesCounts>>;
  /** True once the period cannot be processed; later steps pass it through. */
  stopped: boolean;
  ledger: LedgerEntry[];
  reasons: Reason[];
  /** Flat numbers for the result: catalogue key → value in the catalogue's inner unit; NaN = not available. */
  values: Record<string, number>;
  air: AirState | null;
  wind: WindState | null;
  tilt: TiltState | null;
  lags: Partial<Record<ScalarKey, LagState>>;
  moments: MomentState | null;
  spectralLoss: SpectralLossState | null;
  fluxes: FluxState | null;
  /** Short curves for the period page (≤ 400 points each), e.g. lag curve. */
  curves: Record<string, { x: number[]; y: number[]; xUnit: string; yUnit: string }>;
}

/** Mean thermodynamic state of the period. */
export interface AirState {
  pressurePa: number;
  pressureSource: 'measured' | 'elevation';
  /** True air temperature from sonic temperature and humidity, or from sonic alone. */
  temperatureK: number;
  temperatureSource: 'sonic-and-humidity' | 'sonic' | 'measured';
  vapourPressurePa: number;
  specificHumidity: number;
  dryAirDensity: number;
  vapourDensity: number;
  airDensity: number;
  dryAirMolarDensity: number;
}

export interface WindState {
  meanSpeedMs: number;
  /** Where the wind comes from, true north [deg]; NaN when calm. */
  directionDeg: number;
  directionSpreadDeg: number;
  /** Grade from disturbed sectors, and which. */
  sectorGrade: Grade;
  sectorReason: string | null;
}

export interface TiltState {
  method: string;
  yawRad: number;
  pitchRad: number;
  rollRad: number;
  /** Rows of the rotation from instrument to streamline axes. */
  matrix: [number, number, number, number, number, number, number, number, number];
  meanWBeforeMs: number;
  meanWAfterMs: number;
}

export interface LagState {
  lagSamples: number;
  source: 'maximum' | 'default' | 'fixed';
  covarianceAtZero: number;
  covarianceAtLag: number;
  edgeHit: boolean;
  pairs: number;
}

/** Means, variances and covariances after rotation, detrending and lag (population moments over pairwise valid samples). */
export interface MomentState {
  means: Partial<Record<SeriesKey, number>>;
  variances: Partial<Record<SeriesKey, number>>;
  uw: number;
  vw: number;
  uv: number;
  /** cov(w, scalar) at the scalar's lag: [m s-1 × unit of the scalar]. */
  wScalar: Partial<Record<ScalarKey, number>>;
  uScalar: Partial<Record<ScalarKey, number>>;
  pairs: Partial<Record<ScalarKey | 'uw', number>>;
  ustarMs: number;
}

export interface SpectralLossState {
  factors: { momentum: number; sonicTemperature: number } & Record<GasKey, number>;
  zeta: number;
  /** Sub-sample part of the along-wind lag that remains after shifting whole samples [s]. */
  residualLagS: number;
}

/** Final fluxes in SI. */
export interface FluxState {
  ustarMs: number;
  /** Downward momentum flux ρu*² [kg m-1 s-2]. */
  tau: number;
  temperatureFlux: number; // w'T' [K m s-1]
  sensibleHeat: number; // [W m-2]
  evaporation: number; // [kg m-2 s-1]
  latentHeat: number; // [W m-2]
  co2Flux: number; // [mol m-2 s-1]
  /** The three parts of co2Flux: corrected covariance, vapour term, heat term [mol m-2 s-1]. */
  co2Covariance: number;
  co2VapourTerm: number;
  co2HeatTerm: number;
  /** Mean vertical wind implied by zero dry-air flux [m s-1]. */
  densityMeanW: number;
  obukhovLengthM: number;
  zeta: number;
  passes: number;
  humidityMissing: boolean;
}

// ---------------------------------------------------------------------------------------------------------------- result

export interface FluxGrade {
  /** Overall grade by the recipe; null when the flux has no value. */
  grade: Grade | null;
  /** Steady state and integral turbulence alone, 0/1/2; null when not testable. */
  ssitc: Grade | null;
  /** Nine-class grade; null when not testable. */
  class9: number | null;
  /** Keys of the reasons that decided `grade`, the worst first. */
  decidedBy: string[];
}

export interface PeriodResult {
  startMs: number;
  endMs: number;
  /** computed: has fluxes; partial: some fluxes missing; stopped: not processed, reasons say why; empty: nothing recorded. */
  outcome: 'computed' | 'partial' | 'stopped' | 'empty' | 'crossing';
  /** Catalogue key → value in the catalogue's inner unit; null = not available. */
  values: Record<string, number | null>;
  grades: Record<FluxKey, FluxGrade>;
  reasons: Reason[];
  ledger: LedgerEntry[];
  curves: PeriodState['curves'];
  rawFiles: string[];
}

export type Step<Settings> = (state: PeriodState, settings: Settings) => PeriodState;
