import type { ChannelKey, Layout, TimeSource } from '../../processing/schemas/layout';
import { channelKeys, requiredChannels } from '../../processing/schemas/layout';
import { channelWords } from '../../processing/records/guess-layout';
import type { Confidence, LayoutGuess, LayoutProblem } from '../../processing/records/guess-layout';
import { formatOffset } from '../format/times';

/** A layout in words. */

export const delimiterWords: Record<Layout['delimiter'], string> = {
  comma: 'comma',
  semicolon: 'semicolon',
  tab: 'tab',
  blanks: 'blanks',
  pipe: 'vertical bar',
};

export const timeKindWords: Record<TimeSource['kind'], string> = {
  stamp: 'one column with date and time',
  'date-and-time': 'a date column and a time column',
  'day-of-year': 'day of the year',
  epoch: 'seconds since 1970',
  'time-of-day': 'time of day in a column, date from name or header',
  'start-and-rate': 'no stamps: a start, then the rate',
};

const fromWords = { 'file-name': 'the file’s name', header: 'the header' } as const;

export function clockWords(clock: Layout['clock']): string {
  return clock.kind === 'utc' ? 'UTC' : formatOffset(clock.offsetMinutes);
}

/** "Column 1 (time) holds date and time." */
export function timeSentence(layout: Layout, names: readonly string[] | null): string {
  const { time } = layout;
  const column = (index: number): string =>
    `column ${index + 1}${names?.[index] ? ` (${names[index]})` : ''}`;
  switch (time.kind) {
    case 'stamp':
      return `Date and time from ${column(time.column)}, written as ${time.format === 'iso' ? 'ISO 8601' : time.format}`;
    case 'date-and-time':
      return `Date from ${column(time.dateColumn)}, written as ${time.dateFormat === 'iso' ? 'ISO 8601' : time.dateFormat}, time from ${column(time.timeColumn)}`;
    case 'day-of-year': {
      const year = 'column' in time.year ? column(time.year.column) : fromWords[time.year.from];
      const clock =
        time.timeFormat === 'fraction-of-day' && time.timeColumn === null
          ? 'time as fraction of the day'
          : `time from ${column(time.timeColumn ?? 0)}${time.secondsColumn === null ? '' : ` and ${column(time.secondsColumn)}`}`;
      return `Year from ${year}, day of the year from ${column(time.dayColumn)}, ${clock}`;
    }
    case 'epoch':
      return `${time.unit === 's' ? 'Seconds' : time.unit === 'ms' ? 'Milliseconds' : 'Microseconds'} since 1970 (UTC) from ${column(time.column)}`;
    case 'time-of-day':
      return `Time of day from ${column(time.column)}, date from ${fromWords[time.date.from]} (${time.date.pattern})`;
    case 'start-and-rate':
      return `Start from ${fromWords[time.start.from]} (${time.start.pattern}), then ${layout.sampleRateHz} rows a second`;
  }
}

/** "Comma-separated, 3 header lines, 20 rows a second." */
export function dialectSentence(layout: Layout): string {
  const header =
    layout.headerRows === 0
      ? 'no header'
      : layout.headerRows === 1
        ? 'one header line'
        : `${layout.headerRows} header lines`;
  return `Parted by ${delimiterWords[layout.delimiter]}, decimal ${layout.decimal === ',' ? 'comma' : 'point'}, ${header}, ${layout.sampleRateHz} rows a second.`;
}

/** How one quantity gets its values, and how that is known. */
export interface QuantityRow {
  channel: ChannelKey;
  label: string;
  isRequired: boolean;
  column: Layout['columns'][number] | null;
  /** 0 known, 1 please look, 2 needed and missing, null not recorded. */
  mark: 0 | 1 | 2 | null;
  how: string;
}

const knownWords: Record<Layout['columns'][number]['knownBy'], string> = {
  name: 'from the header',
  'unit-row': 'from the unit row',
  range: 'from the range',
  position: 'from its place',
  person: 'said by a person',
};

/**
 * The layout as a list by quantity.
 *
 * @param guess what the first lines spoke for; null for a saved layout
 */
export function quantityRows(
  layout: Layout,
  guess: LayoutGuess | null,
  open: readonly LayoutProblem[],
): QuantityRow[] {
  return channelKeys.map((channel): QuantityRow => {
    const column = layout.columns.find((candidate) => candidate.channel === channel) ?? null;
    const isRequired = requiredChannels.includes(channel);
    const label = channelWords[channel];
    if (!column)
      return {
        channel,
        label,
        isRequired,
        column,
        mark: isRequired ? 2 : null,
        how: isRequired ? 'needed for every flux' : 'not recorded',
      };
    const proposal = guess?.columns.find(
      (candidate) =>
        candidate.index === column.index &&
        candidate.use.kind === 'quantity' &&
        candidate.use.channel === channel,
    );
    const isDoubtful = open.some((problem) => problem.channel === channel);
    const how =
      column.knownBy === 'person' || !proposal
        ? knownWords[column.knownBy]
        : [
            proposal.quantityBy === 'name'
              ? 'name from the header'
              : `by its ${proposal.quantityBy === 'range' ? 'range' : 'place'}`,
            proposal.how,
          ].join('; ');
    return { channel, label, isRequired, column, mark: isDoubtful ? 1 : 0, how };
  });
}

export const confidenceWords: Record<Confidence, string> = {
  sure: 'sure',
  likely: 'likely',
  doubtful: 'please look',
};
