import Papa from 'papaparse';
import type { ChannelKey, Layout, TimeSource } from '../schemas/layout';
import {
  compileTimePattern,
  dayOfYearMs,
  findTimePattern,
  findYear,
  readClock,
  readIso,
  readTimePattern,
} from './time-pattern';
import { numericSentinels, readNumber } from './token';

/**
 * The first lines of a raw file read with a layout, for looking at before the whole file is read. Small and forgiving: what cannot be
 * read is null. The bulk is read elsewhere, by a parser made for it.
 */

/** Lines of the text; a last line that was cut off is left out. */
export function linesOf(text: string, isCutOff: boolean): string[] {
  const lines = text.replace(/^\uFEFF/, '').split(/\r\n|\n|\r/);
  const last = lines.pop() ?? '';
  if (!isCutOff && last !== '') lines.push(last);
  return lines;
}

const delimiterMarks = { comma: ',', semicolon: ';', tab: '\t', pipe: '|' } as const;

/** Fields of one line, without the blanks around them and without quotes. */
export function fieldsOf(line: string, delimiter: Layout['delimiter']): string[] {
  if (delimiter === 'blanks') {
    const bare = line.trim();
    return bare === '' ? [] : bare.split(/[ \t]+/).map(unquote);
  }
  const mark = delimiterMarks[delimiter];
  if (!line.includes('"')) return line.split(mark).map((field) => field.trim());
  const parsed = Papa.parse<string[]>(line, { delimiter: mark, quoteChar: '"', header: false });
  return (parsed.data[0] ?? []).map((field) => unquote(field.trim()));
}

function unquote(field: string): string {
  return field.length >= 2 && field.startsWith('"') && field.endsWith('"') ? field.slice(1, -1) : field;
}

/** A token as number; NaN when it is none. */
export function numberOf(token: string, decimal: '.' | ','): number {
  return token === '' ? Number.NaN : (readNumber(token, decimal, noTokens) ?? Number.NaN);
}

const noTokens: ReadonlySet<string> = new Set();

/**
 * A reader of stamps, row after row; it remembers the row before, for midnights that roll over.
 *
 * @returns wall-clock ms as if the clock were UTC, or null where a row holds no time
 */
export function stampReader(
  layout: Pick<Layout, 'time' | 'decimal' | 'sampleRateHz'>,
  fileName: string,
  headerLines: readonly string[],
): (fields: readonly string[]) => number | null {
  const { time, decimal, sampleRateHz } = layout;
  const msOrNull = (reading: { ms: number } | null): number | null =>
    reading === null || Number.isNaN(reading.ms) ? null : reading.ms;
  const textReader = (format: string): ((token: string) => number | null) => {
    if (format === 'iso') return (token) => msOrNull(readIso(token));
    const pattern = compileTimePattern(format, 'whole');
    return (token) => msOrNull(readTimePattern(pattern, token));
  };
  const textsOf = (from: 'file-name' | 'header'): readonly string[] =>
    from === 'file-name' ? [fileName] : headerLines;

  switch (time.kind) {
    case 'stamp': {
      const read = textReader(time.format);
      return (fields) => read(fields[time.column] ?? '');
    }
    case 'date-and-time': {
      const readDate = textReader(time.dateFormat);
      return (fields) => {
        const dateMs = readDate(fields[time.dateColumn] ?? '');
        const clockMs = msOrNull(readClock(fields[time.timeColumn] ?? ''));
        return dateMs === null || clockMs === null ? null : dateMs + clockMs;
      };
    }
    case 'day-of-year': {
      const fixedYear =
        'column' in time.year ? Number.NaN : findYear(time.year.pattern, textsOf(time.year.from));
      return (fields) => dayOfYearStampMs(time, decimal, fields, fixedYear);
    }
    case 'epoch':
      return (fields) => {
        const value = numberOf(fields[time.column] ?? '', decimal);
        if (Number.isNaN(value)) return null;
        return time.unit === 's' ? value * 1000 : time.unit === 'ms' ? value : value / 1000;
      };
    case 'time-of-day': {
      const foundMs = findTimePattern(time.date.pattern, textsOf(time.date.from));
      let midnightMs = Math.floor(foundMs / dayMs) * dayMs;
      let previousMs = Number.NaN;
      return (fields) => {
        const clockMs = msOrNull(readClock(fields[time.column] ?? ''));
        if (clockMs === null || Number.isNaN(midnightMs)) return null;
        if (clockMs < previousMs - dayMs / 2) midnightMs += dayMs;
        previousMs = clockMs;
        return midnightMs + clockMs;
      };
    }
    case 'start-and-rate': {
      const startMs = findTimePattern(time.start.pattern, textsOf(time.start.from));
      let row = 0;
      return () => {
        const stampMs = Number.isNaN(startMs) ? null : startMs + (row * 1000) / sampleRateHz;
        row += 1;
        return stampMs;
      };
    }
  }
}

