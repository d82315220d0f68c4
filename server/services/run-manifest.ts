import type { RawFileRow } from '../../db/queries/raw-files';
import type { SetUpRow } from '../../db/queries/stations';
import type { RecipeSettings } from '../../processing/schemas/recipe';

/**
 * The set-ups that hold: of revisions with the same date the newest, ordered by date.
 *
 * A revision corrects an earlier one of the same date and adds to those of other dates.
 */
export function effectiveSetUps<Row extends Pick<SetUpRow, 'validFromMs' | 'revision'>>(
  revisions: Row[],
): Row[] {
  const byDate = new Map<number, Row>();
  for (const revision of revisions) {
    const known = byDate.get(revision.validFromMs);
    if (known === undefined || revision.revision > known.revision) byDate.set(revision.validFromMs, revision);
  }
  return [...byDate.values()].sort((a, b) => a.validFromMs - b.validFromMs);
}

/** Set-ups that bear on [fromMs, toMs): those that begin inside it, and the one in force at its start. */
export function setUpsWithin<Row extends { validFromMs: number }>(
  effective: Row[],
  fromMs: number,
  toMs: number,
): Row[] {
  return effective.filter((setUp, k) => {
    const endsMs = effective[k + 1]?.validFromMs ?? Infinity;
    return setUp.validFromMs < toMs && endsMs > fromMs;
  });
}

export type UsableFile = Pick<
  RawFileRow,
  'id' | 'state' | 'withdrawnAt' | 'supersededBy' | 'contentHash' | 'firstScanMs' | 'lastScanMs' | 'rows'
>;

/**
 * Files that count: read, not withdrawn, and not the beginning of a grown file that counts itself.
 *
 * A chain of grown files is followed to its end, so that withdrawing the longest brings back only the next.
 */
export function filesInUse<Row extends UsableFile>(rows: Row[]): Row[] {
  const byId = new Map(rows.map((row) => [row.id, row]));
  const counts = (row: Row) => row.state === 'read' && row.withdrawnAt === null;
  const isReplaced = (row: Row): boolean => {
    const seen = new Set<string>([row.id]);
    let at = row;
    while (at.supersededBy !== null) {
      const next = byId.get(at.supersededBy);
      if (next === undefined || seen.has(next.id)) return false;
      if (counts(next)) return true;
      seen.add(next.id);
      at = next;
    }
    return false;
  };
  return rows.filter((row) => counts(row) && !isReplaced(row));
}

/** How far outside its span a run looks [ms]: back for the signal-strength reference, ahead and back for storage at the edges. */
export function lookAround(settings: RecipeSettings): { backMs: number; aheadMs: number } {
  const edgeMs = settings.storage.method === 'none' ? 0 : settings.storage.edgeMinutes * 60_000;
  return {
    backMs: Math.max(edgeMs, settings.diagnostics.signalStrength.referenceDays * 86_400_000),
    aheadMs: edgeMs,
  };
}

/** Does a read file hold scans in [fromMs, toMs)? */
export function reaches(
  row: Pick<UsableFile, 'firstScanMs' | 'lastScanMs'>,
  fromMs: number,
  toMs: number,
): boolean {
  return (
    row.firstScanMs !== null && row.lastScanMs !== null && row.firstScanMs < toMs && row.lastScanMs >= fromMs
  );
}
