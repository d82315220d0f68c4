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
  it('spread half hours and grades over the bins they fill', () => {
    const bins = binned(
      [part(0, 0, 1), part(half, 0, 1, 0.5)],
      [
        { startMs: 0, endMs: half, grade: 0 },
        { startMs: half, endMs: 2 * half, grade: 2 },
      ],
      0,
      4 * half,
      2 * half,
    );
    expect(bins.recorded).toEqual([0.75, 0]);
    expect(bins.good).toEqual([0.5, 0]);
    expect(bins.rejected).toEqual([0.5, 0]);
  });
});
