import { SplitMix64 } from '../../../processing/numerics/random';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import type { PeriodState, SeriesKey } from '../../../processing/state';
import { demoSetUp } from '../../../processing/synthetic/demo-scenario';
import { generateTurbulence } from '../../../processing/synthetic/turbulence';
import type { GeneratorMode } from '../../../processing/synthetic/turbulence';

/** States for step tests, from invented turbulence. */

/** A state as the first steps leave it, with these working series. */
export function stateWith(
  series: Partial<Record<SeriesKey, Float64Array>>,
  sampleRateHz: number,
): PeriodState {
  const length = Object.values(series)[0]?.length ?? 0;
  const startMs = Date.UTC(2027, 5, 17, 10);
  return {
    block: {
      startMs,
      endMs: startMs + Math.round((length / sampleRateHz) * 1000),
      sampleRateHz,
      length,
      values: {},
      status: {},
      present: new Uint8Array(length).fill(1),
      gasMeasures: { co2: 'molar-density', h2o: 'molar-density' },
      intake: {
        rowsRead: length,
        duplicates: 0,
        clockJumps: 0,
        backwardSteps: 0,
        largestJumpS: 0,
        fittedRateHz: null,
        rawFiles: [],
      },
      margins: { before: null, after: null },
    },
    setUp: demoSetUp,
    context: {
      utcOffsetMinutes: 60,
      signalStrengthReference: null,
      goodCodes: {},
      signalHigherIsBetter: true,
    },
    settings: defaultRecipe.settings,
    series,
    counts: {},
    stopped: false,
    ledger: [],
    reasons: [],
    values: {},
    air: null,
    wind: { meanSpeedMs: 3, directionDeg: 225, directionSpreadDeg: 10, sectorGrade: 0, sectorReason: null },
    tilt: null,
    lags: {},
    moments: null,
    spectralLoss: null,
    fluxes: null,
    curves: {},
  };
}

/** Six series with u* 0.3 m/s and daytime fluxes, gases in mol m-3; no means but those of wind and scalars. */
export function turbulentSeries(
  seed: number,
  options: { length?: number; sampleRateHz?: number; mode?: GeneratorMode } = {},
): Record<SeriesKey, Float64Array> {
  const { series } = generateTurbulence(
    {
      sampleRateHz: options.sampleRateHz ?? 20,
      length: options.length ?? 36_000,
      heightM: 3,
      meanSpeedMs: 3,
      zeta: 0,
      variances: { w: 0.25, u: 1.2, v: 0.8, temperature: 0.16, vapour: 0.16, co2: 4 },
      covariances: { u: -0.09, temperature: 0.09, vapour: 0.08, co2: -0.4 },
      residualCorrelation: [
        [1, 0.5, -0.5],
        [0.5, 1, -0.6],
        [-0.5, -0.6, 1],
      ],
      cospectra: 'surface-layer',
      mode: options.mode ?? 'gauss',
    },
    new SplitMix64(seed),
  );
  // 40 mol of air per m3: µmol/mol and mmol/mol become mol m-3.
  return {
    windU: series.u.map((value) => 3 + value),
    windV: series.v,
    windW: series.w,
    sonicTemperature: series.temperature.map((value) => 293 + value),
    co2: series.co2.map((value) => 40e-6 * (400 + value)),
    h2o: series.vapour.map((value) => 40e-3 * (10 + value)),
  };
}

/** A circular shift: sample i comes from i − by, as numpy's roll does. */
export function rolled(series: Float64Array, by: number): Float64Array {
  const n = series.length;
  return series.map((_, i) => series[(((i - by) % n) + n) % n]);
}

/** The same series without one. */
export function without(
  series: Record<SeriesKey, Float64Array>,
  key: SeriesKey,
): Partial<Record<SeriesKey, Float64Array>> {
  return Object.fromEntries(Object.entries(series).filter(([name]) => name !== key));
}
