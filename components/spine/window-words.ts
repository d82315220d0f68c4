import { formatPeriodClock, formatSpan } from '../format/times';

const minuteMs = 60_000;
const dayMs = 86_400_000;

/**
 * Words of a window: "14–17 June 2027", and with both clock times where it is shorter than a day: "17 June 2027, 06:00–12:00".
 * Ends are rounded to minutes.
 */
export function windowWords(fromMs: number, toMs: number, offsetMinutes: number): string {
  const from = Math.round(fromMs / minuteMs) * minuteMs;
  const to = Math.round(toMs / minuteMs) * minuteMs;
  const span = formatSpan(from, to, offsetMinutes);
  return to - from >= dayMs ? span : `${span}, ${formatPeriodClock(from, to, offsetMinutes)}`;
}
