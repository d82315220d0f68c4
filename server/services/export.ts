import { periodsForExport } from '../../db/queries/runs';
import type { RunRow } from '../../db/queries/runs';
import { stationBySystem } from '../../db/queries/stations';
import type { StationRow } from '../../db/queries/stations';
import { catalogue } from '../../processing/catalogue';
import { exchangeLines } from '../../processing/export/exchange-csv';
import { plainLines } from '../../processing/export/plain-csv';
import type { PeriodResult } from '../../processing/state';
import type { Deps } from '../deps';
import type { Answer } from '../routes/route';
import { stationDocument } from './documents';

const PERIODS_AT_ONCE = 300;

export type ExportFormat = 'exchange' | 'plain';

/** All quantities, so that the columns do not depend on which part of a run is exported. */
const allKeys = catalogue.map(({ key }) => key);

/** Half-hourly results as text, a few hundred periods at a time; full precision, nothing rounded. */
export async function exportRun(
  deps: Deps,
  run: RunRow,
  format: ExportFormat,
  fromMs = run.fromMs,
  toMs = run.toMs,
): Promise<Answer> {
  const station = (await stationBySystem(deps.db, run.systemId)) as StationRow;
  const { utcOffsetMinutes } = stationDocument(station);
  return async (res) => {
    res.set({
      'content-type': 'text/csv; charset=utf-8',
      'content-disposition': `attachment; filename="${station.slug}-run-${run.number}-${format}.csv"`,
    });
    let writtenToMs: number | undefined;
    let hasHeader = false;
    for (let at = fromMs; !res.destroyed;) {
      const rows = await periodsForExport(deps.db, run.id, at, toMs, PERIODS_AT_ONCE);
      if (rows.length === 0 && hasHeader) break;
      const periods = rows.map(
        (row) => ({ ...row, ledger: [], curves: {}, rawFiles: [] }) as unknown as PeriodResult,
      );
      const lines =
        format === 'exchange'
          ? exchangeLines(periods, { utcOffsetMinutes }, { fromMs: writtenToMs })
          : plainLines(periods, { utcOffsetMinutes }, { keys: allKeys });
      const headerLines = format === 'exchange' ? 1 : 2;
      const text = [...lines].slice(hasHeader ? headerLines : 0).map((line) => `${line}\n`);
      hasHeader = true;
      const hasRoom = res.write(text.join(''));
      if (rows.length < PERIODS_AT_ONCE) break;
      at = rows[rows.length - 1].startMs + 1;
      writtenToMs = rows[rows.length - 1].endMs;
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
