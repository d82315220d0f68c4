import { periodSummaries } from '../../db/queries/runs';
import type { PeriodSummaryRow, RunRow } from '../../db/queries/runs';
import { stationBySystem } from '../../db/queries/stations';
import type { StationRow } from '../../db/queries/stations';
import { catalogue, fluxLabels } from '../../processing/catalogue';
import type { Quantity } from '../../processing/catalogue';
import { fluxKeys } from '../../processing/state';
import type { FluxKey, PeriodResult } from '../../processing/state';
import type { Deps } from '../deps';
import type { Answer } from '../routes/route';
import { stationDocument } from './documents';

const ROWS_AT_ONCE = 500;

export type ExportFormat = 'exchange' | 'plain';

interface Writer {
  header: string;
  row(period: PeriodSummaryRow): string;
}

/** Half-hourly results as text, a few hundred rows at a time; full precision, nothing rounded. */
export async function exportRun(
  deps: Deps,
  run: RunRow,
  format: ExportFormat,
  fromMs = run.fromMs,
  toMs = run.toMs,
): Promise<Answer> {
  const station = (await stationBySystem(deps.db, run.systemId)) as StationRow;
  const { utcOffsetMinutes } = stationDocument(station);
  const writer = format === 'exchange' ? exchangeWriter(utcOffsetMinutes) : plainWriter();
  return async (res) => {
    res.set({
      'content-type': 'text/csv; charset=utf-8',
      'content-disposition': `attachment; filename="${station.slug}-run-${run.number}-${format}.csv"`,
    });
    res.write(writer.header);
    for (let at = fromMs; ;) {
      const rows = await periodSummaries(deps.db, run.id, at, toMs, ROWS_AT_ONCE);
      const hasRoom = res.write(rows.map((row) => writer.row(row)).join(''));
      if (rows.length < ROWS_AT_ONCE || res.destroyed) break;
      at = rows[rows.length - 1].startMs + 1;
      if (!hasRoom) {
        await new Promise<void>((resolve) => {
          res.once('drain', resolve);
          res.once('close', resolve);
        });
      }
    }
    res.end();
  };
}

const gradesOf = (period: PeriodSummaryRow) => period.grades as PeriodResult['grades'];

/** The flux networks' half-hourly form: station standard time, their names and units, −9999 for missing. */
function exchangeWriter(utcOffsetMinutes: number): Writer {
  const columns = catalogue.filter((quantity) => quantity.exchange !== null);
  const tested = fluxKeys.flatMap((flux) => {
    const name = columns.find((quantity) => quantity.key === fluxLabels[flux].valueKey)?.exchange?.name;
    return name === undefined ? [] : [{ flux, name: `${name}_SSITC_TEST` }];
  });
  const stamp = (ms: number) =>
    new Date(ms + utcOffsetMinutes * 60_000).toISOString().slice(0, 16).replace(/[-T:]/g, '');
  const value = ({ key, exchange }: Quantity, period: PeriodSummaryRow) => {
    const inner = period.values[key];
    return inner == null ? '-9999' : String(inner * exchange!.factor + exchange!.offset);
  };
  const test = (flux: FluxKey, period: PeriodSummaryRow) => String(gradesOf(period)[flux].ssitc ?? -9999);
  return {
    header: `${['TIMESTAMP_START', 'TIMESTAMP_END', ...columns.map((quantity) => quantity.exchange!.name), ...tested.map(({ name }) => name)].join(',')}\n`,
    row: (period) =>
      `${[
        stamp(period.startMs),
        stamp(period.endMs),
        ...columns.map((quantity) => value(quantity, period)),
        ...tested.map(({ flux }) => test(flux, period)),
      ].join(',')}\n`,
  };
}

/** Every quantity under its own key, in the units of the screen, UTC, missing left empty, with the grade of each flux. */
function plainWriter(): Writer {
  const text = (words: string) => (/[",\n]/.test(words) ? `"${words.replaceAll('"', '""')}"` : words);
  const value = ({ key, factor, offset }: Quantity, period: PeriodSummaryRow) => {
    const inner = period.values[key];
    return inner == null ? '' : String(inner * factor + offset);
  };
  const names = [
    'start',
    'end',
    'outcome',
    ...catalogue.map(({ key }) => key),
    ...fluxKeys.map((flux) => `grade.${flux}`),
  ];
  const units = [
    'UTC',
    'UTC',
    '',
    ...catalogue.map(({ unit }) => unit),
    ...fluxKeys.map(() => '0 good 1 usable 2 rejected'),
  ];
  return {
    header: `${names.map(text).join(',')}\n${units.map(text).join(',')}\n`,
    row: (period) =>
      `${[
        new Date(period.startMs).toISOString(),
        new Date(period.endMs).toISOString(),
        period.outcome,
        ...catalogue.map((quantity) => value(quantity, period)),
        ...fluxKeys.map((flux) => String(gradesOf(period)[flux].grade ?? '')),
      ].join(',')}\n`,
  };
}
