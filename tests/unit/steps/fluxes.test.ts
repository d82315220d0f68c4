import { describe, expect, it } from 'vitest';
import { isQuantity } from '../../../processing/catalogue';
import type { MomentState, PeriodState } from '../../../processing/state';
import { airStateStep, solveFluxes, solveFluxesStep } from '../../../processing/steps/fluxes';
import {
  moistAir,
  pressureFromElevationPa,
  saturationVapourPressurePa,
  sonicTemperatureK,
} from '../../../processing/thermodynamics';
import { stateWith } from './turbulent-state';

/** 25 °C, 50 %, 1000 hPa, 400 µmol/mol in dry air: the state of the worked example. */
const temperatureK = 298.15;
const air = moistAir(temperatureK, 0.5 * saturationVapourPressurePa(temperatureK), 100_000);
const meanCo2 = 400e-6 * air.dryAirMolarDensity;

function periodState(change: Partial<MomentState> = {}): PeriodState {
  const state = stateWith({ windU: new Float64Array(36_000) }, 20);
  state.values.airPressure = 100_000;
  state.wind = {
    meanSpeedMs: 3,
    directionDeg: 225,
    directionSpreadDeg: 10,
    sectorGrade: 0,
    sectorReason: null,
  };
  const lag = {
    lagSamples: 0,
    source: 'maximum',
    covarianceAtZero: 1,
    covarianceAtLag: 1,
    edgeHit: false,
    pairs: 36_000,
  } as const;
  state.lags = { sonicTemperature: { ...lag, source: 'fixed' }, co2: lag, h2o: lag };
  state.moments = {
    means: {
      windU: 3,
      windV: 0,
      windW: 0,
      sonicTemperature: sonicTemperatureK(temperatureK, air.specificHumidity),
      co2: meanCo2,
      h2o: air.vapourMolarDensity,
    },
    variances: {},
    uw: -0.12,
    vw: 0.01,
    uv: 0,
    wScalar: { sonicTemperature: 0.215, co2: -20e-6, h2o: 7e-5 / 0.01801528 },
    uScalar: {},
    pairs: { uw: 36_000, co2: 36_000, h2o: 36_000, sonicTemperature: 36_000 },
    ustarMs: 0.347,
    ...change,
  };
  return state;
}

const run = (state: PeriodState) => solveFluxesStep(airStateStep(state), state.settings);
const keys = (state: PeriodState) => state.reasons.map((reason) => reason.key);

describe('air state of a period', () => {
  it('recovers the worked state from sonic temperature and vapour density', () => {
    // numpy values at 25 °C, 50 %, 1000 hPa; printed digits.
    const { values, air: found } = airStateStep(periodState());
    expect(values.airTemperature).toBeCloseTo(298.15, 9);
    expect(values.relativeHumidity).toBeCloseTo(0.5, 9);
    expect(values.vapourPressure).toBeCloseTo(1584.95, 2);
    expect(values.vapourPressureDeficit).toBeCloseTo(1584.95, 2);
    expect(values.airDensity).toBeCloseTo(1.16144204, 8);
    expect(values.specificHumidity).toBeCloseTo(0.00991723, 8);
    expect(values.co2DryMoleFraction).toBeCloseTo(400e-6, 12);
    // In moist air less by 1 − x_v, x_v = 0.0158495.
    expect(values.co2MoleFraction).toBeCloseTo(400e-6 * (1 - 0.0158495), 10);
    expect(values.h2oMoleFraction).toBeCloseTo(0.0158495, 7);
    expect(found?.temperatureSource).toBe('sonic-and-humidity');
  });

  it('uses the pressure of the standard atmosphere where none is known, and says so', () => {
    const state = periodState();
    delete state.values.airPressure;
    const { air: found, values } = airStateStep(state);
    expect(found?.pressureSource).toBe('elevation');
    expect(values.airPressure).toBe(pressureFromElevationPa(state.setUp.elevationM));
  });

  it('counts air without H2O as dry at the sonic temperature and gives no humidity', () => {
    const state = periodState();
    delete state.moments!.means.h2o;
    const { air: found, values } = airStateStep(state);
    expect(found?.temperatureSource).toBe('sonic');
    expect(found?.specificHumidity).toBe(0);
    expect(values.relativeHumidity).toBeUndefined();
    // Sonic is close to virtual temperature: within 0.1 % of the moist density.
    expect(Math.abs(values.airDensity / air.airDensity - 1)).toBeLessThan(2e-3);
  });

  it('clips humidity just above saturation and leaves it out beyond 105 per cent', () => {
    const humid = (share: number) => {
      const wet = moistAir(temperatureK, share * saturationVapourPressurePa(temperatureK), 100_000);
      const state = periodState();
      state.moments!.means.h2o = wet.vapourMolarDensity;
      state.moments!.means.sonicTemperature = sonicTemperatureK(temperatureK, wet.specificHumidity);
      return airStateStep(state);
    };
    const clipped = humid(1.02);
    expect([clipped.values.relativeHumidity, clipped.values.vapourPressureDeficit]).toEqual([1, 0]);
    expect(keys(clipped)).toEqual(['density.relativeHumidity']);
    const invalid = humid(1.08);
    expect(invalid.values.relativeHumidity).toBeUndefined();
    expect(keys(invalid)).toEqual(['density.relativeHumidity']);
    expect(keys(humid(0.99))).toEqual([]);
  });
});

