import { channelUnits, requiredChannels } from '../schemas/layout';
import type { ChannelKey, Layout, LayoutColumn, TimeSource } from '../schemas/layout';
import { readName, readTimeName, readUnit, unitForChannel } from './column-names';
import type { NameReading, TimeNameReading } from './column-names';
import { fieldsOf, linesOf, numberOf, previewLayout, uncomment } from './preview';
import type { Preview } from './preview';
import { compileTimePattern, findTimePattern, readIso, readTimePattern } from './time-pattern';

/**
 * A proposal of the layout of a raw file, from its first lines, its name and what the set-up says. Nothing is decided in silence:
 * each field carries how it is known, and what could be read in two ways is listed as a problem for a person to look at.
 */

export interface GuessInput {
  /** The first part of the file, unpacked; about 64 kB are enough. */
  text: string;
  /** True when the file goes on after `text`. */
  isCutOff: boolean;
  fileName: string;
  /** From the set-up [Hz]; null when there is none yet. */
  sampleRateHz: number | null;
  /** Station standard time minus UTC [min]. */
  utcOffsetMinutes: number;
}

export type Confidence = 'sure' | 'likely' | 'doubtful';
export type Source =
  | 'name'
  | 'unit-row'
  | 'range'
  | 'position'
  | 'header'
  | 'file-name'
  | 'values'
  | 'spacing'
  | 'set-up'
  | 'usual';

export const guessedFields = [
  'delimiter',
  'decimal',
  'quoted',
  'headerRows',
  'nameRow',
  'unitRow',
  'missingTokens',
  'sampleRateHz',
  'clock',
  'stampMarks',
  'time',
] as const;
export type GuessedField = (typeof guessedFields)[number];

export interface FieldKnowledge {
  confidence: Confidence;
  source: Source;
  /** In words: "from the header". */
  how: string;
}

/** One column of the file and what it seems to hold. */
export interface ColumnProposal {
  index: number;
  name: string | null;
  unitText: string | null;
  /** What it is used for in the layout. */
  use: { kind: 'quantity'; channel: ChannelKey; unit: string } | { kind: 'time' } | { kind: 'left-out' };
  quantityBy: Source;
  unitBy: Source;
  confidence: Confidence;
  how: string;
  /** Over the rows looked at; NaN without numbers. */
  min: number;
  max: number;
}

export type ProblemCode =
  | 'no-columns'
  | 'comma-twice'
  | 'mixed-decimals'
  | 'no-decimals'
  | 'unit-from-range'
  | 'unit-doubtful'
  | 'unit-contradicts-range'
  | 'unit-unknown'
  | 'quantity-doubtful'
  | 'two-candidates'
  | 'quantity-missing'
  | 'good-codes'
  | 'signal-direction'
  | 'clock-unsaid'
  | 'day-month-order'
  | 'date-unsaid'
  | 'date-candidates'
  | 'time-columns-separate'
  | 'stamps-coarse'
  | 'stamps-uneven'
  | 'stamps-unreadable'
  | 'rate-unsaid'
  | 'rate-contradicts'
  | 'sentinel-doubtful';

export interface LayoutProblem {
  code: ProblemCode;
  /** `blocks`: cannot be read like this. `confirm`: look at it, then go on. */
  severity: 'blocks' | 'confirm';
  field: GuessedField | 'columns';
  channel: ChannelKey | null;
  /** What was seen, and what to do. */
  message: string;
}

export interface LayoutGuess {
  /** A draft: it may lack columns, then `problems` says so. */
  layout: Layout;
  knowledge: Record<GuessedField, FieldKnowledge>;
  columns: ColumnProposal[];
  problems: LayoutProblem[];
  preview: Preview;
  /** Rows a second by the stamps [Hz]; null without stamps. */
  estimatedRateHz: number | null;
}

const rowsLookedAt = 1200;
const delimiterOrder = ['tab', 'semicolon', 'pipe', 'comma', 'blanks'] as const;
/** Always taken as missing, since later files may hold them although this one does not. */
export const usualMissingTokens: readonly string[] = ['NaN', 'NAN', 'nan', 'NA', '-9999'];

// ---------------------------------------------------------------------------------------------------------------- tokens

