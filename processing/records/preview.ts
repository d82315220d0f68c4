import Papa from 'papaparse';
import type { ChannelKey, Layout, TimeSource } from '../schemas/layout';

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
  if (decimal === ',' && token.includes('.')) return Number.NaN;
  const plain = decimal === ',' ? token.replace(',', '.') : token;
  return /^[-+]?(\d+\.?\d*|\.\d+)([eE][-+]?\d+)?$/.test(plain) ? Number(plain) : Number.NaN;
}

// ---------------------------------------------------------------------------------------------------------------- dates

/** What a pattern found; parts it does not name are absent. */
export interface DateParts {
  year?: number;
  month?: number;
  day?: number;
  dayOfYear?: number;
  hour?: number;
  minute?: number;
  second?: number;
}

const partShapes = {
  YYYY: { part: 'year', expression: '(\\d{4})' },
  YY: { part: 'year', expression: '(\\d{2})' },
  MM: { part: 'month', expression: '(\\d{1,2})' },
  DDD: { part: 'dayOfYear', expression: '(\\d{1,3})' },
  DD: { part: 'day', expression: '(\\d{1,2})' },
  hh: { part: 'hour', expression: '(\\d{1,2})' },
  mm: { part: 'minute', expression: '(\\d{1,2})' },
  ss: { part: 'second', expression: '(\\d{1,2}(?:[.,]\\d+)?)' },
} as const satisfies Record<string, { part: keyof DateParts; expression: string }>;
type PartToken = keyof typeof partShapes;
const partTokens = /YYYY|YY|MM|DDD|DD|hh|mm|ss|\*/g;

/** True if a text would be read as part of a pattern instead of as itself. */
export function holdsPatternTokens(text: string): boolean {
  return new RegExp(partTokens.source).test(text);
}

/**
 * Reads a text by a pattern of the layout (YYYY YY MM DD DDD hh mm ss, `*` any run).
 *
 * Parts that touch ("YYYYMMDD") have fixed widths; parts between other characters may be shorter ("D/M/YYYY" written as DD/MM/YYYY).
 */
export function readPattern(text: string, pattern: string): DateParts | null {
  const order: PartToken[] = [];
  let expression = '^';
  let cursor = 0;
  const pieces = [...pattern.matchAll(partTokens)];
  pieces.forEach((piece, index) => {
    expression += escapeExpression(pattern.slice(cursor, piece.index));
    cursor = piece.index + piece[0].length;
    if (piece[0] === '*') {
      expression += '.*?';
      return;
    }
    const token = piece[0] as PartToken;
    const next = pieces[index + 1];
    const before = pieces[index - 1];
    const touches =
      (next !== undefined && next.index === cursor && next[0] !== '*') ||
      (before !== undefined && before.index + before[0].length === piece.index && before[0] !== '*');
    const isFixed = touches || token === 'YYYY' || token === 'YY';
    const width = token === 'YYYY' ? 4 : token === 'DDD' ? 3 : 2;
    expression += isFixed
      ? token === 'ss'
        ? `(\\d{2}(?:[.,]\\d+)?)`
        : `(\\d{${width}})`
      : partShapes[token].expression;
    order.push(token);
  });
  expression += `${escapeExpression(pattern.slice(cursor))}$`;
  const match = new RegExp(expression).exec(text);
  if (!match) return null;
  const parts: DateParts = {};
  order.forEach((token, index) => {
    const value = Number((match[index + 1] ?? '').replace(',', '.'));
    parts[partShapes[token].part] = token === 'YY' ? 2000 + value : value;
  });
  return isPossible(parts) ? parts : null;
}

function escapeExpression(text: string): string {
  return text.replace(/[.*+?^${}()|[\]\\]/g, '\\$&');
}

function isPossible(parts: DateParts): boolean {
  const within = (value: number | undefined, low: number, high: number): boolean =>
    value === undefined || (value >= low && value <= high);
  return (
    within(parts.year, 1970, 2199) &&
    within(parts.month, 1, 12) &&
    within(parts.day, 1, 31) &&
    within(parts.dayOfYear, 1, 366) &&
    within(parts.hour, 0, 24) &&
    within(parts.minute, 0, 59) &&
    within(parts.second, 0, 60.999)
  );
}

