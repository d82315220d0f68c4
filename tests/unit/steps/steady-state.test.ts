import { describe, expect, it } from 'vitest';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import { lagStep } from '../../../processing/steps/lag';
import { steadyState, steadyStateStep } from '../../../processing/steps/steady-state';
import type { PeriodState, SeriesKey } from '../../../processing/state';
import { stateWith, turbulentSeries, without } from './turbulent-state';

const settings = defaultRecipe.settings.steadyState;

function run(series: Partial<Record<SeriesKey, Float64Array>>, sampleRateHz = 10): PeriodState {
  return steadyStateStep(lagStep(stateWith(series, sampleRateHz), defaultRecipe.settings.lag), settings);
}

/** Half an hour at 10 Hz in which gas is exchanged during the first half only: the flux is not steady, and not zero. */
function interrupted(seed: number): Record<SeriesKey, Float64Array> {
  const series = turbulentSeries(seed, { length: 18_000, sampleRateHz: 10 });
  const mean = series.co2.reduce((sum, value) => sum + value, 0) / 18_000;
  // Wind and gas shift together at half time: half of the whole covariance is then a difference of means.
  return {
    ...series,
    windW: series.windW.map((value, i) => value + (i < 9000 ? -0.4 : 0.4)),
    co2: series.co2.map((value, i) => mean + (value - mean) + (i < 9000 ? 40e-6 : -40e-6)),
  };
}

describe('steadyState', () => {
  it('finds small deviations in stationary records', () => {
    // Largest of 40 synthetic half hours in an independent program: 0.033; mean 0.012.
    for (let seed = 0; seed < 12; seed++) {
      const { windW, sonicTemperature } = turbulentSeries(seed, { length: 18_000, sampleRateHz: 10 });
      expect(steadyState(windW, sonicTemperature, 6).deviation).toBeLessThan(0.05);
    }
  });

  it('leaves out short intervals with less than half of their pairs, and needs four', () => {
    const { windW, sonicTemperature } = turbulentSeries(3, { length: 18_000, sampleRateHz: 10 });
    sonicTemperature.fill(Number.NaN, 0, 1501);
    sonicTemperature.fill(Number.NaN, 3000, 6000);
    const four = steadyState(windW, sonicTemperature, 6);
    expect(four.parts.map(Number.isNaN)).toEqual([true, true, false, false, false, false]);
    expect(four.used).toBe(4);
    expect(Number.isFinite(four.deviation)).toBe(true);
    sonicTemperature.fill(Number.NaN, 6000, 9000);
    const three = steadyState(windW, sonicTemperature, 6);
    expect(three.used).toBe(3);
    expect(three.deviation).toBeNaN();
    expect(Number.isFinite(three.wholeCovariance)).toBe(true);
  });

  it('uses an interval with exactly half of its pairs', () => {
    const { windW, sonicTemperature } = turbulentSeries(3, { length: 18_000, sampleRateHz: 10 });
    sonicTemperature.fill(Number.NaN, 0, 1500);
    expect(steadyState(windW, sonicTemperature, 6).used).toBe(6);
  });

  it('obeys whole = mean of the parts + covariance of the block means when every block is complete', () => {
    const { windW, co2 } = turbulentSeries(4, { length: 6000, sampleRateHz: 10 });
    const found = steadyState(windW, co2, 6);
    const means = (x: Float64Array): number[] =>
      [0, 1, 2, 3, 4, 5].map(
        (part) => x.subarray(part * 1000, part * 1000 + 1000).reduce((s, v) => s + v, 0) / 1000,
      );
    const [a, b] = [means(windW), means(co2)];
    const middle = (values: number[]): number => values.reduce((s, v) => s + v, 0) / 6;
    const between = a.reduce((s, v, i) => s + (v - middle(a)) * (b[i] - middle(b)), 0) / 6;
    expect(Math.abs(found.wholeCovariance - found.shortCovariance - between)).toBeLessThan(1e-15);
  });
});

describe('steadyStateStep', () => {
  it('finds nothing against a stationary record', () => {
    const state = run(turbulentSeries(1, { length: 18_000, sampleRateHz: 10 }));
    for (const flux of ['momentum', 'sensibleHeat', 'latentHeat', 'co2Flux']) {
      expect(state.values[`steadyState.${flux}`]).toBeLessThan(0.3);
    }
    expect(state.reasons).toEqual([]);
    expect(state.ledger.at(-1)?.summary).toContain('six 5-minute');
  });

  it('explains a flux that changed within the period, with both covariances and their unit', () => {
    const state = run(interrupted(2));
    const deviation = state.values['steadyState.co2Flux'];
    const reason = state.reasons.find((one) => one.key === 'steadyState.co2Flux')!;
    expect(deviation).toBeGreaterThan(0.3);
    expect(reason).toMatchObject({
      step: 'steadyState',
      fluxes: ['co2Flux'],
      series: 'co2',
      grade: deviation > 1 ? 2 : 1,
      limits: { softLow: null, softHigh: 30, hardLow: null, hardHigh: 100 },
    });
    expect(reason.statistic.value).toBeCloseTo(deviation * 100, 10);
    expect(reason.finding).toBe(`Steady-state deviation ${Math.round(deviation * 100)} %`);
    expect(reason.sentence).toMatch(
      /^The six 5-minute covariances of w and CO2 average −\d+\.\d\d µmol m-2 s-1; the half hour as a whole gives −\d+\.\d\d µmol m-2 s-1\. /,
    );
  });

  it('says when too little is left to test, without lowering the grade', () => {
    const series = turbulentSeries(5, { length: 18_000, sampleRateHz: 10 });
    series.h2o.fill(Number.NaN, 0, 8999);
    const state = run(series);
    expect(state.values['steadyState.latentHeat']).toBeNaN();
    expect(state.reasons.find((one) => one.key === 'steadyState.latentHeat')).toMatchObject({
      grade: 0,
      finding: 'Steady state not testable',
    });
  });

  it('notes a flux next to zero, where a percentage says little', () => {
    // Exactly uncorrelated in every block but a trace: temperature made orthogonal to w, plus 1e-4 of w.
    const series = turbulentSeries(6, { length: 6000, sampleRateHz: 10 });
    const { windW } = series;
    const pattern = Float64Array.from(windW, (_, i) => (i % 4 < 2 ? 1 : -1));
    const square = Float64Array.from(windW, (_, i) => (i % 2 === 0 ? 1 : -1));
    const state = run({
      ...series,
      windW: square,
      sonicTemperature: pattern.map((value, i) => 293 + value + 5e-4 * square[i]),
    });
    expect(state.reasons.find((one) => one.key === 'steadyState.nearZero.sensibleHeat')).toMatchObject({
      grade: 0,
    });
  });

  it('has nothing to compare with where a series is frozen', () => {
    const series = turbulentSeries(8, { length: 6000, sampleRateHz: 10 });
    const state = run({ ...series, sonicTemperature: new Float64Array(6000).fill(294.65) });
    expect(state.values['steadyState.sensibleHeat']).toBeNaN();
    expect(state.reasons.find((one) => one.key === 'steadyState.sensibleHeat')?.sentence).toContain(
      'exactly zero',
    );
  });

  it('leaves fluxes whose series is not recorded untested', () => {
    const rest = without(turbulentSeries(7, { length: 6000, sampleRateHz: 10 }), 'co2');
    const state = run(rest);
    expect(state.values['steadyState.co2Flux']).toBeUndefined();
    expect(state.values['steadyState.momentum']).toBeGreaterThanOrEqual(0);
  });
});
