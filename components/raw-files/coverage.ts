import type { RawFile } from '../../server/contract/api';

/** Where raw files fall in time. */

export interface FileSpan {
  fromMs: number;
  toMs: number;
}

/** Spans of files that count: read, not withdrawn, not superseded. */
export function spansOf(files: readonly RawFile[]): FileSpan[] {
  return files.flatMap((file) =>
    file.state === 'read' &&
    file.supersededBy === null &&
    file.firstScanMs !== null &&
    file.lastScanMs !== null
      ? [{ fromMs: file.firstScanMs, toMs: file.lastScanMs }]
      : [],
  );
}

/** Touching and overlapping spans joined, in order; gaps up to `gapMs` do not part them. */
export function joinSpans(spans: readonly FileSpan[], gapMs = 2000): FileSpan[] {
  const joined: FileSpan[] = [];
  for (const span of [...spans].sort((a, b) => a.fromMs - b.fromMs)) {
    const last = joined[joined.length - 1];
    if (last && span.fromMs <= last.toMs + gapMs) last.toMs = Math.max(last.toMs, span.toMs);
    else joined.push({ ...span });
  }
  return joined;
}

/** How long two sets of spans lie over each other [ms]. */
export function overlapMs(a: readonly FileSpan[], b: readonly FileSpan[]): number {
  let sum = 0;
  for (const one of joinSpans(a)) {
    for (const other of joinSpans(b))
      sum += Math.max(0, Math.min(one.toMs, other.toMs) - Math.max(one.fromMs, other.fromMs));
  }
  return sum;
}

/** Runs that used the time of a file and would be stale without it. */
export function runsTouching<R extends { state: string; fromMs: number; toMs: number }>(
  runs: readonly R[],
  file: Pick<RawFile, 'firstScanMs' | 'lastScanMs'>,
): R[] {
  const { firstScanMs, lastScanMs } = file;
  if (firstScanMs === null || lastScanMs === null) return [];
  return runs.filter((run) => run.state === 'done' && run.fromMs <= lastScanMs && run.toMs > firstScanMs);
}
