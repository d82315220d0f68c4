import { describe, expect, it } from 'vitest';
import { binned, recordedShares } from '../../../server/services/spine';

const half = 1_800_000;
const part = (startMs: number, from: number, to: number, recorded = to - from) => ({
  startMs,
  from,
  to,
  recorded,
});

describe('recorded share of half hours', () => {
  it('adds the parts of a half hour that two files cut between them', () => {
    expect(recordedShares([part(0, 0, 0.43), part(0, 0.43, 1)]).get(0)).toBeCloseTo(1, 12);
  });

  it('counts a stretch once that two files both hold', () => {
    expect(recordedShares([part(0, 0, 0.5), part(0, 0, 0.5)]).get(0)).toBeCloseTo(0.5, 12);
    expect(recordedShares([part(0, 0, 0.6), part(0, 0.4, 0.8)]).get(0)).toBeCloseTo(0.8, 12);
  });

  it('shows scans lost inside a file', () => {
    expect(recordedShares([part(0, 0, 1, 0.4)]).get(0)).toBeCloseTo(0.4, 12);
  });
});

describe('bins of the spine', () => {
  it('hold the recorded share and the shares of grades, by hand: two half hours a bin', () => {
    const halfHours = [part(0, 0, 1), part(half, 0, 1, 0.5), part(3 * half, 0, 1)];
    const graded = [
      { startMs: 0, endMs: half, grade: 0 },
      { startMs: half, endMs: 2 * half, grade: 2 },
      { startMs: 2 * half, endMs: 3 * half, grade: null },
      { startMs: 3 * half, endMs: 4 * half, grade: 1 },
    ];
    expect(binned(halfHours, graded, 0, 4 * half, 2 * half)).toEqual({
      fromMs: 0,
      toMs: 4 * half,
      binMs: 2 * half,
      recorded: [0.75, 0.5],
      good: [0.5, 0],
      usable: [0, 0.5],
      rejected: [0.5, 0],
    });
  });

  it('count a half hour that two files hold once, in its fuller copy', () => {
    const twice = [part(0, 0, 0.25), part(0, 0, 0.75)];
    expect(binned(twice, [], 0, half, half).recorded).toEqual([0.75]);
  });

  it('cut what reaches over the ends of the span', () => {
    const period = [{ startMs: half, endMs: 3 * half, grade: 0 }];
    const bins = binned([part(-half / 2, 0, 1)], period, 0, 2 * half, half);
    expect([bins.recorded, bins.good]).toEqual([
      [0.5, 0],
      [0, 1],
    ]);
  });
});
