import type { Quantity } from '../catalogue';
import { catalogue } from '../catalogue';
import type { FluxKey, PeriodResult } from '../state';
import { shortestDecimal } from './number-text';

/**
 * Half-hourly files as the regional flux networks exchange them: one header line, comma separated, local standard time without daylight
 * saving, −9999 for missing, a constant interval throughout. Values are neither filtered by friction velocity nor gap-filled.
 *
 * @reference the networks' public pages on half-hourly variables and upload format (names and units as tagged in the catalogue; the sign
 *   of TAU is from memory and therefore an option)
 */

export const missingValue = '-9999';

export interface ExchangeStation {
  /** Station standard time minus UTC [min]. */
  utcOffsetMinutes: number;
}

export interface ExchangeOptions {
  /** Appended to every variable, such as `_1_1_1` (horizontal, vertical, replicate); none by default. */
  positionSuffix?: string;
  /** Sign of the downward momentum flux; negative by default. */
  tauSign?: 'negative' | 'positive';
  /** Catalogue keys to write, in this order; all with an exchange name by default. */
  keys?: readonly string[];
  /** Span of the file [ms UTC], half-open; from the first to the last period by default. Times without a result are written as missing. */
  fromMs?: number;
  toMs?: number;
}

const testNames: readonly { flux: FluxKey; name: string }[] = [
  { flux: 'co2Flux', name: 'FC_SSITC_TEST' },
  { flux: 'latentHeat', name: 'LE_SSITC_TEST' },
  { flux: 'sensibleHeat', name: 'H_SSITC_TEST' },
  { flux: 'momentum', name: 'TAU_SSITC_TEST' },
];

/** Quantities that have a name in exchange files, in catalogue order. */
export const exchangeQuantities: readonly Quantity[] = catalogue.filter(
  (quantity) => quantity.exchange !== null,
);

function chosenQuantities(keys: readonly string[] | undefined): readonly Quantity[] {
  if (!keys) return exchangeQuantities;
  return keys.map((key) => {
    const found = exchangeQuantities.find((quantity) => quantity.key === key);
    if (!found) throw new RangeError(`${key} has no name in exchange files`);
    return found;
  });
}

/** Instant as YYYYMMDDHHMM in station standard time. */
export function exchangeStamp(ms: number, utcOffsetMinutes: number): string {
  return new Date(ms + utcOffsetMinutes * 60_000).toISOString().replace(/[-T:]/g, '').slice(0, 12);
}

function intervalOf(periods: readonly PeriodResult[]): number {
  const intervalMs = periods[0].endMs - periods[0].startMs;
  if (!(intervalMs > 0)) throw new RangeError('A period must end after it starts');
  periods.forEach((period, i) => {
    if (
      period.endMs - period.startMs !== intervalMs ||
      (period.startMs - periods[0].startMs) % intervalMs !== 0
    )
      throw new RangeError('An exchange file has one constant interval');
    if (i > 0 && period.startMs <= periods[i - 1].startMs)
      throw new RangeError('Periods must be in order of time, each once');
  });
  return intervalMs;
}

/** A value in the unit of exchange files, as text. */
function exchanged(
  quantity: Quantity,
  inner: number | null | undefined,
  tauSign: 'negative' | 'positive',
): string {
  if (inner === null || inner === undefined || !Number.isFinite(inner) || !quantity.exchange)
    return missingValue;
  const { factor, offset } = quantity.exchange;
  const signed = quantity.key === 'tau' && tauSign === 'positive' ? Math.abs(factor) : factor;
  return shortestDecimal(inner * signed + offset);
}

/**
 * Lines of an exchange file, without line ends: header first, then one row per interval.
 *
 * @param periods results of equal length, in order of time
 * @param station its standard time
 * @param options see ExchangeOptions
 * @returns lines; only the header when there is no period
 * @assumes periods stand on one regular grid; throws RangeError otherwise, and for a key without an exchange name
 * @reference see top of file
 * @deviates none
 */
export function* exchangeLines(
  periods: readonly PeriodResult[],
  station: ExchangeStation,
  options: ExchangeOptions = {},
): Generator<string> {
  const quantities = chosenQuantities(options.keys);
  const suffix = options.positionSuffix ?? '';
  if (!/^(_\d+_\d+_\d+)?$/.test(suffix)) throw new RangeError('A position suffix has the form _1_1_1');
  const tauSign = options.tauSign ?? 'negative';
  yield [
    'TIMESTAMP_START',
    'TIMESTAMP_END',
    ...quantities.map((quantity) => `${quantity.exchange?.name}${suffix}`),
    ...testNames.map(({ name }) => `${name}${suffix}`),
  ].join(',');
  if (periods.length === 0) return;
  const intervalMs = intervalOf(periods);
  const fromMs = options.fromMs ?? periods[0].startMs;
  const toMs = options.toMs ?? periods[periods.length - 1].endMs;
  if ((periods[0].startMs - fromMs) % intervalMs !== 0)
    throw new RangeError('The span must stand on the periods’ grid');
  const byStart = new Map(periods.map((period) => [period.startMs, period]));
  for (let startMs = fromMs; startMs + intervalMs <= toMs; startMs += intervalMs) {
    const period = byStart.get(startMs);
    const cells = [
      exchangeStamp(startMs, station.utcOffsetMinutes),
      exchangeStamp(startMs + intervalMs, station.utcOffsetMinutes),
    ];
    for (const quantity of quantities) cells.push(exchanged(quantity, period?.values[quantity.key], tauSign));
    for (const { flux } of testNames) cells.push(String(period?.grades[flux].ssitc ?? missingValue));
    yield cells.join(',');
  }
}

/** A whole exchange file as text, with a line end after each line. */
export function exchangeCsv(
  periods: readonly PeriodResult[],
  station: ExchangeStation,
  options: ExchangeOptions = {},
): string {
  let text = '';
  for (const line of exchangeLines(periods, station, options)) text += `${line}\n`;
  return text;
}
