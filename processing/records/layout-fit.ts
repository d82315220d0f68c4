import type { Layout } from '../schemas/layout';
import { fieldsOf, previewLayout } from './preview';

/** How well a saved layout reads the first lines of a file. */
export interface LayoutFit {
  /** 0 none, 1 all. */
  score: number;
  /** What does not fit, in words. */
  misfits: string[];
}

/**
 * Tries a saved layout on the beginning of a file: number of values a row, names at their places, numbers in the columns, stamps.
 *
 * @returns score 1 when everything fits; from 0.9 on the layout can be taken
 */
export function layoutFit(layout: Layout, text: string, isCutOff: boolean, fileName: string): LayoutFit {
  const misfits: string[] = [];
  const preview = previewLayout(text, isCutOff, fileName, layout);
  const { rows } = preview;
  if (rows.length === 0) return { score: 0, misfits: ['no rows below the header'] };

  const width = rows.map((row) => row.fields.length).sort((a, b) => a - b)[Math.floor(rows.length / 2)] ?? 0;
  const last = Math.max(...layout.columns.map((column) => column.index));
  if (width < 2 || last >= width)
    return { score: 0, misfits: [`rows have ${width} values, the layout needs ${last + 1}`] };

  const firstLine =
    preview.headerLines.length > 0 ? preview.headerLines[preview.headerLines.length - 1] : undefined;
  const headerLooksLikeData =
    firstLine !== undefined &&
    fieldsOf(firstLine, layout.delimiter).length === width &&
    fieldsOf(firstLine, layout.delimiter).every((field) => /^[-+0-9.,:TZ/ ]*$/.test(field) && field !== '');
  if (headerLooksLikeData) misfits.push('the header holds a row of numbers');

  const named = layout.columns.filter((column) => column.name !== null);
  const wrongNames = named.filter(
    (column) => preview.names !== null && preview.names[column.index] !== column.name,
  );
  for (const column of wrongNames.slice(0, 3))
    misfits.push(
      `column ${column.index + 1} is named “${preview.names?.[column.index] ?? ''}”, not “${column.name}”`,
    );

  const unreadable =
    preview.columns.reduce((sum, column) => sum + column.unreadable, 0) /
    (rows.length * layout.columns.length);
  if (unreadable > 0.01) misfits.push(`${Math.round(unreadable * 100)} % of the values are no numbers`);
  const withoutStamp = preview.rowsWithoutStamp / rows.length;
  if (withoutStamp > 0.01)
    misfits.push(`${Math.round(withoutStamp * 100)} % of the rows have no readable time`);
  const rate = preview.spacing?.rateHz;
  const isRateOff =
    rate !== undefined && Number.isFinite(rate) && Math.abs(rate / layout.sampleRateHz - 1) > 0.02;
  if (isRateOff)
    misfits.push(`${Number(rate.toFixed(2))} rows a second, the layout says ${layout.sampleRateHz}`);

  const nameShare = named.length > 0 && preview.names !== null ? wrongNames.length / named.length : 0;
  const score =
    (1 - nameShare) *
    (1 - Math.min(1, unreadable)) *
    (1 - Math.min(1, withoutStamp)) *
    (isRateOff ? 0.6 : 1) *
    (headerLooksLikeData ? 0.7 : 1);
  return { score, misfits };
}

/** From this score on a saved layout is proposed before a guessed one. */
export const fitsFrom = 0.9;

/** The best of several saved layouts for a file, newest first on equal scores; null when none fits. */
export function bestLayout<Saved extends { layout: Layout; createdAtMs: number }>(
  saved: readonly Saved[],
  text: string,
  isCutOff: boolean,
  fileName: string,
): { saved: Saved; fit: LayoutFit } | null {
  const tried = saved
    .map((candidate) => ({ saved: candidate, fit: layoutFit(candidate.layout, text, isCutOff, fileName) }))
    .filter(({ fit }) => fit.score >= fitsFrom)
    .sort((a, b) => b.fit.score - a.fit.score || b.saved.createdAtMs - a.saved.createdAtMs);
  return tried[0] ?? null;
}
