import { describe, expect, it } from 'vitest';
import {
  airStateFrom,
  airDensityByVirtualTemperature,
  airTemperatureFromSonicK,
  dewPointK,
  geopotentialAltitudeM,
  latentHeatOfVaporisation,
  moistAir,
  pressureFromElevationFao56Pa,
  pressureFromElevationPa,
  psychrometricConstantPaPerK,
  saturationSlopePaPerK,
  saturationVapourPressureIcePa,
  saturationVapourPressurePa,
  sonicTemperatureK,
  specificHeat,
  standardPressurePa,
  vapourPressureDeficitPa,
  vapourPressureFromPsychrometerPa,
} from '../../processing/thermodynamics';
import { massRatioDryAirToWater, massRatioWaterToDryAir } from '../../processing/constants';

const kelvin = (t: number) => t + 273.15;

/**
 * Saturation vapour pressure over water [kPa]. First column: the published laboratory table as general encyclopedias reproduce it
 * (0.6113 at 0 °C …). The other three were computed with numpy from the formulae of Sonntag 1990, FAO-56 eq. 11 and WMO-No. 8.
 */
const saturation: [t: number, published: number, sonntag: number, fao: number, wmo: number][] = [
  [0, 0.6113, 0.61121, 0.6108, 0.6112],
  [5, 0.8726, 0.87254, 0.87231, 0.87174],
  [10, 1.2281, 1.22813, 1.22796, 1.22603],
  [15, 1.7056, 1.70571, 1.70535, 1.70167],
  [20, 2.3388, 2.33925, 2.33828, 2.3326],
  [25, 3.169, 3.1699, 3.16778, 3.16006],
  [30, 4.2455, 4.24703, 4.24307, 4.23372],
  [35, 5.6267, 5.6292, 5.62268, 5.61284],
  [40, 7.3814, 7.3853, 7.37561, 7.36746],
  [45, 9.5898, 9.5956, 9.5825, 9.5797],
  [50, 12.344, 12.35274, 12.33676, 12.34516],
];

describe('saturation vapour pressure', () => {
  it.each(saturation)('stays within the stated share of the published table at %d °C', (t, published) => {
    // Stated accuracy of each formula against the table: 0.08 %, 0.09 %, 0.29 %.
    const relative = (formula: 'sonntag-1990' | 'fao-56' | 'wmo-8') =>
      Math.abs(saturationVapourPressurePa(kelvin(t), formula) / 1000 / published - 1);
    expect(relative('sonntag-1990')).toBeLessThan(0.0008);
    expect(relative('fao-56')).toBeLessThan(0.0009);
    expect(relative('wmo-8')).toBeLessThan(0.0029);
  });

  it.each(saturation)(
    'matches the numpy evaluation of the three formulae at %d °C',
    (t, _published, sonntag, fao, wmo) => {
      // Half a unit of the last digit printed (four or five decimals of kPa).
      const tolerance = t === 45 ? 5.01e-5 : 5.01e-6;
      expect(Math.abs(saturationVapourPressurePa(kelvin(t), 'sonntag-1990') / 1000 - sonntag)).toBeLessThan(
        tolerance,
      );
      expect(Math.abs(saturationVapourPressurePa(kelvin(t), 'fao-56') / 1000 - fao)).toBeLessThan(tolerance);
      expect(Math.abs(saturationVapourPressurePa(kelvin(t), 'wmo-8') / 1000 - wmo)).toBeLessThan(tolerance);
    },
  );

  it('matches values over ice and over supercooled water', () => {
    // numpy evaluation of Sonntag 1990 and WMO-No. 8 [Pa]; printed to 0.01.
    const ice: [number, number, number][] = [
      [-5, 401.76, 401.74],
      [-10, 259.89, 259.87],
      [-20, 103.24, 103.26],
      [-30, 38.0, 38.02],
    ];
    for (const [t, sonntag, wmo] of ice) {
      expect(Math.abs(saturationVapourPressureIcePa(kelvin(t)) - sonntag)).toBeLessThan(0.0051);
      expect(Math.abs(saturationVapourPressureIcePa(kelvin(t), 'wmo-8') - wmo)).toBeLessThan(0.0051);
    }
    expect(Math.abs(saturationVapourPressurePa(kelvin(-10)) - 286.52)).toBeLessThan(0.0051);
    expect(Math.abs(saturationVapourPressurePa(kelvin(-20)) - 125.59)).toBeLessThan(0.0051);
  });

  it('rises with temperature from −60 to 60 °C in every formula, and is NaN outside', () => {
    for (const formula of ['sonntag-1990', 'fao-56', 'wmo-8'] as const) {
      let last = 0;
      for (let t = -60; t <= 60; t += 0.5) {
        const e = saturationVapourPressurePa(kelvin(t), formula);
        expect(e).toBeGreaterThan(last);
        last = e;
      }
      expect(saturationVapourPressurePa(kelvin(-60.5), formula)).toBeNaN();
      expect(saturationVapourPressurePa(kelvin(60.5), formula)).toBeNaN();
      expect(saturationVapourPressurePa(NaN, formula)).toBeNaN();
    }
  });
});

