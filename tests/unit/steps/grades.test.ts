import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import type { Grade, PeriodState, Reason } from '../../../processing/state';
import { fluxKeys } from '../../../processing/state';
import { gradePeriod, gradesStep, worstOf } from '../../../processing/steps/grades';
import { addReason } from '../../../processing/steps/ledger';
import { stateWith, turbulentSeries } from './turbulent-state';

function computed(): PeriodState {
  const state = stateWith(turbulentSeries(1, { length: 100 }), 20);
  Object.assign(state.values, {
    ustar: 0.3,
    sensibleHeat: 100,
    latentHeat: 200,
    co2Flux: -10e-6,
    'steadyState.momentum': 0.1,
    'steadyState.sensibleHeat': 0.1,
    'steadyState.latentHeat': 0.2,
    'steadyState.co2Flux': 0.47,
    'integralTurbulence.windW': 0.1,
    'integralTurbulence.windU': 0.4,
  });
  return state;
}

function reason(state: PeriodState, key: string, grade: Grade, fluxes: Reason['fluxes']): void {
  addReason(state, {
    key,
    step: 'screening',
    fluxes,
    grade,
    statistic: { label: 'x', value: 1, unit: '1' },
    finding: 'x',
    sentence: 'x',
  });
}

describe('worstOf', () => {
  it('is good without findings, and names all findings of the worst grade', () => {
    expect(worstOf([])).toEqual({ grade: 0, decidedBy: [] });
    expect(worstOf([{ key: 'a', grade: 0 }])).toEqual({ grade: 0, decidedBy: [] });
    expect(
      worstOf([
        { key: 'a', grade: 1 },
        { key: 'b', grade: 2 },
        { key: 'c', grade: 2 },
      ]),
    ).toEqual({ grade: 2, decidedBy: ['b', 'c'] });
  });

  it('never gets better by a further or worse finding', () => {
    const finding = fc.record({ key: fc.string(), grade: fc.constantFrom<Grade>(0, 1, 2) });
    fc.assert(
      fc.property(fc.array(finding), finding, (some, more) => {
        expect(worstOf([...some, more]).grade).toBeGreaterThanOrEqual(worstOf(some).grade);
        expect(worstOf([...some, more]).grade).toBeGreaterThanOrEqual(more.grade);
      }),
    );
  });

  it('puts the finding farthest beyond its limit first, an equal one in the order of the chain', () => {
    const noLimits = { softLow: null, softHigh: null, hardLow: null, hardHigh: null };
    const finding = (key: string, value: number | null, limits: Partial<Reason['limits']>) => ({
      key,
      grade: 2 as const,
      statistic: { label: key, value, unit: '%' },
      limits: { ...noLimits, ...limits },
    });
    // 37/30 = 1.23, 178/100 = 1.78, at least 90 but 30: 3; without limits: last
    expect(
      worstOf([
        finding('noLimit', 5, {}),
        finding('lag', 37, { softHigh: 15, hardHigh: 30 }),
        finding('steady', 178, { softHigh: 30, hardHigh: 100 }),
        finding('rows', 30, { hardLow: 90 }),
        finding('untested', null, { hardHigh: 1 }),
      ]).decidedBy,
    ).toEqual(['rows', 'steady', 'lag', 'noLimit', 'untested']);
  });
});

describe('gradePeriod', () => {
  it('grades each flux by the worst finding that bears on it', () => {
    const state = computed();
    reason(state, 'steadyState.co2Flux', 1, ['co2Flux']);
    reason(state, 'screening.kurtosis.windW', 1, [...fluxKeys]);
    reason(state, 'wind.sector', 2, ['momentum']);
    reason(state, 'lag.h2o', 0, ['latentHeat']);
    const grades = gradePeriod(state);
    expect(grades.co2Flux).toMatchObject({
      grade: 1,
      decidedBy: ['steadyState.co2Flux', 'screening.kurtosis.windW'],
    });
    expect(grades.momentum).toMatchObject({ grade: 2, decidedBy: ['wind.sector'] });
    expect(grades.latentHeat).toMatchObject({ grade: 1, decidedBy: ['screening.kurtosis.windW'] });
  });

  it('gives steady state and turbulence alone beside it: w for scalars, the worse of u and w for momentum', () => {
    const grades = gradePeriod(computed());
    // RN 47 % → class 3, ITC w 10 % → class 1: overall 4; RN 20 % → 2; momentum RN 10 % → 1, ITC u 40 % → 3: overall 3.
    expect(grades.co2Flux).toEqual({ grade: 0, ssitc: 1, class9: 4, decidedBy: [] });
    expect(grades.latentHeat).toMatchObject({ ssitc: 0, class9: 2 });
    expect(grades.sensibleHeat).toMatchObject({ ssitc: 0, class9: 1 });
    expect(grades.momentum).toMatchObject({ ssitc: 1, class9: 3 });
  });

  it('stands on steady state where turbulence is not testable', () => {
    const state = computed();
    state.values['integralTurbulence.windW'] = Number.NaN;
    state.values['integralTurbulence.windU'] = Number.NaN;
    expect(gradePeriod(state).latentHeat).toMatchObject({ ssitc: 0, class9: 2 });
    expect(gradePeriod(state).momentum).toMatchObject({ ssitc: 0, class9: 1 });
  });

  it('has neither where steady state is not testable', () => {
    const state = computed();
    state.values['steadyState.co2Flux'] = Number.NaN;
    expect(gradePeriod(state).co2Flux).toMatchObject({ grade: 0, ssitc: null, class9: null });
  });

  it('puts wind from an excluded sector into class 9', () => {
    const state = computed();
    state.wind = { ...state.wind!, sectorGrade: 2 };
    for (const flux of fluxKeys) expect(gradePeriod(state)[flux].class9).toBe(9);
  });

  it('gives no grade to a flux without a value, and says what rejected it', () => {
    const state = computed();
    state.values.co2Flux = Number.NaN;
    delete state.values.latentHeat;
    reason(state, 'completeness.co2', 2, ['co2Flux']);
    const grades = gradePeriod(state);
    expect(grades.co2Flux).toEqual({
      grade: null,
      ssitc: null,
      class9: null,
      decidedBy: ['completeness.co2'],
    });
    expect(grades.latentHeat).toEqual({ grade: null, ssitc: null, class9: null, decidedBy: [] });
  });

  it('follows the limits of the recipe', () => {
    const state = computed();
    const settings = {
      ...defaultRecipe.settings,
      steadyState: { subIntervals: 6, goodPercent: 50, usablePercent: 60 },
    };
    expect(gradePeriod({ ...state, settings }).co2Flux.ssitc).toBe(0);
  });
});

describe('gradesStep', () => {
  it('writes the grades into the ledger in words', () => {
    const state = computed();
    reason(state, 'steadyState.co2Flux', 1, ['co2Flux']);
    state.values.sensibleHeat = Number.NaN;
    const [entry] = gradesStep(state, defaultRecipe.settings).ledger;
    expect(entry.summary).toBe('Grades by the worst finding: u* good, H no value, LE good, FC usable.');
    expect(entry.changes).toMatchObject({
      'grade.co2Flux': 1,
      'class9.co2Flux': 4,
      'decidedBy.co2Flux': 'steadyState.co2Flux',
    });
  });
});
