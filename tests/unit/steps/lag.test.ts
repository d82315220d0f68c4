import { describe, expect, it } from 'vitest';
import { laggedCovariances } from '../../../processing/numerics/correlation';
import { SplitMix64 } from '../../../processing/numerics/random';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import { alignByLag, chooseLag, lagStep, openPathLagWindow } from '../../../processing/steps/lag';
import { demoSetUp } from '../../../processing/synthetic/demo-scenario';
import { rolled, stateWith, turbulentSeries, without } from './turbulent-state';

const settings = defaultRecipe.settings.lag;
const window = { expectedS: 0, halfWidthS: 1 };

function white(n: number, random: SplitMix64): Float64Array {
  const out = new Float64Array(n);
  random.fillNormal(out);
  return out;
}

describe('openPathLagWindow', () => {
  it('expects the travel time and looks at least as far around as asked', () => {
    // 0.3 m at 3 m/s: 0.1 s. Slowest transport 0.5 m/s: 0.6 s, less than the 1 s asked for.
    expect(openPathLagWindow(0.3, 0.3, 3, 1)).toEqual({ expectedS: 0.3 / 3, halfWidthS: 1 });
    expect(openPathLagWindow(-0.3, 0.3, 3, 1).expectedS).toBeCloseTo(-0.1, 12);
    expect(openPathLagWindow(0.3, 1, 3, 1).halfWidthS).toBe(2);
  });

  it('holds the expected lag to the slowest transport in a calm, and to zero without a direction', () => {
    expect(openPathLagWindow(0.3, 0.3, 0.01, 1).expectedS).toBe(0.6);
    expect(openPathLagWindow(-0.3, 0.3, 0.01, 1).expectedS).toBe(-0.6);
    expect(openPathLagWindow(Number.NaN, 0.3, 3, 1).expectedS).toBe(0);
    expect(openPathLagWindow(0.3, 0.3, 0, 1).expectedS).toBe(0);
    expect(openPathLagWindow(0, 0, 0, 1).expectedS).toBe(0);
  });
});

describe('chooseLag', () => {
  it('finds a shift of 7 samples in 30 of 30 synthetic records', () => {
    for (let seed = 0; seed < 30; seed++) {
      const { windW, co2 } = turbulentSeries(seed, { length: 18_000, sampleRateHz: 10 });
      const curve = laggedCovariances(windW, rolled(co2, 7), 700);
      const found = chooseLag(curve, 10, window, 3, 18_000);
      expect(found).toMatchObject({ lagSamples: 7, source: 'maximum', edgeHit: false, fallback: null });
    }
  });

  it('keeps the expected lag for white independent series', () => {
    const random = new SplitMix64(3);
    for (let run = 0; run < 10; run++) {
      const curve = laggedCovariances(white(6000, random), white(6000, random), 700);
      const found = chooseLag(curve, 10, { expectedS: 0.2, halfWidthS: 1 }, 4, 6000);
      // 21 chance covariances stay below four of their standard deviations with probability 0.999 each run.
      expect(found.source).toBe('default');
      expect(found.lagSamples).toBe(2);
      expect(found.fallback === 'noise' || found.fallback === 'edge').toBe(true);
    }
  });

  it('follows the analytic covariance of two sinusoids, cos(2πk(L − shift)/n)', () => {
    const n = 1200;
    const k = 24;
    const wave = (shift: number): Float64Array =>
      Float64Array.from({ length: n }, (_, i) => Math.SQRT2 * Math.cos((2 * Math.PI * k * (i - shift)) / n));
    const { covariances } = laggedCovariances(wave(0), wave(6), 20);
    for (let lag = -20; lag <= 20; lag++) {
      // The record does not wrap: leaving out |lag| samples of 1200 changes the mean product by up to |lag|/n.
      const expected = Math.cos((2 * Math.PI * k * (lag - 6)) / n);
      expect(Math.abs(covariances[lag + 20] - expected)).toBeLessThan(0.02);
    }
    expect(chooseLag(laggedCovariances(wave(0), wave(6), 20), 10, window, 3, n).lagSamples).toBe(6);
  });

  it('falls back where the maximum lies on the edge of the window', () => {
    const { windW, co2 } = turbulentSeries(5, { length: 18_000, sampleRateHz: 10 });
    const found = chooseLag(laggedCovariances(windW, rolled(co2, 25), 700), 10, window, 3, 18_000);
    expect(found).toMatchObject({
      lagSamples: 0,
      source: 'default',
      edgeHit: true,
      fallback: 'edge',
      peakSamples: 10,
    });
  });

  it('falls back where fewer than half of the pairs remain', () => {
    const { windW, co2 } = turbulentSeries(6, { length: 6000, sampleRateHz: 10 });
    co2.fill(Number.NaN, 0, 3100);
    expect(chooseLag(laggedCovariances(windW, co2, 700), 10, window, 3, 6000).fallback).toBe('pairs');
    co2.fill(Number.NaN);
    expect(chooseLag(laggedCovariances(windW, co2, 700), 10, window, 3, 6000).fallback).toBe('no-data');
  });
});