describe('FAO-56', () => {
  // FAO-56 table 2.3 and examples 3, 4, 5 and 20 [kPa], printed to the digits given.
  const table: [number, number, number][] = [
    [1, 0.657, 3],
    [10, 1.228, 3],
    [14.8, 1.68, 2],
    [15, 1.705, 3],
    [18, 2.064, 3],
    [19.5, 2.267, 3],
    [20, 2.338, 3],
    [24.5, 3.075, 3],
    [25, 3.168, 3],
    [30, 4.243, 3],
    // Examples 17 and 18.
    [34.8, 5.56, 2],
    [25.6, 3.28, 2],
    [21.5, 2.564, 3],
    [12.3, 1.431, 3],
  ];
  it.each(table)('matches table 2.3 and the examples at %d °C', (t, kPa, decimals) => {
    // One unit of the last printed digit: the publication rounds some of them down.
    expect(Math.abs(saturationVapourPressurePa(kelvin(t), 'fao-56') / 1000 - kPa)).toBeLessThan(
      1.01 * 10 ** -decimals,
    );
  });

  it('matches example 3: mean saturation vapour pressure of 15 and 24.5 °C', () => {
    const mean =
      (saturationVapourPressurePa(kelvin(15), 'fao-56') +
        saturationVapourPressurePa(kelvin(24.5), 'fao-56')) /
      2;
    expect(Math.abs(mean / 1000 - 2.39)).toBeLessThan(0.005);
  });

  it.each([
    [25, 0.189],
    [30.2, 0.246],
    [1, 0.047],
    [10, 0.082],
    [20, 0.145],
  ])('matches the slope of the curve at %d °C (table 2.4, example 17)', (t, kPa) => {
    expect(Math.abs(saturationSlopePaPerK(kelvin(t)) / 1000 - kPa)).toBeLessThan(0.00051);
  });

  it('matches example 4: vapour pressure from a ventilated psychrometer at 1200 m', () => {
    const pressure = pressureFromElevationFao56Pa(1200);
    expect(Math.abs(pressure / 1000 - 87.9)).toBeLessThan(0.05);
    const e = vapourPressureFromPsychrometerPa(kelvin(25.6), kelvin(19.5), 87_900);
    expect(Math.abs(e / 1000 - 1.91)).toBeLessThan(0.005);
    // Unrounded, numpy: 1.9119 kPa.
    expect(
      Math.abs(vapourPressureFromPsychrometerPa(kelvin(25.6), kelvin(19.5), pressure) / 1000 - 1.9119),
    ).toBeLessThan(0.00006);
  });

  it('matches example 5: vapour pressure from the extremes of relative humidity', () => {
    const low = saturationVapourPressurePa(kelvin(18), 'fao-56') * 0.82;
    const high = saturationVapourPressurePa(kelvin(25), 'fao-56') * 0.54;
    expect(Math.abs((low + high) / 2000 - 1.7)).toBeLessThan(0.005);
  });

  it('matches equation 7 at thirteen elevations and example 2', () => {
    // numpy evaluation of eq. 7 [kPa]; example 2 prints 81.8 at 1800 m.
    const rows: [number, number][] = [
      [0, 101.3],
      [100, 100.12],
      [200, 98.96],
      [500, 95.53],
      [800, 92.19],
      [1000, 90.02],
      [1200, 87.9],
      [1500, 84.78],
      [1800, 81.76],
      [2000, 79.79],
      [2500, 75.04],
      [3000, 70.51],
      [4000, 62.13],
    ];
    for (const [z, kPa] of rows)
      expect(Math.abs(pressureFromElevationFao56Pa(z) / 1000 - kPa)).toBeLessThan(0.0051);
    expect(Math.abs(pressureFromElevationFao56Pa(1800) / 1000 - 81.8)).toBeLessThan(0.05);
  });

  it('matches the psychrometric constant of table 2.2 and three worked values', () => {
    const rows: [number, number][] = [
      [0, 0.067],
      [500, 0.064],
      [1000, 0.06],
      [1800, 0.054],
      [2000, 0.053],
      [3000, 0.047],
    ];
    for (const [z, kPa] of rows) {
      expect(
        Math.abs(psychrometricConstantPaPerK(pressureFromElevationFao56Pa(z)) / 1000 - kPa),
      ).toBeLessThan(0.00051);
    }
    // γ at 60, 80, 100 kPa with the coefficient 0.000664742: the unrounded cp/(ε λ) of eq. 8. We keep the printed 0.665e-3.
    for (const [kPa, gamma] of [
      [60, 0.0398844],
      [80, 0.0531792],
      [100, 0.066474],
    ] as const) {
      expect(Math.abs(psychrometricConstantPaPerK(kPa * 1000) / 1000 / gamma - 1)).toBeLessThan(4e-4);
    }
  });

  it('evaporates water at 2.45 MJ per kilogram at 20 °C', () => {
    // FAO-56 rounds to 2.45; the formula gives 2.45378.
    expect(latentHeatOfVaporisation(kelvin(20))).toBeCloseTo(2_453_780, 3);
    expect(latentHeatOfVaporisation(kelvin(-5), 'ice')).toBe(2.834e6);
  });
});

