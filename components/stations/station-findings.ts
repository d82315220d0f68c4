import type { StationSummary } from '../../server/contract/api';
import type { GradeValue } from '../tokens';

/** What a station needs next, the worst first. */

export interface StationFinding {
  /** 2 nothing can be computed, 1 something wants a hand, 0 all well. */
  mark: Exclude<GradeValue, null>;
  title: string;
  text: string;
  action: { label: string; place: 'set-up' | 'raw-files' | 'runs' | 'series' };
}

export function stationFinding(summary: StationSummary): StationFinding {
  const { name } = summary.station;
  const run = summary.latestRun;
  if (!summary.setUp) {
    return {
      mark: 2,
      title: `${name} has no set-up`,
      text: 'Without heights and directions no flux can be computed.',
      action: { label: 'Write the set-up', place: 'set-up' },
    };
  }
  if (summary.rawFiles === 0) {
    return {
      mark: 2,
      title: `${name} has no raw files`,
      text: 'Bring in the first of them and see how they read.',
      action: { label: 'Bring in raw files', place: 'raw-files' },
    };
  }
  if (!run) {
    return {
      mark: 1,
      title: `${name} is not computed yet`,
      text: 'Raw files are here, and no run has been made of them.',
      action: { label: 'Compute', place: 'runs' },
    };
  }
  if (run.state === 'failed') {
    return {
      mark: 2,
      title: `Run ${run.number} of ${name} failed`,
      text: 'Raw files are safe. The run says what happened.',
      action: { label: 'See the run', place: 'runs' },
    };
  }
  if (['waiting', 'reading', 'computing'].includes(run.state)) {
    return {
      mark: 0,
      title: `Run ${run.number} of ${name} is under way`,
      text: 'Half hours appear as they are computed.',
      action: { label: 'Watch it', place: 'series' },
    };
  }
  if (run.stale) {
    return {
      mark: 1,
      title: `Run ${run.number} of ${name} is stale`,
      text: 'Something it was made from was corrected or brought in since.',
      action: { label: 'See what, and recompute', place: 'runs' },
    };
  }
  return {
    mark: 0,
    title: `${name} is computed and up to date`,
    text: `Run ${run.number}, recipe ${run.recipeName}.`,
    action: { label: 'Open series', place: 'series' },
  };
}

const numbers = [
  'no',
  'one',
  'two',
  'three',
  'four',
  'five',
  'six',
  'seven',
  'eight',
  'nine',
  'ten',
  'eleven',
  'twelve',
];
const word = (count: number): string => numbers[count] ?? String(count);
const capital = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1);

/** The page's heading as a finding: "Two of three stations need a hand". */
export function stationsHeading(stations: readonly StationSummary[]): string {
  if (stations.length === 0) return 'No stations yet';
  const needing = stations.filter((summary) => stationFinding(summary).mark > 0);
  if (stations.length === 1) return stationFinding(stations[0]!).title;
  if (needing.length === 0)
    return capital(`all ${word(stations.length)} stations are computed and up to date`);
  if (needing.length === stations.length) return capital(`all ${word(stations.length)} stations need a hand`);
  return capital(
    `${word(needing.length)} of ${word(stations.length)} stations ${needing.length === 1 ? 'needs' : 'need'} a hand`,
  );
}

/** The worst first, then by name. */
export function byNeed(stations: readonly StationSummary[]): StationSummary[] {
  return [...stations].sort(
    (a, b) =>
      stationFinding(b).mark - stationFinding(a).mark || a.station.name.localeCompare(b.station.name, 'en'),
  );
}