/** Wall-clock milliseconds of date parts, as if the clock were UTC; null without year and day. */
export function wallMsOf(parts: DateParts): number | null {
  if (parts.year === undefined) return null;
  const timeMs =
    ((parts.hour ?? 0) * 3600 + (parts.minute ?? 0) * 60) * 1000 +
    Math.round((parts.second ?? 0) * 1e6) / 1e3;
  if (parts.dayOfYear !== undefined)
    return Date.UTC(parts.year, 0, 1) + (parts.dayOfYear - 1) * 86_400_000 + timeMs;
  if (parts.month === undefined || parts.day === undefined) return null;
  const midnight = Date.UTC(parts.year, parts.month - 1, parts.day);
  // 31 June becomes 1 July in Date.UTC: no such day
  return new Date(midnight).getUTCMonth() === parts.month - 1 ? midnight + timeMs : null;
}

const isoExpression =
  /^(\d{4})-(\d{2})-(\d{2})(?:[T ](\d{2}):(\d{2})(?::(\d{2}(?:[.,]\d+)?))?)?\s*(Z|[+-]\d{2}:?\d{2})?$/;

/** An ISO 8601 stamp; `offsetMinutes` is null where the stamp names no zone. */
export function readIso(token: string): { wallMs: number; offsetMinutes: number | null } | null {
  const match = isoExpression.exec(token);
  if (!match) return null;
  const parts: DateParts = {
    year: Number(match[1]),
    month: Number(match[2]),
    day: Number(match[3]),
    hour: Number(match[4] ?? 0),
    minute: Number(match[5] ?? 0),
    second: Number((match[6] ?? '0').replace(',', '.')),
  };
  const wallMs = isPossible(parts) ? wallMsOf(parts) : null;
  if (wallMs === null) return null;
  const zone = match[7];
  if (zone === undefined) return { wallMs, offsetMinutes: null };
  if (zone === 'Z') return { wallMs, offsetMinutes: 0 };
  const [, sign, hours, minutes] = /^([+-])(\d{2}):?(\d{2})$/.exec(zone) ?? [];
  return { wallMs, offsetMinutes: (sign === '-' ? -1 : 1) * (Number(hours) * 60 + Number(minutes)) };
}

/** Seconds since midnight of hh:mm[:ss[.f]] or hhmmss[.f]; NaN when it is no time of day. */
export function readClockS(token: string): number {
  const match =
    /^(\d{1,2}):(\d{2})(?::(\d{2}(?:[.,]\d+)?))?$/.exec(token) ??
    /^(\d{2})(\d{2})(\d{2}(?:[.,]\d+)?)$/.exec(token);
  if (!match) return Number.NaN;
  const hours = Number(match[1]);
  const minutes = Number(match[2]);
  const seconds = Number((match[3] ?? '0').replace(',', '.'));
  return hours <= 24 && minutes <= 59 && seconds < 61 ? hours * 3600 + minutes * 60 + seconds : Number.NaN;
}

type PartSource = { from: 'file-name' | 'header'; pattern: string };

