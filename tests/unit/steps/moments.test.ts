import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { SplitMix64 } from '../../../processing/numerics/random';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import { lagStep } from '../../../processing/steps/lag';
import { alignedCovariance, frictionVelocity, momentsStep } from '../../../processing/steps/moments';
import { rolled, stateWith, turbulentSeries, without } from './turbulent-state';

describe('frictionVelocity', () => {
  it('is 0.3 m/s for a momentum flux of −0.09 m2 s-2, and counts the lateral part', () => {
    expect(frictionVelocity(-0.09, 0)).toBeCloseTo(0.3, 12);
    // (0.03² + 0.04²)^¼ = √0.05
    expect(frictionVelocity(-0.03, 0.04)).toBeCloseTo(Math.sqrt(0.05), 12);
    expect(frictionVelocity(Number.NaN, 0)).toBeNaN();
  });

  it('doubles when both fluxes grow fourfold', () => {
    expect(frictionVelocity(-0.4, 0.2) / frictionVelocity(-0.1, 0.05)).toBeCloseTo(2, 12);
  });
});

describe('alignedCovariance', () => {
  it('scales with either series and ignores offsets', () => {
    const random = new SplitMix64(1);
    const x = new Float64Array(500);
    const y = new Float64Array(500);
    random.fillNormal(x);
    random.fillNormal(y);
    const base = alignedCovariance(x, y, 3).covariance;
    fc.assert(
      fc.property(
        fc.double({ min: -50, max: 50, noNaN: true }),
        fc.double({ min: -1000, max: 1000, noNaN: true }),
        (a, b) => {
          const found = alignedCovariance(
            x,
            y.map((value) => a * value + b),
            3,
          ).covariance;
          expect(Math.abs(found - a * base)).toBeLessThan(1e-10);
        },
      ),
      { numRuns: 40 },
    );
  });

  it('is 0 with a constant, and unknown without pairs', () => {
    expect(alignedCovariance(Float64Array.of(1, 2, 3), Float64Array.of(293, 293, 293), 0)).toEqual({
      covariance: 0,
      pairs: 3,
    });
    expect(alignedCovariance(Float64Array.of(1, 2), Float64Array.of(3, 4), 5).covariance).toBeNaN();
  });

  it('takes means over exactly the pairs it uses', () => {
    // The unpaired 1000 must not enter any mean: pairs (1,2) (2,4) (3,6), population covariance 4/3.
    const x = Float64Array.of(1, 2, 3, 1000);
    const y = Float64Array.of(2, 4, 6, Number.NaN);
    expect(alignedCovariance(x, y, 0).covariance).toBeCloseTo(4 / 3, 12);
  });
});

describe('momentsStep', () => {
  it('recovers the moments the record was made with', () => {
    // `matched` records have exactly these sample moments (variances w 0.25, u 1.2, v 0.8, T 0.16; cov −0.09, 0.09, 0.08, −0.40).
    const state = stateWith(turbulentSeries(3, { length: 12_000, mode: 'matched' }), 20);
    state.lags = {
      sonicTemperature: {
        lagSamples: 0,
        source: 'fixed',
        covarianceAtZero: 0,
        covarianceAtLag: 0,
        edgeHit: false,
        pairs: 12_000,
      },
      co2: {
        lagSamples: 0,
        source: 'maximum',
        covarianceAtZero: 0,
        covarianceAtLag: 0,
        edgeHit: false,
        pairs: 12_000,
      },
      h2o: {
        lagSamples: 0,
        source: 'maximum',
        covarianceAtZero: 0,
        covarianceAtLag: 0,
        edgeHit: false,
        pairs: 12_000,
      },
    };
    const { values, moments } = momentsStep(state, defaultRecipe.settings);
    expect(values.wSigma).toBeCloseTo(0.5, 10);
    expect(values.uSigma).toBeCloseTo(Math.sqrt(1.2), 10);
    expect(values.vSigma).toBeCloseTo(Math.sqrt(0.8), 10);
    expect(values.sonicTemperatureSigma).toBeCloseTo(0.4, 10);
    expect(values.sonicTemperatureMean).toBeCloseTo(293, 8);
    expect(values.co2Sigma).toBeCloseTo(80e-6, 12);
    expect(values.h2oSigma).toBeCloseTo(16e-3, 10);
    expect(values.covUW).toBeCloseTo(-0.09, 10);
    expect(Math.abs(values.covVW)).toBeLessThan(1e-10);
    expect(values.covWTs).toBeCloseTo(0.09, 10);
    expect(values.covWCo2).toBeCloseTo(-16e-6, 13);
    expect(values.covWH2o).toBeCloseTo(3.2e-3, 12);
    expect(values.turbulentKineticEnergy).toBeCloseTo(1.125, 10);
    expect(moments!.ustarMs).toBeCloseTo(0.3, 9);
    expect(moments!.means.co2).toBeCloseTo(0.016, 10);
    expect(moments!.pairs).toEqual({ uw: 12_000, sonicTemperature: 12_000, co2: 12_000, h2o: 12_000 });
  });

  it('forms covariances at the lag that was found', () => {
    const series = turbulentSeries(4, { length: 18_000, sampleRateHz: 10 });
    const shifted = stateWith({ ...series, co2: rolled(series.co2, 6) }, 10);
    const plain = stateWith({ ...series }, 10);
    const run = (state: typeof shifted): number =>
      momentsStep(lagStep(state, defaultRecipe.settings.lag), defaultRecipe.settings).values.covWCo2;
    const [a, b] = [run(shifted), run(plain)];
    // Six of 18 000 pairs are left out at the end: a difference of the order of 6/18 000.
    expect(Math.abs(a / b - 1)).toBeLessThan(2e-3);
  });

  it('rejects every flux that needs a frozen series, gas fluxes through their heat term too', () => {
    const series = {
      ...turbulentSeries(6, { length: 6000 }),
      sonicTemperature: new Float64Array(6000).fill(294.65),
    };
    const state = momentsStep(
      lagStep(stateWith(series, 20), defaultRecipe.settings.lag),
      defaultRecipe.settings,
    );
    expect(state.values.covWTs).toBe(0);
    expect(state.reasons.find((one) => one.key === 'moments.constant.sonicTemperature')).toMatchObject({
      grade: 2,
      fluxes: ['sensibleHeat', 'latentHeat', 'co2Flux'],
    });
  });

  it('leaves out a gas that is not recorded', () => {
    const rest = without(turbulentSeries(5, { length: 6000 }), 'co2');
    const state = momentsStep(
      lagStep(stateWith(rest, 20), defaultRecipe.settings.lag),
      defaultRecipe.settings,
    );
    expect(state.values.covWCo2).toBeUndefined();
    expect(state.moments!.wScalar.co2).toBeUndefined();
    expect(state.values.covWH2o).toBeGreaterThan(0);
  });
});
