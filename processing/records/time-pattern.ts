/**
 * Dates and times written by a pattern: YYYY YY MM DD DDD hh mm ss, everything else literal, `*` any run of characters.
 * Calendar arithmetic only: no clock, no zone names.
 */

const DAY_MS = 86_400_000;

interface PatternPart {
  name: 'YYYY' | 'YY' | 'MM' | 'DDD' | 'DD' | 'hh' | 'mm' | 'ss';
  group: number;
}

export interface TimePattern {
  expression: RegExp;
  parts: PatternPart[];
}

export interface PatternReading {
  /** ms since 1970-01-01, as if the text were UTC; NaN when it is no calendar date. */
  ms: number;
  /** Where the seconds begin, when they end the text; −1 otherwise. */
  secondsAt: number;
  /** Milliseconds of everything before the seconds. */
  baseMs: number;
}

const tokens = /YYYY|YY|MM|DDD|DD|hh|mm|ss|\*|[^YMDhms*]+|[YMDhms]/g;
const digitTokens = new Set(['YYYY', 'YY', 'MM', 'DDD', 'DD', 'hh', 'mm', 'ss']);

/**
 * @param pattern see above
 * @param where `whole`: the text is nothing but the pattern, seconds may have a fraction; `inside`: it stands somewhere in the text
 */
export function compileTimePattern(pattern: string, where: 'whole' | 'inside'): TimePattern {
  const pieces = pattern.match(tokens) ?? [];
  const parts: PatternPart[] = [];
  let source = '';
  pieces.forEach((piece, i) => {
    if (piece === '*') {
      source += '.*?';
      return;
    }
    if (!digitTokens.has(piece)) {
      source += piece.replace(/[.*+?^${}()|[\]\\/]/g, '\\$&');
      return;
    }
    parts.push({ name: piece as PatternPart['name'], group: parts.length + 1 });
    const isPacked = digitTokens.has(pieces[i - 1]) || digitTokens.has(pieces[i + 1]) || where === 'inside';
    const width = piece.length;
    const digits = width === 4 || isPacked ? `\\d{${width}}` : `\\d{1,${width}}`;
    source += piece === 'ss' && where === 'whole' ? `(${digits}(?:[.,]\\d*)?)` : `(${digits})`;
  });
  const bounded = where === 'whole' ? `^${source}$` : `(?<!\\d)${source}(?!\\d)`;
  return { expression: new RegExp(bounded, 'd'), parts };
}

function daysInMonth(year: number, month: number): number {
  if (month === 2) return (year % 4 === 0 && year % 100 !== 0) || year % 400 === 0 ? 29 : 28;
  return month === 4 || month === 6 || month === 9 || month === 11 ? 30 : 31;
}

/** Midnight of a calendar date, ms; NaN when there is no such date. */
export function dateMs(year: number, month: number, day: number): number {
  if (!(
    year >= 1900 &&
    year <= 2999 &&
    month >= 1 &&
    month <= 12 &&
    day >= 1 &&
    day <= daysInMonth(year, month)
  ))
    return NaN;
  return Date.UTC(year, month - 1, day);
}

/** Midnight of a day of the year (1 = 1 January), ms; NaN when the year has no such day. */
export function dayOfYearMs(year: number, dayOfYear: number): number {
  const isLeap = daysInMonth(year, 2) === 29;
  if (!(year >= 1900 && year <= 2999 && dayOfYear >= 1 && dayOfYear <= (isLeap ? 366 : 365))) return NaN;
  return Date.UTC(year, 0, 1) + (dayOfYear - 1) * DAY_MS;
}

/** Two-digit years: 70–99 are of the 1900s, 00–69 of the 2000s (POSIX rule). */
function fullYear(twoDigits: number): number {
  return twoDigits + (twoDigits >= 70 ? 1900 : 2000);
}

