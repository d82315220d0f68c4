import { describe, expect, it } from 'vitest';
import { biasedCovariances } from '../../../processing/numerics/correlation';
import { pairMoments } from '../../../processing/numerics/moments';
import { defaultRecipe } from '../../../processing/schemas/recipe';
import type { AirState, FluxState, PeriodState } from '../../../processing/state';
import { lagStep } from '../../../processing/steps/lag';
import { momentsStep } from '../../../processing/steps/moments';
import {
  combineScalars,
  finkelsteinSims,
  fluxSensitivities,
  uncertaintyStep,
} from '../../../processing/steps/uncertainty';
import { rolled, stateWith, turbulentSeries } from './turbulent-state';

/** State of moist air at 25 °C, 50 %, 1000 hPa, as an independent program (numpy) worked it out. */
const air: AirState = {
  pressurePa: 100_000,
  pressureSource: 'measured',
  temperatureK: 298.15,
  temperatureSource: 'sonic-and-humidity',
  vapourPressurePa: 1584.95,
  specificHumidity: 0.00991723,
  dryAirDensity: 1.14992374,
  vapourDensity: 0.01151829,
  airDensity: 1.16144204,
  dryAirMolarDensity: 39.700183,
};

describe('fluxSensitivities', () => {
  it('reproduces the coupled example: sonic flux 0.215, vapour 7.0e-5, CO2 −20 µmol, factors 1.0136 and 1.10', () => {
    // Webb, Pearman & Leuning (1980) with sonic humidity, worked example by an independent program:
    // H 242.0184 W m-2, LE 210.7780 W m-2, FC −9.1581485 µmol m-2 s-1. The state above carries 7 to 8 digits.
    const factors = { sonicTemperature: 1.0136, h2o: 1.1, co2: 1.1 };
    const by = fluxSensitivities(air, factors, 15.880073e-3, true);
    const h2o = 7e-5 / 0.01801528;
    const of = ({ sonicTemperature: a, h2o: b, co2: c }: typeof by.co2Flux): number =>
      a * 0.215 + b * h2o + c * -20e-6;
    expect(of(by.sensibleHeat)).toBeCloseTo(242.0184, 3);
    expect(of(by.latentHeat)).toBeCloseTo(210.778, 3);
    expect(of(by.co2Flux) * 1e6).toBeCloseTo(-9.1581485, 5);
  });

  it('takes the sonic flux for the heat flux where humidity is missing', () => {
    const dry = { ...air, specificHumidity: 0, vapourDensity: 0 };
    const by = fluxSensitivities(dry, { sonicTemperature: 1, h2o: Number.NaN, co2: 1 }, Number.NaN, false);
    expect(by.sensibleHeat.h2o).toBe(0);
    expect(by.sensibleHeat.sonicTemperature).toBeCloseTo(1.16144204 * 1004.67, 6);
  });
});

describe('combineScalars', () => {
  it('reads each scalar at its lag, and needs only the required ones', () => {
    const a = Float64Array.of(1, 2, 3, 4);
    const b = Float64Array.of(10, Number.NaN, 30, 40);
    const part = { mean: 0, isRequired: true };
    expect([
      ...combineScalars(4, [
        { values: a, lagSamples: 0, factor: 1, ...part },
        { values: b, lagSamples: 1, factor: 0.1, ...part },
      ]),
    ]).toEqual([Number.NaN, 5, 7, Number.NaN]);
    expect([
      ...combineScalars(4, [
        { values: a, lagSamples: 0, factor: 1, mean: 1, isRequired: true },
        { values: b, lagSamples: -1, factor: 0.1, mean: 10, isRequired: false },
      ]),
    ]).toEqual([0, 1, 2, 5]);
  });
});

