import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { SplitMix64 } from '../../../processing/numerics/random';
import type { PeriodState, SeriesKey } from '../../../processing/state';
import { flagAbove, flagOutside, screeningStep } from '../../../processing/steps/screening';
import { amplitudeTests } from '../../../processing/steps/screening/amplitude';
import { angleOfAttack } from '../../../processing/steps/screening/angle-of-attack';
import { discontinuities } from '../../../processing/steps/screening/discontinuities';
import { lagTest } from '../../../processing/steps/screening/lag';
import { recordStatistics } from '../../../processing/steps/screening/record';
import { windNonstationarity } from '../../../processing/steps/screening/wind-nonstationarity';
import { slowSeries, withGaps } from './recorded-state';
import { stateWith, turbulentSeries } from './turbulent-state';

const haar = (values: Float64Array, windowPoints: number) =>
  discontinuities(values, windowPoints, recordStatistics(values));

describe('flags', () => {
  it('let a value on a limit pass and judge nothing without one', () => {
    expect(flagAbove(70, { soft: null, hard: 70 })).toBe(0);
    expect(flagAbove(70.1, { soft: null, hard: 70 })).toBe(2);
    expect(flagAbove(3, { soft: 2, hard: 3 })).toBe(1);
    expect(flagAbove(99, { soft: null, hard: null })).toBe(0);
    expect(flagAbove(NaN, { soft: 0, hard: 0 })).toBe(0);
  });

  it('stand outside of bands, edges included', () => {
    const bands = { soft: { low: -1, high: 1 }, hard: { low: -2, high: 2 } };
    expect([-2.1, -2, -1, 0, 1, 1.1, 2.1, NaN].map((value) => flagOutside(value, bands))).toEqual([
      2, 1, 0, 0, 0, 1, 2, 0,
    ]);
  });
});

