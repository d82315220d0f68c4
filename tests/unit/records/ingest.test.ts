import { describe, expect, it } from 'vitest';
import { STATUS_MISSING } from '../../../processing/chunks/chunk';
import { Ingest } from '../../../processing/records/ingest';
import { RecordError } from '../../../processing/records/record-error';
import type { Layout } from '../../../processing/schemas/layout';
import {
  DAY_START_MS,
  fileOf,
  header,
  HOUR_MS,
  ingest,
  reportOf,
  rows,
  scanValues,
  smallLayout,
  stamp,
  warningCodes,
} from './record-fixtures';

const firstOf = (text: string, layout: Layout, fileName = 'x.dat'): number =>
  reportOf(ingest(text, layout, { fileName })).firstScanMs;

const bare = (time: Layout['time'], columns: number[], extra: Partial<Layout> = {}): Layout => ({
  ...smallLayout,
  quoted: false,
  headerRows: 0,
  nameRow: null,
  time,
  columns: smallLayout.columns
    .slice(0, columns.length)
    .map((c, i) => ({ ...c, index: columns[i], name: null })),
  ...extra,
});

describe('placing scans', () => {
  it('puts 18 000 rows of half an hour at 10 Hz into as many slots', () => {
    const read = ingest(fileOf(rows(18_000)));
    expect(read.chunks).toHaveLength(1);
    const { columns, intake } = read.chunks[0];
    expect(intake).toMatchObject({
      startMs: DAY_START_MS,
      firstSlot: 0,
      length: 18_000,
      rowsRead: 18_000,
      duplicates: 0,
      clockJumps: 0,
    });
    expect(columns.present.every((p) => p === 1)).toBe(true);
    expect(columns.values.windU?.[12_345]).toBe(Math.fround(3.45));
    expect(reportOf(read).warnings).toEqual([]);
    expect(reportOf(read).fittedRateHz).toBeCloseTo(10, 9);
  });

  it('gives the sample stamped exactly at the end to the next half hour', () => {
    const read = ingest(fileOf(rows(18_001)));
    expect(read.chunks.map((c) => [c.intake.startMs, c.intake.length])).toEqual([
      [DAY_START_MS, 18_000],
      [DAY_START_MS + HOUR_MS / 2, 1],
    ]);
  });

  it('anchors half hours to station standard time', () => {
    // 5 h 45 min east: half hours begin at :15 and :45 UTC.
    const read = ingest(fileOf(rows(12_000, DAY_START_MS)), smallLayout, { utcOffsetMinutes: 345 });
    expect(
      read.chunks.map((c) => [c.intake.startMs - DAY_START_MS, c.intake.firstSlot, c.intake.length]),
    ).toEqual([
      [-900_000, 9000, 9000],
      [900_000, 0, 3000],
    ]);
  });

  it('counts the first ten rows given twice as ten duplicates and keeps the first scans', () => {
    const ten = rows(10);
    const again = rows(10, DAY_START_MS, 500);
    const read = ingest(fileOf([...ten, ...again, ...rows(90, DAY_START_MS + 1000, 10)]));
    expect(read.chunks[0].intake).toMatchObject({
      duplicates: 10,
      backwardSteps: 1,
      length: 100,
      rowsRead: 110,
    });
    expect(read.chunks[0].columns.values.windU?.[5]).toBe(Math.fround(0.05));
    expect(warningCodes(read)).toEqual(['time-reversed', 'duplicates']);
  });

  it('leaves a gap missing and reports it as a jump of its length', () => {
    const read = ingest(fileOf([...rows(100), ...rows(100, DAY_START_MS + 60_000, 100)]));
    const { columns, intake } = read.chunks[0];
    expect(intake.clockJumps).toBe(1);
    // From 9.9 s to 60 s: 50.1 s, 50.0 s more than one scan.
    expect(intake.largestJumpS).toBeCloseTo(50, 9);
    expect(columns.present.reduce((sum, p) => sum + p, 0)).toBe(200);
    expect(columns.values.windU?.[300]).toBeNaN();
    expect(columns.status.sonicStatus?.[300]).toBe(STATUS_MISSING);
  });

  it('does not call five lost rows a jump, nor a slow clock', () => {
    const lines = rows(2000).filter((_, i) => i % 400 > 4);
    const read = ingest(fileOf(lines));
    expect(read.chunks[0].intake.clockJumps).toBe(0);
    expect(reportOf(read).fittedRateHz).toBeCloseTo(10, 6);
    expect(warningCodes(read)).toEqual([]);
  });

  it('subtracts one scan from stamps that mark the end', () => {
    const read = ingest(fileOf(rows(10, DAY_START_MS + 100)), { ...smallLayout, stampMarks: 'end' });
    expect(reportOf(read).firstScanMs).toBe(DAY_START_MS);
    expect(read.chunks[0].intake.firstSlot).toBe(0);
  });

  it('applies a fixed clock offset, and a zone written in the stamp before it', () => {
    const fixed: Layout = { ...smallLayout, clock: { kind: 'fixed', offsetMinutes: 60 } };
    expect(reportOf(ingest(fileOf(rows(10)), fixed)).firstScanMs).toBe(DAY_START_MS - HOUR_MS);
    const zoned = rows(10).map((row) => row.replace(/^([^,]+)/, '$1Z'));
    const read = ingest(fileOf(zoned), fixed);
    expect(reportOf(read).firstScanMs).toBe(DAY_START_MS);
    expect(warningCodes(read)).toContain('zone-in-stamp');
    const east = rows(10).map((row) => row.replace(/^([^,]+)/, '$1+02:00'));
    expect(reportOf(ingest(fileOf(east))).firstScanMs).toBe(DAY_START_MS - 2 * HOUR_MS);
  });

  it('spreads scans whose stamps change only every second', () => {
    // The file begins with the last four scans of a second.
    const lines = Array.from(
      { length: 100 },
      (_, i) => `${stamp(DAY_START_MS + Math.floor((i + 6) / 10) * 1000).slice(0, 19)},${scanValues(i)}`,
    );
    const read = ingest(fileOf(lines));
    expect(warningCodes(read)).toEqual(['coarse-stamps']);
    expect(read.chunks[0].intake).toMatchObject({ firstSlot: 6, length: 100, duplicates: 0 });
    expect(read.chunks[0].columns.values.windU?.[50]).toBe(Math.fround(0.5));
  });

  it('takes jitter of a few milliseconds as it is', () => {
    const lines = Array.from(
      { length: 3000 },
      (_, i) => `${stamp(DAY_START_MS + i * 100 + ((i * 37) % 41) - 20)},${scanValues(i)}`,
    );
    const read = ingest(fileOf(lines));
    const { intake } = read.chunks[read.chunks.length - 1];
    expect(intake).toMatchObject({ duplicates: 0, clockJumps: 0, backwardSteps: 0 });
    expect(warningCodes(read)).toEqual([]);
  });

  it('gives the same chunks however the bytes are cut and whatever the block size', () => {
    const text = fileOf([...rows(3000), ...rows(3000, DAY_START_MS + HOUR_MS, 7)]);
    const bytes = new TextEncoder().encode(text);
    const whole = ingest(text);
    const pieces: Uint8Array[] = [];
    for (let at = 0; at < bytes.length; at += 7919) pieces.push(bytes.subarray(at, at + 7919));
    const cut = ingest(pieces, smallLayout, { rowsPerBlock: 777 });
    expect(cut.chunks).toEqual(whole.chunks);
    expect(cut.result).toEqual(whole.result);
  });

  it('comes back to half hours handed over already as further parts of them', () => {
    const lines = [0, 1, 2, 3, 4, 5].flatMap((h) => rows(10, DAY_START_MS + h * HOUR_MS, h * 10));
    const read = ingest(fileOf([...lines, ...rows(20, DAY_START_MS + 500, 900)]));
    const parts = read.chunks.filter((c) => c.intake.startMs === DAY_START_MS);
    expect(parts.map((p) => [p.intake.firstSlot, p.intake.length])).toEqual([
      [0, 10],
      [5, 20],
    ]);
    expect(warningCodes(read)).toContain('split-chunks');
  });

  it('keeps the number of open half hours small: chunks come while the file is still being read', () => {
    const seen: number[] = [];
    const reader = new Ingest({
      layout: smallLayout,
      fileName: 'x',
      utcOffsetMinutes: 0,
      onChunk: (_, intake) => seen.push(intake.startMs),
      rowsPerBlock: 500,
    });
    const encoder = new TextEncoder();
    reader.push(encoder.encode(header));
    for (let h = 0; h < 12; h++)
      reader.push(encoder.encode(rows(4000, DAY_START_MS + h * HOUR_MS).join('\n') + '\n'));
    expect(seen.length).toBeGreaterThanOrEqual(7);
    expect(reader.finish('')).not.toBeInstanceOf(RecordError);
    expect(seen).toHaveLength(12);
  });

  it('gives the 95th percentile of signal strength of each chunk', () => {
    // 90, 91, 92 in turn: the 95th percentile of 300 values is 92.
    expect(ingest(fileOf(rows(300))).chunks[0].intake.signalStrengthP95).toBe(92);
  });
});