const dayMs = 86_400_000;

function dayOfYearStampMs(
  time: Extract<TimeSource, { kind: 'day-of-year' }>,
  decimal: '.' | ',',
  fields: readonly string[],
  fixedYear: number,
): number | null {
  const number = (column: number | null): number =>
    column === null ? 0 : numberOf(fields[column] ?? '', decimal);
  const year = 'column' in time.year ? number(time.year.column) : fixedYear;
  const day = number(time.dayColumn);
  const wholeDay = Math.floor(day);
  let clockMs: number;
  if (time.timeFormat === 'fraction-of-day')
    clockMs = (time.timeColumn === null ? day - wholeDay : number(time.timeColumn)) * dayMs;
  else if (time.timeFormat === 'clock')
    clockMs = readClock(fields[time.timeColumn ?? -1] ?? '')?.ms ?? Number.NaN;
  else {
    const value = number(time.timeColumn);
    clockMs =
      time.timeFormat === 'hhmm' ? (Math.floor(value / 100) * 60 + (value % 100)) * 60_000 : value * 1000;
  }
  const stampMs = dayOfYearMs(year, wholeDay) + clockMs + number(time.secondsColumn) * 1000;
  return Number.isNaN(stampMs) ? null : stampMs;
}

// ---------------------------------------------------------------------------------------------------------------- preview

export interface PreviewRow {
  /** Zero-based line in the file. */
  line: number;
  fields: string[];
  /** Stamp as the file's clock shows it, ms as if that clock were UTC; null where unreadable. */
  wallMs: number | null;
}

export interface ColumnSummary {
  channel: ChannelKey;
  index: number;
  /** Rows with a number, in the file's unit. */
  count: number;
  missing: number;
  /** Tokens that are neither number nor declared missing. */
  unreadable: number;
  min: number;
  max: number;
  median: number;
}

export interface Preview {
  headerLines: string[];
  names: string[] | null;
  units: string[] | null;
  rows: PreviewRow[];
  columns: ColumnSummary[];
  /** First and last stamp read, UTC by the layout's clock; null without. */
  firstMs: number | null;
  lastMs: number | null;
  spacing: Spacing | null;
  /** Rows whose stamp could not be read. */
  rowsWithoutStamp: number;
}

export interface Spacing {
  rows: number;
  /** Rows a second, from first to last stamp [Hz]. */
  rateHz: number;
  /** Steps that differ from the usual one by more than half of it. */
  irregular: number;
  repeated: number;
  backward: number;
  /** Stamps have whole seconds only, and several rows share one. */
  isCoarse: boolean;
  isEven: boolean;
}

/**
 * How evenly stamps follow each other.
 *
 * @param stampsMs stamps [ms], in the order of the rows
 * @returns null with fewer than three stamps
 */
