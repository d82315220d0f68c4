import { describe, expect, it } from 'vitest';
import { clampWindow, spineBars, timeTicks } from '../../../components/spine/spine-geometry';
import type { SpineData } from '../../../server/contract/api';

const hour = 3_600_000;
const day = 24 * hour;

describe('bars of the spine', () => {
  const data: SpineData = {
    fromMs: 0,
    toMs: 4 * hour,
    binMs: hour,
    recorded: [1, 0.5, 0, 1],
    gradedFlux: 'FC',
    good: [1, 0, 0, 0.25],
    usable: [0, 0.5, 0, 0.25],
    rejected: [0, 0, 0, 0.5],
    setUpChangesMs: [],
    runId: null,
  };

  it('leaves out a bin in which nothing was recorded', () => {
    const bars = spineBars(data, 400);
    expect(bars.map((bar) => bar.x)).toEqual([0, 100, 300]);
    expect(bars.every((bar) => bar.width === 100)).toBe(true);
  });
});

describe('time ticks', () => {
  it('stand on whole hours of the station clock, not of UTC', () => {
    // A day at UTC+5:45: midnight there is 18:15 UTC.
    const fromMs = Date.UTC(2027, 5, 16, 18, 15);
    const ticks = timeTicks({ fromMs, toMs: fromMs + day, width: 600 }, 345, 62);
    expect(ticks[0]).toEqual({ atMs: fromMs, label: '17 Jun', major: true });
    expect(ticks.slice(1).map((tick) => tick.label)).toEqual([
      '03:00',
      '06:00',
      '09:00',
      '12:00',
      '15:00',
      '18:00',
      '21:00',
      '18 Jun',
    ]);
  });

  it('become months and years over long spans, and never stand closer than asked', () => {
    const fromMs = Date.UTC(2007, 0, 1);
    const toMs = Date.UTC(2027, 0, 1);
    const ticks = timeTicks({ fromMs, toMs, width: 900 }, 0, 62);
    expect(ticks.every((tick) => /^\d{4}$/.test(tick.label))).toBe(true);
    const gaps = ticks
      .slice(1)
      .map((tick, index) => ((tick.atMs - ticks[index].atMs) / (toMs - fromMs)) * 900);
    expect(Math.min(...gaps)).toBeGreaterThan(60);
  });
});

describe('a window kept inside the strip', () => {
  it('moves without changing its length', () => {
    expect(clampWindow({ fromMs: -5, toMs: 5 }, { fromMs: 0, toMs: 100 })).toEqual({ fromMs: 0, toMs: 10 });
    expect(clampWindow({ fromMs: 95, toMs: 105 }, { fromMs: 0, toMs: 100 })).toEqual({
      fromMs: 90,
      toMs: 100,
    });
  });

  it('shrinks only when it is longer than the strip', () => {
    expect(clampWindow({ fromMs: -50, toMs: 200 }, { fromMs: 0, toMs: 100 })).toEqual({
      fromMs: 0,
      toMs: 100,
    });
  });
});
