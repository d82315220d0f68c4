import type { Quantity } from '../catalogue';
import { catalogue, fluxLabels, quantity } from '../catalogue';
import type { FluxKey, PeriodResult } from '../state';
import { fluxKeys } from '../state';
import { shortestDecimal } from './number-text';

/**
 * A table for people's own programs: a row of names, a row of units, then one row per period with both time stamps, every value in its
 * display unit at full precision, grades and reasons. Missing is empty. Comma separated, quoted where needed (RFC 4180), UTF-8.
 */

export interface PlainStation {
  utcOffsetMinutes: number;
}

export interface PlainOptions {
  /** Catalogue keys to write, in this order; by default every key that any period holds, in catalogue order. */
  keys?: readonly string[];
}

function quoted(text: string): string {
  return /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}

/** ISO 8601 with the station's fixed offset, to the minute: 2027-06-17T10:30+01:00. */
export function stationStamp(ms: number, utcOffsetMinutes: number): string {
  const local = new Date(ms + utcOffsetMinutes * 60_000).toISOString().slice(0, 16);
  const size = Math.abs(utcOffsetMinutes);
  const two = (value: number) => String(value).padStart(2, '0');
  return `${local}${utcOffsetMinutes < 0 ? '-' : '+'}${two(Math.floor(size / 60))}:${two(size % 60)}`;
}

function utcStamp(ms: number): string {
  return `${new Date(ms).toISOString().slice(0, 16)}Z`;
}

function usedQuantities(periods: readonly PeriodResult[]): readonly Quantity[] {
  const used = new Set(periods.flatMap((period) => Object.keys(period.values)));
  return catalogue.filter(({ key }) => used.has(key));
}

/** Column name of a quantity: its key, so that no two are alike. */
const fixedColumns: readonly [name: string, unit: string][] = [
  ['startUtc', 'ISO 8601'],
  ['endUtc', 'ISO 8601'],
  ['startStation', 'ISO 8601'],
  ['endStation', 'ISO 8601'],
  ['outcome', ''],
];

const gradeColumns = (flux: FluxKey): [name: string, unit: string][] => {
  const name = fluxLabels[flux].valueKey;
  return [
    [`grade.${name}`, '0 good, 1 usable, 2 rejected'],
    [`ssitc.${name}`, '0, 1, 2'],
    [`class9.${name}`, '1 to 9'],
  ];
};

/**
 * Lines of the table, without line ends: names, units, then one row per period.
 *
 * @param periods in the order they are to be written
 * @param station its standard time
 * @param options see PlainOptions
 * @returns lines
 * @assumes keys are in the catalogue; throws RangeError otherwise
 * @reference RFC 4180
 * @deviates none
 */
export function* plainLines(
  periods: readonly PeriodResult[],
  station: PlainStation,
  options: PlainOptions = {},
): Generator<string> {
  const quantities = options.keys ? options.keys.map(quantity) : usedQuantities(periods);
  const grades = fluxKeys.flatMap(gradeColumns);
  yield [
    ...fixedColumns.map(([name]) => name),
    ...quantities.map(({ key }) => key),
    ...grades.map(([name]) => name),
    'reasons',
  ]
    .map(quoted)
    .join(',');
  yield [
    ...fixedColumns.map(([, unit]) => unit),
    ...quantities.map(({ unit }) => unit),
    ...grades.map(([, unit]) => unit),
    'worst first',
  ]
    .map(quoted)
    .join(',');
  for (const period of periods) {
    const cells = [
      utcStamp(period.startMs),
      utcStamp(period.endMs),
      stationStamp(period.startMs, station.utcOffsetMinutes),
      stationStamp(period.endMs, station.utcOffsetMinutes),
      period.outcome,
    ];
    for (const { key, factor, offset } of quantities) {
      const inner = period.values[key];
      const isMissing = inner === null || inner === undefined || !Number.isFinite(inner);
      cells.push(isMissing ? '' : shortestDecimal(inner * factor + offset));
    }
    for (const flux of fluxKeys) {
      const { grade, ssitc, class9 } = period.grades[flux];
      for (const value of [grade, ssitc, class9]) cells.push(value === null ? '' : String(value));
    }
    const reasons = [...period.reasons].sort((a, b) => b.grade - a.grade).map((reason) => reason.finding);
    cells.push(reasons.join('; '));
    yield cells.map(quoted).join(',');
  }
}

/** The whole table as text, with a line end after each line. */
export function plainCsv(
  periods: readonly PeriodResult[],
  station: PlainStation,
  options: PlainOptions = {},
): string {
  let text = '';
  for (const line of plainLines(periods, station, options)) text += `${line}\n`;
  return text;
}