export function spacingOf(stampsMs: readonly number[]): Spacing | null {
  const rows = stampsMs.length;
  if (rows < 3) return null;
  const steps = stampsMs.slice(1).map((stamp, index) => stamp - (stampsMs[index] ?? stamp));
  const repeated = steps.filter((step) => step === 0).length;
  const backward = steps.filter((step) => step < 0).length;
  const positive = steps.filter((step) => step > 0).sort((a, b) => a - b);
  const usual = positive[Math.floor(positive.length / 2)] ?? Number.NaN;
  if (Number.isNaN(usual))
    return { rows, rateHz: Number.NaN, irregular: 0, repeated, backward, isCoarse: true, isEven: false };
  if (repeated > rows * 0.4) {
    // several rows share a stamp: count rows between the changes, leaving the cut first and last group out
    const groups: number[] = [];
    let size = 1;
    for (const step of steps) {
      if (step === 0) size += 1;
      else {
        groups.push(size);
        size = 1;
      }
    }
    const inner = groups.slice(1);
    const perStamp = inner.length > 0 ? inner.reduce((sum, value) => sum + value, 0) / inner.length : size;
    const irregular = inner.filter((value) => Math.abs(value - perStamp) > 0.5).length;
    return {
      rows,
      rateHz: (perStamp * 1000) / usual,
      irregular,
      repeated,
      backward,
      isCoarse: true,
      isEven: irregular === 0 && backward === 0,
    };
  }
  const irregular = steps.filter((step) => Math.abs(step - usual) > usual / 2).length;
  const regular = steps.filter((step) => Math.abs(step - usual) <= usual / 2);
  const meanStep = regular.reduce((sum, step) => sum + step, 0) / regular.length;
  return {
    rows,
    rateHz: 1000 / meanStep,
    irregular,
    repeated,
    backward,
    isCoarse: false,
    isEven: irregular === 0,
  };
}

export function offsetOf(clock: Layout['clock']): number {
  return clock.kind === 'utc' ? 0 : clock.offsetMinutes;
}

/**
 * The beginning of a file, read with a layout.
 *
 * @param text the first part of the file
 * @param isCutOff the text ends before the file does
 */
export function previewLayout(text: string, isCutOff: boolean, fileName: string, layout: Layout): Preview {
  const lines = linesOf(text, isCutOff);
  const headerLines = lines.slice(0, layout.headerRows);
  const readStamp = stampReader(layout, fileName, headerLines);
  const rows: PreviewRow[] = [];
  lines.slice(layout.headerRows).forEach((line, index) => {
    if (line.trim() === '') return;
    const fields = fieldsOf(line, layout.delimiter);
    rows.push({ line: layout.headerRows + index, fields, wallMs: readStamp(fields) });
  });
  const headerFields = (row: number | null): string[] | null =>
    row === null || headerLines[row] === undefined
      ? null
      : fieldsOf(uncomment(headerLines[row]), layout.delimiter);
  const missing = new Set(['', ...layout.missingTokens]);
  const sentinels = new Set(numericSentinels(layout.missingTokens, layout.decimal));
  const columns = layout.columns.map((column): ColumnSummary => {
    let missingCount = 0;
    let unreadable = 0;
    const numbers: number[] = [];
    for (const row of rows) {
      const token = row.fields[column.index] ?? '';
      if (missing.has(token)) missingCount += 1;
      else {
        const value = readNumber(token, layout.decimal, missing);
        if (value === null) unreadable += 1;
        else if (Number.isNaN(value) || sentinels.has(value)) missingCount += 1;
        else numbers.push(value);
      }
    }
    numbers.sort((a, b) => a - b);
    return {
      channel: column.channel,
      index: column.index,
      count: numbers.length,
      missing: missingCount,
      unreadable,
      min: numbers[0] ?? Number.NaN,
      max: numbers[numbers.length - 1] ?? Number.NaN,
      median: numbers[Math.floor(numbers.length / 2)] ?? Number.NaN,
    };
  });
  const stamps = rows.flatMap((row) => (row.wallMs === null ? [] : [row.wallMs]));
  const ownZone =
    layout.time.kind === 'stamp' && layout.time.format === 'iso'
      ? (readIso(rows[0]?.fields[layout.time.column] ?? '')?.zoneMinutes ?? null)
      : null;
  const shiftMs = (layout.time.kind === 'epoch' ? 0 : (ownZone ?? offsetOf(layout.clock))) * 60_000;
  return {
    headerLines,
    names: headerFields(layout.nameRow),
    units: headerFields(layout.unitRow),
    rows,
    columns,
    firstMs: stamps.length > 0 ? stamps[0]! - shiftMs : null,
    lastMs: stamps.length > 0 ? stamps[stamps.length - 1]! - shiftMs : null,
    spacing: layout.time.kind === 'start-and-rate' ? null : spacingOf(stamps),
    rowsWithoutStamp: rows.length - stamps.length,
  };
}

/** A header line without the mark that makes it a comment. */
export function uncomment(line: string): string {
  return line.replace(/^\s*(#|%|\/\/|!)+\s*/, '');
}