/** Date parts from file name or header by a layout's pattern. */
export function readPartSource(
  source: PartSource,
  fileName: string,
  headerLines: readonly string[],
): DateParts | null {
  if (source.from === 'file-name') return readPattern(fileName, source.pattern);
  for (const line of headerLines) {
    const parts = readPattern(line, source.pattern);
    if (parts) return parts;
  }
  return null;
}

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
  switch (time.kind) {
    case 'stamp':
      return (fields) => {
        const token = fields[time.column] ?? '';
        if (time.format !== 'iso') {
          const parts = readPattern(token, time.format);
          return parts ? wallMsOf(parts) : null;
        }
        return readIso(token)?.wallMs ?? null;
      };
    case 'date-and-time':
      return (fields) => {
        const dateToken = fields[time.dateColumn] ?? '';
        const dateMs =
          time.dateFormat === 'iso'
            ? (readIso(dateToken)?.wallMs ?? null)
            : wallOrNull(readPattern(dateToken, time.dateFormat));
        const seconds = readClockS(fields[time.timeColumn] ?? '');
        return dateMs === null || Number.isNaN(seconds) ? null : dateMs + Math.round(seconds * 1e6) / 1e3;
      };
    case 'day-of-year':
      return (fields) => dayOfYearMs(time, decimal, fields, fileName, headerLines);
    case 'epoch':
      return (fields) => {
        const value = numberOf(fields[time.column] ?? '', decimal);
        if (Number.isNaN(value)) return null;
        return time.unit === 's' ? value * 1000 : time.unit === 'ms' ? value : value / 1000;
      };
    case 'time-of-day': {
      const date = readPartSource(time.date, fileName, headerLines);
      let dayMs = date ? wallMsOf({ ...date, hour: 0, minute: 0, second: 0 }) : null;
      let previousS = Number.NEGATIVE_INFINITY;
      return (fields) => {
        const seconds = readClockS(fields[time.column] ?? '');
        if (Number.isNaN(seconds) || dayMs === null) return null;
        if (seconds < previousS - 43_200) dayMs += 86_400_000;
        previousS = seconds;
        return dayMs + Math.round(seconds * 1e6) / 1e3;
      };
    }
    case 'start-and-rate': {
      const start = readPartSource(time.start, fileName, headerLines);
      const startMs = start ? wallMsOf(start) : null;
      let row = 0;
      return () => {
        const stampMs = startMs === null ? null : startMs + (row * 1000) / sampleRateHz;
        row += 1;
        return stampMs;
      };
    }
  }
}

function wallOrNull(parts: DateParts | null): number | null {
  return parts ? wallMsOf(parts) : null;
}

function dayOfYearMs(
  time: Extract<TimeSource, { kind: 'day-of-year' }>,
  decimal: '.' | ',',
  fields: readonly string[],
  fileName: string,
  headerLines: readonly string[],
): number | null {
  const year =
    'column' in time.year
      ? numberOf(fields[time.year.column] ?? '', decimal)
      : (readPartSource(time.year, fileName, headerLines)?.year ?? Number.NaN);
  const day = numberOf(fields[time.dayColumn] ?? '', decimal);
  if (Number.isNaN(year) || Number.isNaN(day)) return null;
  const wholeDay = Math.floor(day);
  let seconds: number;
  if (time.timeFormat === 'fraction-of-day') {
    seconds =
      (time.timeColumn === null ? day - wholeDay : numberOf(fields[time.timeColumn] ?? '', decimal)) * 86_400;
  } else if (time.timeFormat === 'clock') {
    seconds = readClockS(fields[time.timeColumn ?? -1] ?? '');
  } else {
    const value = numberOf(fields[time.timeColumn ?? -1] ?? '', decimal);
    seconds = time.timeFormat === 'hhmm' ? Math.floor(value / 100) * 3600 + (value % 100) * 60 : value;
  }
  if (time.secondsColumn !== null) seconds += numberOf(fields[time.secondsColumn] ?? '', decimal);
  if (Number.isNaN(seconds)) return null;
  return Date.UTC(year, 0, 1) + (wholeDay - 1) * 86_400_000 + Math.round(seconds * 1e6) / 1e3;
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
  const columns = layout.columns.map((column): ColumnSummary => {
    let missingCount = 0;
    let unreadable = 0;
    const numbers: number[] = [];
    for (const row of rows) {
      const token = row.fields[column.index] ?? '';
      if (missing.has(token)) missingCount += 1;
      else {
        const value = numberOf(token, layout.decimal);
        if (Number.isNaN(value)) unreadable += 1;
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
  const shiftMs = (layout.time.kind === 'epoch' ? 0 : offsetOf(layout.clock)) * 60_000;
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
