import { describe, expect, it } from 'vitest';
import {
  axisRange,
  describePanel,
  gapsOf,
  periodIndexAt,
  plotSeries,
  readoutText,
  visibleRange,
} from '../../../components/plots/series-plot';
import type { SeriesData } from '../../../server/contract/api';

const half = 1_800_000;

/** Five half hours; the third is missing as a row (a hole), the fourth has no value, the second is rejected. Made by hand. */
const data: SeriesData = {
  runId: '00000000-0000-4000-8000-000000000001',
  startMs: [0, half, 3 * half, 4 * half],
  endMs: [half, 2 * half, 4 * half, 5 * half],
  quantities: {
    co2Flux: [-10e-6, 30e-6, null, -4e-6],
    co2FluxRandom: [1e-6, 2e-6, null, null],
  },
  grades: { co2Flux: [0, 2, null, 1] },
  truth: null,
};

describe('a quantity cut for plotting', () => {
  const series = plotSeries(data, 'co2Flux');

  it('shows the unit people read', () => {
    expect(series.value[0]).toBeCloseTo(-10, 12);
    expect(series.upper[0]).toBeCloseTo(-9, 12);
    expect(series.lower[0]).toBeCloseTo(-11, 12);
  });

  it('never joins the line across a rejected value, a missing one or a hole', () => {
    expect(series.startMs).toEqual([0, half, 2 * half, 3 * half, 4 * half]);
    expect(series.line.map((value) => value === null)).toEqual([false, true, true, true, false]);
    expect(series.value[1]).toBeCloseTo(30, 12);
  });

  it('gives a rejected value no band', () => {
    expect(series.upper[1]).toBeNull();
  });

  it('names holes and missing values as one gap', () => {
    expect(gapsOf(series, 0, 5 * half)).toEqual([{ fromMs: 2 * half, toMs: 4 * half }]);
  });

  it('calls what lies beyond the recorded span a gap', () => {
    expect(gapsOf(series, -half, 6 * half)).toEqual([
      { fromMs: -half, toMs: 0 },
      { fromMs: 2 * half, toMs: 4 * half },
      { fromMs: 5 * half, toMs: 6 * half },
    ]);
  });

  it('keeps a far rejected value from stretching the axis, and zero in sight', () => {
    const [low, high] = axisRange(series, 0, 5 * half);
    expect(low).toBeLessThan(-11);
    expect(high).toBeGreaterThanOrEqual(0);
    expect(high).toBeLessThan(10);
  });
});

describe('the period under an instant', () => {
  it('is found by its half-open span, and is none inside a hole', () => {
    expect(periodIndexAt(data.startMs, data.endMs, 0)).toBe(0);
    expect(periodIndexAt(data.startMs, data.endMs, half)).toBe(1);
    expect(periodIndexAt(data.startMs, data.endMs, 2 * half)).toBe(-1);
    expect(periodIndexAt(data.startMs, data.endMs, 5 * half)).toBe(-1);
    expect(periodIndexAt([], [], 3)).toBe(-1);
  });
});

describe('what is not there', () => {
  const series = plotSeries(data, 'co2Flux');

  it('is told apart: computed without a value, and not computed at all', () => {
    expect(gapsOf(series, 0, 6 * half, 'without-value')).toEqual([{ fromMs: 3 * half, toMs: 4 * half }]);
    expect(gapsOf(series, 0, 6 * half, 'absent')).toEqual([
      { fromMs: 2 * half, toMs: 3 * half },
      { fromMs: 5 * half, toMs: 6 * half },
    ]);
    expect(readoutText(series, 2)).toBe('not computed');
    expect(readoutText(series, 3)).toBe('no data');
  });

  it('never reads as zero', () => {
    expect(readoutText(series, 0)).toBe('−10.00 ± 1.00');
    expect(readoutText(series, 4)).toBe('−4.00');
    expect(describePanel(series, { fromMs: 2 * half, toMs: 4 * half })).toBe('FC: no data in this window');
  });
});

describe('the entries in a window', () => {
  it('are those that touch it', () => {
    const series = plotSeries(data, 'co2Flux');
    expect(visibleRange(series, half, 3 * half)).toEqual([1, 3]);
    expect(visibleRange(series, half + 1, 3 * half + 1)).toEqual([1, 4]);
    expect(visibleRange(series, 9 * half, 10 * half)).toEqual([5, 5]);
  });
});

describe('wind direction', () => {
  const winds: SeriesData = {
    ...data,
    quantities: { windDirection: [350, 358, 4, 12] },
    grades: {},
  };

  it('is never joined by a line, because 358° and 4° are neighbours', () => {
    const series = plotSeries(winds, 'windDirection');
    expect(series.line.every((value) => value === null)).toBe(true);
    expect(series.value.filter((value) => value !== null)).toEqual([350, 358, 4, 12]);
  });

  it('has the whole circle as its axis, with room for the readout above', () => {
    const [low, high] = axisRange(plotSeries(winds, 'windDirection'), 0, 5 * half, 0.3);
    expect(low).toBeLessThanOrEqual(0);
    expect((high - 360) / (high - low)).toBeCloseTo(0.3, 9);
  });
});

describe('room for the readout', () => {
  it('is kept below for FC and above for the others', () => {
    const series = plotSeries(data, 'co2Flux');
    // values in view: −11 … 0 (zero is always in sight); 20 % of the axis below, 5 % above
    const [low, high] = axisRange(series, 0, half, 0.2);
    expect((-11 - low) / (high - low)).toBeCloseTo(0.2, 9);
    expect(high / (high - low)).toBeCloseTo(0.05, 9);
  });
});
