import type { Layout, TimeSource } from '../schemas/layout';
import type { ResolveTime } from './kernel';
import { DATE_COLUMN, TIME_COLUMN } from './kernel';
import {
  compileTimePattern,
  dateMs,
  dayOfYearMs,
  findTimePattern,
  findYear,
  readClock,
  readIso,
  readTimePattern,
  type PatternReading,
} from './time-pattern';

const DAY_MS = 86_400_000;

/** Fields of a row that carry time. */
export interface TimeFields {
  dateText: number | null;
  timeText: number | null;
  numbers: number[];
}

export function timeFields(source: TimeSource): TimeFields {
  switch (source.kind) {
    case 'stamp':
      return { dateText: null, timeText: source.column, numbers: [] };
    case 'date-and-time':
      return { dateText: source.dateColumn, timeText: source.timeColumn, numbers: [] };
    case 'day-of-year': {
      const isClock = source.timeFormat === 'clock' && source.timeColumn !== null;
      const numbers = [source.dayColumn];
      if ('column' in source.year) numbers.push(source.year.column);
      if (source.timeColumn !== null && !isClock) numbers.push(source.timeColumn);
      if (source.secondsColumn !== null) numbers.push(source.secondsColumn);
      return { dateText: null, timeText: isClock ? source.timeColumn : null, numbers };
    }
    case 'epoch':
      return { dateText: null, timeText: null, numbers: [source.column] };
    case 'time-of-day':
      return { dateText: null, timeText: source.column, numbers: [] };
    case 'start-and-rate':
      return { dateText: null, timeText: null, numbers: [] };
  }
}

export interface TimeReader {
  resolve: ResolveTime;
  /**
   * Times of the rows [from, to) of a block, ms UTC of the START of the scan, NaN where they make no date.
   *
   * @param column finds the block column of a field
   */
  fill(
    times: Float64Array,
    from: number,
    to: number,
    columns: readonly Float64Array[],
    column: (field: number) => number,
    ordinals: Int32Array,
  ): void;
  /** Zone stated in the stamps themselves that differs from the layout's clock [min]; null when none does. */
  contradictingZoneMinutes(): number | null;
}

/**
 * Binds a layout's time source to one file.
 *
 * @returns null with a reason when the name or header does not give the date it should
 */
