import { describe, expect, it } from 'vitest';
import { STATUS_MISSING } from '../../../processing/chunks/chunk';
import type { PeriodState } from '../../../processing/state';
import { completenessStep } from '../../../processing/steps/completeness';
import { diagnosticsStep, isGoodCode, signalStrengthLimit } from '../../../processing/steps/diagnostics';
import type { Recorded } from './recorded-state';
import { plainChannels, recordedState } from './recorded-state';

const n = 1000;
const zeroIsGood = { codes: [0], mask: null, equals: null };

function judged(recorded: Partial<Recorded>): PeriodState {
  const state = recordedState({ values: plainChannels(n), ...recorded });
  completenessStep(state, state.settings.completeness);
  return diagnosticsStep(state, state.settings.diagnostics);
}

const badFirst = (count: number, code = 4) => new Int32Array(n).fill(code, 0, count);
const keys = (state: PeriodState) => state.reasons.map(({ key, grade }) => `${key} ${grade}`);

describe('good codes', () => {
  it('accepts listed codes', () => {
    expect(isGoodCode(0, zeroIsGood)).toBe(true);
    expect(isGoodCode(3, { ...zeroIsGood, codes: [0, 3] })).toBe(true);
    expect(isGoodCode(1, zeroIsGood)).toBe(false);
  });

  it('accepts codes whose masked bits have the right value', () => {
    // Upper four bits must be 1111, the lower ones carry something else.
    const rule = { codes: [], mask: 0xf0, equals: 0xf0 };
    expect(isGoodCode(0xf7, rule)).toBe(true);
    expect(isGoodCode(0xe7, rule)).toBe(false);
  });

  it('never takes a missing code for good', () => {
    expect(isGoodCode(STATUS_MISSING, { codes: [STATUS_MISSING], mask: 0, equals: 0 })).toBe(false);
  });
});

describe('limit of signal strength', () => {
  it('lies some points below the reference of clean windows', () => {
    expect(signalStrengthLimit(96, 10, null, true)).toEqual({ limit: 86, rule: 'relative' });
  });

  it('is the absolute one only where the set-up states it, and the stricter of both', () => {
    expect(signalStrengthLimit(96, 10, 70, true)).toEqual({ limit: 86, rule: 'relative' });
    expect(signalStrengthLimit(75, 10, 70, true)).toEqual({ limit: 70, rule: 'absolute' });
    expect(signalStrengthLimit(null, 10, 70, true)).toEqual({ limit: 70, rule: 'absolute' });
    expect(signalStrengthLimit(96, null, null, true).rule).toBe('none');
    expect(signalStrengthLimit(null, 10, null, true).limit).toBeNaN();
  });

  it('lies above the reference where less is better', () => {
    expect(signalStrengthLimit(20, 10, null, false)).toEqual({ limit: 30, rule: 'relative' });
    expect(signalStrengthLimit(20, 10, 25, false)).toEqual({ limit: 25, rule: 'absolute' });
  });
});