describe('amplitude resolution and dropouts', () => {
  it('agree with an independent program on a slow gappy record', () => {
    // numpy: histogram by floor, percentiles interpolated linearly, runs counted one by one; 6000 samples.
    const found = amplitudeTests(withGaps(slowSeries(42, 6000, 300), 5, 97), 1000, 500, 100);
    expect(found.windows).toBe(11);
    expect(found.emptyShare).toBeCloseTo(0.15, 12);
    expect(found.emptyAt).toBe(4500);
    expect(found.interiorShare).toBeCloseTo(0.004044489383215369, 12);
    expect(found.extremeShare).toBeCloseTo(0.0030303030303030303, 12);
    expect(found.sameBinShare).toBeCloseTo(0.1037935152016166, 12);
  });

  it('agree on a coarse record that freezes inside and at its top', () => {
    const values = slowSeries(7, 6000).map((value) => Math.round(value * 4) / 4);
    values.fill(values[2000], 2000, 2300);
    values.fill(Math.max(...values), 4000, 4200);
    const found = amplitudeTests(values, 1000, 500, 100);
    expect(found.emptyShare).toBeCloseTo(0.8, 12);
    expect(found.emptyAt).toBe(500);
    expect(found.interiorShare).toBeCloseTo(0.3, 12);
    expect(found.interiorAt).toBe(2000);
    expect(found.extremeShare).toBeCloseTo(0.3, 12);
    expect(found.extremeAt).toBe(1500);
    expect(found.sameBinShare).toBeCloseTo(0.49418181818181817, 12);
  });

  it('agree whether windows are put together from steps or summed whole', () => {
    const values = withGaps(slowSeries(17, 4000, -20), 2, 41);
    const whole = amplitudeTests(values, 1000, 1000, 100);
    const parts = amplitudeTests(values, 1000, 500, 100);
    const odd = amplitudeTests(values, 1000, 300, 100);
    expect(parts.emptyShare).toBeGreaterThanOrEqual(whole.emptyShare);
    expect(odd.windows).toBe(11);
    // Step 300 does not divide 1000, so its windows are summed whole; the one at 3000 is common to all three.
    const last = amplitudeTests(values.slice(3000), 1000, 300, 100);
    const lastInParts = amplitudeTests(values.slice(3000), 1000, 250, 100);
    expect(lastInParts).toEqual(last);
  });

  it('decide by the centre of a bin whether it lies outside of the percentiles', () => {
    /** 200 values from 0 to 1 in 10 bins: 15 in a row at 0.92, `beside` more in the top bin at `value`, the rest spread below. */
    const record = (beside: number, value: number) => {
      const low = Array.from({ length: 185 - beside }, (_, i) => (i % 9) / 10 + 0.05);
      low[0] = 0;
      const spread: number[] = [];
      low.forEach((x, i) => {
        spread.push(x);
        if (i < beside) spread.push(i === 0 ? 1 : value);
      });
      return Float64Array.from([
        ...spread.slice(0, 100),
        ...new Array<number>(15).fill(0.92),
        ...spread.slice(100),
      ]);
    };
    // The 90th percentile lies at index 179.1. With 15 more above, the run fills indices 170–184: 0.92 is below the centre 0.95.
    const outside = record(15, 0.925);
    // With 25 more at 0.98 it fills 160–174, and the percentile is 0.98, above the centre.
    const inside = record(25, 0.98);
    for (const turn of [(x: number) => x, (x: number) => 1 - x]) {
      const beyond = amplitudeTests(outside.map(turn), 200, 200, 10);
      expect(beyond.extremeShare).toBeCloseTo(0.075, 12);
      expect(beyond.interiorShare).toBeLessThan(0.02);
      const within = amplitudeTests(inside.map(turn), 200, 200, 10);
      expect(within.interiorShare).toBeCloseTo(0.075, 12);
      expect(within.extremeShare).toBeLessThan(0.02);
    }
  });

  it('see a constant window as one bin, hard on both counts', () => {
    const values = slowSeries(8, 3000);
    values.fill(2, 1000, 2000);
    const found = amplitudeTests(values, 1000, 500, 100);
    expect(found.emptyShare).toBe(0.99);
    expect(found.interiorShare).toBe(1);
    expect(found.interiorAt).toBe(1000);
  });

  it('skip windows with less than half of their samples, and short records', () => {
    const values = slowSeries(9, 2000);
    values.fill(NaN, 0, 1400);
    // Windows at 0 and 500 hold 0 and 100 samples, that at 1000 holds 600.
    expect(amplitudeTests(values, 1000, 500, 100).windows).toBe(1);
    expect(amplitudeTests(slowSeries(9, 999), 1000, 500, 100)).toMatchObject({
      windows: 0,
      emptyShare: NaN,
      extremeShare: NaN,
    });
    expect(amplitudeTests(new Float64Array(2000).fill(NaN), 1000, 500, 100).windows).toBe(0);
  });

  it('do not depend on offset or scale', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 1e6 }),
        fc.integer({ min: -8, max: 8 }),
        fc.constantFrom(0.25, 2, 16),
        (seed, offset, factor) => {
          // Powers of two and small whole numbers on a 2⁻²⁰ grid: both records are exact, so bins can differ at edges only.
          const values = slowSeries(seed, 2000).map((value) => Math.round(value * 2 ** 20) / 2 ** 20);
          const a = amplitudeTests(values, 1000, 500, 100);
          const b = amplitudeTests(
            values.map((value) => value * factor + offset),
            1000,
            500,
            100,
          );
          expect(Math.abs(a.emptyShare - b.emptyShare)).toBeLessThanOrEqual(0.01);
          expect(Math.abs(a.interiorShare - b.interiorShare)).toBeLessThanOrEqual(0.002);
        },
      ),
      { numRuns: 30 },
    );
  });
});

