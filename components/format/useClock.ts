import { createContext, useContext, useMemo } from 'react';
import {
  formatClock,
  formatDate,
  formatDay,
  formatMoment,
  formatOffset,
  formatPeriod,
  formatPeriodClock,
  formatSpan,
} from './times';
import type { Instant } from './times';

export type ClockMode = 'station' | 'utc';

export interface ClockPreference {
  mode: ClockMode;
  setMode: (mode: ClockMode) => void;
}

export const ClockContext = createContext<ClockPreference>({ mode: 'station', setMode: () => undefined });

export interface StationClock {
  /** 0 when the reader switched to UTC. */
  offsetMinutes: number;
  /** "Station time, UTC+1" or "UTC". */
  label: string;
  /** "UTC+1" or "UTC". */
  zone: string;
  clock: (instant: Instant, withSeconds?: boolean) => string;
  date: (instant: Instant) => string;
  day: (instant: Instant, longWeekday?: boolean) => string;
  moment: (instant: Instant, withSeconds?: boolean) => string;
  period: (start: Instant, end: Instant) => string;
  periodClock: (start: Instant, end: Instant) => string;
  span: (start: Instant, end: Instant) => string;
}

/** Formats of one station's standard time, or UTC where the reader chose that. */
export function useClock(stationOffsetMinutes: number): StationClock {
  const { mode } = useContext(ClockContext);
  return useMemo(() => {
    const offset = mode === 'utc' ? 0 : stationOffsetMinutes;
    const zone = formatOffset(offset);
    return {
      offsetMinutes: offset,
      label: mode === 'utc' ? 'UTC' : `Station time, ${zone}`,
      zone,
      clock: (instant, withSeconds) => formatClock(instant, offset, withSeconds),
      date: (instant) => formatDate(instant, offset),
      day: (instant, longWeekday) => formatDay(instant, offset, longWeekday),
      moment: (instant, withSeconds) => formatMoment(instant, offset, withSeconds),
      period: (start, end) => formatPeriod(start, end, offset),
      periodClock: (start, end) => formatPeriodClock(start, end, offset),
      span: (start, end) => formatSpan(start, end, offset),
    };
  }, [mode, stationOffsetMinutes]);
}
