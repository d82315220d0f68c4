import { fluxKeys } from '../../processing/state';
import type { PeriodRow, SeriesData } from '../../server/contract/api';

/** What the series page knows of a period from the run's columns, without asking for the period itself. */
export type PeriodGlance = Pick<PeriodRow, 'startMs' | 'endMs' | 'values' | 'grades'>;

/** One period out of the columns; null beyond them. */
export function glanceAt(data: SeriesData, index: number): PeriodGlance | null {
  const startMs = data.startMs[index];
  const endMs = data.endMs[index];
  if (startMs === undefined || endMs === undefined) return null;
  return {
    startMs,
    endMs,
    values: Object.fromEntries(
      Object.entries(data.quantities).map(([key, column]) => [key, column[index] ?? null]),
    ),
    grades: Object.fromEntries(
      fluxKeys.map((flux) => [
        flux,
        { grade: data.grades[flux]?.[index] ?? null, ssitc: null, class9: null, decidedBy: [] },
      ]),
    ),
  };
}

/**
 * The period that is worth looking at first: the one with the most rejected fluxes, then the most usable ones, the latest of equals;
 * the middle one where every grade is good. Null without periods.
 */
export function tellingPeriod(data: SeriesData, fromMs: number, toMs: number): number | null {
  let best: number | null = null;
  let bestScore = 0;
  const inside: number[] = [];
  data.startMs.forEach((startMs, index) => {
    if (startMs < fromMs || (data.endMs[index] ?? startMs) > toMs) return;
    inside.push(startMs);
    let score = 0;
    for (const flux of fluxKeys) {
      const grade = data.grades[flux]?.[index] ?? null;
      score += grade === 2 ? 10 : grade === 1 ? 1 : 0;
    }
    if (score > 0 && score >= bestScore) {
      best = startMs;
      bestScore = score;
    }
  });
  return best ?? inside[inside.length >> 1] ?? null;
}

/** How many periods of a window have each grade of a flux. */
export function gradeCounts(
  data: SeriesData,
  flux: string,
  fromMs: number,
  toMs: number,
): { good: number; usable: number; rejected: number; missing: number } {
  const counts = { good: 0, usable: 0, rejected: 0, missing: 0 };
  const column = data.grades[flux] ?? [];
  data.startMs.forEach((startMs, index) => {
    if ((data.endMs[index] ?? startMs) <= fromMs || startMs >= toMs) return;
    const grade = column[index] ?? null;
    if (grade === 0) counts.good += 1;
    else if (grade === 1) counts.usable += 1;
    else if (grade === 2) counts.rejected += 1;
    else counts.missing += 1;
  });
  return counts;
}
