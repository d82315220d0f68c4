/**
 * Instants as the station's clock shows them: a fixed offset from UTC, no daylight saving, never the
 * zone of the browser. Both ends of a period are always written.
 */

const minuteMs = 60_000;
const dayMs = 86_400_000;

const weekdays = ['Sun', 'Mon', 'Tue', 'Wed', 'Thu', 'Fri', 'Sat'] as const;
const weekdaysLong = ['Sunday', 'Monday', 'Tuesday', 'Wednesday', 'Thursday', 'Friday', 'Saturday'] as const;
const months = [
  'January',
  'February',
  'March',
  'April',
  'May',
  'June',
  'July',
  'August',
  'September',
  'October',
  'November',
  'December',
] as const;

const enDash = '\u2013';

export type Instant = number | string | Date;

interface ClockParts {
  year: number;
  month: number;
  day: number;
  weekday: number;
  hour: number;
  minute: number;
  second: number;
}

/** Milliseconds since 1970 UTC. A string must carry its zone (Z or ±hh:mm), else the result is NaN. */
export function epochMsOf(instant: Instant): number {
  if (typeof instant === 'number') return instant;
  if (instant instanceof Date) return instant.getTime();
  return /(Z|[+-]\d{2}:?\d{2})$/i.test(instant) ? Date.parse(instant) : Number.NaN;
}

function partsOf(instant: Instant, offsetMinutes: number): ClockParts | null {
  const epochMs = epochMsOf(instant);
  if (!Number.isFinite(epochMs)) return null;
  const shifted = new Date(epochMs + offsetMinutes * minuteMs);
  return {
    year: shifted.getUTCFullYear(),
    month: shifted.getUTCMonth(),
    day: shifted.getUTCDate(),
    weekday: shifted.getUTCDay(),
    hour: shifted.getUTCHours(),
    minute: shifted.getUTCMinutes(),
    second: shifted.getUTCSeconds(),
  };
}

const two = (value: number): string => String(value).padStart(2, '0');

/** "UTC+1", "UTC+5:30", "UTC\u22123", "UTC". */
export function formatOffset(offsetMinutes: number): string {
  if (offsetMinutes === 0) return 'UTC';
  const size = Math.abs(offsetMinutes);
  const minutes = size % 60;
  return `UTC${offsetMinutes < 0 ? '\u2212' : '+'}${Math.floor(size / 60)}${minutes ? `:${two(minutes)}` : ''}`;
}

/** "12:30"; with seconds "12:30:05". */
export function formatClock(instant: Instant, offsetMinutes: number, withSeconds = false): string {
  const parts = partsOf(instant, offsetMinutes);
  if (!parts) return '';
  return `${two(parts.hour)}:${two(parts.minute)}${withSeconds ? `:${two(parts.second)}` : ''}`;
}

/** "17 June 2027". */
export function formatDate(instant: Instant, offsetMinutes: number): string {
  const parts = partsOf(instant, offsetMinutes);
  return parts ? `${parts.day} ${months[parts.month]} ${parts.year}` : '';
}

/** "Thu 17 June 2027", or with the whole name of the day. */
export function formatDay(instant: Instant, offsetMinutes: number, longWeekday = false): string {
  const parts = partsOf(instant, offsetMinutes);
  if (!parts) return '';
  return `${(longWeekday ? weekdaysLong : weekdays)[parts.weekday]} ${formatDate(instant, offsetMinutes)}`;
}

/** "2027-06-17", for file names and inputs. */
export function formatIsoDate(instant: Instant, offsetMinutes: number): string {
  const parts = partsOf(instant, offsetMinutes);
  return parts ? `${parts.year}-${two(parts.month + 1)}-${two(parts.day)}` : '';
}

/** "17 June 2027, 12:30". Name the zone beside it once on the page (formatOffset). */
export function formatMoment(instant: Instant, offsetMinutes: number, withSeconds = false): string {
  const date = formatDate(instant, offsetMinutes);
  return date ? `${date}, ${formatClock(instant, offsetMinutes, withSeconds)}` : '';
}

/** Both ends on one clock: "12:30–13:00"; midnight at the end is written 24:00. */
export function formatPeriodClock(start: Instant, end: Instant, offsetMinutes: number): string {
  const from = partsOf(start, offsetMinutes);
  const to = partsOf(end, offsetMinutes);
  if (!from || !to) return '';
  const endsAtMidnight = to.hour === 0 && to.minute === 0 && epochMsOf(end) > epochMsOf(start);
  return `${two(from.hour)}:${two(from.minute)}${enDash}${endsAtMidnight ? '24:00' : `${two(to.hour)}:${two(to.minute)}`}`;
}

/** "Thu 17 June 2027, 12:30–13:00": the day is that of the start. */
export function formatPeriod(start: Instant, end: Instant, offsetMinutes: number): string {
  const day = formatDay(start, offsetMinutes);
  return day ? `${day}, ${formatPeriodClock(start, end, offsetMinutes)}` : '';
}

/**
 * Both ends of a span of days: "14–17 June 2027", "29 June–18 July 2027", "17 June 2027" for one day.
 * The span is half-open: an end at midnight belongs to the day before.
 */
export function formatSpan(start: Instant, end: Instant, offsetMinutes: number): string {
  const startMs = epochMsOf(start);
  const endMs = epochMsOf(end);
  const from = partsOf(startMs, offsetMinutes);
  const to = partsOf(Math.max(startMs, endMs - 1), offsetMinutes);
  if (!from || !to) return '';
  const last = `${to.day} ${months[to.month]} ${to.year}`;
  if (from.year !== to.year) return `${from.day} ${months[from.month]} ${from.year}${enDash}${last}`;
  if (from.month !== to.month) return `${from.day} ${months[from.month]}${enDash}${last}`;
  return from.day === to.day ? last : `${from.day}${enDash}${last}`;
}

/** "6 min", "3 h", "12 days": how long, roughly. */
export function formatDuration(durationMs: number): string {
  if (!Number.isFinite(durationMs)) return '';
  const size = Math.abs(durationMs);
  if (size < minuteMs) return `${Math.round(size / 1000)} s`;
  if (size < 120 * minuteMs) return `${Math.round(size / minuteMs)} min`;
  if (size < 2 * dayMs) return `${Math.round(size / (60 * minuteMs))} h`;
  return `${Math.round(size / dayMs)} days`;
}

/** "6 min ago". */
export function formatAgo(instant: Instant, now: Instant): string {
  const elapsed = epochMsOf(now) - epochMsOf(instant);
  return Number.isFinite(elapsed) ? `${formatDuration(Math.max(0, elapsed))} ago` : '';
}

/** The instant of local midnight that begins the day holding `instant` [ms]. */
export function startOfDayMs(instant: Instant, offsetMinutes: number): number {
  const shifted = epochMsOf(instant) + offsetMinutes * minuteMs;
  return Math.floor(shifted / dayMs) * dayMs - offsetMinutes * minuteMs;
}

/** What a date input holds ("2027-06-17") as the instant of that day's midnight [ms]; NaN if it is no date. */
export function parseDay(text: string, offsetMinutes: number): number {
  const match = /^(\d{4})-(\d{2})-(\d{2})$/.exec(text.trim());
  if (!match) return Number.NaN;
  const epochMs = Date.parse(`${text.trim()}T00:00:00Z`);
  return epochMs - offsetMinutes * minuteMs;
}
