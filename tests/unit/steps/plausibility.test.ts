import { describe, expect, it } from 'vitest';
import type { PeriodState } from '../../../processing/state';
import { completenessStep } from '../../../processing/steps/completeness';
import {
  gasLimits,
  leaveOutOutside,
  periodPressurePa,
  plausibilityStep,
} from '../../../processing/steps/plausibility';
import type { Recorded } from './recorded-state';
import { plainChannels, recordedState } from './recorded-state';

const n = 1000;

function judged(recorded: Partial<Recorded>): PeriodState {
  const state = recordedState({ values: plainChannels(n), ...recorded });
  completenessStep(state, state.settings.completeness);
  return plausibilityStep(state, state.settings.plausibility);
}

const reasonOf = (state: PeriodState, key: string) => state.reasons.find((reason) => reason.key === key);
const pressure = (pa = 100_000) => new Float64Array(n).fill(pa);

describe('limits', () => {
  it('accept their own ends and nothing beyond', () => {
    const values = Float64Array.of(-10, 10, -10.001, 10.001, 0, NaN, Infinity, -Infinity);
    expect(leaveOutOutside(values, { low: -10, high: 10 })).toEqual({ low: 2, high: 2 });
    expect(Array.from(values)).toEqual([-10, 10, NaN, NaN, 0, NaN, NaN, NaN]);
  });

  it('accept a limit of zero', () => {
    expect(leaveOutOutside(Float64Array.of(0, -1e-9), { low: 0, high: 1 })).toEqual({ low: 1, high: 0 });
    expect(leaveOutOutside(Float64Array.of(0, 1e-9), { low: -1, high: 0 })).toEqual({ low: 0, high: 1 });
  });

  it('accept a limit that was stored once in single precision', () => {
    // −40 °C in kelvin is stored as 233.14999389648438.
    const values = Float64Array.from(Float32Array.of(233.15, 333.15));
    expect(leaveOutOutside(values, { low: 233.15, high: 333.15 })).toEqual({ low: 0, high: 0 });
  });

  it('of a gas are converted to the measure it was recorded in', () => {
    // n = 40 mol m-3: 150 … 1500 µmol mol-1 are 6 … 60 mmol m-3; dry at x_v = 0.02: /0.98.
    const limits = { low: 150, high: 1500 };
    const molar = gasLimits('co2', limits, 'molar-density', 40, 0.02);
    expect(molar.low).toBeCloseTo(6, 12);
    expect(molar.high).toBeCloseTo(60, 12);
    expect(gasLimits('co2', limits, 'mole-fraction', 40, 0.02)).toEqual(limits);
    expect(gasLimits('co2', limits, 'dry-mole-fraction', 40, 0.02).high).toBeCloseTo(1530.6122448979593, 9);
    // H2O dries itself: 60 mmol mol-1 moist is 60/0.94 dry.
    expect(gasLimits('h2o', { low: -1, high: 60 }, 'dry-mole-fraction', 40, 0).high).toBeCloseTo(
      60 / 0.94,
      12,
    );
    expect(gasLimits('h2o', { low: -1, high: 60 }, 'molar-density', 40, 0)).toEqual({ low: -40, high: 2400 });
  });
});

describe('pressure', () => {
  const limits = { low: 50_000, high: 110_000 };

  it('is the median of what lies within the limits', () => {
    const values = Float64Array.of(1e5, 1.002e5, 0, 1.004e5, 5e5);
    expect(periodPressurePa(values, limits, 0)).toEqual({
      pressurePa: 1.002e5,
      source: 'measured',
      removed: 2,
    });
  });

  it('comes from elevation where none was measured, or none that can be', () => {
    // ISO 2533, table: 1000 m geopotential altitude 89,874.6 Pa; 1000 m geometric are 999.8 m.
    expect(periodPressurePa(undefined, limits, 1000).pressurePa).toBeCloseTo(89_876, -1);
    expect(periodPressurePa(Float64Array.of(0, NaN), limits, 0)).toEqual({
      pressurePa: 101_325,
      source: 'elevation',
      removed: 1,
    });
  });
});

