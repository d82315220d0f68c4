import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { molarMassCo2, molarMassDryAir, molarMassWater, gasConstant } from '../../processing/constants';
import { SplitMix64 } from '../../processing/numerics/random';
import type { DensityAir } from '../../processing/steps/density';
import { co2FluxFromEvaporation, solveDensity } from '../../processing/steps/density';
import { obukhovLength, solveFluxes } from '../../processing/steps/fluxes';
import type { MoistAir } from '../../processing/thermodynamics';
import {
  latentHeatOfVaporisation,
  moistAir,
  saturationVapourPressurePa,
  sonicTemperatureK,
  specificHeat,
} from '../../processing/thermodynamics';

/** 25 °C, 50 % relative humidity, 1000 hPa, 400 µmol CO2 per mole of dry air. */
const temperatureK = 298.15;
const air: MoistAir = moistAir(temperatureK, 0.5 * saturationVapourPressurePa(temperatureK), 100_000);
const meanCo2 = 400e-6 * air.dryAirMolarDensity;
const lambda = latentHeatOfVaporisation(temperatureK);
const heatPerFlux = air.airDensity * specificHeat(air.specificHumidity);

/** Sonic covariance that belongs to a true temperature flux and a raw vapour covariance. */
function sonicCovariance(temperatureFlux: number, vapour: number): number {
  const gamma = 1 + (molarMassDryAir / molarMassWater) * air.mixingRatio;
  const evaporation = gamma * (vapour + (air.vapourDensity / temperatureK) * temperatureFlux);
  const q = air.specificHumidity;
  return temperatureFlux * (1 + 0.51 * q) + (0.51 * temperatureK * (1 - q) * evaporation) / air.airDensity;
}

const relative = (value: number, expected: number) => Math.abs(value / expected - 1);

describe('worked example without spectral loss (Webb, Pearman & Leuning 1980)', () => {
  // Expected values: numpy evaluation of eqs 24 and 25 at the state above; printed digits.
  const vapour = 8.0e-5;
  const solved = solveDensity(
    { sonicTemperature: sonicCovariance(0.2, vapour), vapour, co2: -22e-6 },
    air,
    meanCo2,
  );

  it('starts from 15.880073 mmol CO2 per cubic metre', () => {
    expect(relative(meanCo2, 15.880073e-3)).toBeLessThan(1e-7);
  });

  it('finds the true temperature flux back from the sonic covariance', () => {
    expect(relative(solved.temperatureFlux, 0.2)).toBeLessThan(1e-12);
    expect(relative(heatPerFlux * solved.temperatureFlux, 235.317)).toBeLessThan(3e-6);
  });

  it('raises evaporation by 11.42 per cent', () => {
    expect(relative(lambda * vapour, 195.358)).toBeLessThan(3e-6);
    expect(relative(solved.evaporation, 8.9139324e-5)).toBeLessThan(1e-6);
    expect(relative(lambda * solved.evaporation, 217.676)).toBeLessThan(3e-6);
    expect(solved.evaporation / vapour - 1).toBeCloseTo(0.1142, 4);
  });

  it('adds vapour and heat terms to the CO2 flux', () => {
    expect(relative(solved.co2VapourTerm, 1.7762699e-6)).toBeLessThan(1e-6);
    expect(relative(solved.co2HeatTerm, 10.8239599e-6)).toBeLessThan(1e-6);
    expect(relative(solved.co2Flux, -9.3997702e-6)).toBeLessThan(1e-6);
    expect(relative(solved.co2Flux * molarMassCo2 * 1e6, -0.413679)).toBeLessThan(2e-6);
    expect(relative(solved.densityMeanW, 0.79346e-3)).toBeLessThan(7e-6);
  });

  it('gains 4.5997 µmol per 100 W of sensible and 0.9092 per 100 W of raw latent heat', () => {
    const perHeat = (solved.co2HeatTerm / (heatPerFlux * 0.2)) * 100;
    const perLatent = (solved.co2VapourTerm / (lambda * vapour)) * 100;
    expect(relative(perHeat, 4.5997e-6)).toBeLessThan(1.2e-5);
    expect(relative(perLatent, 0.9092e-6)).toBeLessThan(6e-5);
    // The paper's abstract: the heat correction is about five times that of an equal latent heat flux.
    expect(perHeat / perLatent).toBeCloseTo(5.06, 2);
  });

  it('gives the same CO2 flux in both forms of the equation', () => {
    const other = co2FluxFromEvaporation(-22e-6, solved.evaporation, solved.temperatureFlux, air, meanCo2);
    expect(relative(other, solved.co2Flux)).toBeLessThan(1e-12);
  });
});

