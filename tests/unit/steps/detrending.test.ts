import { describe, expect, it } from 'vitest';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import { detrendingStep, removeBlockMean, trendShare } from '../../../processing/steps/detrending';
import { stateWith, turbulentSeries } from './turbulent-state';

describe('removeBlockMean', () => {
  it('takes off the mean of the valid values and leaves gaps', () => {
    const values = Float64Array.of(1, Number.NaN, 3, 5);
    expect(removeBlockMean(values, values)).toBe(3);
    expect([...values]).toEqual([-2, Number.NaN, 0, 2]);
  });

  it('leaves a sinusoid of whole cycles untouched', () => {
    const wave = Float64Array.from({ length: 600 }, (_, i) => Math.cos((2 * Math.PI * 3 * i) / 600));
    const kept = wave.slice();
    removeBlockMean(wave, wave);
    wave.forEach((value, i) => expect(Math.abs(value - kept[i])).toBeLessThan(1e-15));
  });

  it('has no mean for a series without values', () => {
    expect(removeBlockMean(new Float64Array(3).fill(Number.NaN), new Float64Array(3))).toBeNaN();
  });
});

describe('trendShare', () => {
  it('is 1 for a straight line, with gaps too, and 0 for a symmetric arch', () => {
    const line = Float64Array.from({ length: 100 }, (_, i) => 280 - 0.02 * i);
    line[7] = Number.NaN;
    expect(trendShare(line).slope).toBeCloseTo(-0.02, 12);
    expect(trendShare(line).share).toBeCloseTo(1, 9);
    const arch = Float64Array.from({ length: 101 }, (_, i) => (i - 50) ** 2);
    expect(trendShare(arch).share).toBeCloseTo(0, 12);
  });

  it('equals the squared correlation with time, worked out by hand', () => {
    // t = 0…3, x = 0, 1, 1, 2: cov = 0.75, var t = 1.25, var x = 0.5, r² = 0.5625/0.625 = 0.9.
    expect(trendShare(Float64Array.of(0, 1, 1, 2)).share).toBeCloseTo(0.9, 12);
  });

  it('is unknown for two values or a constant', () => {
    expect(trendShare(Float64Array.of(1, 2)).share).toBeNaN();
    expect(trendShare(new Float64Array(9).fill(293)).share).toBeNaN();
  });
});

describe('detrendingStep', () => {
  it('leaves the series, whose means later steps need, and tells the drift that stays in', () => {
    const series = turbulentSeries(2, { length: 3000 });
    series.co2 = series.co2.map((value, i) => value + 1e-6 * i);
    const kept = series.co2.slice();
    const state = detrendingStep(stateWith(series, 20), defaultRecipe.settings.detrending);
    expect(state.series.co2).toEqual(kept);
    const [entry] = state.ledger;
    expect(entry.step).toBe('detrending');
    expect(entry.changes['trendShare.co2'] as number).toBeGreaterThan(0.9);
    // 10⁻⁶ per sample at 20 Hz is 0.072 per hour; the turbulence adds some per cent.
    expect(entry.changes['trendPerHour.co2'] as number).toBeCloseTo(0.072, 2);
    expect(entry.summary).toContain('(CO2)');
  });
});
