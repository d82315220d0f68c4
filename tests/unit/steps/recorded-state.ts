import { SplitMix64 } from '../../../processing/numerics/random';
import type { ChannelKey } from '../../../processing/schemas/layout';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import type { RecipeSettings } from '../../../processing/schemas/recipe';
import type { SetUp } from '../../../processing/schemas/set-up';
import type { Block, PeriodContext, PeriodState, SeriesKey } from '../../../processing/state';
import { seriesKeys } from '../../../processing/state';
import { demoSetUp } from '../../../processing/synthetic/demo-scenario';

/** States as the very first step gets them, from recorded channels. */

export interface Recorded {
  values: Partial<Record<ChannelKey, Float64Array>>;
  status?: Partial<Record<ChannelKey, Int32Array>>;
  present?: Uint8Array;
  sampleRateHz?: number;
  intake?: Partial<Block['intake']>;
  gasMeasures?: Block['gasMeasures'];
  setUp?: Partial<SetUp>;
  context?: Partial<PeriodContext>;
  settings?: Partial<RecipeSettings>;
}

export function recordedState(recorded: Recorded): PeriodState {
  const length = recorded.present?.length ?? Object.values(recorded.values)[0]?.length ?? 0;
  const sampleRateHz = recorded.sampleRateHz ?? 10;
  const startMs = Date.UTC(2027, 5, 17, 10);
  const series: Partial<Record<SeriesKey, Float64Array>> = {};
  for (const key of seriesKeys) {
    const values = recorded.values[key];
    if (values) series[key] = values;
  }
  return {
    block: {
      startMs,
      endMs: startMs + Math.round((length / sampleRateHz) * 1000),
      sampleRateHz,
      length,
      values: recorded.values,
      status: recorded.status ?? {},
      present: recorded.present ?? new Uint8Array(length).fill(1),
      gasMeasures: recorded.gasMeasures ?? { co2: 'molar-density', h2o: 'molar-density' },
      intake: {
        rowsRead: length,
        duplicates: 0,
        clockJumps: 0,
        backwardSteps: 0,
        largestJumpS: 0,
        fittedRateHz: null,
        rawFiles: [],
        ...recorded.intake,
      },
      margins: { before: null, after: null },
    },
    setUp: { ...demoSetUp, ...recorded.setUp },
    context: {
      utcOffsetMinutes: 60,
      signalStrengthReference: null,
      goodCodes: {},
      signalHigherIsBetter: true,
      ...recorded.context,
    },
    settings: { ...defaultRecipe.settings, ...recorded.settings },
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

/** Six plausible channels of `length` uncorrelated samples: wind m s-1, temperature K, gases mmol m-3. */
export function plainChannels(length: number, seed = 1): Record<SeriesKey, Float64Array> {
  const random = new SplitMix64(seed);
  const around = (mean: number, spread: number) =>
    Float64Array.from({ length }, () => mean + spread * random.normal());
  return {
    windU: around(3, 0.8),
    windV: around(0, 0.6),
    windW: around(0, 0.3),
    sonicTemperature: around(293, 0.4),
    co2: around(16, 0.1),
    h2o: around(500, 8),
  };
}

/** First-order autoregressive series with uniform steps: the same numbers in every language. */
export function slowSeries(seed: number, length: number, offset = 0, memory = 0.95): Float64Array {
  const random = new SplitMix64(seed);
  let value = 0;
  return Float64Array.from({ length }, () => {
    value = memory * value + (random.uniform() - 0.5);
    return value + offset;
  });
}

/** Makes every `every`-th sample from `first` on missing. */
export function withGaps(values: Float64Array, first: number, every: number): Float64Array {
  const out = values.slice();
  for (let i = first; i < out.length; i += every) out[i] = NaN;
  return out;
}

/** All channels but one. */
export function channelsWithout(
  missing: SeriesKey,
  length: number,
): Partial<Record<SeriesKey, Float64Array>> {
  const values: Partial<Record<SeriesKey, Float64Array>> = plainChannels(length);
  delete values[missing];
  return values;
}
