import { describe, expect, it } from 'vitest';
import { covariance } from '../../../processing/numerics/moments';
import type { SetUp } from '../../../processing/schemas/set-up';
import {
  correctCrosswind,
  crosswindCovariance,
  crosswindStep,
  crosswindWeights,
} from '../../../processing/steps/crosswind';
import { plainChannels, recordedState, slowSeries } from './recorded-state';

describe('crosswind correction of samples', () => {
  it('adds (A u² + B v²)/403 and leaves gaps', () => {
    // 7/8 (5² + 2²)/403 = 0.06296526054590570 K.
    const temperature = Float64Array.of(290, 290, NaN, 290);
    const rise = correctCrosswind(temperature, Float64Array.of(5, NaN, 5, 0), Float64Array.of(2, 2, 2, 0), {
      a: 7 / 8,
      b: 7 / 8,
    });
    expect(temperature[0] - 290).toBeCloseTo(0.0629652605459057, 11);
    expect(temperature[1]).toBeNaN();
    expect(temperature[2]).toBeNaN();
    expect(temperature[3]).toBe(290);
    expect(rise).toBeCloseTo(0.0629652605459057 / 2, 12);
  });

  it('changes the covariance with w as the covariance form says, but for third moments', () => {
    const n = 20_000;
    const u = slowSeries(1, n, 5);
    const shared = slowSeries(2, n, 0, 0.5);
    const w = u.map((value, i) => -0.1 * (value - 5) + 0.2 * shared[i]);
    const v = slowSeries(3, n, 1);
    const temperature = slowSeries(4, n, 290);
    const before = covariance(w, temperature).covariance;
    const uw = covariance(u, w).covariance;
    const vw = covariance(v, w).covariance;
    correctCrosswind(temperature, u, v, { a: 7 / 8, b: 7 / 8 });
    const gained = covariance(w, temperature).covariance - before;
    const expected = crosswindCovariance(5, 1, uw, vw, { a: 7 / 8, b: 7 / 8 });
    // u'u'w' of this skewless series is a few per cent of 2 ū u'w'.
    expect(gained / expected).toBeGreaterThan(0.93);
    expect(gained / expected).toBeLessThan(1.07);
  });

  it('weighs a vertical path arrangement by geometry', () => {
    expect(crosswindWeights(90)).toEqual({ a: 1, b: 1 });
    expect(crosswindWeights(0).a).toBe(0.5);
  });
});

describe('crosswind step', () => {
  const run = (crosswindDone: SetUp['sonic']['crosswindDone'], method: 'as-set-up' | 'off' = 'as-set-up') => {
    const values = plainChannels(100);
    const before = values.sonicTemperature.slice();
    const base = recordedState({ values });
    const state = recordedState({ values, setUp: { sonic: { ...base.setUp.sonic, crosswindDone } } });
    crosswindStep(state, { method });
    const changed = state.series.sonicTemperature!.some((value, i) => value !== before[i]);
    return { state, changed };
  };

  it('is applied only where the instrument has not done it', () => {
    expect(run('no').changed).toBe(true);
    expect(run('yes').changed).toBe(false);
    expect(run('no', 'off').changed).toBe(false);
  });

  it('is left out with a word where nobody knows', () => {
    const { state, changed } = run('unknown');
    expect(changed).toBe(false);
    expect(state.reasons).toHaveLength(1);
    expect(state.reasons[0]).toMatchObject({ key: 'crosswind.unknown', grade: 0, fluxes: ['sensibleHeat'] });
    expect(run('yes').state.reasons).toEqual([]);
  });

  it('writes one ledger line in every case', () => {
    expect(run('no').state.ledger).toHaveLength(1);
    expect(run('yes').state.ledger).toHaveLength(1);
    expect(run('unknown').state.ledger).toHaveLength(1);
  });
});
