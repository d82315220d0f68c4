import { describe, expect, it } from 'vitest';
import { guessLayout } from '../../../processing/records/guess-layout';
import type { GuessInput, LayoutGuess, ProblemCode } from '../../../processing/records/guess-layout';
import { layoutSchema } from '../../../processing/schemas/layout';
import type { ChannelKey, Layout } from '../../../processing/schemas/layout';
import { ingest, reportOf } from './record-fixtures';

// All files are invented here, column by column, so what each of them holds is known beforehand.

/** Invented turbulence: smooth, reproducible, of ordinary size. */
function wave(row: number, mean: number, swing: number, phase: number): number {
  return mean + swing * (0.6 * Math.sin(row * 0.7 + phase) + 0.4 * Math.sin(row * 2.3 + 2 * phase));
}

interface Scan {
  u: string;
  v: string;
  w: string;
  tC: string;
  tK: string;
  sos: string;
  co2Mg: string;
  co2Mmol: string;
  co2Ppm: string;
  h2oG: string;
  h2oMmol: string;
  h2oFraction: string;
  pKPa: string;
  pHPa: string;
  pPa: string;
}

function scan(row: number): Scan {
  const tC = wave(row, 18.6, 0.25, 1);
  return {
    u: wave(row, 2.4, 0.8, 0.1).toFixed(3),
    v: wave(row, -1.1, 0.6, 0.7).toFixed(3),
    w: wave(row, 0.02, 0.3, 2.1).toFixed(3),
    tC: tC.toFixed(2),
    tK: (tC + 273.15).toFixed(2),
    sos: (20.067 * Math.sqrt(tC + 273.15)).toFixed(2),
    co2Mg: wave(row, 725, 14, 2.9).toFixed(1),
    co2Mmol: wave(row, 16.5, 0.3, 2.9).toFixed(3),
    co2Ppm: wave(row, 412, 6, 2.9).toFixed(2),
    h2oG: wave(row, 10.4, 0.5, 0.4).toFixed(2),
    h2oMmol: wave(row, 577, 28, 0.4).toFixed(1),
    h2oFraction: wave(row, 13.9, 0.6, 0.4).toFixed(3),
    pKPa: wave(row, 101.3, 0.01, 0.4).toFixed(3),
    pHPa: wave(row, 1013, 0.1, 0.4).toFixed(1),
    pPa: wave(row, 101300, 8, 0.4).toFixed(0),
  };
}

const two = (value: number): string => String(value).padStart(2, '0');
/** Time of day of a row at a rate, starting at a second of the day. */
function clockOf(row: number, rate: number, startS: number, decimals = 2): string {
  const s = startS + row / rate;
  const whole = Math.floor(s + 1e-9);
  const fraction = (s - whole + 1e-9).toFixed(decimals).slice(1);
  return `${two(Math.floor(whole / 3600) % 24)}:${two(Math.floor(whole / 60) % 60)}:${two(whole % 60)}${decimals > 0 ? fraction : ''}`;
}

function file(header: string[], row: (index: number, s: Scan) => string, rows = 120): string {
  return (
    [...header, ...Array.from({ length: rows }, (_, index) => row(index, scan(index)))].join('\n') + '\n'
  );
}

function guess(text: string, fileName: string, more: Partial<GuessInput> = {}): LayoutGuess {
  return guessLayout({ text, fileName, isCutOff: false, sampleRateHz: 10, utcOffsetMinutes: 60, ...more });
}

function columnsOf(found: LayoutGuess): Partial<Record<ChannelKey, [number, string]>> {
  return Object.fromEntries(
    found.layout.columns.map((column) => [column.channel, [column.index, column.unit]]),
  );
}
const codesOf = (found: LayoutGuess): ProblemCode[] =>
  [...new Set(found.problems.map((problem) => problem.code))].sort();
const fields = (
  layout: Layout,
): Pick<
  Layout,
  | 'delimiter'
  | 'decimal'
  | 'quoted'
  | 'headerRows'
  | 'nameRow'
  | 'unitRow'
  | 'sampleRateHz'
  | 'clock'
  | 'stampMarks'
  | 'time'
> => {
  const { delimiter, decimal, quoted, headerRows, nameRow, unitRow, sampleRateHz, clock, stampMarks, time } =
    layout;
  return { delimiter, decimal, quoted, headerRows, nameRow, unitRow, sampleRateHz, clock, stampMarks, time };
};
const plusOne: Layout['clock'] = { kind: 'fixed', offsetMinutes: 60 };
const morning = 11.5 * 3600;