describe('fluxes of a period', () => {
  it('fills fluxes and only values that the catalogue knows, with three ledger lines', () => {
    const state = run(periodState());
    expect(state.ledger.map((entry) => entry.step)).toEqual(['spectralLoss', 'density', 'fluxes']);
    for (const key of Object.keys(state.values)) expect(isQuantity(key), key).toBe(true);
    expect(state.reasons).toEqual([]);
    const { fluxes, spectralLoss } = state;
    // u* carries the root of the momentum factor; τ = ρ u*².
    expect(fluxes!.ustarMs).toBeCloseTo(
      (0.12 ** 2 + 0.01 ** 2) ** 0.25 * Math.sqrt(spectralLoss!.factors.momentum),
      12,
    );
    expect(fluxes!.tau).toBeCloseTo(air.airDensity * fluxes!.ustarMs ** 2, 9);
    expect(fluxes!.co2Flux).toBeCloseTo(
      fluxes!.co2Covariance + fluxes!.co2VapourTerm + fluxes!.co2HeatTerm,
      15,
    );
    expect(fluxes!.co2Covariance).toBeCloseTo(-20e-6 * spectralLoss!.factors.co2, 15);
    expect(state.values.evaporation! * 3600).toBeGreaterThan(0.2);
    expect(fluxes!.passes).toBeLessThanOrEqual(4);
  });

  it('settles with factors at the stability it reports, within the limits of the recipe', () => {
    const { fluxes, spectralLoss } = run(periodState());
    expect(Math.abs(spectralLoss!.zeta - fluxes!.zeta)).toBeLessThan(
      Math.max(0.001, 0.01 * Math.abs(fluxes!.zeta)),
    );
  });

  it('gives H from the sonic flux, flagged, and neither LE nor FC without H2O', () => {
    const state = periodState();
    delete state.moments!.wScalar.h2o;
    delete state.moments!.means.h2o;
    run(state);
    expect(state.fluxes!.humidityMissing).toBe(true);
    // Dry air of 100 kPa: ρ cp CF 0.215.
    const { factors } = state.spectralLoss!;
    expect(state.values.sensibleHeat).toBeCloseTo(
      state.values.airDensity * 1004.67 * 0.215 * factors.sonicTemperature,
      6,
    );
    expect(state.values.latentHeat).toBeNaN();
    expect(state.values.co2Flux).toBeNaN();
    expect(keys(state)).toEqual(['fluxes.noHumidity', 'fluxes.noDensityTerms']);
    expect(state.reasons[0]).toMatchObject({ grade: 1, fluxes: ['sensibleHeat'] });
    expect(state.reasons[1]).toMatchObject({ grade: 2, fluxes: ['latentHeat', 'co2Flux'] });
  });

  it('gives LE but no FC without CO2', () => {
    const state = periodState();
    delete state.moments!.wScalar.co2;
    delete state.moments!.means.co2;
    run(state);
    expect(state.values.latentHeat).toBeGreaterThan(100);
    expect(state.values.co2Flux).toBeNaN();
    expect(state.values.spectralFactorCo2).toBeNaN();
    expect(keys(state)).toEqual(['fluxes.noCo2']);
  });

  it('flags a calm period and takes neutral factors below u* 0.01 m/s', () => {
    const state = periodState({ uw: -5e-5, vw: 0 });
    state.wind!.meanSpeedMs = 0.2;
    run(state);
    expect(state.values.zeta).toBeNaN();
    expect(state.values.obukhovLength).toBeNaN();
    expect(state.values.temperatureScale).toBeNaN();
    expect(Number.isFinite(state.values.sensibleHeat)).toBe(true);
    expect(keys(state)).toEqual(['spectralLoss.calm', 'fluxes.noStability']);
  });

  it('grades factors above the warning and above the rejection limit', () => {
    const graded = (warnFactor: number, rejectFactor: number) => {
      const state = airStateStep(periodState());
      const { spectralLoss } = state.settings;
      solveFluxesStep(state, {
        ...state.settings,
        spectralLoss: { ...spectralLoss, warnFactor, rejectFactor } as typeof spectralLoss,
      });
      const { co2 } = state.spectralLoss!.factors;
      return {
        co2,
        grades: state.reasons.filter((reason) => reason.key === 'spectralLoss.co2').map((r) => r.grade),
      };
    };
    const { co2, grades } = graded(2, 5);
    expect(grades).toEqual([]);
    expect(graded(co2, 5).grades).toEqual([]);
    expect(graded(co2 - 1e-6, 5).grades).toEqual([1]);
    expect(graded(1, co2 - 1e-6).grades).toEqual([2]);
  });

  it('rejects what cannot be corrected and never throws', () => {
    const state = periodState();
    state.wind!.meanSpeedMs = NaN;
    run(state);
    expect(state.values.co2Flux).toBeNaN();
    expect(state.reasons.filter((reason) => reason.grade === 2).map((reason) => reason.key)).toEqual([
      'spectralLoss.momentum',
      'spectralLoss.sonicTemperature',
      'spectralLoss.h2o',
      'spectralLoss.co2',
    ]);
  });

  it('passes a stopped period through with three skipped lines', () => {
    const state = stateWith({ windU: new Float64Array(10) }, 20);
    state.stopped = true;
    run(state);
    expect(state.ledger.map((entry) => entry.step)).toEqual(['spectralLoss', 'density', 'fluxes']);
    expect(state.fluxes).toBeNull();
  });

  it('corrects nothing when the recipe says so', () => {
    const state = periodState();
    solveFluxesStep(airStateStep(state), { ...state.settings, spectralLoss: { method: 'none' } });
    expect(state.spectralLoss!.factors).toEqual({ momentum: 1, sonicTemperature: 1, co2: 1, h2o: 1 });
  });
});

