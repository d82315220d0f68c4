import { describe, expect, it } from 'vitest';
import { moistAir, saturationVapourPressurePa, sonicTemperatureK } from '../../../processing/thermodynamics';
import type { MarginSamples, PeriodState } from '../../../processing/state';
import {
  edgeState,
  profileStorage,
  robustMean,
  singleLevelStorage,
  storageStep,
} from '../../../processing/steps/storage';
import { stateWith } from './turbulent-state';

const temperatureK = 298.15;
const air = moistAir(temperatureK, 0.5 * saturationVapourPressurePa(temperatureK), 100_000);
const sonicK = sonicTemperatureK(temperatureK, air.specificHumidity);

describe('storage formulae', () => {
  it('gives +0.132334 µmol for 2 µmol/mol in half an hour below 3 m', () => {
    // n_d 39.700183 mol m-3: hand calculation, 39.700183 · 3 · 2 / 1800.
    expect(singleLevelStorage(39.700183, 3, 2e-6, 1800) * 1e6).toBeCloseTo(0.132334, 6);
  });

  it('gives 0.204014 for three levels with layer edges 0, 1, 2.25 and 3 m', () => {
    // By hand: 39.7 (4 · 1 + 3 · 1.25 + 2 · 0.75)/1800.
    const levels = [
      { heightM: 0.5, change: 4e-6, dryAirMolarDensity: 39.7 },
      { heightM: 1.5, change: 3e-6, dryAirMolarDensity: 39.7 },
      { heightM: 3, change: 2e-6, dryAirMolarDensity: 39.7 },
    ];
    expect(profileStorage(levels, 1800) * 1e6).toBeCloseTo(0.204014, 6);
    expect(profileStorage([], 1800)).toBeNaN();
  });

  it('gives one level and a profile of one level the same', () => {
    expect(profileStorage([{ heightM: 3, change: 2e-6, dryAirMolarDensity: 40 }], 1800)).toBeCloseTo(
      singleLevelStorage(40, 3, 2e-6, 1800),
      18,
    );
  });
});

describe('robust mean', () => {
  it('leaves out spikes and gaps', () => {
    const values = Float64Array.from([1, 2, 3, 2, NaN, 1, 3, 2, 500]);
    // Median 2, deviation 0.5–1: 500 goes; (1+2+3+2+1+3+2)/7 = 2.
    expect(robustMean(values, 4)).toEqual({ mean: 2, count: 7 });
  });
  it('is NaN with too few values and exact for a constant', () => {
    expect(robustMean(Float64Array.from([1, NaN]), 2).mean).toBeNaN();
    expect(robustMean(new Float64Array(5).fill(4), 3)).toEqual({ mean: 4, count: 5 });
  });
});

describe('state of the air at a boundary', () => {
  const co2Dry = 410e-6;
  it.each(['molar-density', 'mole-fraction', 'dry-mole-fraction'] as const)(
    'is the same however the gases were recorded: %s',
    (measure) => {
      const co2 = {
        'molar-density': co2Dry * air.dryAirMolarDensity * 1e3,
        'mole-fraction': co2Dry * (1 - air.vapourMoleFraction) * 1e6,
        'dry-mole-fraction': co2Dry * 1e6,
      }[measure];
      const h2o = {
        'molar-density': air.vapourMolarDensity * 1e3,
        'mole-fraction': air.vapourMoleFraction * 1e3,
        'dry-mole-fraction': air.vapourDryMoleFraction * 1e3,
      }[measure];
      const edge = edgeState(
        { sonicTemperatureK: sonicK, co2, h2o },
        { co2: measure, h2o: measure },
        100_000,
      );
      expect(Math.abs(edge.co2DryMoleFraction / co2Dry - 1)).toBeLessThan(1e-11);
      expect(Math.abs(edge.temperatureK - temperatureK)).toBeLessThan(1e-9);
      expect(Math.abs(edge.vapourDensity / air.vapourDensity - 1)).toBeLessThan(1e-11);
    },
  );

  it('sees no change of a constant dry ratio when only temperature changes', () => {
    const at = (t: number) => {
      const state = moistAir(t, 1500, 100_000);
      return edgeState(
        {
          sonicTemperatureK: sonicTemperatureK(t, state.specificHumidity),
          co2: co2Dry * state.dryAirMolarDensity * 1e3,
          h2o: state.vapourMolarDensity * 1e3,
        },
        { co2: 'molar-density', h2o: 'molar-density' },
        100_000,
      ).co2DryMoleFraction;
    };
    expect(Math.abs(at(293) / at(296) - 1)).toBeLessThan(1e-11);
  });
});