describe('guessLayout on ordinary files', () => {
  it('reads a comma file with names and ISO stamps, and asks about units that only the range tells', () => {
    const found = guess(
      file(['time,wind_x,wind_y,wind_z,sonic_t,co2_dens,h2o_dens,gas_status'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}`, s.u, s.v, s.w, s.tC, s.co2Mg, s.h2oG, '0'].join(','),
      ),
      'HOF_20270622_1130.csv',
    );
    expect(fields(found.layout)).toEqual({
      delimiter: 'comma',
      decimal: '.',
      quoted: false,
      headerRows: 1,
      nameRow: 0,
      unitRow: null,
      sampleRateHz: 10,
      clock: plusOne,
      stampMarks: 'start',
      time: { kind: 'stamp', column: 0, format: 'iso' },
    });
    expect(columnsOf(found)).toEqual({
      windU: [1, 'm s-1'],
      windV: [2, 'm s-1'],
      windW: [3, 'm s-1'],
      sonicTemperature: [4, 'degC'],
      co2: [5, 'mg m-3'],
      h2o: [6, 'g m-3'],
      analyserStatus: [7, 'code'],
    });
    expect(found.layout.columns.find((column) => column.channel === 'analyserStatus')?.good).toEqual({
      codes: [0],
      mask: null,
      equals: null,
    });
    expect(codesOf(found)).toEqual(['clock-unsaid', 'unit-from-range']);
    expect(found.problems.find((problem) => problem.channel === 'co2')?.message).toContain(
      'fits mg m-3, not mmol m-3',
    );
    expect(found.preview.spacing?.isEven).toBe(true);
    expect(found.estimatedRateHz).toBeCloseTo(10, 6);
    // 11:30 at UTC+1 is 10:30 UTC
    expect(found.preview.firstMs).toBe(Date.UTC(2027, 5, 22, 10, 30));
    expect(layoutSchema.safeParse(found.layout).success).toBe(true);
  });

  it('reads semicolons with decimal commas, a date with dots and a unit row', () => {
    const comma = (value: string): string => value.replace('.', ',');
    const found = guess(
      file(
        ['Datum;Time;Ux;Uy;Uz;Ts;CO2;H2O;P', 'dd.mm.yyyy;hh:mm:ss;m/s;m/s;m/s;°C;mmol/m³;mmol/m³;hPa'],
        (i, s) =>
          [
            '22.06.2027',
            comma(clockOf(i, 20, morning)),
            ...[s.u, s.v, s.w, s.tC, s.co2Mmol, s.h2oMmol, s.pHPa].map(comma),
          ].join(';'),
      ),
      'ostrey.txt',
      { sampleRateHz: 20 },
    );
    expect(fields(found.layout)).toEqual({
      delimiter: 'semicolon',
      decimal: ',',
      quoted: false,
      headerRows: 2,
      nameRow: 0,
      unitRow: 1,
      sampleRateHz: 20,
      clock: plusOne,
      stampMarks: 'start',
      time: { kind: 'date-and-time', dateColumn: 0, dateFormat: 'DD.MM.YYYY', timeColumn: 1 },
    });
    expect(columnsOf(found)).toEqual({
      windU: [2, 'm s-1'],
      windV: [3, 'm s-1'],
      windW: [4, 'm s-1'],
      sonicTemperature: [5, 'degC'],
      co2: [6, 'mmol m-3'],
      h2o: [7, 'mmol m-3'],
      airPressure: [8, 'hPa'],
    });
    expect(found.layout.columns.every((column) => column.knownBy === 'unit-row')).toBe(true);
    expect(codesOf(found)).toEqual(['clock-unsaid']);
    expect(found.estimatedRateHz).toBeCloseTo(20, 6);
  });

  it('reads tabs with epoch milliseconds, whose clock is UTC whatever the station says', () => {
    const found = guess(
      file(['epoch_ms\tu_ms\tv_ms\tw_ms\tTsonic_K\tCO2_mmol_m3\tH2O_mmol_m3\tpress_kPa'], (i, s) =>
        [String(1813663800000 + i * 50), s.u, s.v, s.w, s.tK, s.co2Mmol, s.h2oMmol, s.pKPa].join('\t'),
      ),
      'quillet.tsv',
      { sampleRateHz: 20 },
    );
    expect(found.layout.delimiter).toBe('tab');
    expect(found.layout.time).toEqual({ kind: 'epoch', column: 0, unit: 'ms' });
    expect(found.layout.clock).toEqual({ kind: 'utc' });
    expect(columnsOf(found)).toEqual({
      windU: [1, 'm s-1'],
      windV: [2, 'm s-1'],
      windW: [3, 'm s-1'],
      sonicTemperature: [4, 'K'],
      co2: [5, 'mmol m-3'],
      h2o: [6, 'mmol m-3'],
      airPressure: [7, 'kPa'],
    });
    expect(found.problems).toEqual([]);
    expect(found.preview.firstMs).toBe(1813663800000);
  });

  it('reads epoch seconds with fractions', () => {
    const found = guess(
      file(['unix_time,u,v,w,Ts (K)'], (i, s) =>
        [(1813663800 + i / 10).toFixed(1), s.u, s.v, s.w, s.tK].join(','),
      ),
      'a.csv',
    );
    expect(found.layout.time).toEqual({ kind: 'epoch', column: 0, unit: 's' });
    expect(columnsOf(found).sonicTemperature).toEqual([4, 'K']);
    expect(found.layout.columns.find((column) => column.channel === 'sonicTemperature')?.knownBy).toBe(
      'name',
    );
    expect(found.estimatedRateHz).toBeCloseTo(10, 6);
  });

  it('reads blanks without a header: year, day of year, hhmm and seconds, quantities by place and values', () => {
    const found = guess(
      file([], (i, s) =>
        [
          '2027',
          '173',
          '1130',
          (i / 10).toFixed(1).padStart(5),
          s.u.padStart(7),
          s.v.padStart(7),
          s.w.padStart(7),
          s.tC,
          s.co2Ppm,
          s.h2oFraction,
          '0',
        ].join(' '),
      ),
      'fen.dat',
    );
    expect(fields(found.layout)).toEqual({
      delimiter: 'blanks',
      decimal: '.',
      quoted: false,
      headerRows: 0,
      nameRow: null,
      unitRow: null,
      sampleRateHz: 10,
      clock: plusOne,
      stampMarks: 'start',
      time: {
        kind: 'day-of-year',
        year: { column: 0 },
        dayColumn: 1,
        timeColumn: 2,
        timeFormat: 'hhmm',
        secondsColumn: 3,
      },
    });
    expect(columnsOf(found)).toMatchObject({
      windU: [4, 'm s-1'],
      windV: [5, 'm s-1'],
      windW: [6, 'm s-1'],
      sonicTemperature: [7, 'degC'],
      co2: [8, 'umol mol-1'],
      h2o: [9, 'mmol mol-1'],
      analyserStatus: [10, 'code'],
    });
    // nothing here is written: every quantity is to be looked at
    expect(found.problems.filter((problem) => problem.code === 'quantity-doubtful')).toHaveLength(7);
    expect(found.preview.firstMs).toBe(Date.UTC(2027, 5, 22, 10, 30));
  });

  it('reads the day of the year with its fraction, year from the file name', () => {
    const found = guess(
      file(['doy u v w ts'], (i, s) =>
        [(173 + (morning + i / 10) / 86400).toFixed(9), s.u, s.v, s.w, s.tC].join('  '),
      ),
      'hof_2027_173.txt',
    );
    expect(found.layout.time).toEqual({
      kind: 'day-of-year',
      year: { from: 'file-name', pattern: 'YYYY_DDD' },
      dayColumn: 0,
      timeColumn: null,
      timeFormat: 'fraction-of-day',
      secondsColumn: null,
    });
    expect(found.layout.delimiter).toBe('blanks');
    expect(found.preview.firstMs).toBeCloseTo(Date.UTC(2027, 5, 22, 10, 30), -2);
  });

  it('reads day of year and seconds of the day', () => {
    const found = guess(
      file(['year,doy,seconds_of_day,U,V,W,T_sonic'], (i, s) =>
        ['2027', '173', (41400 + i / 20).toFixed(2), s.u, s.v, s.w, s.tC].join(','),
      ),
      'x.csv',
      { sampleRateHz: 20 },
    );
    expect(found.layout.time).toEqual({
      kind: 'day-of-year',
      year: { column: 0 },
      dayColumn: 1,
      timeColumn: 2,
      timeFormat: 'seconds-of-day',
      secondsColumn: null,
    });
    expect(found.layout.sampleRateHz).toBe(20);
  });

  it('reads day of year and a clock column', () => {
    const found = guess(
      file(['year;doy;time;u;v;w;ts'], (i, s) =>
        ['2027', '173', clockOf(i, 10, morning, 1), s.u, s.v, s.w, s.tC].join(';'),
      ),
      'x.csv',
    );
    expect(found.layout.time).toEqual({
      kind: 'day-of-year',
      year: { column: 0 },
      dayColumn: 1,
      timeColumn: 2,
      timeFormat: 'clock',
      secondsColumn: null,
    });
  });

  it('reads stamps of fourteen digits', () => {
    const found = guess(
      file(['timestamp,u,v,w,ts'], (i, s) =>
        [`20270622${clockOf(i, 10, morning, 1).replaceAll(':', '')}`, s.u, s.v, s.w, s.tC].join(','),
      ),
      'x.csv',
    );
    expect(found.layout.time).toEqual({ kind: 'stamp', column: 0, format: 'YYYYMMDDhhmmss' });
    expect(found.estimatedRateHz).toBeCloseTo(10, 3);
  });

  it('takes the date from the file name when rows carry the time of day only, across midnight', () => {
    const found = guess(
      file(['time,u,v,w,ts'], (i, s) => [clockOf(i, 10, 86395, 1), s.u, s.v, s.w, s.tC].join(',')),
      'HOF-2027-06-22_2359.csv',
    );
    expect(found.layout.time).toEqual({
      kind: 'time-of-day',
      column: 0,
      date: { from: 'file-name', pattern: 'YYYY-MM-DD_hhmm' },
    });
    expect(found.preview.spacing?.isEven).toBe(true);
    expect(found.preview.lastMs! - found.preview.firstMs!).toBeCloseTo(11_900, 3);
    expect(found.preview.lastMs).toBeGreaterThan(Date.UTC(2027, 5, 22, 23, 0));
  });

  it('takes the date from the header when the name has none', () => {
    const found = guess(
      file(['# Station: Hollin Fen (invented)', '# Date: 2027-06-22', '# time u v w ts'], (i, s) =>
        [clockOf(i, 10, morning, 1), s.u, s.v, s.w, s.tC].join('\t'),
      ),
      'latest.txt',
    );
    expect(found.layout.headerRows).toBe(3);
    expect(found.layout.time).toEqual({
      kind: 'time-of-day',
      column: 0,
      date: { from: 'header', pattern: 'YYYY-MM-DD' },
    });
    expect(found.preview.firstMs).toBe(Date.UTC(2027, 5, 22, 10, 30));
    expect(codesOf(found)).not.toContain('date-candidates');
  });

  it('takes start from the file name and the rate from the set-up when rows carry no time', () => {
    const found = guess(
      file(['u,v,w,ts,co2 [mg m-3],h2o [g m-3]'], (_, s) => [s.u, s.v, s.w, s.tC, s.co2Mg, s.h2oG].join(',')),
      'hollin_20270622T113000Z.csv',
      { sampleRateHz: 20 },
    );
    expect(found.layout.time).toEqual({
      kind: 'start-and-rate',
      start: { from: 'file-name', pattern: 'YYYYMMDDThhmmss' },
    });
    expect(found.layout.sampleRateHz).toBe(20);
    expect(found.knowledge.sampleRateHz.source).toBe('set-up');
    expect(found.layout.clock).toEqual({ kind: 'utc' });
    expect(found.knowledge.clock.source).toBe('file-name');
    expect(columnsOf(found)).toMatchObject({ co2: [4, 'mg m-3'], h2o: [5, 'g m-3'] });
    expect(found.estimatedRateHz).toBeNull();
    expect(found.preview.firstMs).toBe(Date.UTC(2027, 5, 22, 11, 30));
    expect(found.problems.map((problem) => problem.code)).toEqual(['unit-from-range']);
  });

  it('takes rate and clock from the header', () => {
    const found = guess(
      file(['Start 2027-06-22 11:30:00', 'Sampling rate: 25 Hz', 'Clock: UTC+2', 'u;v;w;sos'], (_, s) =>
        [s.u, s.v, s.w, s.sos].join(';'),
      ),
      'a.csv',
      { sampleRateHz: null },
    );
    expect(found.layout.sampleRateHz).toBe(25);
    expect(found.knowledge.sampleRateHz).toMatchObject({ source: 'header', confidence: 'sure' });
    expect(found.layout.clock).toEqual({ kind: 'fixed', offsetMinutes: 120 });
    expect(found.layout.time).toEqual({
      kind: 'start-and-rate',
      start: { from: 'header', pattern: 'YYYY-MM-DD hh:mm:ss' },
    });
    expect(columnsOf(found).sonicTemperature).toEqual([3, 'm s-1']);
    expect(found.preview.firstMs).toBe(Date.UTC(2027, 5, 22, 9, 30));
  });

  it('reads the zone that stamps carry', () => {
    const zulu = guess(
      file(['t_utc,u,v,w,ts'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}Z`, s.u, s.v, s.w, s.tC].join(','),
      ),
      'a.csv',
    );
    expect(zulu.layout.clock).toEqual({ kind: 'utc' });
    expect(zulu.knowledge.clock.confidence).toBe('sure');
    const shifted = guess(
      file(['t,u,v,w,ts'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}+05:30`, s.u, s.v, s.w, s.tC].join(','),
      ),
      'a.csv',
    );
    expect(shifted.layout.clock).toEqual({ kind: 'fixed', offsetMinutes: 330 });
    expect(codesOf(shifted)).not.toContain('clock-unsaid');
  });

  it('reads quoted stamps and tokens below a header of four lines, with names and units in it', () => {
    const found = guess(
      file(
        [
          '"Hollin Fen","logger 3","20 Hz"',
          '"TIMESTAMP","RECORD","Ux","Uy","Uz","T_SONIC","diag_sonic","CO2_density","H2O_density","diag_gas","signal_strength","P"',
          '"TS","RN","m/s","m/s","m/s","deg C","","mg/m^3","g/m^3","","%","kPa"',
          '"","","Smp","Smp","Smp","Smp","Smp","Smp","Smp","Smp","Smp","Smp"',
        ],
        (i, s) =>
          [
            `"2027-06-22 ${clockOf(i, 20, morning)}"`,
            String(918273 + i),
            s.u,
            s.v,
            s.w,
            s.tC,
            '0',
            i === 7 ? '"NAN"' : s.co2Mg,
            s.h2oG,
            '0',
            '97.5',
            s.pKPa,
          ].join(','),
      ),
      'fen_fast.dat',
      { sampleRateHz: 20 },
    );
    expect(fields(found.layout)).toEqual({
      delimiter: 'comma',
      decimal: '.',
      quoted: true,
      headerRows: 4,
      nameRow: 1,
      unitRow: 2,
      sampleRateHz: 20,
      clock: plusOne,
      stampMarks: 'start',
      time: { kind: 'stamp', column: 0, format: 'iso' },
    });
    expect(columnsOf(found)).toEqual({
      windU: [2, 'm s-1'],
      windV: [3, 'm s-1'],
      windW: [4, 'm s-1'],
      sonicTemperature: [5, 'degC'],
      sonicStatus: [6, 'code'],
      co2: [7, 'mg m-3'],
      h2o: [8, 'g m-3'],
      analyserStatus: [9, 'code'],
      signalStrength: [10, '%'],
      airPressure: [11, 'kPa'],
    });
    expect(found.columns[1]?.use).toEqual({ kind: 'left-out' });
    expect(codesOf(found)).toEqual(['clock-unsaid', 'signal-direction']);
    expect(found.preview.columns.find((column) => column.channel === 'co2')?.missing).toBe(1);
  });

  it('tells dry mole fractions from moist ones by their words', () => {
    const found = guess(
      file(['time,u,v,w,ts,co2_dry,h2o_dry', 'iso,m/s,m/s,m/s,K,umol mol-1,mmol mol-1'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}Z`, s.u, s.v, s.w, s.tK, s.co2Ppm, s.h2oFraction].join(','),
      ),
      'a.csv',
    );
    expect(columnsOf(found)).toMatchObject({
      co2: [5, 'umol mol-1 dry'],
      h2o: [6, 'mmol mol-1 dry'],
      sonicTemperature: [4, 'K'],
    });
    expect(found.problems).toEqual([]);
  });

  it('reads pipes, and names with blanks and brackets', () => {
    const found = guess(
      file(
        [
          'Time | Wind U (m/s) | Wind V (m/s) | Vertical wind (m/s) | Sonic temperature (K) | Water vapour (g/m3) | Air pressure (Pa)',
        ],
        (i, s) =>
          [`2027-06-22 ${clockOf(i, 10, morning, 1)}`, s.u, s.v, s.w, s.tK, s.h2oG, s.pPa].join(' | '),
      ),
      'a.txt',
    );
    expect(found.layout.delimiter).toBe('pipe');
    expect(columnsOf(found)).toEqual({
      windU: [1, 'm s-1'],
      windV: [2, 'm s-1'],
      windW: [3, 'm s-1'],
      sonicTemperature: [4, 'K'],
      h2o: [5, 'g m-3'],
      airPressure: [6, 'Pa'],
    });
    expect(codesOf(found)).toEqual(['clock-unsaid']);
  });

  it('tells a sonic temperature from an air temperature', () => {
    const found = guess(
      file(['time,u,v,w,Ts,T'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}`, s.u, s.v, s.w, s.tK, s.tC].join(','),
      ),
      'a.csv',
    );
    expect(columnsOf(found)).toMatchObject({ sonicTemperature: [4, 'K'], airTemperature: [5, 'degC'] });
  });

  it('keeps tokens for “no value”, words and sentinels', () => {
    const found = guess(
      file(['time;u;v;w;ts;co2 [mg/m3]'], (i, s) =>
        [
          `2027-06-22T${clockOf(i, 10, morning, 1)}Z`,
          s.u,
          s.v,
          s.w,
          i % 9 === 0 ? '---' : s.tC,
          i % 7 === 0 ? '-9999.0' : s.co2Mg,
        ].join(';'),
      ),
      'a.csv',
    );
    expect(found.layout.missingTokens).toEqual(expect.arrayContaining(['NaN', '-9999', '---', '-9999.0']));
    expect(found.preview.columns.find((column) => column.channel === 'co2')?.min).toBeGreaterThan(600);
    expect(codesOf(found)).toEqual(['unit-from-range']);
  });

  it('leaves out a last line that was cut', () => {
    const text = file(['time,u,v,w,ts'], (i, s) =>
      [`2027-06-22T${clockOf(i, 10, morning, 1)}Z`, s.u, s.v, s.w, s.tC].join(','),
    );
    const found = guess(`${text}2027-06-22T11:30:12.0Z,1.2`, 'a.csv', { isCutOff: true });
    expect(found.preview.rows).toHaveLength(120);
    expect(found.preview.rowsWithoutStamp).toBe(0);
  });
});

describe('guessLayout on files that can be read in two ways', () => {
  it('asks which of day and month comes first', () => {
    const text = file(['when,u,v,w,ts'], (i, s) =>
      [`05/06/2027 ${clockOf(i, 10, morning, 1)}`, s.u, s.v, s.w, s.tC].join(','),
    );
    const found = guess(text, 'a.csv');
    expect(found.layout.time).toEqual({ kind: 'stamp', column: 0, format: 'DD/MM/YYYY hh:mm:ss' });
    expect(found.knowledge.time.confidence).toBe('doubtful');
    expect(codesOf(found)).toContain('day-month-order');
    // the file's name settles it
    const settled = guess(text, 'HOF_20270506_1130.csv');
    expect(settled.layout.time).toEqual({ kind: 'stamp', column: 0, format: 'MM/DD/YYYY hh:mm:ss' });
    expect(codesOf(settled)).not.toContain('day-month-order');
  });

  it('knows that a thirteenth month does not exist', () => {
    const found = guess(
      file(['when,u,v,w,ts'], (i, s) =>
        [`06/22/2027 ${clockOf(i, 10, morning, 1)}`, s.u, s.v, s.w, s.tC].join(','),
      ),
      'a.csv',
    );
    expect(found.layout.time).toEqual({ kind: 'stamp', column: 0, format: 'MM/DD/YYYY hh:mm:ss' });
    expect(codesOf(found)).not.toContain('day-month-order');
  });

  it('does not decide alone between CO2 of 560 mg m-3 on a mountain and of 560 ppm in a canopy', () => {
    const found = guess(
      file(['time,u,v,w,ts,co2'], (i, s) =>
        [
          `2027-06-22T${clockOf(i, 10, morning, 1)}Z`,
          s.u,
          s.v,
          s.w,
          s.tC,
          wave(i, 560, 8, 1).toFixed(1),
        ].join(','),
      ),
      'a.csv',
    );
    const doubt = found.problems.find((problem) => problem.channel === 'co2');
    expect(doubt?.code).toBe('unit-doubtful');
    expect(doubt?.message).toContain('mg m-3 and umol mol-1');
    expect(found.columns[5]?.confidence).toBe('doubtful');
  });

  it('does not decide alone whether vapour of 10 is g m-3 or mmol mol-1', () => {
    const found = guess(
      file(['time,u,v,w,ts,q'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}Z`, s.u, s.v, s.w, s.tC, s.h2oG].join(','),
      ),
      'a.csv',
    );
    expect(found.problems.find((problem) => problem.channel === 'h2o')?.code).toBe('unit-doubtful');
  });

  it('asks when a written unit and the range disagree', () => {
    const found = guess(
      file(['time,u,v,w,ts,co2,h2o', 'iso,m/s,m/s,m/s,C,mmol/m3,mmol/m3'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}Z`, s.u, s.v, s.w, s.tC, s.co2Mg, s.h2oMmol].join(','),
      ),
      'a.csv',
    );
    expect(columnsOf(found).co2).toEqual([5, 'mmol m-3']);
    expect(found.problems).toHaveLength(1);
    expect(found.problems[0]).toMatchObject({ code: 'unit-contradicts-range', channel: 'co2' });
    expect(found.problems[0]?.message).toContain('mg m-3');
  });

  it('asks about two columns that could be CO2, and prefers the density', () => {
    const found = guess(
      file(['time,u,v,w,ts,co2_ppm,co2_density'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}Z`, s.u, s.v, s.w, s.tC, s.co2Ppm, s.co2Mg].join(','),
      ),
      'a.csv',
    );
    expect(columnsOf(found).co2).toEqual([6, 'mg m-3']);
    expect(codesOf(found)).toEqual(['two-candidates', 'unit-from-range']);
  });

  it('asks whose status an unnamed status is, and which codes are good when they vary', () => {
    const found = guess(
      file(['time,u,v,w,ts,status,co2 [mg/m3],diag'], (i, s) =>
        [
          `2027-06-22T${clockOf(i, 10, morning, 1)}Z`,
          s.u,
          s.v,
          s.w,
          s.tC,
          '0',
          s.co2Mg,
          i % 10 === 0 ? '240' : '249',
        ].join(','),
      ),
      'a.csv',
    );
    expect(columnsOf(found)).toMatchObject({ sonicStatus: [5, 'code'], analyserStatus: [7, 'code'] });
    expect(found.layout.columns.find((column) => column.channel === 'analyserStatus')?.good?.codes).toEqual([
      249,
    ]);
    expect(found.problems.filter((problem) => problem.code === 'quantity-doubtful')).toHaveLength(2);
    expect(found.problems.find((problem) => problem.code === 'good-codes')?.message).toContain(
      '249 in 90 % of rows',
    );
  });

  it('reads x y z as the wind only as a set, and says that t is taken as the sonic temperature', () => {
    const found = guess(
      file(['time,x,y,z,t'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}Z`, s.u, s.v, s.w, s.tC].join(','),
      ),
      'a.csv',
    );
    expect(columnsOf(found)).toMatchObject({
      windU: [1, 'm s-1'],
      windV: [2, 'm s-1'],
      windW: [3, 'm s-1'],
      sonicTemperature: [4, 'degC'],
    });
    expect(found.columns[1]?.confidence).toBe('likely');
    expect(found.problems.find((problem) => problem.channel === 'sonicTemperature')?.code).toBe(
      'quantity-doubtful',
    );
  });

  it('takes large winds as cm s-1 and asks', () => {
    const centi = (value: string): string => (Number(value) * 100).toFixed(0);
    const found = guess(
      file(['time,u,v,w,ts'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}Z`, centi(s.u), centi(s.v), centi(s.w), s.tC].join(','),
      ),
      'a.csv',
    );
    expect(columnsOf(found)).toMatchObject({
      windU: [1, 'cm s-1'],
      windV: [2, 'cm s-1'],
      windW: [3, 'cm s-1'],
    });
    expect(
      found.problems.filter((problem) => problem.code === 'unit-doubtful').map((problem) => problem.channel),
    ).toEqual(['windU', 'windV', 'windW']);
  });

  it('counts the rate of stamps that several rows share, and says that they are spread', () => {
    const found = guess(
      file(
        ['time,u,v,w,ts'],
        (i, s) => [`2027-06-22 ${clockOf(i, 20, morning, 0)}`, s.u, s.v, s.w, s.tC].join(','),
        400,
      ),
      'a.csv',
      { sampleRateHz: 20 },
    );
    expect(found.layout.time).toEqual({ kind: 'stamp', column: 0, format: 'iso' });
    expect(found.layout.sampleRateHz).toBe(20);
    expect(found.problems.find((problem) => problem.code === 'stamps-coarse')).toMatchObject({
      severity: 'confirm',
      message:
        'Stamps are coarse: about 20 rows share one. They are spread evenly between two stamps, at 20 Hz.',
    });
  });

  it('asks which of two dates in the header is the start', () => {
    const found = guess(
      file(['calibrated 2026-03-01', 'begin 2027-06-22 11:30', 'u,v,w,ts'], (_, s) =>
        [s.u, s.v, s.w, s.tC].join(','),
      ),
      'a.csv',
    );
    expect(found.layout.time).toEqual({
      kind: 'start-and-rate',
      start: { from: 'header', pattern: 'begin YYYY-MM-DD hh:mm' },
    });
    expect(codesOf(found)).toContain('date-candidates');
    expect(found.preview.firstMs).toBe(Date.UTC(2027, 5, 22, 10, 30));
  });

  it('says when rate of stamps and of the set-up disagree', () => {
    const found = guess(
      file(['time,u,v,w,ts'], (i, s) =>
        [`2027-06-22T${clockOf(i, 20, morning)}Z`, s.u, s.v, s.w, s.tC].join(','),
      ),
      'a.csv',
    );
    expect(found.layout.sampleRateHz).toBe(20);
    expect(found.knowledge.sampleRateHz.confidence).toBe('doubtful');
    expect(found.problems.find((problem) => problem.code === 'rate-contradicts')?.message).toBe(
      'The stamps say 20 Hz, the set-up 10 Hz. Taken: the stamps. One of them is wrong.',
    );
  });

  it('counts uneven steps', () => {
    const found = guess(
      file(['time,u,v,w,ts'], (i, s) =>
        [`2027-06-22T${clockOf(i < 60 ? i : i + 30, 10, morning, 1)}Z`, s.u, s.v, s.w, s.tC].join(','),
      ),
      'a.csv',
    );
    expect(found.preview.spacing).toMatchObject({ isEven: false, irregular: 1, backward: 0 });
    expect(found.layout.sampleRateHz).toBe(10);
    expect(codesOf(found)).toContain('stamps-uneven');
  });

  it('asks about a doubtful sentinel instead of swallowing it', () => {
    const found = guess(
      file(['time,u,v,w,ts'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}Z`, s.u, s.v, s.w, i === 5 ? '-99' : s.tC].join(','),
      ),
      'a.csv',
    );
    expect(found.layout.missingTokens).toContain('-99');
    expect(found.problems.find((problem) => problem.code === 'sentinel-doubtful')?.message).toContain(
      '“-99” in “ts”',
    );
  });
});

describe('guessLayout on files that cannot be read safely', () => {
  it('refuses quoted decimal commas between commas', () => {
    const quoted = (value: string): string => `"${value.replace('.', ',')}"`;
    const found = guess(
      file(['time,u,v,w,ts'], (i, s) =>
        [
          `2027-06-22T${clockOf(i, 10, morning, 1)}Z`,
          quoted(s.u),
          quoted(s.v),
          quoted(s.w),
          quoted(s.tC),
        ].join(','),
      ),
      'a.csv',
    );
    expect(found.problems.find((problem) => problem.code === 'comma-twice')).toMatchObject({
      severity: 'blocks',
      field: 'decimal',
    });
  });

  it('refuses bare decimal commas between commas', () => {
    const found = guess(
      file([], (_, s) => [s.u, s.v, s.w, s.tC].map((value) => value.replace('.', ',')).join(',')),
      'HOF_20270622_1130.csv',
    );
    expect(found.problems.find((problem) => problem.code === 'no-decimals')).toMatchObject({
      severity: 'blocks',
    });
  });

  it('says that no date is to be found', () => {
    const found = guess(
      file(['u,v,w,ts'], (_, s) => [s.u, s.v, s.w, s.tC].join(',')),
      'latest.csv',
    );
    expect(found.problems.find((problem) => problem.code === 'date-unsaid')).toMatchObject({
      severity: 'blocks',
      field: 'time',
    });
  });

  it('says that columns of year, month and day cannot be joined', () => {
    const header = ['year,month,day,hour,minute,second,u,v,w,ts'];
    const row = (i: number, s: Scan): string =>
      ['2027', '6', '22', '11', '30', (i / 10).toFixed(1), s.u, s.v, s.w, s.tC].join(',');
    expect(
      guess(file(header, row), 'a.csv').problems.find((problem) => problem.code === 'time-columns-separate'),
    ).toMatchObject({ severity: 'blocks' });
    const named = guess(file(header, row), 'a_20270622_1130.csv');
    expect(named.problems.find((problem) => problem.code === 'time-columns-separate')).toMatchObject({
      severity: 'confirm',
    });
    expect(named.layout.time).toEqual({
      kind: 'start-and-rate',
      start: { from: 'file-name', pattern: 'YYYYMMDD_hhmm' },
    });
    expect(columnsOf(named).windU).toEqual([6, 'm s-1']);
  });

  it('says that a time of day without colons cannot be read', () => {
    const found = guess(
      file(['date,time,u,v,w,ts'], (i, s) =>
        ['20270622', clockOf(i, 10, morning, 1).replaceAll(':', ''), s.u, s.v, s.w, s.tC].join(','),
      ),
      'a.csv',
    );
    expect(found.layout.time).toEqual({
      kind: 'date-and-time',
      dateColumn: 0,
      dateFormat: 'YYYYMMDD',
      timeColumn: 1,
    });
    expect(found.problems.find((problem) => problem.code === 'stamps-unreadable')).toMatchObject({
      severity: 'blocks',
    });
  });

  it('says which required quantity is missing', () => {
    const found = guess(
      file(['time,u,v,ts'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}Z`, s.u, s.v, s.tC].join(','),
      ),
      'a.csv',
    );
    expect(
      found.problems
        .filter((problem) => problem.code === 'quantity-missing')
        .map((problem) => problem.channel),
    ).toEqual(['windW']);
  });

  it('finds no table in prose, in one column, and in nothing', () => {
    for (const text of ['Dear all,\nthe mast is up.\nBest wishes\n', '1\n2\n3\n', '']) {
      const found = guess(text, 'letter.txt');
      expect(codesOf(found)).toContain('no-columns');
      expect(found.layout.columns).toEqual([]);
    }
  });

  it('never throws on bytes that are no text', () => {
    const bytes = Array.from({ length: 4000 }, (_, i) => String.fromCharCode((i * 7919) % 256)).join('');
    expect(() => guess(bytes, 'x.bin')).not.toThrow();
  });
});

