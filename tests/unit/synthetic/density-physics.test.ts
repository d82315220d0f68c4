import { describe, expect, it } from 'vitest';
import { SplitMix64 } from '../../../processing/numerics/random';
import { seenByOpenPath } from '../../../processing/synthetic/density-physics';
import { generateTurbulence } from '../../../processing/synthetic/turbulence';
import { covariance, mean, referenceTargets } from './reference-parameters';

function referenceAir(seed: number, sampleRateHz = 20) {
  const { series } = generateTurbulence(referenceTargets('matched', sampleRateHz), new SplitMix64(seed));
  return {
    w: series.w,
    temperature: series.temperature.map((x) => x + 295),
    vapour: series.vapour.map((x) => (x + 12) * 1e-3),
    co2: series.co2.map((x) => (x + 410) * 1e-6),
    pressure: new Float64Array(series.w.length).fill(100_000),
  };
}

describe('true fluxes and what an open path sees', () => {
  const air = referenceAir(4);
  const seen = seenByOpenPath(air);

  it('lets no dry air pass', () => {
    const dry = seen.co2Density.map((c, i) => c / air.co2[i]);
    const flux = mean(dry.map((d, i) => d * seen.w[i]));
    expect(Math.abs(flux)).toBeLessThan(1e-12 * mean(dry));
  });

  it('splits the true flux into density covariance and mean flow, to rounding', () => {
    const sum = covariance(seen.w, seen.co2Density) + seen.meanW * mean(seen.co2Density);
    expect(Math.abs(sum / seen.co2Flux - 1)).toBeLessThan(1e-12);
  });

  it('equals mean dry-air density times the covariance of the dry mole fraction within 1e-4, pooled over ten seeds', () => {
    // What differs is the triple product of fluctuations, which has no mean: single records scatter by about 1e-4.
    const errors = { co2: 0, vapour: 0 };
    const sizes = { co2: 0, vapour: 0 };
    for (let seed = 1; seed <= 10; seed++) {
      const one = referenceAir(seed, 10);
      const it = seenByOpenPath(one);
      for (const gas of ['co2', 'vapour'] as const) {
        const truth = gas === 'co2' ? it.co2Flux : it.vapourFlux;
        errors[gas] += it.dryAirDensityMean * covariance(it.w, one[gas]) - truth;
        sizes[gas] += Math.abs(truth);
      }
    }
    expect(Math.abs(errors.co2 / sizes.co2)).toBeLessThan(1e-4);
    expect(Math.abs(errors.vapour / sizes.vapour)).toBeLessThan(1e-4);
  });

  it('is found again by the first-order density terms within 1e-3', () => {
    // Webb, Pearman and Leuning (1980) in molar form; an independent numpy run found 2.7e-5.
    const [nc, nv, nd] = [mean(seen.co2Density), mean(seen.vapourDensity), seen.dryAirDensityMean];
    const flux =
      covariance(seen.w, seen.co2Density) +
      (nc / nd) * covariance(seen.w, seen.vapourDensity) +
      (nc * (1 + nv / nd) * covariance(seen.w, air.temperature)) / mean(air.temperature);
    expect(Math.abs(flux / seen.co2Flux - 1)).toBeLessThan(1e-3);
  });

  it('shows the known 39 % error of the raw density covariance', () => {
    // Independent numpy run with the same covariances: raw −22.46, truth −16.12 µmol m⁻² s⁻¹. It does not state its mean state;
    // 295 K, 12 mmol/mol and 410 µmol/mol are assumed, hence the tolerance.
    expect(Math.abs(covariance(seen.w, seen.co2Density) * 1e6 + 22.46)).toBeLessThan(0.03);
    expect(Math.abs(seen.co2Flux * 1e6 + 16.12)).toBeLessThan(0.03);
  });

  it('gives sonic temperature as T (1 + 0.51 q)', () => {
    // T = 298.15 K, moist vapour fraction 0.015: 299.57669268332353 K (independent double-precision calculation).
    const one = (x: number) => new Float64Array([x, x]);
    const sample = seenByOpenPath({
      w: one(0),
      temperature: one(298.15),
      vapour: one(0.015 / 0.985),
      co2: one(400e-6 / 0.985),
      pressure: one(101_325),
    });
    expect(sample.sonicTemperature[0]).toBeCloseTo(299.57669268332353, 10);
    expect(sample.co2Density[0] * 1e3).toBeCloseTo(16.349617809731775, 10);
    expect(sample.vapourDensity[0] * 1e3).toBeCloseTo(613.1106678649415, 9);
  });
});
