import { quantity } from '../../processing/catalogue';
import type { SeriesData } from '../../server/contract/api';
import { formatNumber } from '../format/numbers';
import { shownSpread, shownValue } from '../format/quantities';
import type { GradeValue } from '../tokens';

/** One quantity over time, in the unit people read, cut for plotting. */
export interface PlotSeries {
  key: string;
  /** Middle of each period [s since 1970 UTC], as uPlot wants it. */
  x: number[];
  startMs: number[];
  endMs: number[];
  /** Values with rejected and missing taken out: the line. */
  line: (number | null)[];
  /** All values. */
  value: (number | null)[];
  upper: (number | null)[];
  lower: (number | null)[];
  grade: (number | null)[];
  truth: (number | null)[] | null;
}

/**
 * Cuts one quantity out of a run's columns. The line never joins across a rejected or missing value, nor across a hole between periods.
 */
export function plotSeries(data: SeriesData, key: string): PlotSeries {
  const { gradedBy, uncertaintyKey } = quantity(key);
  const column = data.quantities[key] ?? [];
  const spread = uncertaintyKey ? (data.quantities[uncertaintyKey] ?? []) : [];
  const grades = gradedBy ? (data.grades[gradedBy] ?? []) : [];
  const truthColumn = data.truth?.[key] ?? null;
  const series: PlotSeries = {
    key,
    x: [],
    startMs: [],
    endMs: [],
    line: [],
    value: [],
    upper: [],
    lower: [],
    grade: [],
    truth: truthColumn ? [] : null,
  };
  const put = (
    startMs: number,
    endMs: number,
    value: number | null,
    sigma: number | null,
    grade: number | null,
    truth: number | null,
  ) => {
    const isJoined = value !== null && grade !== 2;
    series.x.push((startMs + endMs) / 2000);
    series.startMs.push(startMs);
    series.endMs.push(endMs);
    series.value.push(value);
    series.line.push(isJoined ? value : null);
    series.upper.push(isJoined && sigma !== null ? value + sigma : null);
    series.lower.push(isJoined && sigma !== null ? value - sigma : null);
    series.grade.push(grade);
    series.truth?.push(truth);
  };
  data.startMs.forEach((startMs, index) => {
    const endMs = data.endMs[index] ?? startMs;
    const before = index > 0 ? (data.endMs[index - 1] ?? startMs) : startMs;
    if (startMs > before) put(before, startMs, null, null, null, null);
    put(
      startMs,
      endMs,
      shownValue(key, column[index]),
      shownSpread(key, spread[index]),
      grades[index] ?? null,
      truthColumn ? shownValue(key, truthColumn[index]) : null,
    );
  });
  return series;
}

/** Spans without a value inside a window, for hatching. */
export function gapsOf(series: PlotSeries, fromMs: number, toMs: number): { fromMs: number; toMs: number }[] {
  const gaps: { fromMs: number; toMs: number }[] = [];
  const add = (from: number, to: number) => {
    const clippedFrom = Math.max(from, fromMs);
    const clippedTo = Math.min(to, toMs);
    if (clippedTo <= clippedFrom) return;
    const last = gaps.at(-1);
    if (last && last.toMs >= clippedFrom) last.toMs = Math.max(last.toMs, clippedTo);
    else gaps.push({ fromMs: clippedFrom, toMs: clippedTo });
  };
  let covered = fromMs;
  series.startMs.forEach((startMs, index) => {
    const endMs = series.endMs[index] ?? startMs;
    if (startMs > covered) add(covered, startMs);
    if (series.value[index] === null) add(startMs, endMs);
    covered = Math.max(covered, endMs);
  });
  if (covered < toMs) add(covered, toMs);
  return gaps;
}

/** Index of the period that holds an instant, or −1: a gap shows no data, never the nearest value. */
export function periodIndexAt(startMs: readonly number[], endMs: readonly number[], atMs: number): number {
  let low = 0;
  let high = startMs.length - 1;
  while (low <= high) {
    const middle = (low + high) >> 1;
    const start = startMs[middle] ?? Number.NaN;
    const end = endMs[middle] ?? Number.NaN;
    if (atMs < start) high = middle - 1;
    else if (atMs >= end) low = middle + 1;
    else return middle;
  }
  return -1;
}

/**
 * Ends of a value axis with headroom for the readout. Rejected values outside of four times the spread of the others don't stretch the
 * axis: they sit on its edge.
 */
export function axisRange(series: PlotSeries, fromMs: number, toMs: number): [number, number] {
  let low = Infinity;
  let high = -Infinity;
  const widen = (value: number | null | undefined) => {
    if (value === null || value === undefined) return;
    low = Math.min(low, value);
    high = Math.max(high, value);
  };
  const rejected: number[] = [];
  series.value.forEach((value, index) => {
    const end = series.endMs[index] ?? 0;
    const start = series.startMs[index] ?? 0;
    if (end <= fromMs || start >= toMs) return;
    if (series.grade[index] === 2) {
      if (value !== null) rejected.push(value);
      return;
    }
    widen(value);
    widen(series.upper[index]);
    widen(series.lower[index]);
    widen(series.truth?.[index]);
  });
  if (low > high) {
    rejected.forEach(widen);
    if (low > high) return [0, 1];
  } else {
    const reach = Math.max(high - low, 1e-9);
    for (const value of rejected) if (value < high + 0.5 * reach && value > low - 0.5 * reach) widen(value);
  }
  const { group } = quantity(series.key);
  if (group === 'flux') {
    low = Math.min(low, 0);
    high = Math.max(high, 0);
  }
  const reach = high - low || Math.max(1, Math.abs(high) * 0.1);
  return [low - 0.06 * reach, high + 0.22 * reach];
}

/** Decimals that tell an axis's splits apart. */
export function decimalsOf(splits: readonly (number | null)[]): number {
  const numbers = splits.filter((split): split is number => split !== null);
  if (numbers.length < 2) return 0;
  const step = Math.abs((numbers[1] ?? 0) - (numbers[0] ?? 0));
  return step >= 1 || step === 0 ? 0 : Math.min(4, Math.ceil(-Math.log10(step) - 1e-9));
}

/** A column's number as a grade. */
export function gradeValue(grade: number | null | undefined): GradeValue {
  return grade === 0 || grade === 1 || grade === 2 ? grade : null;
}

/** What a panel shows, for those who hear it: least, mean, greatest, gaps, grades. */
export function describePanel(series: PlotSeries, window: { fromMs: number; toMs: number }): string {
  const { symbol, unit, decimals, gradedBy } = quantity(series.key);
  const shown = series.value.flatMap((value, index) => {
    const inside = (series.endMs[index] ?? 0) > window.fromMs && (series.startMs[index] ?? 0) < window.toMs;
    return inside ? [{ value, grade: series.grade[index] ?? null }] : [];
  });
  const values = shown.flatMap(({ value }) => (value === null ? [] : [value]));
  if (values.length === 0) return `${symbol}: no data in this window`;
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  const count = (grade: number) => shown.filter((one) => one.grade === grade).length;
  const grades = gradedBy ? `; ${count(0)} good, ${count(1)} usable, ${count(2)} rejected` : '';
  return (
    `${symbol} in ${unit}: least ${formatNumber(Math.min(...values), decimals)}, mean ${formatNumber(mean, decimals)}, ` +
    `greatest ${formatNumber(Math.max(...values), decimals)}, ${shown.length - values.length} without data${grades}`
  );
}