describe('the reader of whole files, given the guessed layout', () => {
  const wind = (s: Scan): string[] => [s.u, s.v, s.w, s.tC];
  const cases: { name: string; text: string; fileName: string; rateHz: number; firstMs: number }[] = [
    {
      name: 'ISO stamps with a zone',
      text: file(['t,u,v,w,ts'], (i, s) =>
        [`2027-06-22T${clockOf(i, 10, morning, 1)}+05:30`, ...wind(s)].join(','),
      ),
      fileName: 'a.csv',
      rateHz: 10,
      firstMs: Date.UTC(2027, 5, 22, 6, 0),
    },
    {
      name: 'day and month with slashes',
      text: file(['t;u;v;w;ts'], (i, s) =>
        [`22/06/2027 ${clockOf(i, 10, morning, 1)}`, ...wind(s)].join(';'),
      ),
      fileName: 'a.csv',
      rateHz: 10,
      firstMs: Date.UTC(2027, 5, 22, 10, 30),
    },
    {
      name: 'fourteen digits',
      text: file(['t,u,v,w,ts'], (i, s) =>
        [`20270622${clockOf(i, 10, morning, 1).replaceAll(':', '')}`, ...wind(s)].join(','),
      ),
      fileName: 'a.csv',
      rateHz: 10,
      firstMs: Date.UTC(2027, 5, 22, 10, 30),
    },
    {
      name: 'date and time columns with decimal commas',
      text: file(['date;time;u;v;w;ts'], (i, s) =>
        ['22.06.2027', clockOf(i, 20, morning), ...wind(s)]
          .join(';')
          .replaceAll('.', ',')
          .replace('22,06,2027', '22.06.2027'),
      ),
      fileName: 'a.csv',
      rateHz: 20,
      firstMs: Date.UTC(2027, 5, 22, 10, 30),
    },
    {
      name: 'year, day of year, hhmm and seconds',
      text: file(['year doy hhmm sec u v w ts'], (i, s) =>
        ['2027', '173', '1130', (i / 10).toFixed(1), ...wind(s)].join(' '),
      ),
      fileName: 'a.dat',
      rateHz: 10,
      firstMs: Date.UTC(2027, 5, 22, 10, 30),
    },
    {
      name: 'epoch seconds',
      text: file(['unix_time\tu\tv\tw\tts'], (i, s) =>
        [(1813663800 + i / 10).toFixed(1), ...wind(s)].join('\t'),
      ),
      fileName: 'a.tsv',
      rateHz: 10,
      firstMs: 1813663800000,
    },
    {
      name: 'time of day with the date in the name',
      text: file(['time,u,v,w,ts'], (i, s) => [clockOf(i, 10, morning, 1), ...wind(s)].join(',')),
      fileName: 'HOF-2027-06-22_1130.csv',
      rateHz: 10,
      firstMs: Date.UTC(2027, 5, 22, 10, 30),
    },
    {
      name: 'start in one of two dates of the header, then the rate',
      text: file(['calibrated 2026-03-01', 'begin 2027-06-22 11:30', 'u,v,w,ts'], (_, s) =>
        wind(s).join(','),
      ),
      fileName: 'a.csv',
      rateHz: 10,
      firstMs: Date.UTC(2027, 5, 22, 10, 30),
    },
    {
      name: 'start in the name, in UTC',
      text: file(['u,v,w,ts'], (_, s) => wind(s).join(',')),
      fileName: 'hollin_20270622T113000Z.csv',
      rateHz: 20,
      firstMs: Date.UTC(2027, 5, 22, 11, 30),
    },
    {
      name: 'whole seconds that twenty rows share',
      text: file(
        ['time,u,v,w,ts'],
        (i, s) => [`2027-06-22 ${clockOf(i, 20, morning, 0)}`, ...wind(s)].join(','),
        400,
      ),
      fileName: 'a.csv',
      rateHz: 20,
      firstMs: Date.UTC(2027, 5, 22, 10, 30),
    },
  ];

  it.each(cases)('finds every row at its time: $name', ({ text, fileName, rateHz, firstMs }) => {
    const found = guess(text, fileName, { sampleRateHz: rateHz });
    const read = ingest(text, found.layout, { fileName, utcOffsetMinutes: 60 });
    const report = reportOf(read);
    const rows = text.split('\n').length - 1 - found.layout.headerRows;
    expect(found.preview.firstMs).toBe(firstMs);
    expect(report.firstScanMs).toBe(firstMs);
    expect(report).toMatchObject({ rows, badRows: 0 });
    expect(read.chunks.map(({ intake }) => intake.duplicates)).toEqual([0]);
    // last stamp: (rows − 1) scans later, to the millisecond that the stamps are written with
    expect(Math.abs(report.lastScanMs - (firstMs + ((rows - 1) * 1000) / rateHz))).toBeLessThan(1);
  });
});
