import type { SpineData } from '../../server/contract/api';

/** Where instants lie on a strip of some width. */
export interface StripScale {
  fromMs: number;
  toMs: number;
  width: number;
}

export function xOf(instantMs: number, scale: StripScale): number {
  return ((instantMs - scale.fromMs) / (scale.toMs - scale.fromMs)) * scale.width;
}

export function instantOf(x: number, scale: StripScale): number {
  return scale.fromMs + (x / scale.width) * (scale.toMs - scale.fromMs);
}

export interface SpineBar {
  x: number;
  width: number;
  recorded: number;
  good: number;
  usable: number;
  rejected: number;
}

/** One bar per bin; bins without anything are left out. */
export function spineBars(data: SpineData, width: number): SpineBar[] {
  const scale = { fromMs: data.fromMs, toMs: data.toMs, width };
  const isWide = (data.binMs / (data.toMs - data.fromMs)) * width >= 2;
  return data.recorded.flatMap((recorded, index) => {
    const start = data.fromMs + index * data.binMs;
    // whole pixels where bins are wide enough, so that no seams show between them
    const snap = (px: number) => (isWide ? Math.round(px) : px);
    const x = snap(xOf(start, scale));
    const right = snap(xOf(Math.min(data.toMs, start + data.binMs), scale));
    const good = data.good[index] ?? 0;
    const usable = data.usable[index] ?? 0;
    const rejected = data.rejected[index] ?? 0;
    if (recorded <= 0 && good + usable + rejected <= 0) return [];
    return [{ x, width: Math.max(0.75, right - x), recorded, good, usable, rejected }];
  });
}

export interface TimeTick {
  atMs: number;
  label: string;
  major: boolean;
}

const hourMs = 3_600_000;
const dayMs = 24 * hourMs;
const monthNames = ['Jan', 'Feb', 'Mar', 'Apr', 'May', 'Jun', 'Jul', 'Aug', 'Sep', 'Oct', 'Nov', 'Dec'];

/**
 * Ticks that people read as hours, days, months or years of the station's clock, as many as fit.
 *
 * @param minGapPx least distance between two labels
 */
export function timeTicks(scale: StripScale, offsetMinutes: number, minGapPx = 62): TimeTick[] {
  const offsetMs = offsetMinutes * 60_000;
  const perPx = (scale.toMs - scale.fromMs) / scale.width;
  const least = perPx * minGapPx;
  const two = (n: number) => String(n).padStart(2, '0');
  const step = [hourMs / 2, hourMs, 3 * hourMs, 6 * hourMs, 12 * hourMs].find((s) => s >= least);
  if (step !== undefined) {
    const ticks: TimeTick[] = [];
    for (
      let local = Math.ceil((scale.fromMs + offsetMs) / step) * step;
      local <= scale.toMs + offsetMs;
      local += step
    ) {
      const date = new Date(local);
      const midnight = local % dayMs === 0;
      ticks.push({
        atMs: local - offsetMs,
        major: midnight,
        label: midnight
          ? `${date.getUTCDate()} ${monthNames[date.getUTCMonth()]}`
          : `${two(date.getUTCHours())}:${two(date.getUTCMinutes())}`,
      });
    }
    return ticks;
  }
  const days = [1, 2, 5, 10].find((d) => d * dayMs >= least);
  if (days !== undefined) {
    const ticks: TimeTick[] = [];
    for (
      let local = Math.ceil((scale.fromMs + offsetMs) / dayMs) * dayMs;
      local <= scale.toMs + offsetMs;
      local += dayMs
    ) {
      const date = new Date(local);
      const day = date.getUTCDate();
      if (days === 1 || day === 1 || (day % days === 1 && day <= 31 - days / 2)) {
        ticks.push({
          atMs: local - offsetMs,
          major: day === 1,
          label: `${day} ${monthNames[date.getUTCMonth()]}`,
        });
      }
    }
    return ticks;
  }
  const months = [1, 3, 6, 12, 24, 60].find((m) => m * 30 * dayMs >= least) ?? 120;
  const first = new Date(scale.fromMs + offsetMs);
  const ticks: TimeTick[] = [];
  for (let index = first.getUTCFullYear() * 12 + first.getUTCMonth(); ; index += 1) {
    const local = Date.UTC(Math.floor(index / 12), index % 12, 1);
    if (local > scale.toMs + offsetMs) break;
    if (local < scale.fromMs + offsetMs || index % months !== 0) continue;
    const january = index % 12 === 0;
    ticks.push({
      atMs: local - offsetMs,
      major: january,
      label: january ? String(Math.floor(index / 12)) : (monthNames[index % 12] ?? ''),
    });
  }
  return ticks;
}

/** Keeps a window inside the strip without changing its length, unless it is longer than the strip. */
export function clampWindow(
  window: { fromMs: number; toMs: number },
  bounds: { fromMs: number; toMs: number },
): { fromMs: number; toMs: number } {
  const length = Math.min(window.toMs - window.fromMs, bounds.toMs - bounds.fromMs);
  const fromMs = Math.min(Math.max(window.fromMs, bounds.fromMs), bounds.toMs - length);
  return { fromMs, toMs: fromMs + length };
}

/** Where the panels' vertical lines stand: midnights under hours, else every labelled day or month. */
export function gridInstants(scale: StripScale, offsetMinutes: number, minGapPx = 58): number[] {
  const ticks = timeTicks(scale, offsetMinutes, minGapPx);
  const isHourly = ticks.some((tick) => tick.label.includes(':'));
  return ticks.filter((tick) => !isHourly || tick.major).map((tick) => tick.atMs);
}

/** A window changed by a factor about an instant that keeps its place; never shorter than `leastMs`, never outside of the bounds. */
export function zoomedWindow(
  window: { fromMs: number; toMs: number },
  factor: number,
  aboutMs: number,
  bounds: { fromMs: number; toMs: number },
  leastMs: number,
): { fromMs: number; toMs: number } {
  const before = window.toMs - window.fromMs;
  const length = Math.min(bounds.toMs - bounds.fromMs, Math.max(leastMs, before * factor));
  const share = Math.min(1, Math.max(0, (aboutMs - window.fromMs) / before));
  return clampWindow({ fromMs: aboutMs - share * length, toMs: aboutMs + (1 - share) * length }, bounds);
}
