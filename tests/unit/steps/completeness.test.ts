import { describe, expect, it } from 'vitest';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import type { PeriodState } from '../../../processing/state';
import {
  clockDrift,
  completenessStep,
  expectedSamples,
  finalCompleteness,
  gapsIn,
  gradeOfMissing,
} from '../../../processing/steps/completeness';
import type { Recorded } from './recorded-state';
import { channelsWithout, plainChannels, recordedState } from './recorded-state';

const limits = defaultRecipe.settings.completeness;
const n = 1000;

function judged(recorded: Partial<Recorded> = {}): PeriodState {
  const state = recordedState({ values: plainChannels(n), ...recorded });
  return completenessStep(state, state.settings.completeness);
}

/** Scans `from` … `to` − 1 are absent, in the mask and in every channel. */
function without(from: number, to: number): Partial<Recorded> {
  const values = plainChannels(n);
  const present = new Uint8Array(n).fill(1);
  for (let i = from; i < to; i++) {
    present[i] = 0;
    for (const channel of Object.values(values)) channel[i] = NaN;
  }
  return { values, present };
}

const reasonOf = (state: PeriodState, key: string) => state.reasons.find((reason) => reason.key === key);

describe('counting scans', () => {
  it('expects 18,000 samples of 10 Hz in half an hour', () => {
    expect(expectedSamples(10, 1800)).toBe(18_000);
    expect(expectedSamples(20, 1800)).toBe(36_000);
  });

  it('expects as many in a half hour in which the civil clock changes', () => {
    // 28 March 2027, 01:00 UTC: clocks in central Europe go from 02:00 to 03:00.
    const startMs = Date.UTC(2027, 2, 28, 0, 45);
    const endMs = Date.UTC(2027, 2, 28, 1, 15);
    expect(expectedSamples(10, (endMs - startMs) / 1000)).toBe(18_000);
  });

  it('passes 1800 of 18,000 missing and flags 1801', () => {
    expect(gradeOfMissing(18_000 - 1800, 18_000, limits)).toBe(0);
    expect(gradeOfMissing(18_000 - 1801, 18_000, limits)).toBe(1);
    expect(gradeOfMissing(9000, 18_000, limits)).toBe(1);
    expect(gradeOfMissing(8999, 18_000, limits)).toBe(2);
  });

  it('finds gaps, the longest of them and where it begins', () => {
    expect(gapsIn(Uint8Array.of(0, 1, 1, 0, 0, 0, 1, 0))).toEqual({
      recorded: 3,
      gaps: 3,
      longestGap: 3,
      longestGapAt: 3,
    });
    expect(gapsIn(Uint8Array.of(1, 1))).toEqual({ recorded: 2, gaps: 0, longestGap: 0, longestGapAt: -1 });
    expect(gapsIn(new Uint8Array(4)).longestGap).toBe(4);
  });

  it('compares the fitted with the nominal rate', () => {
    expect(clockDrift(9.98, 10)).toBeCloseTo(-0.002, 12);
    expect(clockDrift(null, 10)).toBeNaN();
  });
});

describe('completeness step', () => {
  it('says nothing against a complete period', () => {
    const state = judged();
    expect(state.reasons).toEqual([]);
    expect(state.stopped).toBe(false);
    expect(state.values).toMatchObject({
      samplesExpected: n,
      samplesRead: n,
      longestGap: 0,
      duplicates: 0,
      clockJumps: 0,
      'missing.co2': 0,
    });
    expect(state.counts.windW).toMatchObject({ expected: n, valid: n });
    expect(state.ledger).toHaveLength(1);
  });

  it('counts duplicates without counting more scans', () => {
    const state = judged({ intake: { duplicates: 10, rowsRead: n + 10 } });
    expect(state.values.duplicates).toBe(10);
    expect(state.values.samplesRead).toBe(n);
    expect(state.reasons).toEqual([]);
  });

  it('grades 1 above 10 % of missing scans and names the longest gap', () => {
    const state = judged(without(200, 301));
    const reason = reasonOf(state, 'completeness.scans');
    expect(reason?.grade).toBe(1);
    expect(reason?.statistic.value).toBeCloseTo(10.1, 12);
    expect(reason?.limits).toMatchObject({ softHigh: 10, hardHigh: 50 });
    expect(reason?.fluxes).toEqual(['momentum', 'sensibleHeat', 'latentHeat', 'co2Flux']);
    // 101 scans at 10 Hz, from the 200th on.
    expect(reason?.sentence).toContain('the longest gap lasts 10 s, from 20 s on');
    expect(reason?.atS).toBe(20);
    expect(state.values.longestGap).toBeCloseTo(10.1, 12);
    expect(state.stopped).toBe(false);
  });

  it('is silent at exactly 10 %', () => {
    expect(judged(without(200, 300)).reasons).toEqual([]);
  });

  it('stops above 50 %, and only there', () => {
    expect(judged(without(0, 500)).stopped).toBe(false);
    const state = judged(without(0, 501));
    expect(state.stopped).toBe(true);
    expect(reasonOf(state, 'completeness.scans')?.grade).toBe(2);
  });

  it('stops an empty period and says that nothing was recorded', () => {
    const state = judged(without(0, n));
    expect(state.stopped).toBe(true);
    expect(state.values.samplesRead).toBe(0);
    expect(reasonOf(state, 'completeness.scans')?.finding).toBe('No scans recorded');
  });

  it('stops without a wind component, but not without a gas', () => {
    const stopped = judged({ values: channelsWithout('windV', n) });
    expect(stopped.stopped).toBe(true);
    expect(reasonOf(stopped, 'completeness.windV')?.fluxes).toHaveLength(4);

    const going = judged({ values: channelsWithout('co2', n) });
    expect(going.stopped).toBe(false);
    expect(reasonOf(going, 'completeness.co2')).toMatchObject({ grade: 2, fluxes: ['co2Flux'] });
  });
});

