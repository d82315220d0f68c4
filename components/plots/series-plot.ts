import { quantity } from '../../processing/catalogue';
import type { SeriesData } from '../../server/contract/api';
import { formatNumber, formatUncertainty } from '../format/numbers';
import { shownSpread, shownValue } from '../format/quantities';
import type { GradeValue } from '../tokens';
import { panelLook } from './panel-looks';

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
  /** One standard deviation of sampling error, in the unit of the value, of all values. */
  spread: (number | null)[];
  upper: (number | null)[];
  lower: (number | null)[];
  grade: (number | null)[];
  /** True where no period exists, between two that do: not computed, as against computed without a value. */
  isHole: boolean[];
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
  const isAngle = panelLook(key).dash === null;
  const series: PlotSeries = {
    key,
    x: [],
    startMs: [],
    endMs: [],
    line: [],
    value: [],
    spread: [],
    upper: [],
    lower: [],
    grade: [],
    isHole: [],
    truth: truthColumn ? [] : null,
  };
  const put = (
    startMs: number,
    endMs: number,
    value: number | null,
    sigma: number | null,
    grade: number | null,
    truth: number | null,
    isHole: boolean,
  ) => {
    const isJoined = value !== null && grade !== 2 && !isAngle;
    series.x.push((startMs + endMs) / 2000);
    series.startMs.push(startMs);
    series.endMs.push(endMs);
    series.value.push(value);
    series.spread.push(sigma);
    series.line.push(isJoined ? value : null);
    series.upper.push(isJoined && sigma !== null ? value + sigma : null);
    series.lower.push(isJoined && sigma !== null ? value - sigma : null);
    series.grade.push(grade);
    series.isHole.push(isHole);
    series.truth?.push(truth);
  };
  data.startMs.forEach((startMs, index) => {
    const endMs = data.endMs[index] ?? startMs;
    const before = index > 0 ? (data.endMs[index - 1] ?? startMs) : startMs;
    if (startMs > before) put(before, startMs, null, null, null, null, true);
    put(
      startMs,
      endMs,
      shownValue(key, column[index]),
      shownSpread(key, spread[index]),
      grades[index] ?? null,
      truthColumn ? shownValue(key, truthColumn[index]) : null,
      false,
    );
  });
  return series;
}

/** Index range [first, end) of the entries that touch a window. */
export function visibleRange(
  series: Pick<PlotSeries, 'startMs' | 'endMs'>,
  fromMs: number,
  toMs: number,
): [number, number] {
  return [
    firstWhere(series.endMs, (end) => end > fromMs),
    firstWhere(series.startMs, (start) => start >= toMs),
  ];
}

/** First index for which the test holds, in an ascending column. */
function firstWhere(column: readonly number[], test: (value: number) => boolean): number {
  let low = 0;
  let high = column.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (test(column[middle] ?? Number.NaN)) high = middle;
    else low = middle + 1;
  }
  return low;
}

export interface Gap {
  fromMs: number;
  toMs: number;
}

/**
 * Spans without a value inside a window, for hatching.
 *
 * @param which `all`; `without-value`: periods that were computed and have none; `absent`: spans without any period
 */