describe('where time comes from', () => {
  const iso = '2027-05-03T00:00:00';

  it('reads a pattern of its own', () => {
    const text = Array.from({ length: 5 }, (_, i) => `03.05.27 00:00:0${i}.5,1`).join('\n');
    const layout = bare({ kind: 'stamp', column: 0, format: 'DD.MM.YY hh:mm:ss' }, [1], { sampleRateHz: 1 });
    expect(firstOf(text, layout)).toBe(DAY_START_MS + 500);
  });

  it('reads a date column beside a time column', () => {
    const text = Array.from(
      { length: 50 },
      (_, i) => `2027/05/03;00:00:${(i / 10).toFixed(1).padStart(4, '0')};1`,
    ).join('\n');
    const layout = bare({ kind: 'date-and-time', dateColumn: 0, dateFormat: 'iso', timeColumn: 1 }, [2], {
      delimiter: 'semicolon',
    });
    const report = reportOf(ingest(text, layout));
    expect([report.firstScanMs, report.lastScanMs]).toEqual([DAY_START_MS, DAY_START_MS + 4900]);
  });

  it.each([
    // 3 May is day 123 of 2027.
    ['clock', '2027,123,00:01:{s},', null, 60_000],
    ['hhmm', '2027,123,5,{s}', 3, 300_000],
    ['seconds-of-day', '2027,123,{s},', null, 0],
  ] as const)('reads year, day of year and %s', (timeFormat, row, secondsColumn, offset) => {
    const text = Array.from(
      { length: 50 },
      (_, i) => `${row.replace('{s}', (i / 10).toFixed(1).padStart(4, '0'))},1`,
    ).join('\n');
    const layout = bare(
      { kind: 'day-of-year', year: { column: 0 }, dayColumn: 1, timeColumn: 2, timeFormat, secondsColumn },
      [4],
    );
    const report = reportOf(ingest(text, layout));
    expect(report.firstScanMs).toBeCloseTo(DAY_START_MS + offset, 6);
    expect(report.rows).toBe(50);
  });

  it('reads a day of year with its fraction, and the year from the name', () => {
    const text = Array.from({ length: 50 }, (_, i) => `${(123 + i / 864_000).toFixed(9)} 1`).join('\n');
    const layout = bare(
      {
        kind: 'day-of-year',
        year: { from: 'file-name', pattern: 'YYYY' },
        dayColumn: 0,
        timeColumn: null,
        timeFormat: 'fraction-of-day',
        secondsColumn: null,
      },
      [1],
      { delimiter: 'blanks' },
    );
    const read = ingest(text, layout, { fileName: 'fen_2027_b.dat' });
    // Nine decimals of a day are 0.09 ms.
    expect(reportOf(read).firstScanMs).toBeCloseTo(DAY_START_MS, 0);
    expect(read.chunks[0].intake).toMatchObject({ length: 50, duplicates: 0 });
  });

  it('counts the year on when a file runs over New Year', () => {
    const lines = Array.from({ length: 40 }, (_, i) => {
      const second = 86_398 + i / 10;
      return second < 86_400 ? `365,${second.toFixed(1)},1` : `1,${(second - 86_400).toFixed(1)},1`;
    });
    const layout = bare(
      {
        kind: 'day-of-year',
        year: { from: 'header', pattern: 'season YYYY' },
        dayColumn: 0,
        timeColumn: 1,
        timeFormat: 'seconds-of-day',
        secondsColumn: null,
      },
      [2],
      { headerRows: 1 },
    );
    const report = reportOf(ingest(`season 2027\n${lines.join('\n')}`, layout));
    expect(report.lastScanMs - report.firstScanMs).toBeCloseTo(3900, 6);
  });

  it.each([
    ['s', (i: number) => ((DAY_START_MS + i * 100) / 1000).toFixed(6)],
    ['ms', (i: number) => String(DAY_START_MS + i * 100)],
    ['us', (i: number) => String((DAY_START_MS + i * 100) * 1000)],
  ] as const)('reads time since 1970 in %s, whatever the clock of the layout', (unit, write) => {
    const text = Array.from({ length: 50 }, (_, i) => `${write(i)},1`).join('\n');
    const layout = bare({ kind: 'epoch', column: 0, unit }, [1], {
      clock: { kind: 'fixed', offsetMinutes: 120 },
    });
    const report = reportOf(ingest(text, layout));
    expect([report.firstScanMs, report.lastScanMs]).toEqual([DAY_START_MS, DAY_START_MS + 4900]);
  });

  it('counts days on when the time of day passes midnight', () => {
    const lines = Array.from(
      { length: 40 },
      (_, i) => `${stamp(DAY_START_MS + 86_398_000 + i * 100).slice(11)},1`,
    );
    const layout = bare(
      { kind: 'time-of-day', column: 0, date: { from: 'file-name', pattern: 'YYYYMMDD' } },
      [1],
    );
    const read = ingest(lines.join('\n'), layout, { fileName: 'a-20270503.txt' });
    expect(reportOf(read).lastScanMs).toBe(DAY_START_MS + 86_400_000 + 1900);
    expect(warningCodes(read)).toEqual([]);
  });

  it('counts on from a start in the name; unreadable rows take their time', () => {
    const lines = Array.from({ length: 30 }, (_, i) => (i === 10 ? 'x' : `${i},2`));
    const layout = bare(
      { kind: 'start-and-rate', start: { from: 'file-name', pattern: 'YYMMDD_hhmm' } },
      [0, 1],
      { clock: { kind: 'fixed', offsetMinutes: 60 } },
    );
    const read = ingest(lines.join('\n'), layout, { fileName: 'fen-270503_0130.raw' });
    const report = reportOf(read);
    expect(report.firstScanMs).toBe(DAY_START_MS + 30 * 60_000);
    expect(report.fittedRateHz).toBeNull();
    expect([...(read.chunks[0].columns.values.windU ?? [])].slice(9, 12)).toEqual([9, NaN, 11]);
  });

  it('says so when the name does not hold the date', () => {
    const layout = bare({ kind: 'start-and-rate', start: { from: 'file-name', pattern: 'YYYYMMDD' } }, [0]);
    expect(ingest('1\n2\n', layout, { fileName: 'data.raw' }).result).toMatchObject({ code: 'no-time' });
  });

  it('reads stamps without a fraction between stamps with one', () => {
    const text = Array.from(
      { length: 40 },
      (_, i) => `${iso.slice(0, 17)}${i % 10 === 0 ? `0${i / 10}` : (i / 10).toFixed(1).padStart(4, '0')},1`,
    ).join('\n');
    const read = ingest(text, bare({ kind: 'stamp', column: 0, format: 'iso' }, [1]));
    expect(read.chunks[0].intake).toMatchObject({ length: 40, duplicates: 0 });
  });
});
