import { describe, expect, it, vi } from 'vitest';
import { weatherWords } from '../../../../components/series/PeriodInspector';
import { passedTests } from '../../../../components/series/passed-tests';
import { reasonsOf, valueGroups, verdictFlux, verdictWords } from '../../../../components/series/period-view';
import { isFlagged, mainFindingWords } from '../../../../components/series/PeriodTable';
import { limitDecimals, limitOf } from '../../../../components/series/ReasonList';
import type { PeriodDetail } from '../../../../server/contract/api';

vi.mock('expo-router', () => ({ router: { push: vi.fn() } }));

const noLimits = { softLow: null, softHigh: null, hardLow: null, hardHigh: null };

function reason(
  key: string,
  fluxes: string[],
  grade: 0 | 1 | 2,
  finding: string,
): PeriodDetail['reasons'][number] {
  return {
    key,
    step: key.split('.')[0] ?? '',
    fluxes,
    series: null,
    grade,
    statistic: { label: key, value: null, unit: '%' },
    limits: noLimits,
    finding,
    sentence: `${finding}.`,
  };
}

function grade(value: number | null, decidedBy: string[] = []) {
  return { grade: value, ssitc: null, class9: null, decidedBy };
}

/** A period in which CO2 is rejected by two findings, written by hand. */
const period: PeriodDetail = {
  startMs: 0,
  endMs: 1_800_000,
  outcome: 'computed',
  values: {
    co2Flux: -12e-6,
    windSpeed: 3.14,
    windDirection: 214.2,
    zeta: -0.18,
    airTemperature: 290.95,
    'missing.windW': 0.001,
    'missing.co2': 0.4,
    'missing.h2o': 0.001,
    'missing.windU': 0.001,
    'steadyState.co2Flux': 0.47,
    'steadyState.momentum': 0.1,
    'screening.dropoutInterior.co2': 0.2,
    'screening.dropoutExtreme.co2': 0.01,
    'screening.skewness.co2': null,
  },
  grades: {
    co2Flux: grade(2, ['steadyState.co2Flux', 'screening.dropouts.co2']),
    latentHeat: grade(1, ['completeness.h2o']),
    sensibleHeat: grade(0),
    momentum: grade(0),
  },
  mainFinding: {
    co2Flux: 'Steady-state deviation 47 %',
    latentHeat: null,
    sensibleHeat: null,
    momentum: null,
  },
  reasons: [
    reason('lag.co2', ['co2Flux'], 0, 'CO2 lag at edge of search'),
    reason('completeness.co2', ['co2Flux'], 1, 'CO2 missing 40 %'),
    reason('screening.dropouts.co2', ['co2Flux'], 2, 'CO2 stuck for 20 %'),
    reason('steadyState.co2Flux', ['co2Flux'], 2, 'Steady-state deviation 47 %'),
    reason('completeness.h2o', ['latentHeat'], 1, 'H2O missing 12 %'),
  ],
  ledger: [],
  curves: {},
  rawFiles: [],
  previousStartMs: null,
  nextStartMs: null,
};

describe('the reasons of a flux', () => {
  it('begin with what decided its grade, in that order, and end with what changes nothing', () => {
    expect(reasonsOf(period, 'co2Flux').map((one) => one.key)).toEqual([
      'steadyState.co2Flux',
      'screening.dropouts.co2',
      'completeness.co2',
      'lag.co2',
    ]);
  });
});

describe('the flux that speaks for a period', () => {
  it('is the one with the worst grade, the first of equals', () => {
    expect(verdictFlux(period)).toBe('co2Flux');
    expect(verdictFlux({ grades: { ...period.grades, co2Flux: grade(0), latentHeat: grade(0) } })).toBe(
      'co2Flux',
    );
    expect(verdictFlux({ grades: { ...period.grades, co2Flux: grade(1), momentum: grade(2) } })).toBe(
      'momentum',
    );
  });

  it('is one that lost its value to a finding before one that is merely usable', () => {
    const grades = { ...period.grades, co2Flux: grade(null, ['completeness.co2']), sensibleHeat: grade(1) };
    expect(verdictFlux({ grades })).toBe('co2Flux');
  });

  it('is not one that nobody measures', () => {
    const grades = {
      ...period.grades,
      co2Flux: grade(null),
      latentHeat: grade(null),
      sensibleHeat: grade(1),
    };
    expect(verdictFlux({ grades })).toBe('sensibleHeat');
  });
});