describe('record statistics', () => {
  it('agree with scipy on the detrended gappy record', () => {
    const found = recordStatistics(withGaps(slowSeries(42, 6000, 300), 5, 97));
    expect(found.variance).toBeCloseTo(0.8510647499374577, 11);
    expect(found.skewness).toBeCloseTo(-0.11469205565857457, 10);
    expect(found.kurtosis).toBeCloseTo(2.89851560295266, 10);
  });

  it('have no shape for a pure line or a constant', () => {
    const line = recordStatistics(Float64Array.from({ length: 100 }, (_, i) => 3 + 0.5 * i));
    expect(line.isConstant).toBe(false);
    expect(line.skewness).toBeNaN();
    const constant = recordStatistics(new Float64Array(100).fill(7.3));
    expect(constant).toMatchObject({ isConstant: true, variance: 0, kurtosis: NaN });
    expect(recordStatistics(new Float64Array(3).fill(NaN)).n).toBe(0);
  });
});

describe('steps in mean and variance', () => {
  it('agree with sums made window by window, gaps included', () => {
    // numpy nanmean and nanvar of both halves at every place.
    const found = haar(withGaps(slowSeries(42, 6000, 300), 5, 97), 1000);
    expect(found.meanStep).toBeCloseTo(1.1249149366747433, 9);
    expect(found.meanStepAt).toBe(1021);
    expect(found.varianceStep).toBeCloseTo(0.9442245032731668, 9);
    expect(found.varianceStepAt).toBe(4416);
  });

  it('agree where mean and variance do step', () => {
    const values = slowSeries(9, 6000);
    for (let i = 3000; i < 6000; i++) values[i] *= 1.5;
    for (let i = 3600; i < 6000; i++) values[i] += 4;
    const found = haar(values, 1000);
    expect(found.meanStep).toBeCloseTo(1.8679769458646591, 9);
    expect(found.meanStepAt).toBe(3596);
    expect(found.varianceStep).toBeCloseTo(1.17132791599803, 9);
    expect(found.varianceStepAt).toBe(3237);
  });

  it('are not judged for constant or short records', () => {
    expect(haar(new Float64Array(5000).fill(1), 1000).meanStep).toBeNaN();
    expect(haar(slowSeries(1, 999), 1000).meanStep).toBeNaN();
    expect(haar(slowSeries(1, 1000), 1000).meanStep).toBeGreaterThan(0);
  });

  it('do not depend on offset, scale or direction of time', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 1e6 }),
        fc.double({ min: 0.1, max: 20, noNaN: true }),
        (seed, factor) => {
          const values = slowSeries(seed, 800);
          const a = haar(values, 200);
          const b = haar(
            values.map((value) => value * factor - 30),
            200,
          );
          const c = haar(values.slice().reverse(), 200);
          expect(b.meanStep).toBeCloseTo(a.meanStep, 8);
          expect(b.varianceStep).toBeCloseTo(a.varianceStep, 8);
          expect(c.meanStep).toBeCloseTo(a.meanStep, 8);
          expect(c.varianceStep).toBeCloseTo(a.varianceStep, 8);
        },
      ),
      { numRuns: 40 },
    );
  });
});

