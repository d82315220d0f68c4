import { describe, expect, it } from 'vitest';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import { lossFactor } from '../../../processing/spectral/loss-integral';
import {
  lossEffects,
  lossGeometry,
  prepareFactors,
  residualLagS,
} from '../../../processing/steps/spectral-loss';
import type { LossGeometry } from '../../../processing/steps/spectral-loss';
import { stateWith } from './turbulent-state';

const settings = defaultRecipe.settings.spectralLoss;
if (settings.method !== 'transfer-functions') throw new Error('The default recipe corrects spectral loss.');

const geometry: LossGeometry = {
  heightM: 3,
  windMs: 3,
  sonicPathM: 0.1,
  analyserPathM: 0.125,
  responseTimeS: 0,
  separationM: 0.2,
  alongWindTravelS: 0,
  periodS: 1800,
  sampleIntervalS: 0.05,
};
const lag = (lagSamples: number, source: 'maximum' | 'default' | 'fixed' = 'maximum') => ({
  lagSamples,
  source,
  covarianceAtZero: 1,
  covarianceAtLag: 1,
  edgeHit: false,
  pairs: 1000,
});

describe('spectral loss of a period', () => {
  it('reproduces the worked example: gas 1.07064, heat 1.01326, stable 1.11272 and 1.01800', () => {
    // numpy, printed digits; stated tolerance 5e-4.
    const prepared = prepareFactors(settings, geometry, { co2: lag(0), h2o: lag(0) });
    const unstable = prepared.at(-0.5).factors;
    expect(Math.abs(unstable.co2 - 1.07064)).toBeLessThan(5e-4);
    expect(Math.abs(unstable.sonicTemperature - 1.01326)).toBeLessThan(5e-4);
    const stable = prepared.at(0.1).factors;
    expect(Math.abs(stable.h2o - 1.11272)).toBeLessThan(5e-4);
    expect(Math.abs(stable.sonicTemperature - 1.018)).toBeLessThan(5e-4);
  });

  it('counts the wind path twice for momentum, with the momentum cospectrum', () => {
    const expected = lossFactor(
      { kind: 'momentum', windPathM: 0.1, windPaths: 2, blockS: 1800 },
      { heightM: 3, windMs: 3, zeta: 0.1 },
    );
    expect(prepareFactors(settings, geometry, {}).at(0.1).factors.momentum).toBe(expected.factor);
    const once = lossFactor(
      { kind: 'momentum', windPathM: 0.1, windPaths: 1, blockS: 1800 },
      { heightM: 3, windMs: 3, zeta: 0.1 },
    );
    expect(expected.factor).toBeGreaterThan(once.factor);
  });

  it('leaves out what the recipe switches off', () => {
    const off = { ...settings, blockAverage: false, pathAveraging: false, separation: false };
    const { factors } = prepareFactors(off, geometry, { co2: lag(0) }).at(0.2);
    expect(factors).toEqual({ momentum: 1, sonicTemperature: 1, co2: 1, h2o: 1 });
    expect(prepareFactors({ method: 'none' }, geometry, {}).at(0.2).factors.co2).toBe(1);
    const noBlock = lossEffects({ ...settings, blockAverage: false }, geometry);
    expect([noBlock.momentum.blockS, noBlock.sonicTemperature.blockS, noBlock.gas.blockS]).toEqual([0, 0, 0]);
  });

  it('gives each gas the rest of its own lag', () => {
    const moved = { ...geometry, alongWindTravelS: 0.07 };
    const { factors, residualLagS: rest } = prepareFactors(settings, moved, { co2: lag(1), h2o: lag(2) }).at(
      -0.1,
    );
    // 0.07 s is 1.4 samples: with lag 1 0.02 s are left, with lag 2 −0.03 s, which is 0.02 s beyond a whole sample.
    expect(rest).toBeCloseTo(0.02, 12);
    expect(factors.co2).toBeCloseTo(factors.h2o, 12);
    expect(factors.co2).toBeGreaterThan(
      prepareFactors(settings, geometry, { co2: lag(0) }).at(-0.1).factors.co2,
    );
  });

  it('is NaN, not a guess, without wind', () => {
    const { factors } = prepareFactors(settings, { ...geometry, windMs: NaN }, {}).at(0);
    for (const factor of Object.values(factors)) expect(factor).toBeNaN();
  });
});

describe('rest of the lag', () => {
  it('is within half a sample where the lag was found by maximum covariance', () => {
    // By hand: 0.33 m at 3 m/s take 0.11 s, 2.2 samples; seven further samples of electronics do not count.
    expect(residualLagS(0.11, 0, lag(2), 0.05)).toBeCloseTo(0.01, 12);
    expect(residualLagS(0.11, 0, lag(9), 0.05)).toBeCloseTo(0.01, 12);
    expect(residualLagS(-0.11, 0, lag(-2), 0.05)).toBeCloseTo(-0.01, 12);
  });

  it('is taken as it is where a default lag was used', () => {
    expect(residualLagS(0.11, 0.08, lag(2, 'default'), 0.05)).toBeCloseTo(0.09, 12);
  });

  it('counts only the response when calm, and nothing without a lag', () => {
    expect(residualLagS(NaN, 0.03, lag(1), 0.05)).toBeCloseTo(-0.02, 12);
    expect(residualLagS(0.1, 0, undefined, 0.05)).toBe(0);
  });
});

describe('geometry of the losses', () => {
  const base = stateWith({ windU: new Float64Array(20) }, 20);
  const withSeparation = {
    ...base,
    setUp: { ...base.setUp, separation: { northM: 0, eastM: 0.3, upM: -0.4 } },
  };

  it('takes the distance across the wind and up as lost, along the wind as travel time', () => {
    // Wind from the west blows towards the analyser: 0.3 m at 3 m/s; 0.4 m stay.
    const west = lossGeometry({
      ...withSeparation,
      wind: { ...base.wind!, meanSpeedMs: 3, directionDeg: 270 },
    });
    expect(west.alongWindTravelS).toBeCloseTo(0.1, 12);
    expect(west.separationM).toBeCloseTo(0.4, 12);
    // Wind from the north: all of it is across; 0.3 and 0.4 make 0.5.
    const north = lossGeometry({
      ...withSeparation,
      wind: { ...base.wind!, meanSpeedMs: 3, directionDeg: 0 },
    });
    expect(north.alongWindTravelS).toBeCloseTo(0, 12);
    expect(north.separationM).toBeCloseTo(0.5, 12);
  });

  it('takes the whole distance when the wind has no direction', () => {
    const calm = lossGeometry({ ...withSeparation, wind: { ...base.wind!, directionDeg: NaN } });
    expect(calm.separationM).toBeCloseTo(0.5, 12);
    expect(calm.alongWindTravelS).toBeNaN();
  });

  it('measures height above displacement', () => {
    const { heightM } = lossGeometry({
      ...base,
      setUp: { ...base.setUp, sonicHeightM: 3.2, displacementM: 0.4 },
    });
    expect(heightM).toBeCloseTo(2.8, 12);
  });
});
