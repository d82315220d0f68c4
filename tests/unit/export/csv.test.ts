import * as fc from 'fast-check';
import Papa from 'papaparse';
import { describe, expect, it } from 'vitest';
import { catalogue } from '../../../processing/catalogue';
import { exchangeCsv, exchangeQuantities, exchangeStamp } from '../../../processing/export/exchange-csv';
import { shortestDecimal } from '../../../processing/export/number-text';
import { plainCsv, stationStamp } from '../../../processing/export/plain-csv';
import type { FluxGrade, PeriodResult, Reason } from '../../../processing/state';

const halfHour = 1_800_000;
const station = { utcOffsetMinutes: 60 };
const grade = (ssitc: 0 | 1 | 2 | null): FluxGrade => ({
  grade: ssitc,
  ssitc,
  class9: ssitc === null ? null : 3,
  decidedBy: [],
});

function period(startMs: number, values: PeriodResult['values'] = {}): PeriodResult {
  return {
    startMs,
    endMs: startMs + halfHour,
    outcome: 'computed',
    values,
    grades: { momentum: grade(1), sensibleHeat: grade(0), latentHeat: grade(2), co2Flux: grade(null) },
    reasons: [],
    ledger: [],
    curves: {},
    rawFiles: [],
  };
}
const reason = (finding: string, gradeOf: 0 | 1 | 2): Reason => ({
  key: 'steadyState.co2',
  step: 'steadyState',
  fluxes: ['co2Flux'],
  series: 'co2',
  grade: gradeOf,
  statistic: { label: 'x', value: 1, unit: '1' },
  limits: { softLow: null, softHigh: null, hardLow: null, hardHigh: null },
  finding,
  sentence: finding,
});
const start = Date.UTC(2027, 5, 17, 21, 30);
const parsed = (text: string) => Papa.parse<string[]>(text.trimEnd(), { delimiter: ',' }).data;
const cell = (rows: string[][], row: number, name: string) => rows[row][rows[0].indexOf(name)];

describe('numbers in tables', () => {
  it('read back as the same double and hold no exponent', () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true, min: -1e30, max: 1e30 }), (value) => {
        const text = shortestDecimal(value);
        expect(text).toMatch(/^-?\d+(\.\d+)?$/);
        expect(Number(text) === value).toBe(true);
      }),
    );
    expect(shortestDecimal(-1.25e-7)).toBe('-0.000000125');
    expect(shortestDecimal(1e21)).toBe('1000000000000000000000');
    expect(shortestDecimal(-0)).toBe('0');
  });
});

describe('exchange file', () => {
  it('writes stamps in local standard time, midnight as 0000 of the next day', () => {
    // 22:30 to 23:00 and 23:30 to 00:00 at UTC+1.
    const rows = parsed(exchangeCsv([period(start), period(start + 2 * halfHour)], station));
    expect(rows[0].slice(0, 2)).toEqual(['TIMESTAMP_START', 'TIMESTAMP_END']);
    expect(rows[1].slice(0, 2)).toEqual(['202706172230', '202706172300']);
    expect(rows[3].slice(0, 2)).toEqual(['202706172330', '202706180000']);
    expect(exchangeStamp(Date.UTC(2027, 0, 1), -90)).toBe('202612312230');
  });

  it('has 48 rows on the day the clocks of daylight saving change', () => {
    const dayStart = Date.UTC(2027, 2, 27, 23);
    const rows = parsed(exchangeCsv([period(dayStart), period(dayStart + 47 * halfHour)], station));
    expect(rows).toHaveLength(49);
    expect(new Set(rows.slice(1).map((row) => row[0].slice(0, 8)))).toEqual(new Set(['20270328']));
  });

  it('writes missing values and periods without a result as −9999', () => {
    const rows = parsed(
      exchangeCsv([period(start, { sensibleHeat: null }), period(start + 2 * halfHour)], station),
    );
    expect(rows).toHaveLength(4);
    expect(cell(rows, 1, 'H')).toBe('-9999');
    expect(new Set(rows[2].slice(2))).toEqual(new Set(['-9999']));
    expect(cell(rows, 1, 'FC_SSITC_TEST')).toBe('-9999');
    expect(cell(rows, 1, 'LE_SSITC_TEST')).toBe('2');
    expect(cell(rows, 1, 'H_SSITC_TEST')).toBe('0');
    expect(cell(rows, 1, 'TAU_SSITC_TEST')).toBe('1');
    for (const row of rows) expect(row).toHaveLength(rows[0].length);
  });

  it('fills up the span asked for', () => {
    const rows = parsed(
      exchangeCsv([period(start)], station, { fromMs: start - halfHour, toMs: start + 3 * halfHour }),
    );
    expect(rows.slice(1).map((row) => row[0])).toEqual([
      '202706172200',
      '202706172230',
      '202706172300',
      '202706172330',
    ]);
  });

  it('converts to the units of the networks', () => {
    // By hand: −10.5 µmol, 100 kPa, 12.5 hPa, 20 °C, 55 %, downward momentum negative.
    const values = {
      co2Flux: -10.5e-6,
      airPressure: 100_000,
      vapourPressureDeficit: 1250,
      airTemperature: 293.15,
      relativeHumidity: 0.55,
      tau: 0.125,
    };
    const rows = parsed(exchangeCsv([period(start, values)], station));
    const number = (name: string) => Number(cell(rows, 1, name));
    expect(number('FC')).toBeCloseTo(-10.5, 12);
    expect(number('PA')).toBeCloseTo(100, 12);
    expect(number('VPD')).toBeCloseTo(12.5, 12);
    expect(number('TA')).toBeCloseTo(20, 12);
    expect(number('RH')).toBeCloseTo(55, 12);
    expect(number('TAU')).toBe(-0.125);
    expect(
      Number(cell(parsed(exchangeCsv([period(start, values)], station, { tauSign: 'positive' })), 1, 'TAU')),
    ).toBe(0.125);
  });

  it('reads back every value of every quantity to the last digit of its unit', () => {
    // Round trip through an independent reader; one multiplication and one addition each way.
    const values: Record<string, number> = {};
    exchangeQuantities.forEach(
      ({ key }, i) => (values[key] = (i % 2 ? 1 : -1) * Math.exp(i / 3 - 8) * Math.PI),
    );
    const rows = parsed(exchangeCsv([period(start, values)], station));
    for (const { key, exchange } of exchangeQuantities) {
      const back = (Number(cell(rows, 1, exchange!.name)) - exchange!.offset) / exchange!.factor;
      const size = Math.abs(values[key]) + Math.abs(exchange!.offset / exchange!.factor);
      expect(Math.abs(back - values[key]), key).toBeLessThanOrEqual(4e-16 * size);
    }
  });

  it('names each variable once and knows the names the networks list', () => {
    const names = exchangeQuantities.map(({ exchange }) => exchange!.name);
    expect(new Set(names).size).toBe(names.length);
    for (const name of [
      'FC',
      'SC',
      'NEE',
      'H',
      'LE',
      'FH2O',
      'TAU',
      'USTAR',
      'MO_LENGTH',
      'ZL',
      'WS',
      'WD',
      'U_SIGMA',
      'V_SIGMA',
      'W_SIGMA',
      'T_SONIC',
      'T_SONIC_SIGMA',
      'CO2',
      'H2O',
      'TA',
      'RH',
      'PA',
      'VPD',
      'SH',
      'SLE',
    ])
      expect(names).toContain(name);
  });

  it('appends a position to every variable, but not to the stamps', () => {
    const [header] = parsed(
      exchangeCsv([period(start)], station, { positionSuffix: '_1_2_1', keys: ['airTemperature'] }),
    );
    expect(header.slice(0, 4)).toEqual([
      'TIMESTAMP_START',
      'TIMESTAMP_END',
      'TA_1_2_1',
      'FC_SSITC_TEST_1_2_1',
    ]);
  });

  it('refuses unknown names, mixed intervals, disorder and odd suffixes', () => {
    const one = period(start);
    expect(() => exchangeCsv([one], station, { keys: ['bowenRatio'] })).toThrow(RangeError);
    expect(() =>
      exchangeCsv([one, { ...period(start + halfHour), endMs: start + 3 * halfHour }], station),
    ).toThrow(RangeError);
    expect(() => exchangeCsv([period(start + halfHour), one], station)).toThrow(RangeError);
    expect(() => exchangeCsv([one, one], station)).toThrow(RangeError);
    expect(() => exchangeCsv([one], station, { positionSuffix: ',X' })).toThrow(RangeError);
    expect(exchangeCsv([], station).split('\n')).toHaveLength(2);
  });
});

