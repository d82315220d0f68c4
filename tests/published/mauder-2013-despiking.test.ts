import { describe, expect, it } from 'vitest';
import { defaultValue } from '../../processing/defaults';
import { medianAbsoluteDeviation } from '../../processing/numerics/selection';
import { leaveOutSpikes } from '../../processing/steps/despiking';

/**
 * Mauder et al. (2013), A strategy for quality and uncertainty assessment of long-term eddy-covariance measurements, Agric. For.
 * Meteorol. 169:122–135: spike if |x − median| > 7 MAD / 0.6745 (from memory). Numbers by hand and by numpy.
 */
const eight = Float64Array.of(1, 2, 0, -1, -2, 1, 3, -4);

describe('despiking by median and MAD', () => {
  it('has median 0.5 and MAD 1.5 for eight points', () => {
    const found = medianAbsoluteDeviation(eight);
    expect(found.median).toBe(0.5);
    expect(found.mad).toBe(1.5);
  });

  it('puts the limits of these points at −15.067 and 16.067', () => {
    // 0.5 ± 7 × 1.5/0.6745. Two ninths of each sign keep median and MAD: a value just inside stays, one just outside goes.
    const reach = (7 * 1.5) / defaultValue('despiking.madToSigma');
    expect(0.5 - reach).toBeCloseTo(-15.067086730911786, 12);
    expect(0.5 + reach).toBeCloseTo(16.067086730911786, 12);
    const repeated = (extra: number) =>
      Float64Array.from({ length: 801 }, (_, i) => (i < 800 ? eight[i % 8] : extra));
    // One value more shifts the median of 801 to one of the two middle values, 0 or 1; the MAD becomes 1 or 2.
    const high = leaveOutSpikes(repeated(1000), 7, false);
    expect([high.median, high.mad, high.spikes]).toEqual([1, 2, 1]);
    const inside = repeated(1 + (7 * 2) / 0.6745 - 1e-9);
    const outside = repeated(1 + (7 * 2) / 0.6745 + 1e-9);
    expect(leaveOutSpikes(inside, 7, false).spikes).toBe(0);
    expect(leaveOutSpikes(outside, 7, false).spikes).toBe(1);
  });

  it('uses 0.6745, the third quartile of a Gaussian to four digits', () => {
    expect(1 / defaultValue('despiking.madToSigma')).toBeCloseTo(1.482602218505602, 4);
  });
});