/** @returns null when the text does not follow the pattern */
export function readTimePattern(pattern: TimePattern, text: string): PatternReading | null {
  const match = pattern.expression.exec(text);
  if (match === null) return null;
  let year = NaN;
  let month = 1;
  let day = 1;
  let dayOfYear = NaN;
  let hours = 0;
  let minutes = 0;
  let seconds = 0;
  let secondsAt = -1;
  for (const part of pattern.parts) {
    const number = Number(match[part.group].replace(',', '.'));
    switch (part.name) {
      case 'YYYY':
        year = number;
        break;
      case 'YY':
        year = fullYear(number);
        break;
      case 'MM':
        month = number;
        break;
      case 'DDD':
        dayOfYear = number;
        break;
      case 'DD':
        day = number;
        break;
      case 'hh':
        hours = number;
        break;
      case 'mm':
        minutes = number;
        break;
      case 'ss': {
        seconds = number;
        const [from, to] = match.indices?.[part.group] ?? [-1, -1];
        secondsAt = to === text.length ? from : -1;
        break;
      }
    }
  }
  const midnight = Number.isNaN(dayOfYear) ? dateMs(year, month, day) : dayOfYearMs(year, dayOfYear);
  if (hours > 24 || minutes > 59 || seconds >= 61) return { ms: NaN, secondsAt: -1, baseMs: NaN };
  const baseMs = midnight + (hours * 60 + minutes) * 60_000;
  return { ms: baseMs + seconds * 1000, secondsAt, baseMs };
}

/** First place in a name or in header lines where the pattern stands; NaN when nowhere. */
export function findTimePattern(pattern: string, texts: readonly string[]): number {
  const compiled = compileTimePattern(pattern, 'inside');
  for (const text of texts) {
    const reading = readTimePattern(compiled, text);
    if (reading !== null && !Number.isNaN(reading.ms)) return reading.ms;
  }
  return NaN;
}

/** First year (YYYY or YY) that the pattern finds in a name or in header lines; NaN when nowhere. */
export function findYear(pattern: string, texts: readonly string[]): number {
  const compiled = compileTimePattern(pattern, 'inside');
  const part = compiled.parts.find((p) => p.name === 'YYYY' || p.name === 'YY');
  if (part === undefined) return NaN;
  for (const text of texts) {
    const match = compiled.expression.exec(text);
    if (match !== null)
      return part.name === 'YYYY' ? Number(match[part.group]) : fullYear(Number(match[part.group]));
  }
  return NaN;
}

const iso =
  /^(\d{4})[-/](\d{1,2})[-/](\d{1,2})(?:[T ] *(\d{1,2}):(\d{2})(?::(\d{1,2}(?:[.,]\d*)?))?)? ?(Z|[+-]\d{2}:?\d{2})?$/d;

export interface IsoReading extends PatternReading {
  /** Minutes east of UTC that the text itself states; null when it states none. */
  zoneMinutes: number | null;
}

/** ISO 8601 date and time with T or blank, seconds and zone optional; null when it is something else. */
export function readIso(text: string): IsoReading | null {
  const match = iso.exec(text);
  if (match === null) return null;
  const [, year, month, day, hours, minutes, seconds, zone] = match;
  const baseMs =
    dateMs(Number(year), Number(month), Number(day)) +
    (Number(hours ?? 0) * 60 + Number(minutes ?? 0)) * 60_000;
  const secondsNumber = seconds === undefined ? 0 : Number(seconds.replace(',', '.'));
  if (Number(hours ?? 0) > 24 || Number(minutes ?? 0) > 59 || secondsNumber >= 61)
    return { ms: NaN, secondsAt: -1, baseMs: NaN, zoneMinutes: null };
  let zoneMinutes: number | null = null;
  if (zone === 'Z') zoneMinutes = 0;
  else if (zone !== undefined) {
    const sign = zone.startsWith('-') ? -1 : 1;
    zoneMinutes = sign * (Number(zone.slice(1, 3)) * 60 + Number(zone.slice(-2)));
  }
  const secondsAt =
    seconds !== undefined && (zone === undefined || zone === 'Z') ? (match.indices?.[6]?.[0] ?? -1) : -1;
  return { ms: baseMs + secondsNumber * 1000, secondsAt, baseMs, zoneMinutes };
}

const clock = /^(\d{1,2}):(\d{2})(?::(\d{1,2}(?:[.,]\d*)?))?$/d;

/** Time of day hh:mm[:ss[.f]]; null when it is something else. */
export function readClock(text: string): PatternReading | null {
  const match = clock.exec(text);
  if (match === null) return null;
  const [, hours, minutes, seconds] = match;
  const secondsNumber = seconds === undefined ? 0 : Number(seconds.replace(',', '.'));
  if (Number(hours) > 24 || Number(minutes) > 59 || secondsNumber >= 61)
    return { ms: NaN, secondsAt: -1, baseMs: NaN };
  const baseMs = (Number(hours) * 60 + Number(minutes)) * 60_000;
  return {
    ms: baseMs + secondsNumber * 1000,
    secondsAt: seconds === undefined ? -1 : (match.indices?.[3]?.[0] ?? -1),
    baseMs,
  };
}