describe('worked example with spectral loss, solved together', () => {
  // Raw covariances 0.215 K m/s, 7.0e-5 kg, −20 µmol with factors 1.0136, 1.10, 1.10; u* 0.35 m/s, 3 m. Expected: numpy.
  const factors = { momentum: 1, sonicTemperature: 1.0136, h2o: 1.1, co2: 1.1 };
  const { fluxes } = solveFluxes(
    {
      uw: -(0.35 ** 2),
      vw: 0,
      wSonicTemperature: 0.215,
      wH2o: 7.0e-5 / molarMassWater,
      wCo2: -20e-6,
      meanCo2,
      sonicTemperatureK: sonicTemperatureK(temperatureK, air.specificHumidity),
      heightM: 3,
      air: { ...air, pressureSource: 'measured', temperatureSource: 'sonic-and-humidity' },
    },
    () => ({ factors }),
    { maxPasses: 10, relativeChange: 0.01, absoluteChange: 0.001 },
  );

  it.each([
    ["w'T'", fluxes.temperatureFlux, 0.205695362],
    ['E', fluxes.evaporation, 8.63145798e-5],
    ['H', fluxes.sensibleHeat, 242.0184],
    ['LE', fluxes.latentHeat, 210.778],
    ['ET in mm per hour', fluxes.evaporation * 3600, 0.3107325],
    ['vapour flux in mmol', (fluxes.evaporation / molarMassWater) * 1e3, 4.791187],
    ['Fc in µmol', fluxes.co2Flux * 1e6, -9.1581485],
    ['Bowen ratio', fluxes.sensibleHeat / fluxes.latentHeat, 1.148214],
    ['L', fluxes.obukhovLengthM, -14.880592],
    ['z/L', fluxes.zeta, -0.2016049],
    // Printed to six digits.
    ['momentum flux', fluxes.tau, 0.142277],
  ])('gives %s', (_name, value, expected) => {
    expect(relative(value, expected)).toBeLessThan(_name === 'momentum flux' ? 3e-6 : 1e-6);
  });

  it('would find an Obukhov length of −15.029490 m from the sonic flux alone', () => {
    const sonic = sonicTemperatureK(temperatureK, air.specificHumidity);
    expect(relative(obukhovLength(0.35, sonic, 0.215 * 1.0136), -15.02949)).toBeLessThan(1e-7);
  });

  it('shows what the wrong order would cost: −8.16292 instead of −9.158 µmol', () => {
    // Density terms on raw covariances, then the whole times 1.10.
    const raw = solveDensity({ sonicTemperature: 0.215, vapour: 7.0e-5, co2: -20e-6 }, air, meanCo2);
    expect(relative(raw.co2Flux * 1.1e6, -8.16292)).toBeLessThan(1e-6);
    expect(Math.abs(raw.co2Flux * 1.1e6 - fluxes.co2Flux * 1e6)).toBeGreaterThan(0.9);
  });

  it('agrees with a fixed-point iteration of the humidity correction', () => {
    // 0.20563345, 0.20569568, 0.20569536 K m/s, printed to eight digits.
    const q = air.specificHumidity;
    const gamma = 1 + (molarMassDryAir / molarMassWater) * air.mixingRatio;
    const a = 0.215 * 1.0136;
    const b = 7.0e-5 * 1.1;
    let flux = a;
    const seen: number[] = [];
    for (let pass = 0; pass < 8; pass++) {
      const evaporation = gamma * (b + (air.vapourDensity / temperatureK) * flux);
      flux = (a - (0.51 * temperatureK * (1 - q) * evaporation) / air.airDensity) / (1 + 0.51 * q);
      seen.push(flux);
    }
    expect(Math.abs(seen[0] - 0.20563345)).toBeLessThan(6e-9);
    expect(Math.abs(seen[1] - 0.20569568)).toBeLessThan(6e-9);
    expect(Math.abs(seen[2] - 0.20569536)).toBeLessThan(6e-9);
    expect(relative(fluxes.temperatureFlux, seen[7])).toBeLessThan(1e-12);
  });
});

describe('worked numbers of the scales', () => {
  it('gives L −26.7012823 m and z/L −0.0936284621 for u* 0.35 m/s, 293.15 K, 0.12 K m/s', () => {
    // numpy; z/L at 2.5 m.
    const length = obukhovLength(0.35, 293.15, 0.12);
    expect(relative(length, -26.7012823143819)).toBeLessThan(1e-12);
    expect(relative(2.5 / length, -0.09362846213020432)).toBeLessThan(1e-12);
  });

  it('evaporates 0.073711 mm in half an hour at 100 W and 25 °C, 3.5265 mm a day at 2.45 MJ/kg', () => {
    expect(relative((100 / lambda) * 1800, 0.073711)).toBeLessThan(1e-5);
    expect(relative((100 / 2.45e6) * 86400, 3.5265)).toBeLessThan(2e-5);
  });

  it('holds L to ±1e5 when neutral and leaves it out below u* 0.01 m/s', () => {
    expect(obukhovLength(0.35, 293, 0)).toBe(-1e5);
    expect(obukhovLength(0.35, 293, 1e-9)).toBe(-1e5);
    expect(obukhovLength(0.35, 293, -1e-9)).toBe(1e5);
    expect(obukhovLength(0.005, 293, 0.1)).toBeNaN();
  });
});

