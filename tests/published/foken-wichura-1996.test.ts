import { describe, expect, it } from 'vitest';
import { deviationClass } from '../../processing/steps/grades';
import { steadyState } from '../../processing/steps/steady-state';

/**
 * Steady-state test of Foken & Wichura (1996), Agric. For. Meteorol. 78:83–105, on a record whose answer is known by hand:
 * six blocks of 100 samples alternating +1, −1 on offsets ±½, the same in both series. Each block has covariance 1; the offsets add
 * their variance ¼ to the whole: 1.25; so RN = |1 − 1.25|/1.25 = 0.2.
 */
describe('steady-state test', () => {
  const offsets = [0.5, 0.5, 0.5, -0.5, -0.5, -0.5];
  const series = Float64Array.from(
    { length: 600 },
    (_, i) => (i % 2 === 0 ? 1 : -1) + offsets[Math.floor(i / 100)],
  );

  it('finds a deviation of 20 %, class 2, in the constructed record', () => {
    const found = steadyState(series, series, 6);
    expect(found.parts).toHaveLength(6);
    for (const part of found.parts) expect(part).toBeCloseTo(1, 12);
    expect(found.shortCovariance).toBeCloseTo(1, 12);
    expect(found.wholeCovariance).toBeCloseTo(1.25, 12);
    expect(found.deviation).toBeCloseTo(0.2, 12);
    expect(deviationClass(found.deviation * 100)).toBe(2);
  });
});
