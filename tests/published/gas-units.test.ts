import { describe, expect, it } from 'vitest';
import { molarMassCo2, molarMassWater } from '../../processing/constants';
import {
  co2ToMolarDensity,
  dryFromMoist,
  h2oToMolarDensity,
  massDensityFromMolar,
  molarDensityOfAir,
} from '../../processing/steps/units';

/**
 * Ideal gas law and definitions at 298.15 K, 101325 Pa, 400 µmol/mol CO2 and 15 mmol/mol H2O in moist air. Numbers by an independent
 * program (numpy) with R = 8.314462618 J mol-1 K-1, M_c = 0.0440095, M_v = 0.01801528, M_d = 0.0289652 kg mol-1.
 */
const temperatureK = 298.15;
const pressurePa = 101_325;
const co2 = 400e-6;
const vapour = 15e-3;
/** T (1 + 0.51 q) with q = 0.009382648445305515. */
const sonicK = 299.57669268332353;

describe('units of gases', () => {
  it('matches the molar density of air', () => {
    expect(molarDensityOfAir(pressurePa, temperatureK)).toBeCloseTo(40.874044524329435, 11);
  });

  it('matches CO2 as molar and mass density', () => {
    const c = molarDensityOfAir(pressurePa, temperatureK) * co2;
    expect(1e3 * c).toBeCloseTo(16.349617809731775, 12);
    expect(1e6 * massDensityFromMolar(c, molarMassCo2)).toBeCloseTo(719.5385049973905, 10);
  });

  it('matches H2O as molar and mass density', () => {
    const c = molarDensityOfAir(pressurePa, temperatureK) * vapour;
    expect(1e3 * c).toBeCloseTo(613.1106678649415, 10);
    expect(1e3 * massDensityFromMolar(c, molarMassWater)).toBeCloseTo(11.045360352573924, 12);
  });

  it('matches both dry mole fractions', () => {
    expect(1e6 * dryFromMoist(co2, vapour)).toBeCloseTo(406.0913705583757, 10);
    expect(1e3 * dryFromMoist(vapour, vapour)).toBeCloseTo(15.228426395939085, 12);
  });

  it('reaches the same densities from every measure, through sonic temperature', () => {
    for (const [measure, h2oValue, co2Value] of [
      ['mole-fraction', 15, 400],
      ['dry-mole-fraction', 15.228426395939085, 406.0913705583757],
      ['molar-density', 613.1106678649415, 16.349617809731775],
    ] as const) {
      const temperature = Float64Array.of(sonicK);
      const h2o = Float64Array.of(h2oValue);
      const gas = Float64Array.of(co2Value);
      h2oToMolarDensity(h2o, measure, temperature, pressurePa);
      co2ToMolarDensity(gas, measure, temperature, h2o, 0, pressurePa);
      expect(h2o[0] / 0.6131106678649415).toBeCloseTo(1, 12);
      // Five passes for the temperature leave 1e-10 K of 298: 4e-13, and a last rounding.
      expect(gas[0] / 0.016349617809731775).toBeCloseTo(1, 11);
    }
  });
});