describe('plausibility step', () => {
  it('says nothing against plausible records with a barometer', () => {
    const state = judged({ values: { ...plainChannels(n), airPressure: pressure() } });
    expect(state.reasons).toEqual([]);
    expect(state.values.airPressure).toBe(100_000);
    expect(state.values['implausible.co2']).toBe(0);
    expect(state.air).toMatchObject({ pressureSource: 'measured', temperatureSource: 'sonic-and-humidity' });
    // Ts 293 K with 500 mmol m-3 of vapour: n ≈ 41.0, x_v ≈ 0.0122, q ≈ 0.0076, T ≈ 293/(1 + 0.51 × 0.0076) ≈ 291.9 K.
    expect(state.air!.temperatureK).toBeGreaterThan(291.7);
    expect(state.air!.temperatureK).toBeLessThan(292);
  });

  it('removes values beyond each limit and keeps those on it', () => {
    const values = plainChannels(n);
    values.windU.set([50, -50, 50.1]);
    values.windV.set([-50.1, 50]);
    values.windW.set([10, -10, -10.1, 11]);
    values.sonicTemperature.set([-40 + 273.15, 60 + 273.15, 60.1 + 273.15, 200]);
    const state = judged({ values: { ...values, airPressure: pressure() } });
    expect(state.counts.windU).toMatchObject({ outLow: 0, outHigh: 1, valid: n - 1 });
    expect(state.counts.windV).toMatchObject({ outLow: 1, outHigh: 0 });
    expect(state.counts.windW).toMatchObject({ outLow: 1, outHigh: 1 });
    expect(state.counts.sonicTemperature).toMatchObject({ outLow: 1, outHigh: 1 });
    expect(state.values['implausible.windW']).toBeCloseTo(0.002, 12);
    expect(state.values['implausible.co2']).toBe(0);
  });

  it('flags one removed value softly, exactly 1 % still softly, more hard', () => {
    const withBad = (count: number) => {
      const values = plainChannels(n);
      values.co2.fill(1e4, 0, count);
      return reasonOf(judged({ values: { ...values, airPressure: pressure() } }), 'plausibility.co2');
    };
    expect(withBad(0)).toBeUndefined();
    expect(withBad(1)).toMatchObject({ grade: 1, fluxes: ['co2Flux'] });
    expect(withBad(10)?.grade).toBe(1);
    expect(withBad(11)?.grade).toBe(2);
  });

  it('gives soft and hard flags the grades of the recipe', () => {
    const values = plainChannels(n);
    values.h2o[0] = 1e5;
    const base = recordedState({ values: {} }).settings;
    const state = judged({
      values: { ...values, airPressure: pressure() },
      settings: { screening: { ...base.screening, softGrade: 0 } },
    });
    expect(reasonOf(state, 'plausibility.h2o')).toMatchObject({
      grade: 0,
      fluxes: ['latentHeat', 'co2Flux'],
    });
  });

  it('keeps slightly negative H2O of frosty air', () => {
    const values = plainChannels(n);
    values.h2o.fill(2);
    // n ≈ 41 mol m-3: −1 mmol mol-1 is −41 mmol m-3.
    values.h2o.set([-40, -43]);
    const state = judged({ values: { ...values, airPressure: pressure() } });
    expect(state.counts.h2o).toMatchObject({ outLow: 1, outHigh: 0 });
    expect(state.series.h2o![0]).toBe(-40);
  });

  it('says when pressure is only assumed, without grading it', () => {
    const state = judged({});
    expect(reasonOf(state, 'plausibility.airPressure')?.grade).toBe(0);
    expect(state.air?.pressureSource).toBe('elevation');
    const broken = judged({ values: { ...plainChannels(n), airPressure: pressure(0) } });
    expect(reasonOf(broken, 'plausibility.airPressure')?.sentence).toContain('no plausible value');
  });

  it('does not touch a stopped period', () => {
    const state = recordedState({ values: plainChannels(n) });
    state.stopped = true;
    const after = plausibilityStep(state, state.settings.plausibility);
    expect(after.values).toEqual({});
    expect(after.ledger[0].summary).toContain('stopped');
  });
});