/**
 * Air whose dry part has no net flux, sample by sample: temperature, vapour and CO2 fluctuate with w at constant pressure. The truth is
 * ⟨n_d w χ⟩, which no density equation enters.
 */
function dryAirRecord(amplitude: number, n: number, seed: number, co2Amplitude = amplitude) {
  const random = new SplitMix64(seed);
  const normal = () => random.normal();
  const pressure = 100_000;
  const w = new Float64Array(n);
  const t = new Float64Array(n);
  const dry = new Float64Array(n);
  const vapour = new Float64Array(n);
  const co2 = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    const up = normal();
    w[i] = 0.4 * up;
    t[i] = 298 + amplitude * 0.6 * (0.5 * up + 0.87 * normal());
    const chiV = 0.016 + amplitude * 4e-4 * (0.4 * up + 0.92 * normal());
    const chiC = 400e-6 + co2Amplitude * 1.5e-6 * (-0.3 * up + 0.95 * normal());
    dry[i] = pressure / (gasConstant * t[i] * (1 + chiV));
    vapour[i] = chiV * dry[i];
    co2[i] = chiC * dry[i];
  }
  const mean = (x: Float64Array) => x.reduce((sum, value) => sum + value, 0) / n;
  const covariance = (x: Float64Array, y: Float64Array) => {
    const mx = mean(x);
    const my = mean(y);
    let sum = 0;
    for (let i = 0; i < n; i++) sum += (x[i] - mx) * (y[i] - my);
    return sum / n;
  };
  // Mean vertical wind that stops dry air.
  const wMean = mean(w);
  for (let i = 0; i < n; i++) w[i] -= wMean;
  const meanW = -covariance(w, dry) / mean(dry);
  const truth = (gas: Float64Array) => covariance(w, gas) + meanW * mean(gas);
  const meanVapour = mean(vapour);
  const meanT = mean(t);
  const state = moistAir(meanT, meanVapour * gasConstant * meanT, pressure);
  const meanDry = mean(dry);
  const density: DensityAir = {
    ...state,
    vapourDensity: meanVapour * molarMassWater,
    dryAirDensity: meanDry * molarMassDryAir,
    airDensity: meanVapour * molarMassWater + meanDry * molarMassDryAir,
  };
  const sonic = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    const rv = vapour[i] * molarMassWater;
    sonic[i] = sonicTemperatureK(t[i], rv / (rv + dry[i] * molarMassDryAir));
  }
  const solved = solveDensity(
    {
      sonicTemperature: covariance(w, sonic),
      vapour: covariance(w, vapour) * molarMassWater,
      co2: covariance(w, co2),
    },
    density,
    mean(co2),
  );
  return {
    solved,
    raw: covariance(w, co2),
    temperatureFlux: covariance(w, t),
    co2Truth: truth(co2),
    vapourTruth: truth(vapour) * molarMassWater,
    meanW,
  };
}

describe('synthetic record without a net flux of dry air', () => {
  const full = dryAirRecord(1, 400_000, 20270617);
  const tenth = dryAirRecord(0.1, 400_000, 20270617);

  it('recovers the CO2 flux, evaporation and mean vertical wind within 0.01 per cent of what was put in', () => {
    expect(relative(full.solved.co2Flux, full.co2Truth)).toBeLessThan(1e-4);
    expect(relative(full.solved.evaporation, full.vapourTruth)).toBeLessThan(1e-4);
    expect(relative(full.solved.densityMeanW, full.meanW)).toBeLessThan(1e-4);
    expect(relative(full.solved.temperatureFlux, full.temperatureFlux)).toBeLessThan(1e-4);
  });

  it('would be wrong by more than the flux itself without the density terms', () => {
    expect(Math.abs(full.raw - full.co2Truth)).toBeGreaterThan(Math.abs(full.co2Truth));
  });

  it('has errors of second order: a tenth of the fluctuations leaves less than a thirtieth of the relative error', () => {
    const error = relative(full.solved.co2Flux, full.co2Truth);
    expect(relative(tenth.solved.co2Flux, tenth.co2Truth)).toBeLessThan(error / 30);
  });

  it('finds no flux of a gas whose dry mole ratio is constant', () => {
    // Second order again: what is left is 1e-6 of what the sensor sees.
    const inert = dryAirRecord(0.1, 200_000, 7, 0);
    expect(Math.abs(inert.co2Truth / inert.raw)).toBeLessThan(1e-9);
    expect(Math.abs(inert.solved.co2Flux / inert.raw)).toBeLessThan(1e-5);
  });
});