export function gapsOf(
  series: PlotSeries,
  fromMs: number,
  toMs: number,
  which: 'all' | 'without-value' | 'absent' = 'all',
): Gap[] {
  const gaps: Gap[] = [];
  const add = (from: number, to: number) => {
    const clippedFrom = Math.max(from, fromMs);
    const clippedTo = Math.min(to, toMs);
    if (clippedTo <= clippedFrom) return;
    const last = gaps.at(-1);
    if (last && last.toMs >= clippedFrom) last.toMs = Math.max(last.toMs, clippedTo);
    else gaps.push({ fromMs: clippedFrom, toMs: clippedTo });
  };
  const [first, end] = visibleRange(series, fromMs, toMs);
  let covered = fromMs;
  for (let index = first; index < end; index += 1) {
    const startMs = series.startMs[index] ?? 0;
    const endMs = series.endMs[index] ?? startMs;
    const isHole = series.isHole[index] === true;
    if (startMs > covered && which !== 'without-value') add(covered, startMs);
    if (series.value[index] === null && (which === 'all' || isHole === (which === 'absent')))
      add(startMs, endMs);
    covered = Math.max(covered, endMs);
  }
  if (covered < toMs && which !== 'without-value') add(covered, toMs);
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
 * Ends of a value axis with room for the readout. Rejected values outside of four times the spread of the others don't stretch the
 * axis: they sit on its edge.
 *
 * @param readoutShare share of the axis that stays free for the readout, 0–0.5
 */
export function axisRange(
  series: PlotSeries,
  fromMs: number,
  toMs: number,
  readoutShare = 0.18,
): [number, number] {
  const { headroom, splits } = panelLook(series.key);
  if (splits) return withRoom(splits[0] ?? 0, splits.at(-1) ?? 1, readoutShare, headroom);
  let low = Infinity;
  let high = -Infinity;
  const widen = (value: number | null | undefined) => {
    if (value === null || value === undefined) return;
    if (value < low) low = value;
    if (value > high) high = value;
  };
  const rejected: number[] = [];
  const [first, end] = visibleRange(series, fromMs, toMs);
  for (let index = first; index < end; index += 1) {
    const value = series.value[index] ?? null;
    if (series.grade[index] === 2) {
      if (value !== null) rejected.push(value);
      continue;
    }
    widen(value);
    widen(series.upper[index]);
    widen(series.lower[index]);
    widen(series.truth?.[index]);
  }
  if (low > high) {
    rejected.forEach(widen);
    if (low > high) return [0, 1];
  } else {
    const reach = Math.max(high - low, 1e-9);
    const keptLow = low - 0.5 * reach;
    const keptHigh = high + 0.5 * reach;
    for (const value of rejected) if (value < keptHigh && value > keptLow) widen(value);
  }
  const { group, decimals } = quantity(series.key);
  if (group === 'flux') {
    low = Math.min(low, 0);
    high = Math.max(high, 0);
  }
  // a record that hardly moves is not blown up until its last digit looks like weather
  const least = 10 * 10 ** -decimals;
  if (high - low < least) {
    const middle = (low + high) / 2;
    low = group === 'flux' && low === 0 ? 0 : middle - least / 2;
    high = low + least;
  }
  return withRoom(low, high, readoutShare, headroom);
}

function withRoom(low: number, high: number, share: number, side: 'top' | 'bottom'): [number, number] {
  const edge = 0.05;
  const whole = (high - low) / (1 - edge - share);
  return side === 'top'
    ? [low - edge * whole, high + share * whole]
    : [low - share * whole, high + edge * whole];
}

/** Decimals that tell an axis's splits apart. */
export function decimalsOf(splits: readonly (number | null)[]): number {
  const numbers = splits.filter((split): split is number => split !== null);
  if (numbers.length < 2) return 0;
  const step = Math.abs((numbers[1] ?? 0) - (numbers[0] ?? 0));
  return step >= 1 || step === 0 ? 0 : Math.min(4, Math.ceil(-Math.log10(step) - 1e-9));
}

/** "−12.2 ± 1.9" of one entry; "no data" where it has no value, "not computed" where there is no period. */
export function readoutText(series: PlotSeries, index: number): string {
  const value = series.value[index] ?? null;
  if (value === null) return series.isHole[index] === true ? 'not computed' : 'no data';
  const { decimals, unit } = quantity(series.key);
  const sigma = series.spread[index] ?? null;
  const text = `${formatNumber(value, decimals)}${unit === '°' ? '°' : ''}`;
  return sigma === null ? text : `${text} ${formatUncertainty(sigma, decimals)}`;
}

/** A column's number as a grade. */
export function gradeValue(grade: number | null | undefined): GradeValue {
  return grade === 0 || grade === 1 || grade === 2 ? grade : null;
}

/** What a panel shows, for those who hear it: least, mean, greatest, gaps, grades. */
export function describePanel(series: PlotSeries, window: { fromMs: number; toMs: number }): string {
  const { symbol, unit, decimals, gradedBy } = quantity(series.key);
  const [first, end] = visibleRange(series, window.fromMs, window.toMs);
  const shown = series.value
    .slice(first, end)
    .map((value, at) => ({ value, grade: series.grade[first + at] ?? null }));
  const values = shown.flatMap(({ value }) => (value === null ? [] : [value]));
  if (values.length === 0) return `${symbol}: no data in this window`;
  const mean = values.reduce((sum, value) => sum + value, 0) / values.length;
  const least = values.reduce((low, value) => Math.min(low, value), Infinity);
  const greatest = values.reduce((high, value) => Math.max(high, value), -Infinity);
  const isAngle = panelLook(series.key).dash === null;
  const count = (grade: number) => shown.filter((one) => one.grade === grade).length;
  const grades = gradedBy ? `; ${count(0)} good, ${count(1)} usable, ${count(2)} rejected` : '';
  return (
    `${symbol} in ${unit}: least ${formatNumber(least, decimals)}, ${isAngle ? '' : `mean ${formatNumber(mean, decimals)}, `}` +
    `greatest ${formatNumber(greatest, decimals)}, ${shown.length - values.length} without data${grades}`
  );
}
