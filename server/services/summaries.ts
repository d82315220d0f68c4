import { rawFileTotals } from '../../db/queries/raw-files';
import { setUpsOf, stationsOf } from '../../db/queries/stations';
import type { StationRow } from '../../db/queries/stations';
import type { StationSummary } from '../contract/api';
import type { Deps } from '../deps';
import { presentSetUp } from '../presenters/present';
import { stationDocument } from './documents';
import { effectiveSetUps } from './run-manifest';
import { presentedRun } from './runs';
import { shownRun, spineOf } from './spine';

const SUMMARY_BINS = 120;

/** A station as the list shows it: what is recorded, how the latest run graded it, and its set-up of today. */
export async function stationSummary(deps: Deps, row: StationRow): Promise<StationSummary> {
  const totals = await rawFileTotals(deps.db, row.systemId);
  const revisions = await setUpsOf(deps.db, row.systemId);
  // The set-up in force at the last scan, or the newest dated one while nothing is recorded.
  const effective = effectiveSetUps(revisions);
  const setUp =
    effective.findLast((one) => totals.lastScanMs === null || one.validFromMs <= totals.lastScanMs) ??
    effective.at(-1);
  const runRow = await shownRun(deps, row.systemId);
  const run = runRow === null ? null : await presentedRun(deps, runRow);
  return {
    id: row.id,
    systemId: row.systemId,
    station: stationDocument(row),
    setUp: setUp === undefined ? null : presentSetUp(setUp),
    rawFiles: totals.files,
    firstScanMs: totals.firstScanMs,
    lastScanMs: totals.lastScanMs,
    latestRun:
      run === null
        ? null
        : {
            id: run.id,
            number: run.number,
            state: run.state,
            recipeName: run.recipeName,
            stale: run.stale.length > 0,
            grades: run.grades,
          },
    spine: await spineOf(deps, row, { run: runRow, bins: SUMMARY_BINS }),
  };
}

export async function stationSummaries(deps: Deps, groupId: string): Promise<StationSummary[]> {
  const summaries: StationSummary[] = [];
  for (const row of await stationsOf(deps.db, groupId)) summaries.push(await stationSummary(deps, row));
  return summaries;
}
