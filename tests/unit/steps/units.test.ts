import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { completenessStep } from '../../../processing/steps/completeness';
import { plausibilityStep } from '../../../processing/steps/plausibility';
import {
  co2ToMolarDensity,
  dryFromMoist,
  h2oToMolarDensity,
  massDensityFromMolar,
  moistFromDry,
  molarDensityFromMass,
  unitsStep,
} from '../../../processing/steps/units';
import type { Recorded } from './recorded-state';
import { channelsWithout, plainChannels, recordedState } from './recorded-state';

const share = fc.double({ min: 1e-7, max: 0.5, noNaN: true });

describe('mole fractions', () => {
  it('come back from dry to moist', () => {
    fc.assert(
      fc.property(share, share, (x, vapour) => {
        const dryVapour = dryFromMoist(vapour, vapour);
        expect(moistFromDry(dryFromMoist(x, vapour), dryVapour) / x).toBeCloseTo(1, 12);
        expect(moistFromDry(dryVapour, dryVapour) / vapour).toBeCloseTo(1, 12);
      }),
    );
  });

  it('are the same dry and moist in dry air', () => {
    expect(dryFromMoist(400e-6, 0)).toBe(400e-6);
    expect(moistFromDry(400e-6, 0)).toBe(400e-6);
  });

  it('do not exist where vapour would be all of the air', () => {
    expect(dryFromMoist(400e-6, 1)).toBeNaN();
    expect(dryFromMoist(1.2, 1.2)).toBeNaN();
  });

  it('and densities come back from mass', () => {
    fc.assert(
      fc.property(share, (c) => {
        expect(molarDensityFromMass(massDensityFromMolar(c, 0.0440095), 0.0440095) / c).toBeCloseTo(1, 12);
      }),
    );
  });
});

describe('conversion of samples', () => {
  it('turns mmol m-3 into mol m-3 and leaves gaps', () => {
    const h2o = Float64Array.of(500, NaN, 250);
    h2oToMolarDensity(h2o, 'molar-density', new Float64Array(3), 1e5);
    expect(Array.from(h2o)).toEqual([0.5, NaN, 0.25]);
    const co2 = Float64Array.of(16, NaN);
    co2ToMolarDensity(co2, 'molar-density', new Float64Array(2), undefined, 0, 1e5);
    expect(co2[0]).toBeCloseTo(0.016, 15);
  });

  it('reaches the same density from moist and from dry mole fraction', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 250, max: 315, noNaN: true }),
        fc.double({ min: 0.1, max: 50, noNaN: true }),
        (sonicK, vapour) => {
          const temperature = Float64Array.of(sonicK);
          const moist = Float64Array.of(vapour);
          const dry = Float64Array.of(1e3 * dryFromMoist(vapour * 1e-3, vapour * 1e-3));
          h2oToMolarDensity(moist, 'mole-fraction', temperature, 1e5);
          h2oToMolarDensity(dry, 'dry-mole-fraction', temperature, 1e5);
          expect(dry[0] / moist[0]).toBeCloseTo(1, 12);

          const moistCo2 = Float64Array.of(400);
          const dryCo2 = Float64Array.of(1e6 * dryFromMoist(400e-6, vapour * 1e-3));
          co2ToMolarDensity(moistCo2, 'mole-fraction', temperature, moist, 0, 1e5);
          co2ToMolarDensity(dryCo2, 'dry-mole-fraction', temperature, moist, 0, 1e5);
          // The temperature is found in five passes and leaves 1e-10 K.
          expect(dryCo2[0] / moistCo2[0]).toBeCloseTo(1, 10);
        },
      ),
    );
  });

  it('puts the mean vapour where a sample has none', () => {
    const temperature = Float64Array.of(295, 295);
    const co2 = Float64Array.of(400, 400);
    co2ToMolarDensity(co2, 'mole-fraction', temperature, Float64Array.of(0.5, NaN), 0.5, 1e5);
    expect(co2[1]).toBe(co2[0]);
  });

  it('has no density without temperature, and counts what was lost', () => {
    const h2o = Float64Array.of(10, 10, 1001);
    const lost = h2oToMolarDensity(h2o, 'mole-fraction', Float64Array.of(295, NaN, 295), 1e5);
    expect(lost).toEqual({ impossible: 1, withoutTemperature: 1 });
    expect(Array.from(h2o, Number.isNaN)).toEqual([false, true, true]);
    const co2 = Float64Array.of(400, NaN);
    expect(
      co2ToMolarDensity(co2, 'mole-fraction', Float64Array.of(NaN, NaN), undefined, 0, 1e5)
        .withoutTemperature,
    ).toBe(1);
  });
});

describe('units step', () => {
  const run = (recorded: Recorded) => {
    const state = recordedState(recorded);
    completenessStep(state, state.settings.completeness);
    plausibilityStep(state, state.settings.plausibility);
    return unitsStep(state, state.settings);
  };
  const pressure = (length: number) => new Float64Array(length).fill(101_325);

  it('turns both gases into mol m-3, whatever they were recorded in', () => {
    const state = run({
      values: { ...plainChannels(200), airPressure: pressure(200) },
    });
    expect(state.series.co2![0]).toBeGreaterThan(0.015);
    expect(state.series.co2![0]).toBeLessThan(0.017);
    expect(state.series.h2o![0]).toBeGreaterThan(0.46);
    expect(state.series.h2o![0]).toBeLessThan(0.54);
    expect(state.ledger[2].changes).toMatchObject({
      co2Measure: 'molar-density',
      h2oMeasure: 'molar-density',
    });
  });

  it('loses a mole fraction with its temperature and says so without grading', () => {
    const values = plainChannels(200);
    values.co2.fill(400);
    values.h2o.fill(12);
    values.sonicTemperature.fill(NaN, 0, 20);
    const state = run({
      values: { ...values, airPressure: pressure(200) },
      gasMeasures: { co2: 'mole-fraction', h2o: 'mole-fraction' },
    });
    expect(state.counts.co2?.valid).toBe(180);
    expect(state.reasons.map(({ key, grade }) => [key, grade])).toEqual([
      ['units.h2oWithoutTemperature', 0],
      ['units.co2WithoutTemperature', 0],
    ]);
  });

  it('converts CO2 without any H2O as if the air were dry', () => {
    const values = channelsWithout('h2o', 200);
    values.co2!.fill(400);
    values.sonicTemperature!.fill(298.15);
    const state = run({
      values: { ...values, airPressure: pressure(200) },
      gasMeasures: { co2: 'mole-fraction' },
    });
    // n = 101325/(8.314462618 × 298.15) = 40.874044524329435 mol m-3, times 400e-6.
    expect(state.series.co2![0]).toBeCloseTo(40.874044524329435 * 400e-6, 12);
  });
});
