import type { PeriodRowStored, PeriodSummaryRow, RecipeRow, RunRow } from '../../db/queries/runs';
import type { LayoutRow, SetUpRow } from '../../db/queries/stations';
import type { RawFileRow } from '../../db/queries/raw-files';
import { quantity, isQuantity } from '../../processing/catalogue';
import { defaultRecipe, recipeHash } from '../../processing/schemas/recipe';
import type {
  LayoutRevision,
  PeriodDetail,
  PeriodRow,
  RawFile,
  RecipeRecord,
  Run,
  SetUpRevision,
} from '../contract/api';
import { layoutDocument, recipeDocument, reportDocument, setUpDocument } from '../services/documents';

/** What of a row goes out. Nothing leaves the server but through one of these. */

const author = (row: { createdBy: string; authorName: string }) => ({
  id: row.createdBy,
  name: row.authorName,
});

export function presentSetUp(row: SetUpRow): SetUpRevision {
  return {
    id: row.id,
    revision: row.revision,
    hash: row.hash,
    setUp: setUpDocument(row),
    why: row.why,
    author: author(row),
    createdAtMs: row.createdAt.getTime(),
  };
}

export function presentLayout(row: LayoutRow): LayoutRevision {
  return {
    id: row.id,
    revision: row.revision,
    hash: row.hash,
    layout: layoutDocument(row),
    author: author(row),
    createdAtMs: row.createdAt.getTime(),
  };
}

export function presentRawFile(row: RawFileRow): RawFile {
  const isKnown = row.state === 'read';
  return {
    id: row.id,
    fileName: row.fileName,
    sha256: row.sha256,
    contentHash: row.contentHash,
    bytes: row.bytes,
    state: row.withdrawnAt === null ? (row.state as RawFile['state']) : 'withdrawn',
    layoutId: row.layoutId,
    layoutName: layoutDocument(row).name,
    rows: isKnown ? row.rows : null,
    badRows: isKnown ? row.badRows : null,
    firstScanMs: isKnown ? row.firstScanMs : null,
    lastScanMs: isKnown ? row.lastScanMs : null,
    warnings: isKnown ? (reportDocument(row)?.warnings ?? []) : [],
    problem: row.problem,
    supersededBy: row.supersededBy,
    author: author(row),
    createdAtMs: row.createdAt.getTime(),
  };
}

const defaultHash = recipeHash(defaultRecipe);

export function presentRecipe(row: RecipeRow): RecipeRecord {
  return {
    hash: row.hash,
    recipe: recipeDocument(row),
    author: row.createdBy === null ? null : { id: row.createdBy, name: row.authorName ?? '' },
    createdAtMs: row.createdAt.getTime(),
    isDefault: row.hash === defaultHash,
  };
}

export function presentRun(row: RunRow, stationSlug: string, stale: string[]): Run {
  return {
    id: row.id,
    number: row.number,
    stationSlug,
    recipeHash: row.recipeHash,
    recipeName: row.recipeName,
    fromMs: row.fromMs,
    toMs: row.toMs,
    everything: row.askedFromMs === null && row.askedToMs === null,
    state: row.state as Run['state'],
    periodsTotal: row.periodsTotal,
    periodsDone: row.periodsDone,
    manifestHash: row.manifestHash,
    softwareVersion: row.softwareVersion,
    resultHash: row.resultHash,
    stale,
    problem: row.problem,
    grades: row.grades as Run['grades'],
    author: author(row),
    createdAtMs: row.createdAt.getTime(),
    finishedAtMs: row.finishedAt?.getTime() ?? null,
  };
}

const mainGroups: readonly string[] = ['flux', 'wind', 'air', 'gas', 'turbulence'];

function mainValues(values: Record<string, number | null>): Record<string, number | null> {
  return Object.fromEntries(
    Object.entries(values).filter(([key]) => isQuantity(key) && mainGroups.includes(quantity(key).group)),
  );
}

export function presentPeriod(row: PeriodSummaryRow): PeriodRow {
  return {
    startMs: row.startMs,
    endMs: row.endMs,
    outcome: row.outcome as PeriodRow['outcome'],
    values: mainValues(row.values),
    grades: row.grades as PeriodRow['grades'],
    mainFinding: row.mainFinding,
  };
}

export function presentPeriodDetail(
  row: PeriodRowStored,
  rawFiles: { id: string; fileName: string }[],
  neighbours: { previousStartMs: number | null; nextStartMs: number | null },
): PeriodDetail {
  return {
    ...presentPeriod(row),
    values: row.values,
    reasons: row.reasons as PeriodDetail['reasons'],
    ledger: row.ledger as PeriodDetail['ledger'],
    curves: row.curves as PeriodDetail['curves'],
    rawFiles,
    ...neighbours,
  };
}