/** A state with all that the step reads; fluxes are what the sensitivities make of the measured covariances. */
function solved(seed: number, length = 18_000): PeriodState {
  const series = turbulentSeries(seed, { length, sampleRateHz: 10 });
  series.co2 = rolled(series.co2, 3);
  const state = momentsStep(
    lagStep(stateWith(series, 10), defaultRecipe.settings.lag),
    defaultRecipe.settings,
  );
  state.air = air;
  state.spectralLoss = {
    factors: { momentum: 1.05, sonicTemperature: 1.02, co2: 1.1, h2o: 1.08 },
    zeta: 0,
    residualLagS: 0,
  };
  const by = fluxSensitivities(air, state.spectralLoss.factors, state.moments!.means.co2!, true);
  const { wScalar } = state.moments!;
  const of = (s: typeof by.co2Flux): number =>
    s.sonicTemperature * wScalar.sonicTemperature! + s.h2o * wScalar.h2o! + s.co2 * wScalar.co2!;
  state.fluxes = {
    ustarMs: state.moments!.ustarMs * Math.sqrt(1.05),
    sensibleHeat: of(by.sensibleHeat),
    latentHeat: of(by.latentHeat),
    co2Flux: of(by.co2Flux),
    humidityMissing: false,
  } as FluxState;
  return state;
}

describe('uncertaintyStep', () => {
  const settings = defaultRecipe.settings.uncertainty;

  it('gives each flux the sampling error of w with its combined scalar, whose covariance is the flux itself', () => {
    const state = solved(1);
    const by = fluxSensitivities(air, state.spectralLoss!.factors, state.moments!.means.co2!, true).co2Flux;
    const parts = (['sonicTemperature', 'h2o', 'co2'] as const).map((key) => ({
      values: state.series[key]!,
      mean: state.moments!.means[key]!,
      lagSamples: state.lags[key]!.lagSamples,
      factor: by[key],
      isRequired: true,
    }));
    const combined = combineScalars(18_000, parts);
    const { cxy, n } = pairMoments(state.series.windW!, combined);
    // Three of 18 000 pairs are lost to the lag.
    expect(Math.abs(cxy / n / state.fluxes!.co2Flux - 1)).toBeLessThan(2e-3);
    const expected = finkelsteinSims(
      biasedCovariances([{ x: state.series.windW!, y: combined }], 2000)[0],
      2000,
    );
    uncertaintyStep(state, settings);
    expect(Math.abs(state.values.co2FluxRandom / expected - 1)).toBeLessThan(1e-11);
    expect(state.ledger.at(-1)?.step).toBe('uncertainty');
  });

  it('stays near 5 % for heat and near 12 % for momentum, as synthetic half hours of this kind scatter', () => {
    let heat = 0;
    let momentum = 0;
    for (let seed = 0; seed < 8; seed++) {
      const state = uncertaintyStep(solved(seed), settings);
      heat += state.values.sensibleHeatRandom / state.fluxes!.sensibleHeat / 8;
      // σ(uw)/|uw| = 2 σ(u*)/u*.
      momentum += (2 * state.values.ustarRandom) / state.fluxes!.ustarMs / 8;
      expect(state.values.latentHeatRandom).toBeGreaterThan(0);
    }
    expect(heat).toBeGreaterThan(0.03);
    expect(heat).toBeLessThan(0.08);
    expect(momentum).toBeGreaterThan(0.07);
    expect(momentum).toBeLessThan(0.18);
  });

  it('grows as the record shortens, by about the square root', () => {
    const long = uncertaintyStep(solved(3, 18_000), settings).values.sensibleHeatRandom;
    const short = uncertaintyStep(solved(3, 6000), settings).values.sensibleHeatRandom;
    expect(short / long).toBeGreaterThan(1.2);
    expect(short / long).toBeLessThan(2.6);
  });

  it('leaves out fluxes that have no value', () => {
    const state = solved(4);
    state.fluxes!.co2Flux = Number.NaN;
    uncertaintyStep(state, settings);
    expect(state.values.co2FluxRandom).toBeUndefined();
    expect(state.values.sensibleHeatRandom).toBeGreaterThan(0);
  });

  it('is passed over without fluxes', () => {
    const state = uncertaintyStep(stateWith(turbulentSeries(1, { length: 100 }), 20), settings);
    expect(state.values).toEqual({});
    expect(state.ledger).toHaveLength(1);
  });
});
