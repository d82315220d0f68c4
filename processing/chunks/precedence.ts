import { quantile } from '../numerics/selection';
import type { IngestReport } from './chunk';

/** Facts of a raw file that decide whose scan is used where two files hold the same instant. */
export type PrecedenceFacts = Pick<IngestReport, 'contentHash' | 'firstScanMs' | 'rows'>;

/**
 * Order of precedence, by content and never by the order of upload: the earlier first scan, then more scans, then the smaller content
 * hash. Negative when `a` comes first.
 */
export function comparePrecedence(a: PrecedenceFacts, b: PrecedenceFacts): number {
  if (a.firstScanMs !== b.firstScanMs) return a.firstScanMs < b.firstScanMs ? -1 : 1;
  if (a.rows !== b.rows) return b.rows - a.rows;
  return a.contentHash < b.contentHash ? -1 : a.contentHash > b.contentHash ? 1 : 0;
}

/**
 * The files that count, in order of precedence: each content once, and none that is only the beginning of another (a logger file that
 * has grown).
 */
export function filesThatCount<Source>(
  sources: readonly Source[],
  reportOf: (source: Source) => IngestReport,
): Source[] {
  const superseded = new Set(sources.flatMap((source) => reportOf(source).beginsWith));
  const seen = new Set<string>();
  return [...sources]
    .sort((a, b) => comparePrecedence(reportOf(a), reportOf(b)))
    .filter((source) => {
      const { contentHash } = reportOf(source);
      if (superseded.has(contentHash) || seen.has(contentHash)) return false;
      seen.add(contentHash);
      return true;
    });
}

/** Half-hourly 95th percentiles of signal strength of all files that count, ordered by time, for running references. */
export class SignalHistory {
  readonly #startsMs: number[] = [];
  readonly #percent: number[] = [];

  constructor(reports: readonly IngestReport[]) {
    const entries: [number, number][] = [];
    for (const report of reports) {
      const factor = report.units.signalStrength === '1' ? 100 : 1;
      for (const { startMs, signalStrengthP95 } of report.chunks)
        if (signalStrengthP95 !== null) entries.push([startMs, signalStrengthP95 * factor]);
    }
    entries.sort((a, b) => a[0] - b[0] || a[1] - b[1]);
    for (const [startMs, value] of entries) {
      this.#startsMs.push(startMs);
      this.#percent.push(value);
    }
  }

  /**
   * What clean windows read lately.
   *
   * @param atMs start of the period [ms]
   * @param days length of the window that ends with the half hour of the period
   * @param percentile of the half-hourly 95th percentiles in that window
   * @returns signal strength [%]; null when none was recorded in the window
   * @deviates the half-hourly 95th percentiles stand for the samples: a percentile of all samples of the window would need all of them
   */
  reference(atMs: number, days: number, percentile: number): number | null {
    const from = this.#firstAfter(atMs - days * 86_400_000);
    const to = this.#firstAfter(atMs);
    return from === to ? null : quantile(Float64Array.from(this.#percent.slice(from, to)), percentile / 100);
  }

  #firstAfter(ms: number): number {
    let low = 0;
    let high = this.#startsMs.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (this.#startsMs[middle] <= ms) low = middle + 1;
      else high = middle;
    }
    return low;
  }
}

/** Running reference of signal strength for one instant; see `SignalHistory.reference`. */
export function signalReference(
  reports: readonly IngestReport[],
  atMs: number,
  days: number,
  percentile: number,
): number | null {
  return new SignalHistory(reports).reference(atMs, days, percentile);
}