describe('the words of a verdict', () => {
  it('name what decides, as the end of a sentence', () => {
    expect(verdictWords(period, 'co2Flux')).toBe('steady-state deviation 47 %');
  });

  it('keep the capitals of a symbol', () => {
    expect(verdictWords(period, 'latentHeat')).toBe('H2O missing 12 %');
  });

  it('say that all is well, that nothing was recorded, or that nothing is measured', () => {
    expect(verdictWords(period, 'momentum')).toBe('every test within its limits');
    expect(verdictWords({ ...period, outcome: 'empty' }, 'co2Flux')).toBe('nothing was recorded');
    expect(verdictWords({ ...period, grades: {}, reasons: [] }, 'co2Flux')).toBe('not measured');
  });
});

describe('tests within limits', () => {
  it('are those with a statistic and without a finding, each counted once', () => {
    expect(passedTests(period, 'co2Flux').map((test) => test.key)).toEqual([
      'missing.windW',
      'windDirection',
    ]);
    expect(passedTests(period, 'momentum').map((test) => test.key)).toEqual([
      'missing.windU',
      'missing.windW',
      'windDirection',
      'steadyState.momentum',
    ]);
  });

  it('do not exist in a period that was not computed', () => {
    expect(passedTests({ ...period, outcome: 'stopped' }, 'co2Flux')).toEqual([]);
  });

  it('do not hold the wind direction where a sector was found', () => {
    const behind = { ...period, reasons: [reason('sectors.2', ['co2Flux'], 2, 'Wind from a wood')] };
    expect(passedTests(behind, 'co2Flux').map((test) => test.key)).not.toContain('windDirection');
  });
});

describe('the limit bar of a finding', () => {
  it('is left out where nothing is measured against a limit', () => {
    const statistic = { label: 'boundaries known', value: 1, unit: '1' };
    expect(limitOf({ grade: 0, statistic, limits: noLimits })).toBeUndefined();
    expect(
      limitOf({ grade: 2, statistic: { ...statistic, value: null }, limits: { ...noLimits, hardHigh: 3 } }),
    ).toBeUndefined();
    expect(
      limitOf({ grade: 2, statistic: { ...statistic, value: 0 }, limits: { ...noLimits, hardLow: 0 } }),
    ).toBeUndefined();
  });

  it('writes degrees as a sign and a bare ratio without unit', () => {
    const limits = { ...noLimits, hardLow: 45 };
    expect(limitOf({ grade: 2, statistic: { label: 'angle', value: 39, unit: 'deg' }, limits })?.unit).toBe(
      '°',
    );
    expect(limitOf({ grade: 2, statistic: { label: 'ratio', value: 39, unit: '1' }, limits })?.unit).toBe('');
  });

  it('shows as many decimals as tell a value from its limit', () => {
    // 2.0117 against 2 and 3: "2" and "2.0" would seem within the limit
    expect(limitDecimals(2.0117, [2, 3])).toBe(2);
    expect(limitDecimals(47.3, [30, 100])).toBe(0);
    expect(limitDecimals(30.04, [30, 100])).toBe(2);
    expect(limitDecimals(0.5, [1])).toBe(2);
  });
});

describe('all values of a period', () => {
  it('stand in groups in the order of the catalogue, without unknown keys', () => {
    const groups = valueGroups({ zeta: 0.1, windSpeed: 2, co2Flux: null, ustar: 0.3, somethingElse: 1 });
    expect(groups.map((group) => group.title)).toEqual(['Fluxes', 'Wind', 'Turbulence']);
    expect(groups[0]?.rows).toEqual([
      { key: 'co2Flux', value: null },
      { key: 'ustar', value: 0.3 },
    ]);
  });
});

describe('the line about the weather', () => {
  it('carries units and leaves out what is missing', () => {
    // 290.95 K − 273.15 K = 17.80 °C
    expect(weatherWords(period.values)).toBe('Wind from 214° at 3.14 m s-1 · z/L −0.18 · air 17.80 °C');
    expect(weatherWords({ windSpeed: null, zeta: 0.5 })).toBe('z/L 0.50');
    expect(weatherWords({})).toBe('');
  });
});

describe('a row of the table', () => {
  it('names the flux and the finding that decided', () => {
    expect(mainFindingWords(period)).toBe('FC: steady-state deviation 47 %');
    expect(mainFindingWords({ ...period, outcome: 'empty' })).toBe('nothing recorded');
  });

  it('needs a look unless every flux is good', () => {
    expect(isFlagged(period)).toBe(true);
    const all = { co2Flux: grade(0), latentHeat: grade(0), sensibleHeat: grade(0), momentum: grade(0) };
    expect(isFlagged({ grades: all })).toBe(false);
    expect(isFlagged({ grades: { ...all, momentum: grade(null) } })).toBe(true);
  });
});