export function createTimeReader(
  layout: Layout,
  fileName: string,
  headerLines: readonly string[],
): { reader: TimeReader } | { problem: string } {
  const source = layout.time;
  const clockOffsetMs = layout.clock.kind === 'utc' ? 0 : layout.clock.offsetMinutes * 60_000;
  const stepMs = 1000 / layout.sampleRateHz;
  const shiftMs = -clockOffsetMs - (layout.stampMarks === 'end' ? stepMs : 0);
  let zoneSeen: number | null = null;

  const textsOf = (from: 'file-name' | 'header'): readonly string[] =>
    from === 'file-name' ? [fileName] : headerLines;
  const whereOf = (from: 'file-name' | 'header'): string =>
    from === 'file-name' ? `the file name "${fileName}"` : 'the header';

  /** Tells the kernel what to remember of a text just read. */
  const remembered = (
    reading: PatternReading | null,
    text: string,
    kernel: Parameters<ResolveTime>[2],
    addMs = 0,
  ): number => {
    if (reading === null || Number.isNaN(reading.ms)) return NaN;
    if (reading.secondsAt > 0 && reading.secondsAt <= 32)
      kernel.rememberPrefix(
        reading.secondsAt,
        reading.baseMs + addMs,
        text.includes(',', reading.secondsAt) ? 44 : 46,
      );
    return reading.ms + addMs;
  };

  const readStampIso = (text: string, kernel: Parameters<ResolveTime>[2]): number => {
    const reading = readIso(text);
    if (reading === null) return NaN;
    let addMs = 0;
    if (reading.zoneMinutes !== null) {
      // A zone written in the stamp says more than the layout: undo the layout's clock, apply the stamp's own.
      addMs = clockOffsetMs - reading.zoneMinutes * 60_000;
      if (addMs !== 0) zoneSeen = reading.zoneMinutes;
    }
    return remembered(reading, text, kernel, addMs);
  };

  const patternReader = (format: string): ((text: string, kernel: Parameters<ResolveTime>[2]) => number) => {
    if (format === 'iso') return readStampIso;
    const pattern = compileTimePattern(format, 'whole');
    return (text, kernel) => remembered(readTimePattern(pattern, text), text, kernel);
  };

  const noFill: Pick<TimeReader, 'contradictingZoneMinutes'> = { contradictingZoneMinutes: () => zoneSeen };

  switch (source.kind) {
    case 'stamp': {
      const read = patternReader(source.format);
      return {
        reader: {
          ...noFill,
          resolve: (_, text, kernel) => read(text, kernel),
          fill: (times, from, to, columns) => {
            const stamps = columns[TIME_COLUMN];
            for (let i = from; i < to; i++) times[i] = stamps[i] + shiftMs;
          },
        },
      };
    }
    case 'date-and-time': {
      const datePattern = source.dateFormat === 'iso' ? null : compileTimePattern(source.dateFormat, 'whole');
      return {
        reader: {
          ...noFill,
          resolve: (which, text, kernel) => {
            if (which === 'time') return remembered(readClock(text), text, kernel);
            const reading = datePattern === null ? readIso(text) : readTimePattern(datePattern, text);
            return reading === null ? NaN : reading.ms;
          },
          fill: (times, from, to, columns) => {
            const dates = columns[DATE_COLUMN];
            const clocks = columns[TIME_COLUMN];
            for (let i = from; i < to; i++) times[i] = dates[i] + clocks[i] + shiftMs;
          },
        },
      };
    }
    case 'day-of-year': {
      let fixedYear = NaN;
      if (!('column' in source.year)) {
        fixedYear = findYear(source.year.pattern, textsOf(source.year.from));
        if (Number.isNaN(fixedYear)) return { problem: `No year was found in ${whereOf(source.year.from)}.` };
      }
      let lastYear = NaN;
      let lastDay = NaN;
      let lastMs = NaN;
      let yearsOn = 0;
      return {
        reader: {
          ...noFill,
          resolve: (_, text, kernel) => remembered(readClock(text), text, kernel),
          fill: (times, from, to, columns, column) => {
            const days = columns[column(source.dayColumn)];
            const years = 'column' in source.year ? columns[column(source.year.column)] : null;
            const isClock = source.timeFormat === 'clock' && source.timeColumn !== null;
            const clocks = isClock ? columns[TIME_COLUMN] : null;
            const numbers =
              source.timeColumn !== null && !isClock ? columns[column(source.timeColumn)] : null;
            const seconds = source.secondsColumn !== null ? columns[column(source.secondsColumn)] : null;
            for (let i = from; i < to; i++) {
              const day = Math.floor(days[i]);
              // A file that runs over New Year with the year only in its name.
              if (years === null && day < lastDay - 300) yearsOn++;
              const year = years === null ? fixedYear + yearsOn : years[i];
              if (day !== lastDay || year !== lastYear) {
                lastMs = dayOfYearMs(year, day);
                if (!Number.isNaN(day)) lastDay = day;
                lastYear = year;
              }
              let ms = Number.isNaN(days[i]) ? NaN : lastMs;
              if (clocks !== null) ms += clocks[i];
              else if (source.timeFormat === 'fraction-of-day') {
                ms += (numbers === null ? days[i] - day : numbers[i]) * DAY_MS;
              } else if (numbers !== null) {
                const number = numbers[i];
                if (source.timeFormat === 'seconds-of-day') ms += number * 1000;
                else {
                  const hours = Math.floor(number / 100);
                  ms += (hours * 60 + (number - hours * 100)) * 60_000;
                }
              }
              if (seconds !== null) ms += seconds[i] * 1000;
              times[i] = ms + shiftMs;
            }
          },
        },
      };
    }
    case 'epoch': {
      const factor = source.unit === 's' ? 1000 : source.unit === 'ms' ? 1 : 0.001;
      // Counted in UTC by definition: the layout's clock does not apply.
      const epochShift = shiftMs + clockOffsetMs;
      return {
        reader: {
          ...noFill,
          resolve: () => NaN,
          fill: (times, from, to, columns, column) => {
            const epochs = columns[column(source.column)];
            for (let i = from; i < to; i++) times[i] = epochs[i] * factor + epochShift;
          },
        },
      };
    }
    case 'time-of-day': {
      const found = findTimePattern(source.date.pattern, textsOf(source.date.from));
      if (Number.isNaN(found)) return { problem: `No date was found in ${whereOf(source.date.from)}.` };
      let midnight = Math.floor(found / DAY_MS) * DAY_MS;
      let last = NaN;
      return {
        reader: {
          ...noFill,
          resolve: (_, text, kernel) => remembered(readClock(text), text, kernel),
          fill: (times, from, to, columns) => {
            const clocks = columns[TIME_COLUMN];
            for (let i = from; i < to; i++) {
              const time = clocks[i];
              if (time < last - DAY_MS / 2) midnight += DAY_MS;
              else if (time > last + DAY_MS / 2) midnight -= DAY_MS;
              if (!Number.isNaN(time)) last = time;
              times[i] = midnight + time + shiftMs;
            }
          },
        },
      };
    }
    case 'start-and-rate': {
      const start = findTimePattern(source.start.pattern, textsOf(source.start.from));
      if (Number.isNaN(start))
        return { problem: `No start time was found in ${whereOf(source.start.from)}.` };
      // The start is that of the first scan; there are no stamps to mark an end.
      const startMs = start - clockOffsetMs;
      return {
        reader: {
          ...noFill,
          resolve: () => NaN,
          fill: (times, from, to, _columns, _column, ordinals) => {
            // Rows that could not be read still took their time.
            for (let i = from; i < to; i++) times[i] = startMs + ordinals[i] * stepMs;
          },
        },
      };
    }
  }
}

/** Days before which and from which on a stamp is taken for a clock that was never set (project choice). */
export const EARLIEST_STAMP_MS = dateMs(1985, 1, 1);
export const LATEST_STAMP_MS = dateMs(2100, 1, 1);