describe('properties of the density terms', () => {
  it('gives exactly no flux of an inert gas where its density follows that of dry air to first order', () => {
    // n_d' = −n T'/T − n_v' at constant pressure, so w'ρc' = χ (−n w'T'/T − w'ρv').
    fc.assert(
      fc.property(
        fc.double({ min: -0.3, max: 0.5, noNaN: true }),
        fc.double({ min: -1e-5, max: 3e-4, noNaN: true }),
        (wT, vapour) => {
          const chi = 400e-6;
          const n = air.dryAirMolarDensity + air.vapourMolarDensity;
          const raw = chi * ((-n * wT) / temperatureK - vapour / molarMassWater);
          const { co2Flux } = solveDensity(
            { sonicTemperature: sonicCovariance(wT, vapour), vapour, co2: raw },
            air,
            meanCo2,
          );
          // Cancellation of terms of the size of raw: rounding only.
          return Math.abs(co2Flux) <= 1e-12 * (Math.abs(raw) + 1e-6);
        },
      ),
    );
  });

  it('agrees between the two forms of the CO2 equation to 1e-12 at any state', () => {
    const number = (min: number, max: number) => fc.double({ min, max, noNaN: true });
    fc.assert(
      fc.property(
        number(250, 315),
        number(0, 3000),
        number(60_000, 105_000),
        number(-0.3, 0.6),
        number(-1e-5, 3e-4),
        number(-4e-5, 4e-5),
        (t, e, p, sonic, vapour, co2) => {
          const state = moistAir(t, e, p);
          const mean = 410e-6 * state.dryAirMolarDensity;
          const one = solveDensity({ sonicTemperature: sonic, vapour, co2 }, state, mean);
          const other = co2FluxFromEvaporation(co2, one.evaporation, one.temperatureFlux, state, mean);
          const size = Math.abs(one.co2Covariance) + Math.abs(one.co2VapourTerm) + Math.abs(one.co2HeatTerm);
          return Math.abs(one.co2Flux - other) <= 1e-12 * size;
        },
      ),
    );
  });

  it('scales linearly: twice all covariances give twice all fluxes, twice the gas gives twice the CO2 flux', () => {
    const one = solveDensity({ sonicTemperature: 0.1, vapour: 5e-5, co2: -1e-5 }, air, meanCo2);
    const two = solveDensity({ sonicTemperature: 0.2, vapour: 1e-4, co2: -2e-5 }, air, meanCo2);
    for (const key of ['temperatureFlux', 'evaporation', 'co2Flux', 'densityMeanW', 'buoyancyFlux'] as const)
      expect(relative(two[key], 2 * one[key])).toBeLessThan(1e-14);
    const rich = solveDensity({ sonicTemperature: 0.1, vapour: 5e-5, co2: -2e-5 }, air, 2 * meanCo2);
    expect(relative(rich.co2Flux, 2 * one.co2Flux)).toBeLessThan(1e-14);
  });

  it('has the dimensions of a flux: changing the unit of length by ten changes each result by its power', () => {
    // Lengths in units of L: speed ×k, density ×k⁻³. w'T' ×k, E ×k⁻², Fc ×k⁻², w̄ ×k; κ carries 1/density.
    const k = 10;
    const scaled: DensityAir = {
      ...air,
      airDensity: air.airDensity / k ** 3,
      dryAirDensity: air.dryAirDensity / k ** 3,
      vapourDensity: air.vapourDensity / k ** 3,
    };
    const one = solveDensity({ sonicTemperature: 0.1, vapour: 5e-5, co2: -1e-5 }, air, meanCo2);
    const other = solveDensity(
      { sonicTemperature: 0.1 * k, vapour: 5e-5 / k ** 2, co2: -1e-5 / k ** 2 },
      scaled,
      meanCo2 / k ** 3,
    );
    expect(relative(other.temperatureFlux, one.temperatureFlux * k)).toBeLessThan(1e-13);
    expect(relative(other.evaporation, one.evaporation / k ** 2)).toBeLessThan(1e-13);
    expect(relative(other.co2Flux, one.co2Flux / k ** 2)).toBeLessThan(1e-13);
    expect(relative(other.densityMeanW, one.densityMeanW * k)).toBeLessThan(1e-13);
  });
});