describe('alignByLag', () => {
  it('pairs each sample with one recorded later, for positive and negative lags', () => {
    const wind = Float64Array.of(0, 1, 2, 3, 4);
    const scalar = Float64Array.of(10, 11, 12, 13, 14);
    const later = alignByLag(wind, scalar, 2);
    expect([[...later.wind], [...later.scalar], later.offset]).toEqual([[0, 1, 2], [12, 13, 14], 0]);
    const earlier = alignByLag(wind, scalar, -1);
    expect([[...earlier.wind], [...earlier.scalar], earlier.offset]).toEqual([
      [1, 2, 3, 4],
      [10, 11, 12, 13],
      1,
    ]);
    expect(alignByLag(wind, scalar, 9).wind).toHaveLength(0);
    expect(alignByLag(wind, scalar, -9).scalar).toHaveLength(0);
  });
});

describe('lagStep', () => {
  it('finds both gases, fixes sonic temperature at zero and keeps a curve for plotting', () => {
    const series = turbulentSeries(8);
    series.co2 = rolled(series.co2, 4);
    series.h2o = rolled(series.h2o, 5);
    const state = lagStep(stateWith(series, 20), settings);
    expect(state.lags.co2).toMatchObject({ lagSamples: 4, source: 'maximum', edgeHit: false, pairs: 35_996 });
    expect(state.lags.h2o).toMatchObject({ lagSamples: 5, source: 'maximum' });
    expect(state.lags.sonicTemperature).toMatchObject({ lagSamples: 0, source: 'fixed', pairs: 36_000 });
    expect(state.values).toMatchObject({ lagCo2: 0.2, lagH2o: 0.25, lagSonicTemperature: 0 });
    expect(Math.abs(state.lags.co2!.covarianceAtLag)).toBeGreaterThan(
      Math.abs(state.lags.co2!.covarianceAtZero),
    );
    const curve = state.curves['lag.co2'];
    expect(curve.x.length).toBeLessThanOrEqual(400);
    expect(curve.x[curve.y.indexOf(Math.min(...curve.y))]).toBe(0.2);
    expect(state.reasons).toEqual([]);
    expect(state.ledger).toHaveLength(1);
  });

  it('thins the curve of a fast record and still holds the chosen lag', () => {
    const series = turbulentSeries(9, { length: 12_000, sampleRateHz: 100 });
    const state = lagStep(stateWith({ ...series, co2: rolled(series.co2, 13) }, 100), settings);
    expect(state.curves['lag.co2'].x.length).toBeLessThanOrEqual(400);
    expect(state.curves['lag.co2'].x).toContain(state.values.lagCo2);
  });

  it('uses the lag that geometry and wind let expect, and says so, where no lag stands out', () => {
    const random = new SplitMix64(21);
    const series = turbulentSeries(10, { length: 18_000, sampleRateHz: 10 });
    const before = stateWith(
      { ...series, co2: white(18_000, random).map((value) => 0.016 + 1e-6 * value) },
      10,
    );
    // South wind at 2 m/s; the analyser 0.6 m north of the sonic sees it 0.3 s later.
    const setUp = { ...demoSetUp, separation: { northM: 0.6, eastM: 0, upM: 0 } };
    before.wind = { ...before.wind!, directionDeg: 180, meanSpeedMs: 2 };
    const state = lagStep({ ...before, setUp }, settings);
    expect(state.lags.co2).toMatchObject({ lagSamples: 3, source: 'default' });
    expect(state.values.lagCo2).toBe(0.3);
    const reason = state.reasons.find((one) => one.key === 'lag.co2');
    expect(reason).toMatchObject({ grade: 0, series: 'co2', fluxes: ['co2Flux'] });
    expect(reason?.sentence).toContain('0.30 s');
  });

  it('has no lag value for a gas without samples, and nothing for one that is not recorded', () => {
    const series = turbulentSeries(11, { length: 6000, sampleRateHz: 10 });
    const rest = without(series, 'h2o');
    const state = lagStep(stateWith({ ...rest, co2: new Float64Array(6000).fill(Number.NaN) }, 10), settings);
    expect(state.values.lagCo2).toBeNaN();
    expect(state.lags.co2?.pairs).toBe(0);
    expect(state.lags.h2o).toBeUndefined();
  });
});