describe('ISO 2533 standard atmosphere', () => {
  // Published table, geopotential altitude [m], pressure [Pa]; printed to 0.1 Pa.
  const table: [number, number][] = [
    [0, 101325],
    [300, 97772.6],
    [400, 96611.1],
    [500, 95460.8],
    [800, 92076.4],
    [1000, 89874.6],
    [1200, 87715.6],
    [1500, 84556.0],
    [1800, 81489.2],
    [2000, 79495.2],
    [2500, 74682.5],
    [3000, 70108.5],
    [4000, 61640.2],
    [5000, 54019.9],
    [6000, 47181.0],
    [8000, 35599.8],
  ];
  it.each(table)('matches the table at %d m', (h, pa) => {
    expect(Math.abs(standardPressurePa(h) - pa)).toBeLessThan(0.101);
  });

  it('gives 850, 700 and 500 hPa at 1457, 3012 and 5574 m', () => {
    // Heights printed to a metre, about 0.1 hPa.
    expect(Math.abs(standardPressurePa(1457) / 100 - 850)).toBeLessThan(0.1);
    expect(Math.abs(standardPressurePa(3012) / 100 - 700)).toBeLessThan(0.1);
    expect(Math.abs(standardPressurePa(5574) / 100 - 500)).toBeLessThan(0.1);
  });

  it('turns 1000 geometric metres into 999.84 geopotential ones, 89876.3 Pa, 1.11164 kg m-3 at 1000 geopotential metres', () => {
    expect(geopotentialAltitudeM(1000)).toBeCloseTo(999.84, 2);
    expect(Math.abs(pressureFromElevationPa(1000) - 89876.3)).toBeLessThan(0.06);
    // Density of the published table; its molar mass differs from ours in the sixth digit.
    const dry = moistAir(288.15 - 6.5, 0, standardPressurePa(1000));
    expect(Math.abs(dry.airDensity - 1.11164)).toBeLessThan(4e-5);
  });

  it('is NaN above the troposphere', () => {
    expect(standardPressurePa(11_500)).toBeNaN();
  });
});