describe('storage of a period', () => {
  const rate = 10;
  const length = 18_000;
  const margin = rate * 300;

  /** Dry ratio and temperature rise linearly through the period and its margins. */
  function rampState(
    options: { co2Rise?: number; heatRise?: number; pressureRisePa?: number } = {},
  ): PeriodState {
    const { co2Rise = 2e-6, heatRise = 1, pressureRisePa = 0 } = options;
    const whole = length + 2 * margin;
    const p = new Float64Array(whole);
    const ts = new Float64Array(whole);
    const c = new Float64Array(whole);
    const v = new Float64Array(whole);
    for (let i = 0; i < whole; i++) {
      const share = (i + 0.5 - margin) / length;
      p[i] = 100_000 + pressureRisePa * (share - 0.5);
      const state = moistAir(temperatureK + heatRise * (share - 0.5), 1500, p[i]);
      ts[i] = sonicTemperatureK(state.temperatureK, state.specificHumidity);
      c[i] = (400e-6 + co2Rise * share) * state.dryAirMolarDensity;
      v[i] = state.vapourMolarDensity;
    }
    const state = stateWith(
      {
        windU: new Float64Array(length),
        sonicTemperature: ts.slice(margin, margin + length),
        co2: c.slice(margin, margin + length),
        h2o: v.slice(margin, margin + length),
      },
      rate,
    );
    state.block.values.airPressure = p.slice(margin, margin + length);
    const outside = (from: number): MarginSamples => ({
      length: margin,
      values: {
        airPressure: p.slice(from, from + margin),
        sonicTemperature: ts.slice(from, from + margin),
        co2: c.slice(from, from + margin).map((x) => x * 1e3),
        h2o: v.slice(from, from + margin).map((x) => x * 1e3),
      },
    });
    state.block.margins = { before: outside(0), after: outside(margin + length) };
    const mean = moistAir(temperatureK, 1500, 100_000);
    state.air = { ...mean, pressureSource: 'measured', temperatureSource: 'sonic-and-humidity' };
    state.fluxes = { co2Flux: -5e-6 } as PeriodState['fluxes'];
    return state;
  }
  const settings = { method: 'single-level', edgeMinutes: 5 } as const;

  it('finds a linear rise of 2 µmol/mol and 1 K and adds it to the flux', () => {
    const state = storageStep(rampState(), settings);
    const z = state.setUp.sonicHeightM;
    // SC = n_d z Δχ/Δt and ρ cp z ΔT/Δt, by hand from the mean state.
    const expected = (state.air!.dryAirMolarDensity * z * 2e-6) / 1800;
    expect(Math.abs(state.values.co2Storage / expected - 1)).toBeLessThan(1e-4);
    const heat = (state.air!.airDensity * 1004.67 * (1 + 0.84 * state.air!.specificHumidity) * z) / 1800;
    expect(Math.abs(state.values.sensibleHeatStorage / heat - 1)).toBeLessThan(1e-4);
    expect(state.values.netExchange).toBe(-5e-6 + state.values.co2Storage);
    expect(state.reasons).toEqual([]);
  });

  it('stores nothing where only the pressure changes, but does where it was not measured', () => {
    const state = storageStep(rampState({ co2Rise: 0, heatRise: 0, pressureRisePa: 50 }), settings);
    // Without the change of pressure 50 Pa of 100 000 would pass for 0.2 µmol/mol of 400: by hand 0.2/2 of the ramp below.
    const ramp = storageStep(rampState({ heatRise: 0 }), settings).values.co2Storage;
    expect(Math.abs(state.values.co2Storage / ramp)).toBeLessThan(1e-6);
    const unmeasured = rampState({ co2Rise: 0, heatRise: 0, pressureRisePa: 50 });
    delete unmeasured.block.values.airPressure;
    delete unmeasured.block.margins.before!.values.airPressure;
    delete unmeasured.block.margins.after!.values.airPressure;
    expect(storageStep(unmeasured, settings).values.co2Storage / ramp).toBeCloseTo(0.1, 2);
  });

  it('takes no pressure that cannot be', () => {
    const expected = storageStep(rampState(), settings).values.co2Storage;
    const state = rampState();
    state.block.margins.before!.values.airPressure!.fill(0);
    state.block.margins.after!.values.airPressure!.fill(NaN);
    expect(storageStep(state, settings).values.co2Storage).toBeCloseTo(expected, 15);
  });

  it('is not fooled by spikes at the boundary', () => {
    const clean = storageStep(rampState(), settings).values.co2Storage;
    const state = rampState();
    for (let i = 0; i < 30; i++) {
      state.series.co2![i * 7] *= 3;
      state.block.margins.after!.values.co2![i * 5] = 0;
    }
    // 2 % of the points left out of a mean: a few hundredths of the rise.
    expect(Math.abs(storageStep(state, settings).values.co2Storage / clean - 1)).toBeLessThan(0.01);
  });

  it.each(['before', 'after'] as const)(
    'has no storage without the margin %s, and net exchange is the flux alone',
    (side) => {
      const state = rampState();
      state.block.margins = { ...state.block.margins, [side]: null };
      storageStep(state, settings);
      expect(state.values.co2Storage).toBeNaN();
      expect(state.values.netExchange).toBe(-5e-6);
      expect(state.reasons).toMatchObject([{ key: 'storage.co2', grade: 0, statistic: { value: 1 } }]);
    },
  );

  it('has no storage when the margin holds too few samples', () => {
    const state = rampState();
    state.block.margins.before!.values.co2!.fill(NaN, 1600);
    storageStep(state, settings);
    expect(state.values.netExchange).toBe(-5e-6);
    expect(state.reasons.map((reason) => reason.key)).toEqual(['storage.co2']);
  });

  it('computes none when not asked for, and passes a stopped period through', () => {
    const none = storageStep(rampState(), { method: 'none' });
    expect(none.values.netExchange).toBe(-5e-6);
    expect(none.values.co2Storage).toBeUndefined();
    const stopped = rampState();
    stopped.stopped = true;
    expect(storageStep(stopped, settings).values.netExchange).toBeUndefined();
  });
});