describe('horizontal wind and angle of attack', () => {
  it('agree with lines through the rotated wind', () => {
    // numpy: rotate both series to the mean wind, polyfit each, (N − 1) slope / U.
    const u = slowSeries(11, 3000, 4);
    const v = slowSeries(12, 3000, 2);
    const found = windNonstationarity(recordStatistics(u), recordStatistics(v), 3000);
    expect(found.alongWind).toBeCloseTo(-0.08767654254762017, 11);
    expect(found.crossWind).toBeCloseTo(-0.0795468464805798, 11);
    expect(found.vector).toBeCloseTo(0.11838444533852233, 11);
  });

  it('are not judged in a calm', () => {
    const still = recordStatistics(Float64Array.of(0.05, -0.04, 0.01));
    expect(windNonstationarity(still, still, 3).vector).toBeNaN();
  });

  it('agree with angles taken sample by sample', () => {
    // numpy: arctan2(w, hypot(u, v)); percentiles of the angle, which differ from ours only between two samples.
    const found = angleOfAttack(slowSeries(11, 3000, 4), slowSeries(12, 3000, 2), slowSeries(13, 3000), 15);
    expect(found.steepShare).toBeCloseTo(0.228, 12);
    expect(found.percentilesDeg[0]).toBeCloseTo(-28.331733166390787, 3);
    expect(found.percentilesDeg[1]).toBeCloseTo(1.5630389250673242, 6);
    expect(found.percentilesDeg[2]).toBeCloseTo(28.724557537543397, 3);
  });

  it('count still air as level and gaps not at all', () => {
    const found = angleOfAttack(
      Float64Array.of(0, 0, NaN, 1),
      Float64Array.of(0, 0, 1, 0),
      Float64Array.of(0, 1, 1, NaN),
      45,
    );
    expect(found.n).toBe(2);
    expect(found.steepShare).toBe(0.5);
    expect(angleOfAttack(Float64Array.of(1), Float64Array.of(0), Float64Array.of(99), 90).steepShare).toBe(0);
  });
});

describe('lag test', () => {
  /** Wind and a scalar that follows it `delay` samples later, cyclically. */
  const pair = (delay: number, seed = 5) => {
    const { windW, co2 } = turbulentSeries(seed);
    const n = windW.length;
    return { windW, scalar: co2.map((_, i) => co2[(i - delay + n) % n] - 0.016) };
  };

  it('finds a rolled scalar and what lag zero would lose', () => {
    const { windW, scalar } = pair(7);
    const found = lagTest(windW, scalar, 40, 20, 3);
    expect(found.lagSamples).toBe(7);
    const expected =
      Math.abs(found.covarianceAtLag - found.covarianceAtZero) / Math.abs(found.covarianceAtLag);
    expect(found.difference).toBe(expected);
    expect(found.difference).toBeGreaterThan(0.1);
  });

  it('gains next to nothing where there is no lag', () => {
    const { windW, scalar } = pair(0);
    expect(lagTest(windW, scalar, 40, 20, 3).difference).toBeLessThan(0.05);
  });

  it('judges nothing where no covariance stands out', () => {
    const random = new SplitMix64(3);
    const noise = () => Float64Array.from({ length: 18_000 }, () => random.normal());
    // The largest of 81 covariances of white noise lies near 2.7 of its standard deviations.
    expect(lagTest(noise(), noise(), 40, 20, 4).difference).toBeNaN();
  });

  it('survives a record shorter than its window', () => {
    expect(lagTest(new Float64Array(30), new Float64Array(30), 40, 20, 3).difference).toBeNaN();
  });
});