describe('stability iteration', () => {
  const inputs = {
    uw: -0.04,
    vw: 0,
    wSonicTemperature: -0.02,
    wH2o: 2e-4,
    wCo2: 2e-6,
    meanCo2,
    sonicTemperatureK: sonicTemperatureK(temperatureK, air.specificHumidity),
    heightM: 3,
    air: { ...air, pressureSource: 'measured' as const, temperatureSource: 'sonic-and-humidity' as const },
  };
  const limits = { maxPasses: 10, relativeChange: 0.01, absoluteChange: 0.001 };

  it('cannot swing for ever between two stabilities', () => {
    // Factors that jump hard the wrong way at z/L = 0.12: undamped, z/L would go to and fro.
    const factorsAt = (zeta: number) => {
      const factor = zeta > 0.12 ? 0.5 : 2;
      return { factors: { momentum: 1, sonicTemperature: factor, h2o: 1, co2: 1 } };
    };
    const { fluxes, hasConverged } = solveFluxes(inputs, factorsAt, limits);
    expect(fluxes.passes).toBe(10);
    expect(hasConverged).toBe(false);
    expect(Number.isFinite(fluxes.zeta)).toBe(true);
  });

  it('needs one pass when factors do not depend on stability and sonic flux is the buoyancy flux', () => {
    const { fluxes, hasConverged } = solveFluxes(
      { ...inputs, wH2o: NaN },
      () => ({ factors: { momentum: 1, sonicTemperature: 1, h2o: 1, co2: 1 } }),
      limits,
    );
    expect([fluxes.passes, hasConverged]).toEqual([1, true]);
  });
});