describe('state of moist air', () => {
  it('matches the worked state at 25 °C, 50 %, 1000 hPa', () => {
    // numpy, Sonntag 1990, enhancement factor off; printed digits.
    const t = kelvin(25);
    const es = saturationVapourPressurePa(t);
    const air = moistAir(t, 0.5 * es, 100_000);
    expect(air.vapourPressurePa).toBeCloseTo(1584.95, 2);
    expect(air.vapourDensity).toBeCloseTo(0.01151829, 8);
    expect(air.dryAirDensity).toBeCloseTo(1.14992374, 8);
    expect(air.airDensity).toBeCloseTo(1.16144204, 8);
    expect(air.specificHumidity).toBeCloseTo(0.00991723, 8);
    expect(air.mixingRatio).toBeCloseTo(0.01001657, 8);
    expect(latentHeatOfVaporisation(t)).toBeCloseTo(2_441_975, 6);
    expect(specificHeat(air.specificHumidity)).toBeCloseTo(1013.039, 3);
    expect(air.airDensity * specificHeat(air.specificHumidity)).toBeCloseTo(1176.5865, 4);
    expect(air.dryAirMolarDensity).toBeCloseTo(39.700183, 6);
    expect(vapourPressureDeficitPa(air.vapourPressurePa, t)).toBeCloseTo(1584.95, 2);
    expect(massRatioDryAirToWater).toBeCloseTo(1.60781292, 8);
    expect(massRatioWaterToDryAir).toBeCloseTo(0.62196291, 8);
    expect(1 + massRatioDryAirToWater * air.mixingRatio).toBeCloseTo(1.01610477, 8);
  });

  it('matches the worked conversion at 298.15 K, 101325 Pa, 15 mmol/mol', () => {
    // numpy, float64; the shape of the arithmetic may differ, hence 1e-12 relative.
    const air = moistAir(298.15, 0.015 * 101_325, 101_325);
    const total = air.dryAirMolarDensity + air.vapourMolarDensity;
    const close = (value: number, expected: number) =>
      expect(Math.abs(value / expected - 1)).toBeLessThan(1e-12);
    close(total, 40.874044524329435);
    close(air.vapourMolarDensity * 1e3, 613.1106678649415);
    close(air.vapourPressurePa, 1519.875);
    close(air.vapourDryMoleFraction * 1e3, 15.228426395939085);
    close(air.mixingRatio * 1e3, 9.471516353494312);
    close(air.specificHumidity, 0.009382648445305515);
    close(air.airDensity, 1.1772113616918392);
    close(air.dryAirDensity, 1.1661660013392652);
    close(sonicTemperatureK(298.15, air.specificHumidity), 299.57669268332353);
    // 400 µmol/mol CO2 in moist air: 406.0913705583757 in dry air, 16.349617809731775 mmol m-3.
    close((400 * total) / air.dryAirMolarDensity, 406.0913705583757);
    close(total * 400e-6 * 1e3, 16.349617809731775);
  });

  it('finds the true temperature back from sonic temperature and vapour density', () => {
    // The same state, inverted. Five passes leave 2e-11 K at 20 mmol/mol.
    const air = airStateFrom({
      sonicTemperatureK: 299.57669268332353,
      vapourMolarDensity: 0.6131106678649415,
      pressurePa: 101_325,
    });
    expect(Math.abs(air.temperatureK - 298.15)).toBeLessThan(1e-10);
    expect(Math.abs(air.vapourPressurePa - 1519.875)).toBeLessThan(1e-8);
  });

  it('finds the density by the virtual temperature that the sum of its parts gives', () => {
    for (const t of [250, 273.15, 300, 315]) {
      for (const e of [0, 300, 1200, 4000]) {
        const air = moistAir(t, e, 95_000);
        expect(Math.abs(airDensityByVirtualTemperature(t, e, 95_000) / air.airDensity - 1)).toBeLessThan(
          1e-12,
        );
      }
    }
  });

  it('finds the dew point 13.8516 °C of half-saturated air at 25 °C', () => {
    // numpy, WMO-No. 8 form both ways.
    const e = 0.5 * saturationVapourPressurePa(kelvin(25), 'wmo-8');
    expect(dewPointK(e) - 273.15).toBeCloseTo(13.8516, 4);
    expect(saturationVapourPressurePa(dewPointK(e), 'wmo-8')).toBeCloseTo(e, 9);
    expect(dewPointK(0)).toBeNaN();
  });

  it('leaves dry air alone and refuses vapour beyond the whole pressure', () => {
    expect(airTemperatureFromSonicK(290, 0, 100_000)).toBe(290);
    expect(airTemperatureFromSonicK(290, 45, 100_000)).toBeNaN();
    expect(moistAir(290, 100_000, 100_000).airDensity).toBeNaN();
    expect(
      airStateFrom({ sonicTemperatureK: NaN, vapourMolarDensity: 0.5, pressurePa: 1e5 }).airDensity,
    ).toBeNaN();
  });
});