describe('screening step', () => {
  const run = (
    change: (series: Record<SeriesKey, Float64Array>) => void = () => undefined,
    more = {},
  ): PeriodState => {
    const series = turbulentSeries(21);
    change(series);
    const state = stateWith(series, 20);
    Object.assign(state.values, more);
    return screeningStep(state, state.settings.screening);
  };
  const keys = (state: PeriodState) => state.reasons.map(({ key, grade }) => `${key} ${grade}`);

  it('raises no flag on clean turbulence, and fills every statistic', () => {
    const state = run();
    expect(keys(state)).toEqual([]);
    for (const key of ['windU', 'windV', 'windW', 'sonicTemperature', 'co2', 'h2o']) {
      for (const test of [
        'emptyBins',
        'dropoutInterior',
        'dropoutExtreme',
        'skewness',
        'kurtosis',
        'haarMean',
        'haarVariance',
      ]) {
        expect(state.values[`screening.${test}.${key}`], `${test} ${key}`).toBeTypeOf('number');
        expect(state.values[`screening.${test}.${key}`]).not.toBeNaN();
      }
    }
    expect(state.values['screening.lag.co2']).toBeLessThan(0.15);
    expect(state.values['screening.angleOfAttack']).toBeLessThan(0.05);
    expect(state.values['screening.windNonstationarity']).toBeLessThan(0.5);
    expect(state.ledger[0].summary).toBe('No test of the record raised a flag.');
  });

  it('changes no sample', () => {
    const series = turbulentSeries(22);
    const before = Object.fromEntries(Object.entries(series).map(([key, values]) => [key, values.slice()]));
    const state = stateWith(series, 20);
    screeningStep(state, state.settings.screening);
    for (const [key, values] of Object.entries(series)) expect(values).toEqual(before[key]);
  });

  it('rejects a frozen minute of CO2 for the CO2 flux alone, and says when', () => {
    const state = run(({ co2 }) => co2.fill(co2[12_000], 12_000, 13_200));
    expect(keys(state)).toEqual(['screening.amplitudeResolution.co2 2', 'screening.dropouts.co2 2']);
    const reason = state.reasons[1];
    expect(reason.fluxes).toEqual(['co2Flux']);
    expect(reason.statistic.value).toBe(100);
    expect(reason.atS).toBe(600);
    expect(state.reasons[0].sentence).toContain('all samples of CO2 are the same');
  });

  it('takes every flux that needs a frozen series: all for u and w, the gases too for sonic temperature', () => {
    const w = run(({ windW }) => windW.fill(windW[12_000], 12_000, 12_400));
    expect(keys(w)).toContain('screening.dropouts.windW 2');
    expect(w.reasons[0].fluxes).toHaveLength(4);
    const u = run(({ windU }) => windU.fill(windU[12_000], 12_000, 12_400));
    expect(u.reasons[0].fluxes).toHaveLength(4);
    const ts = run(({ sonicTemperature }) => sonicTemperature.fill(sonicTemperature[12_000], 12_000, 12_400));
    expect(ts.reasons[0].fluxes).toEqual(['sensibleHeat', 'latentHeat', 'co2Flux']);
  });

  it('reports what despiking took away', () => {
    expect(keys(run(undefined, { 'spikes.h2o': 0.01 }))).toEqual([]);
    const state = run(undefined, { 'spikes.h2o': 0.0101 });
    expect(keys(state)).toEqual(['screening.spikes.h2o 2']);
    expect(state.reasons[0].statistic.value).toBeCloseTo(1.01, 12);
  });

  it('gives flags the grades of the recipe', () => {
    const series = turbulentSeries(21);
    series.co2.fill(series.co2[12_000], 12_000, 13_200);
    const state = stateWith(series, 20);
    screeningStep(state, { ...state.settings.screening, hardGrade: 1 });
    expect(keys(state)).toEqual(['screening.amplitudeResolution.co2 1', 'screening.dropouts.co2 1']);
  });

  it('flags steep and changing wind', () => {
    const steep = run(({ windW }) => windW.forEach((value, i) => (windW[i] = value * 9)));
    expect(keys(steep)).toContain('screening.angleOfAttack 2');
    const turning = run(({ windU }) => windU.forEach((_, i) => (windU[i] += (3 * i) / 36_000)));
    const reason = turning.reasons.find(({ key }) => key === 'screening.windNonstationarity');
    expect(reason).toMatchObject({ grade: 1, fluxes: ['momentum'], series: null });
  });

  it('goes on with what is there when series are missing', () => {
    const { windW, h2o } = turbulentSeries(21);
    const state = stateWith({ windW, h2o }, 20);
    screeningStep(state, state.settings.screening);
    expect(state.values['screening.skewness.h2o']).toBeTypeOf('number');
    expect(state.values['screening.angleOfAttack']).toBeUndefined();
    expect(state.values['screening.lag.co2']).toBeUndefined();
  });
});