const missingWord = /^(nan|na|n\/a|#n\/a|null|none|inf|-inf|\+inf|-{1,4}|\*+|\?+|x+)$/i;
const dotNumber = /^[-+]?(\d+\.?\d*|\.\d+)([eE][-+]?\d+)?$/;
const commaNumber = /^[-+]?\d+,\d+([eE][-+]?\d+)?$/;
const dateToken = /^(\d{1,2}[-/.]\d{1,2}[-/.]\d{2,4}|\d{4}[-/.]\d{1,2}[-/.]\d{1,2})$/;
const clockToken = /^\d{1,2}:\d{2}(:\d{2}([.,]\d+)?)?$/;
const stampToken =
  /^(\d{1,2}[-/.]\d{1,2}[-/.]\d{2,4}|\d{4}[-/.]\d{1,2}[-/.]\d{1,2})[T _]\d{1,2}:\d{2}(:\d{2}([.,]\d+)?)?\s*(Z|[+-]\d{2}:?\d{2})?$/;
const packedStampToken = /^\d{8}[T _-]\d{6}([.,]\d+)?Z?$/;

function isValueLike(token: string): boolean {
  return (
    token === '' ||
    dotNumber.test(token) ||
    commaNumber.test(token) ||
    missingWord.test(token) ||
    dateToken.test(token) ||
    clockToken.test(token) ||
    stampToken.test(token) ||
    packedStampToken.test(token)
  );
}

function mode(values: readonly number[]): { value: number; share: number } {
  const counts = new Map<number, number>();
  for (const value of values) counts.set(value, (counts.get(value) ?? 0) + 1);
  let best = { value: 0, share: 0 };
  for (const [value, count] of counts)
    if (count / values.length > best.share) best = { value, share: count / values.length };
  return best;
}

// ---------------------------------------------------------------------------------------------------------------- dialect

interface Dialect {
  delimiter: Layout['delimiter'];
  quoted: boolean;
  headerRows: number;
  width: number;
  /** How many times better than the next delimiter. */
  isClear: boolean;
  found: boolean;
}

function isDataRow(fields: readonly string[], width: number): boolean {
  if (fields.length !== width) return false;
  const values = fields.filter((field) => isValueLike(field)).length;
  const written = fields.filter((field) => field !== '' && isValueLike(field)).length;
  return written >= 1 && values >= Math.max(1, Math.ceil(width * 0.6));
}

function findDialect(lines: readonly string[]): Dialect {
  const body = lines.slice(Math.floor(lines.length * 0.4)).filter((line) => line.trim() !== '');
  let best: { delimiter: Layout['delimiter']; score: number; width: number } | null = null;
  let second = 0;
  for (const delimiter of delimiterOrder) {
    const split = body.map((line) => fieldsOf(line, delimiter));
    const { value: width, share } = mode(split.map((fields) => fields.length));
    if (width < 2) continue;
    const fields = split.filter((row) => row.length === width).flat();
    const valueShare = fields.filter(isValueLike).length / Math.max(1, fields.length);
    const score = share * valueShare * valueShare;
    if (best === null || score > best.score + 0.02) {
      second = best?.score ?? 0;
      best = { delimiter, score, width };
    } else second = Math.max(second, score);
  }
  if (best === null || best.score < 0.3) {
    return { delimiter: 'comma', quoted: false, headerRows: 0, width: 1, isClear: false, found: false };
  }
  const { delimiter, width } = best;
  let headerRows = 0;
  for (let row = 0; row < Math.min(lines.length, 200); row += 1) {
    const next = lines.slice(row, row + 3).map((line) => fieldsOf(line, delimiter));
    const first = next[0] ?? [];
    if (
      isDataRow(first, width) &&
      next.slice(1).filter((fields) => isDataRow(fields, width)).length >= Math.min(1, next.length - 1)
    ) {
      headerRows = row;
      break;
    }
    headerRows = row + 1;
  }
  return {
    delimiter,
    width,
    headerRows,
    quoted: lines.slice(headerRows).some((line) => line.includes('"')),
    isClear: best.score - second > 0.1,
    found: true,
  };
}

// ---------------------------------------------------------------------------------------------------------------- columns

interface Profile {
  index: number;
  name: string | null;
  unitText: string | null;
  tokens: string[];
  numbers: number[];
  missing: number;
  min: number;
  max: number;
  median: number;
  /** Standard deviation. */
  spread: number;
  isWhole: boolean;
  isConstant: boolean;
  /** Share of steps up. */
  rising: number;
  reading: NameReading | null;
  timeRole: TimeNameReading['role'] | null;
}

function sentinelOf(token: string, numbers: readonly number[], value: number): 'sure' | 'doubtful' | null {
  if (!/^[-+]?(6?9{2,}|8{4,})(\.(9+|0+))?$/.test(token)) return null;
  const others = numbers.filter((number) => number !== value && !Number.isNaN(number));
  if (Math.abs(value) >= 6999) return others.every((number) => Math.abs(number) < 6000) ? 'sure' : null;
  if (others.length === 0) return Math.abs(value) >= 999 ? 'sure' : null;
  const low = Math.min(...others);
  const high = Math.max(...others);
  const reach = Math.max(high - low, 1e-9);
  if (Math.abs(value) >= 999 && (value < low - 3 * reach || value > high + 3 * reach)) return 'sure';
  return value < low - 5 * reach || value > high + 5 * reach ? 'doubtful' : null;
}

function profileOf(
  index: number,
  name: string | null,
  unitText: string | null,
  tokens: string[],
  decimal: '.' | ',',
  missingTokens: ReadonlySet<string>,
): Profile {
  const numbers: number[] = [];
  let missing = 0;
  for (const token of tokens) {
    if (token === '' || missingTokens.has(token)) missing += 1;
    else {
      const value = numberOf(token, decimal);
      if (!Number.isNaN(value)) numbers.push(value);
    }
  }
  const sorted = [...numbers].sort((a, b) => a - b);
  const mean = numbers.reduce((sum, value) => sum + value, 0) / numbers.length;
  const spread = Math.sqrt(numbers.reduce((sum, value) => sum + (value - mean) ** 2, 0) / numbers.length);
  const ups = numbers.filter((value, row) => row > 0 && value > (numbers[row - 1] ?? value)).length;
  return {
    index,
    name,
    unitText,
    tokens,
    numbers,
    missing,
    min: sorted[0] ?? Number.NaN,
    max: sorted[sorted.length - 1] ?? Number.NaN,
    median: sorted[Math.floor(sorted.length / 2)] ?? Number.NaN,
    spread,
    isWhole: numbers.length > 0 && numbers.every((value) => Number.isInteger(value)),
    isConstant: numbers.length > 1 && sorted[0] === sorted[sorted.length - 1],
    rising: numbers.length > 1 ? ups / (numbers.length - 1) : 0,
    reading: name === null ? null : readName(name),
    timeRole: name === null ? null : (readTimeName(name)?.role ?? null),
  };
}

const share = (tokens: readonly string[], test: (token: string) => boolean): number => {
  const written = tokens.filter((token) => token !== '');
  return written.length === 0 ? 0 : written.filter(test).length / written.length;
};

// ---------------------------------------------------------------------------------------------------------------- dates in names and headers

interface DateFound {
  pattern: string;
  text: string;
  hasTime: boolean;
  isUtc: boolean;
  month: number;
  day: number;
  /** Day and month could be swapped. */
  isAmbiguous: boolean;
}

const dateShapes: readonly {
  expression: RegExp;
  format: (match: RegExpExecArray) => string;
  swaps?: true;
}[] = [
  {
    expression:
      /(?<!\d)(\d{4})([-_./]?)(\d{2})\2(\d{2})(?:([T _-]{1,2})(\d{2})([-_:.]?)(\d{2})(?:\7(\d{2}))?(?!\d))?(Z?)/,
    format: (m) =>
      `YYYY${m[2]}MM${m[2]}DD${m[5] === undefined ? '' : `${m[5]}hh${m[7]}mm${m[9] === undefined ? '' : `${m[7]}ss`}`}`,
  },
  {
    expression: /(?<!\d)(\d{4})(\d{2})(\d{2})(\d{2})(\d{2})(\d{2})?(?!\d)/,
    format: (m) => `YYYYMMDDhhmm${m[6] === undefined ? '' : 'ss'}`,
  },
  {
    expression: /(?<!\d)(\d{4})([-_./]?)(\d{3})(?:([T _-])(\d{2})([-_:.]?)(\d{2})(?:\6(\d{2}))?)?(?!\d)/,
    format: (m) =>
      `YYYY${m[2]}DDD${m[4] === undefined ? '' : `${m[4]}hh${m[6]}mm${m[8] === undefined ? '' : `${m[6]}ss`}`}`,
  },
  {
    expression:
      /(?<!\d)(\d{2})([-_./])(\d{2})\2(\d{4})(?:([T _-]{1,2})(\d{2})([-_:.]?)(\d{2})(?:\7(\d{2}))?)?(?!\d)/,
    format: (m) =>
      `DD${m[2]}MM${m[2]}YYYY${m[5] === undefined ? '' : `${m[5]}hh${m[7]}mm${m[9] === undefined ? '' : `${m[7]}ss`}`}`,
    swaps: true,
  },
  {
    expression: /(?<!\d)(\d{2})(\d{2})(\d{2})([T_-])(\d{2})(\d{2})(\d{2})?(?!\d)/,
    format: (m) => `YYMMDD${m[4]}hhmm${m[7] === undefined ? '' : 'ss'}`,
  },
];

/** A text that is nothing but a pattern, as ms; NaN when it does not follow it or names no date. */
function patternMs(text: string, pattern: string): number {
  return readTimePattern(compileTimePattern(pattern, 'whole'), text)?.ms ?? Number.NaN;
}

const patternTokens = /YYYY|YY|MM|DDD|DD|hh|mm|ss|\*/;

/** The first date in a text, with the pattern that finds it again; `keepLabel` keeps the words before it, to tell it from others. */
function datesIn(text: string, keepLabel: boolean): DateFound[] {
  for (const { expression, format, swaps } of dateShapes) {
    const match = new RegExp(expression.source).exec(text);
    if (!match) continue;
    const written = match[0].replace(/Z$/, '');
    let core = format(match);
    let foundMs = patternMs(written, core);
    let isAmbiguous = false;
    if (swaps) {
      const swapped = core.replace('DD', '\u0000').replace('MM', 'DD').replace('\u0000', 'MM');
      const otherMs = patternMs(written, swapped);
      if (Number.isNaN(foundMs)) {
        core = swapped;
        foundMs = otherMs;
      } else isAmbiguous = !Number.isNaN(otherMs) && otherMs !== foundMs && match[2] !== '.';
    }
    if (Number.isNaN(foundMs)) continue;
    const label = keepLabel ? (/[^\d]*$/.exec(text.slice(0, match.index))?.[0] ?? '') : '';
    const labelled = `${label}${core}`;
    const isLabelUsable =
      label !== '' &&
      !patternTokens.test(label) &&
      labelled.length <= 120 &&
      findTimePattern(labelled, [text]) === foundMs;
    const pattern = isLabelUsable ? labelled : core;
    if (findTimePattern(pattern, [text]) !== foundMs) continue;
    const date = new Date(foundMs);
    return [
      {
        pattern,
        text: match[0],
        hasTime: core.includes('hh'),
        isUtc:
          match[0].endsWith('Z') || /^[_ -]?(utc|gmt)\b/i.test(text.slice(match.index + match[0].length)),
        month: date.getUTCMonth() + 1,
        day: date.getUTCDate(),
        isAmbiguous,
      },
    ];
  }
  return [];
}

// ---------------------------------------------------------------------------------------------------------------- time

interface TimeGuess {
  time: TimeSource;
  columns: number[];
  knowledge: FieldKnowledge;
  problems: LayoutProblem[];
  /** Clock written in the stamps themselves. */
  zone: { offsetMinutes: number } | null;
}

interface TimeContext {
  profiles: Profile[];
  fileName: string;
  nameDates: DateFound[];
  headerDates: DateFound[];
  rateHz: number;
}

const problem = (
  code: ProblemCode,
  field: LayoutProblem['field'],
  message: string,
  severity: LayoutProblem['severity'] = 'confirm',
  channel: ChannelKey | null = null,
): LayoutProblem => ({
  code,
  severity,
  field,
  channel,
  message: message.charAt(0).toUpperCase() + message.slice(1),
});

/** Which of day and month comes first in tokens like 22/06/2027. */
function dayMonthOrder(
  tokens: readonly string[],
  context: TimeContext,
): { first: 'DD' | 'MM'; isAmbiguous: boolean } {
  const pairs = tokens.flatMap((token) => {
    const match = /^(\d{1,2})([-/.])(\d{1,2})\2/.exec(token);
    return match ? [{ a: Number(match[1]), b: Number(match[3]), mark: match[2] }] : [];
  });
  if (pairs.some(({ a }) => a > 12)) return { first: 'DD', isAmbiguous: false };
  if (pairs.some(({ b }) => b > 12)) return { first: 'MM', isAmbiguous: false };
  const pair = pairs[0];
  if (!pair || pair.a === pair.b) return { first: 'DD', isAmbiguous: false };
  for (const date of [...context.nameDates, ...context.headerDates]) {
    if (date.isAmbiguous) continue;
    if (date.day === pair.a && date.month === pair.b) return { first: 'DD', isAmbiguous: false };
    if (date.day === pair.b && date.month === pair.a) return { first: 'MM', isAmbiguous: false };
  }
  // written with dots the day stands first (common practice, no source)
  return { first: 'DD', isAmbiguous: pair.mark !== '.' };
}

function datePattern(token: string, order: 'DD' | 'MM'): string | null {
  const yearFirst = /^(\d{4})([-/.])\d{1,2}\2\d{1,2}/.exec(token);
  if (yearFirst) return `YYYY${yearFirst[2]}MM${yearFirst[2]}DD`;
  const yearLast = /^\d{1,2}([-/.])\d{1,2}\1(\d{4}|\d{2})/.exec(token);
  if (!yearLast) return null;
  const year = yearLast[2]?.length === 4 ? 'YYYY' : 'YY';
  return `${order}${yearLast[1]}${order === 'DD' ? 'MM' : 'DD'}${yearLast[1]}${year}`;
}

const orderProblem = (example: string): LayoutProblem =>
  problem(
    'day-month-order',
    'time',
    `“${example}” can be day then month or month then day; no row and no name settles it. Taken as day first: please look.`,
  );

const dateSourceOf = (
  context: TimeContext,
): {
  source: { from: 'file-name' | 'header'; pattern: string } | null;
  date: DateFound | null;
  candidates: DateFound[];
} => {
  const distinct = context.headerDates.filter(
    (date, index) => context.headerDates.findIndex((other) => other.text === date.text) === index,
  );
  const fromName = context.nameDates[0];
  if (fromName)
    return {
      source: { from: 'file-name', pattern: fromName.pattern },
      date: fromName,
      candidates: [fromName],
    };
  const fromHeader = distinct.find((date) => date.hasTime) ?? distinct[0];
  if (fromHeader)
    return {
      source: { from: 'header', pattern: fromHeader.pattern },
      date: fromHeader,
      candidates: distinct,
    };
  return { source: null, date: null, candidates: [] };
};

function guessTime(context: TimeContext): TimeGuess {
  const { profiles } = context;
  const done = (
    time: TimeSource,
    columns: number[],
    how: string,
    confidence: Confidence,
    source: Source = 'values',
  ): TimeGuess => ({
    time,
    columns,
    knowledge: { confidence, source, how },
    problems: [],
    zone: null,
  });

  // date and time in one column
  for (const profile of profiles) {
    const example = profile.tokens.find((token) => token !== '') ?? '';
    if (
      share(
        profile.tokens,
        (token) => token.length > 10 && Number.isFinite(readIso(token)?.ms ?? Number.NaN),
      ) > 0.9
    ) {
      const offset = readIso(example)?.zoneMinutes ?? null;
      const guess = done(
        { kind: 'stamp', column: profile.index, format: 'iso' },
        [profile.index],
        'ISO 8601 stamps',
        'sure',
      );
      return { ...guess, zone: offset === null ? null : { offsetMinutes: offset } };
    }
    if (share(profile.tokens, (token) => stampToken.test(token)) > 0.9) {
      const order = dayMonthOrder(profile.tokens, context);
      const date = datePattern(example, order.first);
      const rest = /([T _])\d{1,2}:\d{2}(:\d{2})?/.exec(example);
      if (date && rest) {
        const guess = done(
          { kind: 'stamp', column: profile.index, format: `${date}${rest[1]}hh:mm${rest[2] ? ':ss' : ''}` },
          [profile.index],
          'one column with date and time',
          order.isAmbiguous ? 'doubtful' : 'sure',
        );
        if (order.isAmbiguous) guess.problems.push(orderProblem(example));
        return guess;
      }
    }
    if (share(profile.tokens, (token) => packedStampToken.test(token)) > 0.9) {
      const mark = /[T _-]/.exec(example)?.[0] ?? 'T';
      const isUtc = example.endsWith('Z');
      const guess = done(
        { kind: 'stamp', column: profile.index, format: `YYYYMMDD${mark}hhmmss${isUtc ? 'Z' : ''}` },
        [profile.index],
        'one column with date and time',
        'sure',
      );
      return { ...guess, zone: isUtc ? { offsetMinutes: 0 } : null };
    }
    if (
      share(
        profile.tokens,
        (token) => /^\d{14}([.,]\d+)?$/.test(token) && !Number.isNaN(patternMs(token, 'YYYYMMDDhhmmss')),
      ) > 0.9
    ) {
      return done(
        { kind: 'stamp', column: profile.index, format: 'YYYYMMDDhhmmss' },
        [profile.index],
        'one column of fourteen digits',
        'sure',
      );
    }
  }

  // date and time of day side by side
  const clock = profiles.find((profile) => share(profile.tokens, (token) => clockToken.test(token)) > 0.9);
  const packedClock = profiles.find(
    (profile) =>
      (profile.timeRole === 'clock' || profile.name === null) &&
      share(profile.tokens, (token) => /^([01]\d|2[0-4])[0-5]\d[0-5]\d([.,]\d+)?$/.test(token)) > 0.9 &&
      profile.rising > 0,
  );
  const clockColumn = clock ?? packedClock;
  const date = profiles.find((profile) => share(profile.tokens, (token) => dateToken.test(token)) > 0.9);
  const packedDate = profiles.find(
    (profile) =>
      share(
        profile.tokens,
        (token) => /^(19|20)\d{6}$/.test(token) && !Number.isNaN(patternMs(token, 'YYYYMMDD')),
      ) > 0.9,
  );
  if (clockColumn && (date || packedDate)) {
    const dateProfile = (date ?? packedDate)!;
    const example = dateProfile.tokens.find((token) => token !== '') ?? '';
    const isIso = Number.isFinite(readIso(example)?.ms ?? Number.NaN);
    const order = dayMonthOrder(dateProfile.tokens, context);
    const format =
      packedDate && !date ? 'YYYYMMDD' : isIso ? 'iso' : (datePattern(example, order.first) ?? 'iso');
    const isAmbiguous = !isIso && format !== 'YYYYMMDD' && !format.startsWith('YYYY') && order.isAmbiguous;
    const guess = done(
      {
        kind: 'date-and-time',
        dateColumn: dateProfile.index,
        dateFormat: format,
        timeColumn: clockColumn.index,
      },
      [dateProfile.index, clockColumn.index],
      'a date column and a time column',
      isAmbiguous ? 'doubtful' : 'sure',
    );
    if (isAmbiguous) guess.problems.push(orderProblem(example));
    return guess;
  }

  // seconds, milliseconds, microseconds since 1970
  for (const profile of profiles) {
    if (profile.numbers.length < profile.tokens.length * 0.9 || profile.rising < 0.2) continue;
    const span: [number, number, 's' | 'ms' | 'us'][] = [
      [6e8, 4.2e9, 's'],
      [6e11, 4.2e12, 'ms'],
      [6e14, 4.2e15, 'us'],
    ];
    const fit = span.find(([low, high]) => profile.min >= low && profile.max <= high);
    if (fit) {
      const guess = done(
        { kind: 'epoch', column: profile.index, unit: fit[2] },
        [profile.index],
        `${fit[2]} since 1970, UTC`,
        'sure',
      );
      return { ...guess, zone: { offsetMinutes: 0 } };
    }
  }

  const byRole = (role: TimeNameReading['role']): Profile | undefined =>
    profiles.find((profile) => profile.timeRole === role);
  const named = profiles.some((profile) => profile.name !== null);
  const isYear = (profile: Profile | undefined): profile is Profile =>
    profile !== undefined &&
    profile.isWhole &&
    profile.min >= 1990 &&
    profile.max <= 2100 &&
    profile.max - profile.min <= 1;

  // year, month, day, hour, minute, second each in its own column: the layout has no word for that
  const monthColumn = byRole('month');
  const hourColumn = byRole('hour');
  if (isYear(byRole('year')) && monthColumn && hourColumn) {
    const { source } = dateSourceOf(context);
    const guess = done(
      { kind: 'start-and-rate', start: source ?? { from: 'file-name', pattern: 'YYYYMMDD_hhmm' } },
      profiles
        .filter((profile) => profile.timeRole !== null && profile.timeRole !== 'counter')
        .map((profile) => profile.index),
      'date and time are spread over columns of their own',
      'doubtful',
      source?.from ?? 'usual',
    );
    guess.problems.push(
      problem(
        'time-columns-separate',
        'time',
        source
          ? 'Year, month, day and time stand in columns of their own, which a layout cannot join yet. The start is taken from the file’s name instead, then the sampling rate: gaps inside the file will not be seen.'
          : 'Year, month, day and time stand in columns of their own, which a layout cannot join yet. Put a start time into the file’s name, or join the columns.',
        source ? 'confirm' : 'blocks',
      ),
    );
    return guess;
  }

  // day of year
  const yearColumn = byRole('year') ?? (named ? undefined : profiles.find((profile) => isYear(profile)));
  const dayColumn =
    byRole('day-of-year') ??
    (yearColumn
      ? profiles.find(
          (profile) => profile.index === yearColumn.index + 1 && profile.min >= 1 && profile.max < 367,
        )
      : undefined);
  if (dayColumn && dayColumn.min >= 1 && dayColumn.max < 367 && dayColumn.numbers.length > 0) {
    const yearFrom = dateSourceOf(context);
    const year: Extract<TimeSource, { kind: 'day-of-year' }>['year'] | null = isYear(yearColumn)
      ? { column: yearColumn.index }
      : yearFrom.source;
    const used = [dayColumn.index, ...(isYear(yearColumn) ? [yearColumn.index] : [])];
    const yearProblem = problem(
      'date-unsaid',
      'time',
      'The day of the year is there, but no year: put it into the file’s name, or write where it stands.',
      'blocks',
    );
    const withYear = (guess: TimeGuess): TimeGuess => {
      if (year === null) {
        guess.problems.push(yearProblem);
        guess.knowledge = { ...guess.knowledge, confidence: 'doubtful' };
      }
      return guess;
    };
    const yearOrPlaceholder = year ?? { from: 'file-name' as const, pattern: 'YYYY' };
    if (!dayColumn.isWhole) {
      return withYear(
        done(
          {
            kind: 'day-of-year',
            year: yearOrPlaceholder,
            dayColumn: dayColumn.index,
            timeColumn: null,
            timeFormat: 'fraction-of-day',
            secondsColumn: null,
          },
          used,
          'day of the year with its fraction',
          'likely',
        ),
      );
    }
    const secondOfDay = byRole('seconds-of-day');
    const hhmm =
      byRole('hhmm') ??
      profiles.find(
        (profile) =>
          profile.index === dayColumn.index + 1 &&
          profile.isWhole &&
          profile.min >= 0 &&
          profile.max <= 2400 &&
          profile.numbers.every((value) => value % 100 < 60) &&
          (profile.timeRole === 'clock' || profile.name === null),
      );
    const seconds =
      byRole('second') ??
      profiles.find(
        (profile) =>
          hhmm !== undefined &&
          profile.index === hhmm.index + 1 &&
          profile.name === null &&
          profile.min >= 0 &&
          profile.max < 60.999,
      );
    if (clockColumn) {
      return withYear(
        done(
          {
            kind: 'day-of-year',
            year: yearOrPlaceholder,
            dayColumn: dayColumn.index,
            timeColumn: clockColumn.index,
            timeFormat: 'clock',
            secondsColumn: null,
          },
          [...used, clockColumn.index],
          'day of the year and time of day',
          'sure',
        ),
      );
    }
    if (secondOfDay) {
      return withYear(
        done(
          {
            kind: 'day-of-year',
            year: yearOrPlaceholder,
            dayColumn: dayColumn.index,
            timeColumn: secondOfDay.index,
            timeFormat: 'seconds-of-day',
            secondsColumn: null,
          },
          [...used, secondOfDay.index],
          'day of the year and seconds of the day',
          'sure',
        ),
      );
    }
    if (hhmm) {
      return withYear(
        done(
          {
            kind: 'day-of-year',
            year: yearOrPlaceholder,
            dayColumn: dayColumn.index,
            timeColumn: hhmm.index,
            timeFormat: 'hhmm',
            secondsColumn: seconds?.index ?? null,
          },
          [...used, hhmm.index, ...(seconds ? [seconds.index] : [])],
          'year, day of the year, hhmm and seconds',
          seconds ? 'sure' : 'doubtful',
        ),
      );
    }
  }

  const place = dateSourceOf(context);
  const candidatesProblem =
    place.candidates.length > 1
      ? [
          problem(
            'date-candidates',
            'time',
            `The header holds ${place.candidates.length} dates (${place.candidates.map((date) => date.text).join(', ')}). The start is taken from “${place.date?.text ?? ''}”: please look.`,
          ),
        ]
      : [];
  const swapProblem = place.date?.isAmbiguous ? [orderProblem(place.date.text)] : [];

  // time of day, date from elsewhere
  if (clockColumn) {
    const source = place.source ?? { from: 'file-name' as const, pattern: 'YYYYMMDD' };
    const guess = done(
      { kind: 'time-of-day', column: clockColumn.index, date: source },
      [clockColumn.index],
      place.source
        ? `time of day in a column, date from the ${source.from === 'header' ? 'header' : 'file’s name'}`
        : 'time of day in a column',
      place.source && candidatesProblem.length === 0 ? 'sure' : 'doubtful',
      place.source?.from ?? 'values',
    );
    guess.problems.push(...candidatesProblem, ...swapProblem);
    if (!place.source) {
      guess.problems.push(
        problem(
          'date-unsaid',
          'time',
          'Rows carry the time of day, but no date stands in the rows, the header or the file’s name. Say where the date comes from.',
          'blocks',
        ),
      );
    }
    return guess;
  }

  // no stamps
  const counters = profiles.filter(
    (profile) => profile.timeRole === 'elapsed' || profile.timeRole === 'seconds-of-day',
  );
  const withTime = [place.date, ...context.headerDates].find((found) => found?.hasTime) ?? null;
  const start: { from: 'file-name' | 'header'; pattern: string } | null =
    place.date?.hasTime || !withTime ? place.source : { from: 'header', pattern: withTime.pattern };
  const guess = done(
    { kind: 'start-and-rate', start: start ?? { from: 'file-name', pattern: 'YYYYMMDD_hhmm' } },
    counters.map((profile) => profile.index),
    start
      ? `rows carry no stamps; start from the ${start.from === 'header' ? 'header' : 'file’s name'}, then the sampling rate`
      : 'rows carry no stamps',
    start && candidatesProblem.length === 0 ? 'likely' : 'doubtful',
    start?.from ?? 'usual',
  );
  guess.problems.push(...candidatesProblem, ...swapProblem);
  if (!start) {
    guess.problems.push(
      problem(
        'date-unsaid',
        'time',
        'No stamp in the rows, no date in the header or in the file’s name: a start time is needed. Put it into the name, for example 20270622_1130.',
        'blocks',
      ),
    );
  } else if (!withTime && !place.date?.hasTime) {
    guess.problems.push(
      problem(
        'date-unsaid',
        'time',
        'A date was found but no time of day, so the file is taken to start at midnight: please look.',
      ),
    );
  }
  return guess;
}

// ---------------------------------------------------------------------------------------------------------------- quantities

interface Pick {
  profile: Profile;
  channel: ChannelKey;
  quantityBy: Source;
  confidence: Confidence;
}

interface UnitPick {
  unit: string;
  by: Source;
  confidence: Confidence;
  how: string;
  problems: LayoutProblem[];
}

export const channelWords: Record<ChannelKey, string> = {
  windU: 'wind u',
  windV: 'wind v',
  windW: 'vertical wind',
  sonicTemperature: 'sonic temperature',
  co2: 'CO2',
  h2o: 'H2O',
  airTemperature: 'air temperature',
  airPressure: 'air pressure',
  sonicStatus: 'sonic status',
  analyserStatus: 'analyser status',
  signalStrength: 'signal strength',
};

interface UnitFit {
  unit: string;
  /** Values that are ordinary for that unit (common practice, no source). */
  low: number;
  high: number;
}

/** Ordinary medians of the air near the ground, 0–3000 m (common practice, no source; CO2 of 380–700 ppm). */
const unitFits: Partial<Record<ChannelKey, readonly UnitFit[]>> = {
  sonicTemperature: [
    { unit: 'degC', low: -50, high: 60 },
    { unit: 'K', low: 225, high: 325 },
    { unit: 'm s-1', low: 305, high: 365 },
  ],
  airTemperature: [
    { unit: 'degC', low: -50, high: 60 },
    { unit: 'K', low: 225, high: 330 },
  ],
  co2: [
    { unit: 'mmol m-3', low: 9, high: 32 },
    { unit: 'mg m-3', low: 500, high: 1250 },
    { unit: 'umol mol-1', low: 330, high: 700 },
    { unit: 'umol m-3', low: 9000, high: 32000 },
  ],
  h2o: [
    { unit: 'g m-3', low: 0.1, high: 35 },
    { unit: 'mmol mol-1', low: 0.1, high: 45 },
    { unit: 'mmol m-3', low: 45, high: 2000 },
    { unit: 'mol m-3', low: 0.005, high: 0.0999 },
  ],
  airPressure: [
    { unit: 'kPa', low: 50, high: 110 },
    { unit: 'hPa', low: 500, high: 1100 },
    { unit: 'Pa', low: 50000, high: 110000 },
  ],
  signalStrength: [
    { unit: '1', low: 0, high: 1.1 },
    { unit: '%', low: 1.1001, high: 130 },
  ],
};

/**
 * Whether a median is ordinary for a unit.
 *
 * @returns true where nothing is known of the unit's range
 */
export function isOrdinaryForUnit(channel: ChannelKey, unit: string, median: number): boolean {
  const fit = unitFits[channel]?.find(
    (candidate) => unit === candidate.unit || unit === `${candidate.unit} dry`,
  );
  return fit === undefined || Number.isNaN(median) || (median >= fit.low && median <= fit.high);
}

const short = (value: number): string => {
  const size = Math.abs(value);
  return Number(value.toFixed(size >= 100 ? 0 : size >= 10 ? 1 : 2))
    .toString()
    .replace('-', '−');
};
const rangeWords = (profile: Profile): string =>
  profile.isConstant
    ? `constant ${short(profile.min)}`
    : `range ${short(profile.min)} to ${short(profile.max)}`;

function pickUnit(pick: Pick, isGasDensity: boolean | null): UnitPick {
  const { profile, channel } = pick;
  const allowed = channelUnits[channel] as readonly string[];
  const reading = profile.reading;
  const measure = reading?.channel === channel ? reading.measure : null;
  const fits = unitFits[channel] ?? [];
  const fitting = fits.filter((fit) => profile.median >= fit.low && profile.median <= fit.high);
  const words = channelWords[channel];

  // written in a unit row, in brackets or as a suffix
  const written = [
    { text: profile.unitText, by: 'unit-row' as const, how: 'unit from the unit row' },
    { text: reading?.unitText ?? null, by: 'name' as const, how: 'unit from the header' },
  ];
  const problems: LayoutProblem[] = [];
  for (const { text, by, how } of written) {
    if (!text) continue;
    const known = readUnit(text);
    if (!known) {
      if (channel !== 'sonicStatus' && channel !== 'analyserStatus') {
        problems.push(
          problem(
            'unit-unknown',
            'columns',
            `“${text}” beside ${words} is no unit that a layout knows. Choose the unit.`,
            'confirm',
            channel,
          ),
        );
      }
      continue;
    }
    const isDry = known.isDry || measure === 'dry-mole-fraction';
    const unit = unitForChannel(channel, { unit: known.unit, isDry });
    if (!unit) {
      problems.push(
        problem(
          'unit-unknown',
          'columns',
          `${words} cannot be in “${text}”. Choose the unit.`,
          'confirm',
          channel,
        ),
      );
      continue;
    }
    const fit = fits.find(
      (candidate) =>
        unit.startsWith(candidate.unit) && (unit === candidate.unit || unit === `${candidate.unit} dry`),
    );
    if (fit && !Number.isNaN(profile.median) && (profile.median < fit.low || profile.median > fit.high)) {
      const better = fitting.map((candidate) => candidate.unit).join(' or ');
      return {
        unit,
        by,
        confidence: 'doubtful',
        how: `${how}; ${rangeWords(profile)} does not fit it`,
        problems: [
          problem(
            'unit-contradicts-range',
            'columns',
            `${words}: “${text}” is written, but ${rangeWords(profile)} fits ${better || 'no unit that a layout knows'}. Which is right?`,
            'confirm',
            channel,
          ),
        ],
      };
    }
    return { unit, by, confidence: 'sure', how, problems: [] };
  }

  if (channel === 'sonicStatus' || channel === 'analyserStatus') {
    return { unit: 'code', by: 'usual', confidence: 'sure', how: rangeWords(profile), problems };
  }

  if (channel === 'windU' || channel === 'windV' || channel === 'windW') {
    const isLarge =
      Math.abs(profile.median) > 60 || profile.spread > 40 || (channel === 'windW' && profile.spread > 12);
    if (isLarge) {
      problems.push(
        problem(
          'unit-doubtful',
          'columns',
          `${words}: ${rangeWords(profile)} is much for m s-1; taken as cm s-1.`,
          'confirm',
          channel,
        ),
      );
      return {
        unit: 'cm s-1',
        by: 'range',
        confidence: 'doubtful',
        how: `${rangeWords(profile)} fits cm s-1`,
        problems,
      };
    }
    return {
      unit: 'm s-1',
      by: 'range',
      confidence: 'likely',
      how: `${rangeWords(profile)} is ordinary for m s-1`,
      problems,
    };
  }

  let candidates = fitting.map((fit) => fit.unit);
  if (measure === 'speed-of-sound') candidates = ['m s-1'];
  else if (channel === 'co2' || channel === 'h2o') {
    const isDensity = measure === 'density' || measure === 'mass-density' || measure === 'molar-density';
    const isFraction = measure === 'mole-fraction' || measure === 'dry-mole-fraction';
    const byMeasure = candidates.filter((unit) => {
      const unitIsFraction = unit.includes('mol-1');
      if (isFraction) return unitIsFraction;
      if (measure === 'mass-density') return unit.includes('g m-3');
      if (measure === 'molar-density') return unit.includes('mol m-3');
      return isDensity ? !unitIsFraction : true;
    });
    if (byMeasure.length > 0) candidates = byMeasure;
  }
  // g m-3 and mmol mol-1 of vapour have the same numbers; the other gas is a hint, and no more
  let hint = '';
  if (candidates.length > 1 && isGasDensity !== null && (channel === 'h2o' || channel === 'co2')) {
    const alike = candidates.filter((unit) => unit.includes('mol-1') !== isGasDensity);
    if (alike.length > 0 && alike.length < candidates.length) {
      candidates = [...alike, ...candidates.filter((unit) => !alike.includes(unit))];
      hint = channel === 'h2o' ? ', as CO2 is' : ', as H2O is';
    }
  }
  const first = candidates[0];
  if (first === undefined) {
    problems.push(
      problem(
        'unit-doubtful',
        'columns',
        `${words}: ${rangeWords(profile)} fits no unit that a layout knows. Choose the unit.`,
        'confirm',
        channel,
      ),
    );
    return {
      unit: allowed[0] ?? '1',
      by: 'usual',
      confidence: 'doubtful',
      how: `${rangeWords(profile)} fits no unit`,
      problems,
    };
  }
  const unit = measure === 'dry-mole-fraction' && allowed.includes(`${first} dry`) ? `${first} dry` : first;
  const others = fits.map((fit) => fit.unit).filter((other) => !candidates.includes(other));
  if (candidates.length > 1) {
    problems.push(
      problem(
        'unit-doubtful',
        'columns',
        `${words}: ${rangeWords(profile)} fits ${candidates.join(' and ')}. Taken as ${unit}${hint}: please look.`,
        'confirm',
        channel,
      ),
    );
    return {
      unit,
      by: 'range',
      confidence: 'doubtful',
      how: `${rangeWords(profile)} fits ${candidates.join(' and ')}`,
      problems,
    };
  }
  if (channel === 'signalStrength') {
    return { unit, by: 'range', confidence: 'likely', how: `${rangeWords(profile)} fits ${unit}`, problems };
  }
  problems.push(
    problem(
      'unit-from-range',
      'columns',
      `${words}: no unit is written; ${rangeWords(profile)} fits ${unit}${others[0] ? `, not ${others[0]}` : ''}. Please confirm.`,
      'confirm',
      channel,
    ),
  );
  return {
    unit,
    by: 'range',
    confidence: 'likely',
    how: `${rangeWords(profile)} fits ${unit}${others[0] ? `, not ${others[0]}` : ''}`,
    problems,
  };
}

function pickByName(profiles: readonly Profile[], problems: LayoutProblem[]): Pick[] {
  const picks: Pick[] = [];
  const taken = new Set<ChannelKey>();
  const candidates = profiles.filter((profile) => profile.reading !== null && profile.timeRole === null);
  const add = (profile: Profile, channel: ChannelKey, confidence: Confidence): void => {
    picks.push({ profile, channel, quantityBy: 'name', confidence });
    taken.add(channel);
  };
  const columnLabel = (profile: Profile): string => `“${profile.name ?? `column ${profile.index + 1}`}”`;

  for (const channel of Object.keys(channelUnits) as ChannelKey[]) {
    if (channel === 'sonicStatus' || channel === 'analyserStatus') continue;
    const strong = candidates.filter(
      (profile) => profile.reading?.channel === channel && profile.reading.strength === 'strong',
    );
    const chosen = strong.length > 1 ? preferred(channel, strong) : strong[0];
    if (!chosen) continue;
    add(chosen, channel, strong.length > 1 ? 'doubtful' : 'sure');
    if (strong.length > 1) {
      problems.push(
        problem(
          'two-candidates',
          'columns',
          `${channelWords[channel]} could be ${strong.map(columnLabel).join(' or ')}. Taken: ${columnLabel(chosen)}. Please look.`,
          'confirm',
          channel,
        ),
      );
    }
  }

  // words that alone say little: x y z only as a set of three, t as sonic temperature only if there is no other
  const weak = candidates.filter(
    (profile) => profile.reading?.strength === 'weak' && !picks.some((pick) => pick.profile === profile),
  );
  const winds = (['windU', 'windV', 'windW'] as const).map((channel) =>
    weak.find((profile) => profile.reading?.channel === channel),
  );
  if (!taken.has('windU') && winds.every((profile) => profile !== undefined)) {
    (['windU', 'windV', 'windW'] as const).forEach((channel, index) => add(winds[index]!, channel, 'likely'));
  }
  for (const channel of ['sonicTemperature', 'co2', 'h2o', 'airPressure'] as const) {
    const found = weak.filter((profile) => profile.reading?.channel === channel);
    const first = found[0];
    if (!first) continue;
    if (channel === 'sonicTemperature' && taken.has('sonicTemperature')) {
      if (!taken.has('airTemperature')) add(first, 'airTemperature', 'likely');
      continue;
    }
    if (taken.has(channel)) continue;
    const written = readUnit(first.unitText ?? first.reading?.unitText ?? '');
    if (
      channel !== 'sonicTemperature' &&
      written &&
      written.unit !== '1' &&
      unitForChannel(channel, written)
    ) {
      // "p" in hPa is a pressure
      add(first, channel, 'likely');
      continue;
    }
    add(first, channel, 'doubtful');
    problems.push(
      problem(
        'quantity-doubtful',
        'columns',
        `${columnLabel(first)} is taken as ${channelWords[channel]}; the name alone could mean something else. Please look.`,
        'confirm',
        channel,
      ),
    );
  }

  // status columns: by the instrument in the name, else by what stands before them
  const statuses = candidates.filter(
    (profile) => profile.reading?.channel === 'sonicStatus' || profile.reading?.channel === 'analyserStatus',
  );
  for (const profile of statuses.filter((candidate) => candidate.reading?.strength === 'strong')) {
    const channel = profile.reading!.channel;
    if (!taken.has(channel)) add(profile, channel, 'sure');
  }
  const vague = statuses.filter((candidate) => candidate.reading?.strength === 'weak');
  for (const profile of vague) {
    const gasBefore = picks.some(
      (pick) => (pick.channel === 'co2' || pick.channel === 'h2o') && pick.profile.index < profile.index,
    );
    const wish: ChannelKey = gasBefore ? 'analyserStatus' : 'sonicStatus';
    const other: ChannelKey = gasBefore ? 'sonicStatus' : 'analyserStatus';
    const channel = !taken.has(wish) ? wish : !taken.has(other) ? other : null;
    if (channel === null) continue;
    add(profile, channel, 'doubtful');
    problems.push(
      problem(
        'quantity-doubtful',
        'columns',
        `${columnLabel(profile)} does not say whose status it is; taken as ${channelWords[channel]} because it follows ${gasBefore ? 'the gases' : 'the wind'}. Please look.`,
        'confirm',
        channel,
      ),
    );
  }
  return picks;
}

/** Of several columns that could be one gas: a density before a mole fraction, since an open path measures density. */
function preferred(channel: ChannelKey, profiles: readonly Profile[]): Profile {
  if (channel === 'co2' || channel === 'h2o') {
    const density = profiles.find((profile) => {
      const unit = readUnit(profile.unitText ?? profile.reading?.unitText ?? '')?.unit ?? '';
      return unit.endsWith('m-3') || /density$/.test(profile.reading?.measure ?? '');
    });
    if (density) return density;
  }
  return profiles[0]!;
}

/** Without names: three winds side by side and a temperature, then gases and pressure by their range. */
function pickByPosition(
  profiles: readonly Profile[],
  timeColumns: ReadonlySet<number>,
  problems: LayoutProblem[],
): Pick[] {
  const usable = profiles.filter(
    (profile) => !timeColumns.has(profile.index) && profile.numbers.length > profile.tokens.length * 0.3,
  );
  const picks: Pick[] = [];
  const isWind = (profile: Profile | undefined): profile is Profile =>
    profile !== undefined &&
    !profile.isConstant &&
    !profile.isWhole &&
    profile.min > -60 &&
    profile.max < 60 &&
    profile.spread > 0.02 &&
    profile.spread < 12;
  const isTemperature = (profile: Profile | undefined): profile is Profile =>
    profile !== undefined &&
    !profile.isConstant &&
    (unitFits.sonicTemperature ?? []).some(
      (fit) => profile.median >= fit.low && profile.median <= fit.high,
    ) &&
    profile.spread < 8;
  for (let at = 0; at + 3 < usable.length; at += 1) {
    const [u, v, w, t] = usable.slice(at, at + 4);
    if (!isWind(u) || !isWind(v) || !isWind(w) || !isTemperature(t)) continue;
    if (![u, v, w].some((profile) => profile.min < 0)) continue;
    const add = (profile: Profile, channel: ChannelKey, confidence: Confidence): void => {
      picks.push({ profile, channel, quantityBy: 'position', confidence });
    };
    // the vertical wind has the smallest mean; if the third column has not, its place alone speaks for it
    const isThirdSmallest =
      Math.abs(w.median) <= Math.min(Math.abs(u.median), Math.abs(v.median)) &&
      w.spread <= Math.max(u.spread, v.spread);
    add(u, 'windU', 'likely');
    add(v, 'windV', 'likely');
    add(w, 'windW', isThirdSmallest ? 'likely' : 'doubtful');
    add(t, 'sonicTemperature', 'likely');
    break;
  }
  const rest = (): Profile[] => usable.filter((profile) => !picks.some((pick) => pick.profile === profile));
  if (picks.length > 0) {
    const after = picks[picks.length - 1]!.profile.index;
    const fits = (channel: ChannelKey, profile: Profile, units: readonly string[]): boolean =>
      (unitFits[channel] ?? []).some(
        (fit) => units.includes(fit.unit) && profile.median >= fit.low && profile.median <= fit.high,
      );
    const following = (): Profile[] =>
      rest().filter((profile) => profile.index > after && !profile.isConstant && !profile.isWhole);
    const co2 = following().find(
      (profile) =>
        fits('co2', profile, ['mg m-3', 'mmol m-3', 'umol mol-1']) && profile.spread < profile.median * 0.2,
    );
    if (co2) picks.push({ profile: co2, channel: 'co2', quantityBy: 'range', confidence: 'doubtful' });
    const h2o = co2
      ? following().find(
          (profile) =>
            profile.index > co2.index &&
            fits('h2o', profile, ['g m-3', 'mmol mol-1', 'mmol m-3']) &&
            !fits('airPressure', profile, ['kPa', 'hPa', 'Pa']),
        )
      : undefined;
    if (h2o) picks.push({ profile: h2o, channel: 'h2o', quantityBy: 'range', confidence: 'doubtful' });
    const pressure = following().find(
      (profile) =>
        fits('airPressure', profile, ['kPa', 'hPa', 'Pa']) && profile.spread < profile.median * 0.01,
    );
    if (pressure)
      picks.push({ profile: pressure, channel: 'airPressure', quantityBy: 'range', confidence: 'doubtful' });
    const codes = rest().filter(
      (profile) =>
        profile.index > after &&
        profile.isWhole &&
        profile.min >= 0 &&
        profile.max < 65536 &&
        profile.rising < 0.5,
    );
    const code = codes[codes.length - 1];
    if (code)
      picks.push({
        profile: code,
        channel: co2 && code.index > co2.index ? 'analyserStatus' : 'sonicStatus',
        quantityBy: 'position',
        confidence: 'doubtful',
      });
  }
  for (const pick of picks) {
    problems.push(
      problem(
        'quantity-doubtful',
        'columns',
        `Column ${pick.profile.index + 1} has no name; taken as ${channelWords[pick.channel]} by its ${pick.quantityBy === 'range' ? 'values' : 'place'}. Please look.`,
        'confirm',
        pick.channel,
      ),
    );
  }
  return picks;
}

// ---------------------------------------------------------------------------------------------------------------- the whole

function clockFromText(text: string): { offsetMinutes: number } | null {
  const offset = /\b(?:utc|gmt)\s*([+-−])\s*(\d{1,2})(?::?(\d{2}))?\b/i.exec(text);
  if (offset)
    return {
      offsetMinutes: (offset[1] === '+' ? 1 : -1) * (Number(offset[2]) * 60 + Number(offset[3] ?? 0)),
    };
  return /\b(utc|gmt)\b/i.test(text.replace(/_/g, ' ')) ? { offsetMinutes: 0 } : null;
}

const clockOf = (offsetMinutes: number): Layout['clock'] =>
  offsetMinutes === 0 ? { kind: 'utc' } : { kind: 'fixed', offsetMinutes };

function rateFromHeader(headerLines: readonly string[]): number | null {
  for (const line of headerLines) {
    const match =
      /(\d+(?:\.\d+)?)\s*hz\b/i.exec(line) ??
      /\b(?:rate|frequency|sampling)\D{0,12}(\d+(?:\.\d+)?)/i.exec(line);
    const value = match ? Number(match[1]) : Number.NaN;
    if (value >= 1 && value <= 100) return value;
  }
  return null;
}

function tidyRate(rateHz: number, setUpHz: number | null): number {
  if (setUpHz !== null && Math.abs(rateHz / setUpHz - 1) < 0.02) return setUpHz;
  const whole = Math.round(rateHz);
  return whole >= 1 && Math.abs(rateHz / whole - 1) < 0.02 ? whole : Math.round(rateHz * 100) / 100;
}

const formatHz = (rate: number): string => `${Number(rate.toFixed(2))} Hz`;

/**
 * The layout that the first lines of a file speak for.
 *
 * @returns the draft, how each field is known, one proposal per column, and every doubt as a problem
 */
export function guessLayout(input: GuessInput): LayoutGuess {
  const lines = linesOf(input.text, input.isCutOff);
  const dialect = findDialect(lines);
  const problems: LayoutProblem[] = [];
  const headerLines = lines.slice(0, dialect.headerRows);
  const rows = lines
    .slice(dialect.headerRows)
    .filter((line) => line.trim() !== '')
    .slice(0, rowsLookedAt)
    .map((line) => fieldsOf(line, dialect.delimiter))
    .filter((fields) => fields.length === dialect.width);

  if (!dialect.found || rows.length === 0) {
    problems.push(
      problem(
        'no-columns',
        'delimiter',
        'No rows with several values were found: this may not be a table of text. Choose the separator, or another file.',
        'blocks',
      ),
    );
  }

  // decimal mark
  const allTokens = rows.flat();
  const withComma = allTokens.filter((token) => commaNumber.test(token)).length;
  const withDot = allTokens.filter((token) => /^[-+]?\d*\.\d+([eE][-+]?\d+)?$/.test(token)).length;
  let decimal: '.' | ',' = withComma > withDot ? ',' : '.';
  let decimalSure: Confidence = 'sure';
  if (dialect.delimiter === 'comma' && withComma > 0) {
    problems.push(
      problem(
        'comma-twice',
        'decimal',
        'Comma is the separator and, in quotes, the decimal mark too. A layout cannot hold both: export the file again with semicolons.',
        'blocks',
      ),
    );
    decimal = '.';
    decimalSure = 'doubtful';
  } else if (withComma > 0 && withDot > withComma * 0.1) {
    problems.push(
      problem(
        'mixed-decimals',
        'decimal',
        `Numbers have a comma in ${withComma} places and a dot in ${withDot}. Taken as ${decimal === ',' ? 'comma' : 'dot'}: please look.`,
      ),
    );
    decimalSure = 'doubtful';
  } else if (withComma === 0 && withDot === 0 && rows.length > 0) {
    problems.push(
      problem(
        'no-decimals',
        'decimal',
        dialect.delimiter === 'comma'
          ? 'No number has decimals: comma may be both separator and decimal mark. If so, export the file again with semicolons.'
          : 'No number has decimals: wind and temperature normally do. Please look.',
        dialect.delimiter === 'comma' ? 'blocks' : 'confirm',
      ),
    );
    decimalSure = 'doubtful';
  }

  // names and units in the header
  const headerFields = headerLines.map((line) => fieldsOf(uncomment(line), dialect.delimiter));
  const nameScore = headerFields.map((fields) =>
    fields.length === dialect.width
      ? fields.filter((field) => readName(field) !== null || readTimeName(field) !== null).length +
        (fields.every((field) => field !== '') ? 0.5 : 0)
      : -1,
  );
  const unitScore = headerFields.map((fields) =>
    fields.length >= dialect.width - 1 && fields.length <= dialect.width
      ? fields.filter((field) => readUnit(field) !== null).length
      : -1,
  );
  const bestName = nameScore.indexOf(Math.max(...nameScore, -1));
  const nameRow = headerLines.length > 0 && (nameScore[bestName] ?? -1) >= 0.5 ? bestName : null;
  const unitCandidates = unitScore.map((score, row) => (row === nameRow ? -1 : score));
  const bestUnit = unitCandidates.indexOf(Math.max(...unitCandidates, -1));
  const unitRow =
    headerLines.length > 0 && (unitCandidates[bestUnit] ?? -1) >= Math.max(2, dialect.width * 0.25)
      ? bestUnit
      : null;
  const names = nameRow === null ? null : (headerFields[nameRow] ?? null);
  const units = unitRow === null ? null : (headerFields[unitRow] ?? null);

  // missing tokens
  const missingTokens = new Set<string>(usualMissingTokens);
  for (let index = 0; index < dialect.width; index += 1) {
    const tokens = rows.map((fields) => fields[index] ?? '');
    const numbers = tokens.map((token) => numberOf(token, decimal));
    const numeric = numbers.filter((value) => !Number.isNaN(value)).length;
    const seen = new Set<string>();
    tokens.forEach((token, row) => {
      if (token === '' || seen.has(token) || missingTokens.has(token)) return;
      seen.add(token);
      if (missingWord.test(token)) missingTokens.add(token);
      else if (numeric > 0) {
        const sentinel = sentinelOf(token, numbers, numbers[row] ?? Number.NaN);
        if (sentinel === null) return;
        missingTokens.add(token);
        if (sentinel === 'doubtful') {
          problems.push(
            problem(
              'sentinel-doubtful',
              'missingTokens',
              `“${token}” in ${names?.[index] ? `“${names[index]}”` : `column ${index + 1}`} is far from every other value; taken as “no value”. Please look.`,
            ),
          );
        }
      }
    });
  }

  const profiles = Array.from({ length: rows.length > 0 ? dialect.width : 0 }, (_, index) =>
    profileOf(
      index,
      names?.[index] || null,
      units?.[index] || null,
      rows.map((fields) => fields[index] ?? ''),
      decimal,
      missingTokens,
    ),
  );

  // time
  const nameDates = datesIn(input.fileName, false);
  const headerDatesBare = headerLines.flatMap((line) => datesIn(line, false));
  // one date in the header is found by its shape alone; of several, the words before it tell them apart
  const headerDates =
    headerDatesBare.length > 1 ? headerLines.flatMap((line) => datesIn(line, true)) : headerDatesBare;
  const headerRate = rateFromHeader(headerLines);
  const timeGuess = guessTime({
    profiles,
    fileName: input.fileName,
    nameDates,
    headerDates,
    rateHz: input.sampleRateHz ?? headerRate ?? 10,
  });
  problems.push(...timeGuess.problems);
  const timeColumns = new Set(timeGuess.columns);

  // quantities
  const free = profiles.filter((profile) => !timeColumns.has(profile.index));
  const hasNames = free.some((profile) => profile.reading !== null);
  const picks = hasNames ? pickByName(free, problems) : pickByPosition(free, timeColumns, problems);
  picks.sort((a, b) => a.profile.index - b.profile.index);
  const gasKind = new Map<ChannelKey, boolean>();
  const proposals = new Map<number, ColumnProposal>();
  const columns: LayoutColumn[] = [];
  const unitOf = (pick: Pick): UnitPick => {
    const other =
      pick.channel === 'h2o' ? gasKind.get('co2') : pick.channel === 'co2' ? gasKind.get('h2o') : undefined;
    return pickUnit(pick, other ?? null);
  };
  // CO2 first: its density and mole fraction differ in their numbers, those of H2O do not
  const order = [...picks].sort((a, b) => Number(b.channel === 'co2') - Number(a.channel === 'co2'));
  const unitPicks = new Map<Pick, UnitPick>();
  for (const pick of order) {
    const unit = unitOf(pick);
    unitPicks.set(pick, unit);
    if (pick.channel === 'co2' || pick.channel === 'h2o')
      gasKind.set(pick.channel, !unit.unit.includes('mol-1'));
  }
  for (const pick of picks) {
    const unit = unitPicks.get(pick)!;
    problems.push(...unit.problems);
    const { profile, channel } = pick;
    const column: LayoutColumn = {
      channel,
      index: profile.index,
      name: profile.name,
      unit: unit.unit,
      knownBy:
        pick.quantityBy === 'name'
          ? unit.by === 'unit-row'
            ? 'unit-row'
            : unit.by === 'range'
              ? 'range'
              : 'name'
          : pick.quantityBy === 'range'
            ? 'range'
            : 'position',
    };
    let how = unit.how;
    if (channel === 'sonicStatus' || channel === 'analyserStatus') {
      const usual = profile.numbers.length > 0 ? mode(profile.numbers) : { value: 0, share: 0 };
      column.good = { codes: [usual.value], mask: null, equals: null };
      how = profile.isConstant
        ? `constant ${usual.value}`
        : `${usual.value} in ${Math.round(usual.share * 100)} % of rows`;
      if (!(profile.isConstant && usual.value === 0)) {
        problems.push(
          problem(
            'good-codes',
            'columns',
            `${channelWords[channel]}: ${how}. Which codes mean “good”? ${usual.value} is taken until somebody says.`,
            'confirm',
            channel,
          ),
        );
      }
    }
    if (channel === 'signalStrength') {
      column.higherIsBetter = !(profile.reading?.isFouling ?? false);
      problems.push(
        problem(
          'signal-direction',
          'columns',
          `Signal strength: does a higher number mean a cleaner window? Taken as ${column.higherIsBetter ? 'yes' : 'no'}.`,
          'confirm',
          channel,
        ),
      );
    }
    columns.push(column);
    const rank = { sure: 0, likely: 1, doubtful: 2 } as const;
    proposals.set(profile.index, {
      index: profile.index,
      name: profile.name,
      unitText: profile.unitText ?? profile.reading?.unitText ?? null,
      use: { kind: 'quantity', channel, unit: unit.unit },
      quantityBy: pick.quantityBy,
      unitBy: unit.by,
      confidence: rank[unit.confidence] > rank[pick.confidence] ? unit.confidence : pick.confidence,
      how,
      min: profile.min,
      max: profile.max,
    });
  }
  for (const channel of requiredChannels) {
    if (rows.length > 0 && !picks.some((pick) => pick.channel === channel)) {
      problems.push(
        problem(
          'quantity-missing',
          'columns',
          `No column was found for ${channelWords[channel]}. Without it no flux can be computed: choose the column.`,
          'blocks',
          channel,
        ),
      );
    }
  }

  // clock
  const utcName = profiles.some(
    (profile) => timeColumns.has(profile.index) && /utc|gmt/i.test(profile.name ?? ''),
  );
  const headerClock = headerLines.map(clockFromText).find((found) => found !== null) ?? null;
  let clock: Layout['clock'];
  let clockKnowledge: FieldKnowledge;
  if (timeGuess.zone) {
    clock = clockOf(timeGuess.zone.offsetMinutes);
    clockKnowledge = { confidence: 'sure', source: 'values', how: 'written in the stamps' };
  } else if (utcName) {
    clock = { kind: 'utc' };
    clockKnowledge = { confidence: 'sure', source: 'name', how: 'from the name of the time column' };
  } else if (headerClock) {
    clock = clockOf(headerClock.offsetMinutes);
    clockKnowledge = { confidence: 'sure', source: 'header', how: 'from the header' };
  } else if (nameDates[0]?.isUtc) {
    clock = { kind: 'utc' };
    clockKnowledge = { confidence: 'likely', source: 'file-name', how: 'from the file’s name' };
  } else {
    clock = clockOf(input.utcOffsetMinutes);
    clockKnowledge = {
      confidence: 'doubtful',
      source: 'set-up',
      how: 'station standard time; the file does not say',
    };
    problems.push(
      problem(
        'clock-unsaid',
        'clock',
        'The file does not say which clock its stamps follow. Taken as station standard time: an hour’s error moves every flux by an hour.',
      ),
    );
  }

  const endWords = /\b(end of|interval end|timestamp_?end|stamp marks end)\b/i;
  const marksEnd =
    headerLines.some((line) => endWords.test(line)) ||
    profiles.some((profile) => timeColumns.has(profile.index) && /end$/i.test(profile.name ?? ''));

  const layout: Layout = {
    schema: 'gustbook/layout/1',
    name: suggestName(input.fileName),
    delimiter: dialect.delimiter,
    decimal,
    quoted: dialect.quoted,
    headerRows: dialect.headerRows,
    nameRow,
    unitRow,
    missingTokens: [...missingTokens].slice(0, 24),
    sampleRateHz: input.sampleRateHz ?? headerRate ?? 10,
    clock,
    stampMarks: marksEnd ? 'end' : 'start',
    time: timeGuess.time,
    columns,
  };

  // rate and spacing, by reading the stamps with the draft
  let preview = previewLayout(input.text, input.isCutOff, input.fileName, layout);
  let timeKnowledge = timeGuess.knowledge;
  let rateKnowledge: FieldKnowledge;
  let estimatedRateHz: number | null = null;
  if (preview.spacing && Number.isFinite(preview.spacing.rateHz)) {
    const spacing = preview.spacing;
    estimatedRateHz = spacing.rateHz;
    const tidy = tidyRate(spacing.rateHz, input.sampleRateHz);
    if (spacing.isCoarse) {
      const share = Math.round(spacing.rows / Math.max(1, spacing.rows - spacing.repeated));
      timeKnowledge = { ...timeKnowledge, confidence: 'likely' };
      problems.push(
        problem(
          'stamps-coarse',
          'time',
          `Stamps are coarse: about ${share} rows share one. They are spread evenly between two stamps, at ${formatHz(tidy)}.`,
        ),
      );
    }
    if (!spacing.isEven) {
      problems.push(
        problem(
          'stamps-uneven',
          'time',
          `${spacing.irregular} of ${spacing.rows - 1} steps between rows are uneven${spacing.backward > 0 ? `, ${spacing.backward} go back in time` : ''}. Gaps are kept as gaps.`,
        ),
      );
    }
    layout.sampleRateHz = tidy >= 1 && tidy <= 100 ? tidy : (input.sampleRateHz ?? 10);
    rateKnowledge = {
      confidence: 'sure',
      source: 'spacing',
      how: `${Number(spacing.rateHz.toFixed(2))} rows a second by the stamps`,
    };
    if (input.sampleRateHz !== null && Math.abs(tidy / input.sampleRateHz - 1) > 0.02) {
      rateKnowledge = {
        confidence: 'doubtful',
        source: 'spacing',
        how: `${formatHz(tidy)} by the stamps, ${formatHz(input.sampleRateHz)} in the set-up`,
      };
      problems.push(
        problem(
          'rate-contradicts',
          'sampleRateHz',
          `The stamps say ${formatHz(tidy)}, the set-up ${formatHz(input.sampleRateHz)}. Taken: the stamps. One of them is wrong.`,
        ),
      );
    }
    preview = previewLayout(input.text, input.isCutOff, input.fileName, layout);
  } else if (headerRate !== null) {
    layout.sampleRateHz = headerRate;
    rateKnowledge = { confidence: 'sure', source: 'header', how: 'from the header' };
    if (input.sampleRateHz !== null && input.sampleRateHz !== headerRate) {
      rateKnowledge = {
        confidence: 'doubtful',
        source: 'header',
        how: `${formatHz(headerRate)} in the header, ${formatHz(input.sampleRateHz)} in the set-up`,
      };
      problems.push(
        problem(
          'rate-contradicts',
          'sampleRateHz',
          `The header says ${formatHz(headerRate)}, the set-up ${formatHz(input.sampleRateHz)}. Taken: the header. One of them is wrong.`,
        ),
      );
    }
    preview = previewLayout(input.text, input.isCutOff, input.fileName, layout);
  } else if (input.sampleRateHz !== null) {
    rateKnowledge = { confidence: 'likely', source: 'set-up', how: 'from the set-up' };
  } else {
    rateKnowledge = { confidence: 'doubtful', source: 'usual', how: 'nothing says it' };
    problems.push(
      problem(
        'rate-unsaid',
        'sampleRateHz',
        'Neither stamps, header nor set-up say how many rows a second there are. Taken as 10 Hz: please write the rate.',
        'blocks',
      ),
    );
  }
  if (
    rows.length > 0 &&
    preview.rowsWithoutStamp > preview.rows.length * 0.1 &&
    !problems.some((known) => known.field === 'time' && known.severity === 'blocks')
  ) {
    problems.push(
      problem(
        'stamps-unreadable',
        'time',
        `${preview.rowsWithoutStamp} of the first ${preview.rows.length} rows have no readable time. Look at where the time comes from.`,
        'blocks',
      ),
    );
  }

  const headerHow = nameRow !== null ? 'the line with the names' : 'lines before the first row of numbers';
  return {
    layout,
    knowledge: {
      delimiter: {
        confidence: dialect.found ? (dialect.isClear ? 'sure' : 'likely') : 'doubtful',
        source: 'values',
        how: 'every row has the same number of values',
      },
      decimal: {
        confidence: decimalSure,
        source: 'values',
        how: decimal === ',' ? 'numbers are written with a comma' : 'numbers are written with a dot',
      },
      quoted: {
        confidence: 'sure',
        source: 'values',
        how: dialect.quoted ? 'quotes stand around values' : 'no quotes in the rows',
      },
      headerRows: { confidence: dialect.found ? 'sure' : 'doubtful', source: 'values', how: headerHow },
      nameRow: {
        confidence: nameRow === null ? 'likely' : 'sure',
        source: 'header',
        how: nameRow === null ? 'no line of names' : 'from the header',
      },
      unitRow: {
        confidence: unitRow === null ? 'likely' : 'sure',
        source: 'header',
        how: unitRow === null ? 'no line of units' : 'from the header',
      },
      missingTokens: {
        confidence: problems.some((known) => known.code === 'sentinel-doubtful')
          ? 'doubtful'
          : missingTokens.size > usualMissingTokens.length
            ? 'likely'
            : 'sure',
        source: missingTokens.size > usualMissingTokens.length ? 'values' : 'usual',
        how:
          missingTokens.size > usualMissingTokens.length ? 'seen in the rows' : 'the usual ones; none seen',
      },
      sampleRateHz: rateKnowledge,
      clock: clockKnowledge,
      stampMarks: marksEnd
        ? { confidence: 'likely', source: 'header', how: 'the header says so' }
        : { confidence: 'likely', source: 'usual', how: 'usual; the file does not say' },
      time: timeKnowledge,
    },
    columns: profiles.map(
      (profile) =>
        proposals.get(profile.index) ?? {
          index: profile.index,
          name: profile.name,
          unitText: profile.unitText,
          use: timeColumns.has(profile.index) ? { kind: 'time' } : { kind: 'left-out' },
          quantityBy: 'position',
          unitBy: 'position',
          confidence: 'sure',
          how: timeColumns.has(profile.index) ? 'date and time' : 'not used',
          min: profile.min,
          max: profile.max,
        },
    ),
    problems,
    preview,
    estimatedRateHz,
  };
}

/** A name for the layout, from the letters of the file's name. */
function suggestName(fileName: string): string {
  const stem = fileName.replace(/(\.(csv|txt|dat|tsv|gz|asc|raw))+$/i, '');
  const letters = stem
    .replace(/\d+/g, ' ')
    .replace(/[_\-.]+/g, ' ')
    .replace(/\b[TZ]\b/g, ' ')
    .replace(/\s+/g, ' ')
    .trim();
  return (letters || 'Raw files').slice(0, 60);
}