describe('clock', () => {
  it('grades a clock that jumped with hardly a scan missing 1', () => {
    const state = judged({ ...without(500, 509), intake: { clockJumps: 1, largestJumpS: 0.9 } });
    expect(reasonOf(state, 'completeness.clock')).toMatchObject({
      grade: 1,
      finding: 'Clock jumped 0.90 s ahead',
    });
    expect(state.values.clockJumps).toBe(1);
  });

  it('takes a jump over a long gap for an outage, graded by what is missing', () => {
    const small = judged({ ...without(500, 550), intake: { clockJumps: 1, largestJumpS: 5 } });
    expect(reasonOf(small, 'completeness.clock')?.grade).toBe(0);
    const large = judged({ ...without(500, 700), intake: { clockJumps: 1, largestJumpS: 20 } });
    expect(reasonOf(large, 'completeness.clock')?.grade).toBe(1);
  });

  it('rejects a period in which the clock went back', () => {
    const state = judged({ intake: { backwardSteps: 2, clockJumps: 3, largestJumpS: -1.5 } });
    const reason = reasonOf(state, 'completeness.clock');
    expect(reason?.grade).toBe(2);
    expect(reason?.sentence).toContain('1.5 s');
    expect(state.reasons.filter(({ key }) => key === 'completeness.clock')).toHaveLength(1);
  });

  it('mentions a drift above 0.1 % without grading it', () => {
    expect(reasonOf(judged({ intake: { fittedRateHz: 10.011 } }), 'completeness.drift')?.grade).toBe(0);
    expect(reasonOf(judged({ intake: { fittedRateHz: 10.009 } }), 'completeness.drift')).toBeUndefined();
  });
});

describe('completeness after all removals', () => {
  const lose = (state: PeriodState, key: 'co2' | 'h2o' | 'windU' | 'windW', count: number) => {
    state.series[key]!.fill(NaN, 0, count);
    state.counts[key]!.badStatus += count;
    state.counts[key]!.valid -= count;
  };

  it('grades a thinned series and only the fluxes that need it', () => {
    const state = judged();
    lose(state, 'h2o', 101);
    finalCompleteness(state);
    expect(state.reasons).toHaveLength(1);
    expect(state.reasons[0]).toMatchObject({
      key: 'completeness.h2o',
      grade: 1,
      fluxes: ['latentHeat', 'co2Flux'],
    });
    expect(state.reasons[0].sentence).toContain('10 % called bad by the instrument');
    expect(state.values['missing.h2o']).toBeCloseTo(0.101, 12);
    expect(state.series.h2o).toBeDefined();
  });

  it('drops a series with more than half missing', () => {
    const state = judged();
    lose(state, 'co2', 501);
    finalCompleteness(state);
    expect(state.series.co2).toBeUndefined();
    expect(state.reasons[0]).toMatchObject({ key: 'completeness.co2', grade: 2, fluxes: ['co2Flux'] });
    expect(state.stopped).toBe(false);
    expect(state.ledger[0].changes.droppedSeries).toBe('co2');
  });

  it('stops when a wind component is dropped, and takes all fluxes with it', () => {
    const state = judged();
    lose(state, 'windU', 600);
    finalCompleteness(state);
    expect(state.stopped).toBe(true);
    expect(state.reasons[0].fluxes).toHaveLength(4);
  });

  it('does not tell again what the missing scans alone explain', () => {
    const state = judged(without(0, 150));
    finalCompleteness(state);
    expect(state.reasons.map(({ key }) => key)).toEqual(['completeness.scans']);
    expect(state.values['missing.co2']).toBeCloseTo(0.15, 12);
  });

  it('tells one story when the whole sonic is thinned', () => {
    const state = judged();
    for (const key of ['windU', 'windV', 'windW', 'sonicTemperature'] as const) {
      state.series[key]!.fill(NaN, 0, 120);
    }
    finalCompleteness(state);
    expect(state.reasons.map(({ key }) => key)).toEqual(['completeness.sonic']);
    expect(state.reasons[0].fluxes).toHaveLength(4);
  });
});