describe('plain table', () => {
  const values = { co2Flux: -1.2345678901234567e-5, airTemperature: 293.15, bowenRatio: null };

  it('has a row of names, a row of units, and stamps in UTC and station time', () => {
    const rows = parsed(plainCsv([period(start, values)], station));
    expect(rows[0].slice(0, 5)).toEqual(['startUtc', 'endUtc', 'startStation', 'endStation', 'outcome']);
    expect(rows[2].slice(0, 5)).toEqual([
      '2027-06-17T21:30Z',
      '2027-06-17T22:00Z',
      '2027-06-17T22:30+01:00',
      '2027-06-17T23:00+01:00',
      'computed',
    ]);
    expect(cell(rows, 1, 'co2Flux')).toBe('µmol m-2 s-1');
    expect(stationStamp(0, -210)).toBe('1969-12-31T20:30-03:30');
  });

  it('keeps full precision and leaves missing empty', () => {
    const rows = parsed(plainCsv([period(start, values)], station));
    expect(Number(cell(rows, 2, 'co2Flux'))).toBe(-1.2345678901234567e-5 * 1e6);
    expect(cell(rows, 2, 'bowenRatio')).toBe('');
    expect(cell(rows, 2, 'grade.co2Flux')).toBe('');
    expect(cell(rows, 2, 'grade.ustar')).toBe('1');
    expect(cell(rows, 2, 'class9.latentHeat')).toBe('3');
  });

  it('writes findings worst first, quoted where they hold commas or quotes', () => {
    const one = {
      ...period(start),
      reasons: [reason('Small, "odd"', 0), reason('Steady-state deviation 147 %', 2)],
    };
    const text = plainCsv([one], station);
    expect(cell(parsed(text), 2, 'reasons')).toBe('Steady-state deviation 147 %; Small, "odd"');
  });

  it('writes the keys asked for, in their order, and refuses unknown ones', () => {
    const [header] = parsed(
      plainCsv([period(start, values)], station, { keys: ['airTemperature', 'co2Flux'] }),
    );
    expect(header.slice(5, 7)).toEqual(['airTemperature', 'co2Flux']);
    expect(() => plainCsv([], station, { keys: ['nothing'] })).toThrow(RangeError);
  });

  it('reads back every quantity of the catalogue', () => {
    const all: Record<string, number> = {};
    catalogue.forEach(({ key }, i) => (all[key] = Math.sin(i + 1) * 10 ** (i % 9)));
    const rows = parsed(plainCsv([period(start, all)], station));
    for (const { key, factor, offset } of catalogue)
      expect(Number(cell(rows, 2, key)), key).toBe(all[key] * factor + offset);
  });
});
