import { describe, expect, it } from 'vitest';
import { SplitMix64 } from '../../../processing/numerics/random';
import {
  drivenPeriod,
  slowMeans,
  standardDriver,
  surfaceFluxes,
} from '../../../processing/synthetic/diurnal-driver';
import { generateTurbulence } from '../../../processing/synthetic/turbulence';
import { covariance } from './reference-parameters';

describe('invented day', () => {
  it('can be met in all 48 half hours, with z/L between −0.18 and 0.49', () => {
    // z/L limits from an independent numpy run with z_m = 4 m, d = 0.2 m, z0 = 0.03 m ("about").
    let [low, high] = [Infinity, -Infinity];
    for (let halfHour = 0; halfHour < 48; halfHour++) {
      const hour = halfHour / 2 + 0.25;
      const period = drivenPeriod(
        surfaceFluxes(hour, standardDriver),
        slowMeans(hour, 0, standardDriver),
        standardDriver,
      );
      low = Math.min(low, period.zeta);
      high = Math.max(high, period.zeta);
      // 5 Hz: the lines of the slow eddies, where correlations are held, are the same as at 20 Hz.
      const { series } = generateTurbulence(
        {
          ...period.targets,
          sampleRateHz: 5,
          length: 9000,
          cospectra: 'surface-layer',
          mode: 'quad',
        },
        new SplitMix64(halfHour),
      );
      for (const key of ['u', 'temperature', 'vapour', 'co2'] as const) {
        const target = period.targets.covariances[key];
        expect(Math.abs(covariance(series.w, series[key]) / target - 1)).toBeLessThan(1e-5);
      }
    }
    expect(Math.abs(low + 0.18)).toBeLessThan(0.02);
    expect(Math.abs(high - 0.49)).toBeLessThan(0.02);
  });
});
