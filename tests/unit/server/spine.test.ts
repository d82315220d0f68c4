import { describe, expect, it } from 'vitest';
import { binned } from '../../../server/services/spine';

const HALF = 1_800_000;

describe('bins of the spine', () => {
  it('hold the recorded share and the shares of grades, by hand: two half hours a bin', () => {
    const halfHours = [
      { startMs: 0, share: 1 },
      { startMs: HALF, share: 0.5 },
      { startMs: 3 * HALF, share: 1 },
    ];
    const graded = [
      { startMs: 0, endMs: HALF, grade: 0 },
      { startMs: HALF, endMs: 2 * HALF, grade: 2 },
      { startMs: 2 * HALF, endMs: 3 * HALF, grade: null },
      { startMs: 3 * HALF, endMs: 4 * HALF, grade: 1 },
    ];
    expect(binned(halfHours, graded, 0, 4 * HALF, 2 * HALF)).toEqual({
      fromMs: 0,
      toMs: 4 * HALF,
      binMs: 2 * HALF,
      recorded: [0.75, 0.5],
      good: [0.5, 0],
      usable: [0, 0.5],
      rejected: [0.5, 0],
    });
  });

  it('count a half hour that two files hold once, in its fuller copy', () => {
    const twice = [
      { startMs: 0, share: 0.25 },
      { startMs: 0, share: 0.75 },
    ];
    expect(binned(twice, [], 0, HALF, HALF).recorded).toEqual([0.75]);
  });

  it('cut what reaches over the ends of the span', () => {
    const across = [{ startMs: -HALF / 2, share: 1 }];
    const period = [{ startMs: HALF, endMs: 3 * HALF, grade: 0 }];
    const bins = binned(across, period, 0, 2 * HALF, HALF);
    expect([bins.recorded, bins.good]).toEqual([
      [0.5, 0],
      [0, 1],
    ]);
  });
});