describe('diagnostics step', () => {
  it('flags 12 % bad analyser scans 1 and takes them out of both gases and nothing else', () => {
    const state = judged({
      status: { analyserStatus: badFirst(120) },
      context: { goodCodes: { analyserStatus: zeroIsGood } },
    });
    expect(keys(state)).toEqual(['diagnostics.analyser 1']);
    expect(state.reasons[0].fluxes).toEqual(['latentHeat', 'co2Flux']);
    expect(state.values['rejectedByStatus.analyser']).toBeCloseTo(0.12, 12);
    for (const gas of ['co2', 'h2o'] as const) {
      expect(state.series[gas]!.slice(0, 120).every(Number.isNaN)).toBe(true);
      expect(state.series[gas]!.slice(120).some(Number.isNaN)).toBe(false);
      expect(state.counts[gas]).toMatchObject({ badStatus: 120, valid: n - 120 });
    }
    expect(state.series.windW!.some(Number.isNaN)).toBe(false);
    expect(state.ledger[1].counts?.co2).toEqual({ before: n, after: n - 120 });
  });

  it('takes a bad sonic scan out of wind and temperature, and bears on all fluxes', () => {
    const state = judged({
      status: { sonicStatus: badFirst(301) },
      context: { goodCodes: { sonicStatus: zeroIsGood } },
    });
    expect(keys(state)).toEqual(['diagnostics.sonic 2']);
    expect(state.reasons[0].fluxes).toHaveLength(4);
    expect(Number.isNaN(state.series.sonicTemperature![300])).toBe(true);
    expect(Number.isNaN(state.series.sonicTemperature![301])).toBe(false);
    expect(state.series.co2!.some(Number.isNaN)).toBe(false);
  });

  it('accepts exactly 10 % and 30 %', () => {
    const bad = (count: number) =>
      judged({
        status: { sonicStatus: badFirst(count) },
        context: { goodCodes: { sonicStatus: zeroIsGood } },
      });
    expect(keys(bad(100))).toEqual([]);
    expect(keys(bad(101))).toEqual(['diagnostics.sonic 1']);
    expect(keys(bad(300))).toEqual(['diagnostics.sonic 1']);
  });

  it('counts shares of the recorded scans, not of absent ones', () => {
    const present = new Uint8Array(n).fill(1);
    present.fill(0, 0, 90);
    const state = judged({
      present,
      status: { sonicStatus: badFirst(180, STATUS_MISSING) },
      context: { goodCodes: { sonicStatus: zeroIsGood } },
    });
    // 90 of 910 recorded scans carry no code.
    expect(state.values['rejectedByStatus.sonic']).toBeCloseTo(90 / 910, 12);
  });

  it('drops samples more than 10 points below the reference, and says that windows are dirty', () => {
    const signal = new Float64Array(n).fill(95);
    signal.fill(85, 0, 200);
    signal[200] = 86;
    const state = judged({
      values: { ...plainChannels(n), signalStrength: signal },
      context: { signalStrengthReference: 96 },
    });
    expect(keys(state)).toEqual(['diagnostics.signalStrength 1']);
    expect(state.counts.co2).toMatchObject({ lowSignal: 200, valid: 800 });
    expect(Number.isNaN(state.series.co2![200])).toBe(false);
    // (200 × 85 + 86 + 799 × 95)/1000 = 92.991.
    expect(state.values.signalStrength).toBeCloseTo(92.991, 9);
    expect(state.values.signalStrengthMin).toBe(85);
    expect(state.reasons[0].sentence).toContain('clean windows here: 96.0 %');
  });

  it('counts a scan that is bad and dim once', () => {
    const signal = new Float64Array(n).fill(95);
    signal.fill(50, 0, 60);
    const state = judged({
      values: { ...plainChannels(n), signalStrength: signal },
      status: { analyserStatus: badFirst(40) },
      context: { signalStrengthReference: 96, goodCodes: { analyserStatus: zeroIsGood } },
    });
    expect(state.values['rejectedByStatus.analyser']).toBeCloseTo(0.06, 12);
    expect(state.counts.h2o).toMatchObject({ badStatus: 40, lowSignal: 20, valid: 940 });
  });

  it('judges nothing without rules or reference, and the ledger says so', () => {
    const signal = new Float64Array(n).fill(3);
    const state = judged({
      values: { ...plainChannels(n), signalStrength: signal },
      status: { analyserStatus: badFirst(n) },
      context: { goodCodes: { analyserStatus: { codes: [], mask: null, equals: null } } },
    });
    expect(state.reasons).toEqual([]);
    expect(state.values['rejectedByStatus.analyser']).toBeUndefined();
    expect(state.ledger[1].summary).toContain('no reference yet');
  });

  it('uses the absolute limit only where the recipe lets it', () => {
    const signal = new Float64Array(n).fill(65);
    const base = recordedState({ values: {} });
    const analyser = { ...base.setUp.analyser, signalStrengthLimitPercent: 70 };
    const values = () => ({ ...plainChannels(n), signalStrength: signal });
    expect(keys(judged({ values: values(), setUp: { analyser } }))).toEqual(['diagnostics.signalStrength 2']);
    const { diagnostics } = base.settings;
    const off = {
      ...diagnostics,
      signalStrength: { ...diagnostics.signalStrength, useAbsoluteLimit: false },
    };
    expect(keys(judged({ values: values(), setUp: { analyser }, settings: { diagnostics: off } }))).toEqual(
      [],
    );
  });
});
