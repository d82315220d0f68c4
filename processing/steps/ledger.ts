import type { FluxKey, Grade, LedgerEntry, PeriodState, Reason, SeriesKey, StepKey } from '../state';

/**
 * What every step shares: writing the ledger, noting reasons, and knowing which fluxes a series bears on.
 */

const allFluxes: readonly FluxKey[] = ['momentum', 'sensibleHeat', 'latentHeat', 'co2Flux'];

/** Fluxes whose grade a doubtful series lowers. */
const fluxesBySeries: Record<SeriesKey, readonly FluxKey[]> = {
  windU: ['momentum'],
  windV: ['momentum'],
  windW: allFluxes,
  sonicTemperature: ['sensibleHeat'],
  co2: ['co2Flux'],
  h2o: ['latentHeat', 'co2Flux'],
};

/** Fluxes that cannot be had at all without a series. */
const fluxesWithout: Record<SeriesKey, readonly FluxKey[]> = {
  windU: allFluxes,
  windV: allFluxes,
  windW: allFluxes,
  // The density terms of both gases need the heat flux.
  sonicTemperature: ['sensibleHeat', 'latentHeat', 'co2Flux'],
  co2: ['co2Flux'],
  h2o: ['latentHeat', 'co2Flux'],
};

/**
 * The fluxes a finding about a series bears on.
 *
 * A doubtful horizontal component lowers momentum only, although all fluxes pass through the rotation: its share in them is small.
 * Without it nothing can be rotated, so its absence takes everything. H2O bears on the CO2 flux through the density term; its small
 * part in the humidity correction of sensible heat lowers no grade.
 *
 * @param series the working series
 * @param finding `doubtful`: present, but unusual; `absent`: broken, dropped or never recorded
 * @returns flux keys in the fixed order of `fluxKeys`; a fresh array
 * @reference project choice
 */
export function fluxesOf(series: SeriesKey, finding: 'doubtful' | 'absent' = 'doubtful'): FluxKey[] {
  return [...(finding === 'absent' ? fluxesWithout : fluxesBySeries)[series]];
}

/** All fluxes that are graded, as a fresh array. */
export function everyFlux(): FluxKey[] {
  return [...allFluxes];
}

/** Union of fluxes over several series, in the fixed order of `fluxKeys`. */
export function fluxesOfAll(
  series: readonly SeriesKey[],
  finding: 'doubtful' | 'absent' = 'doubtful',
): FluxKey[] {
  const found = new Set(series.flatMap((one) => fluxesOf(one, finding)));
  return allFluxes.filter((flux) => found.has(flux));
}

/**
 * Appends one line to the step ledger.
 *
 * @param state changed in place and returned
 */
export function addLedger(state: PeriodState, entry: LedgerEntry): PeriodState {
  state.ledger.push(entry);
  return state;
}

/** A reason with everything that usually stays the same left out. */
export type ReasonDraft = Pick<Reason, 'key' | 'step' | 'fluxes' | 'grade' | 'finding' | 'sentence'> &
  Partial<Omit<Reason, 'statistic' | 'limits'>> & {
    statistic: { label: string; value: number | null; unit: string };
    limits?: Partial<Reason['limits']>;
  };

/**
 * Notes a finding. Limits that are not given are null, a statistic that is not a number becomes null.
 *
 * @param state changed in place and returned
 */
export function addReason(state: PeriodState, draft: ReasonDraft): PeriodState {
  const { value } = draft.statistic;
  state.reasons.push({
    key: draft.key,
    step: draft.step,
    fluxes: draft.fluxes,
    series: draft.series ?? null,
    grade: draft.grade,
    statistic: {
      label: draft.statistic.label,
      value: value !== null && Number.isFinite(value) ? value : null,
      unit: draft.statistic.unit,
    },
    limits: {
      softLow: draft.limits?.softLow ?? null,
      softHigh: draft.limits?.softHigh ?? null,
      hardLow: draft.limits?.hardLow ?? null,
      hardHigh: draft.limits?.hardHigh ?? null,
    },
    finding: draft.finding,
    sentence: draft.sentence,
    ...(draft.atS === undefined ? {} : { atS: draft.atS }),
  });
  return state;
}

/**
 * A step that was passed over, so that the ledger still says that it was asked.
 *
 * @param why one plain sentence
 */
export function addSkipped(
  state: PeriodState,
  step: StepKey,
  version: number,
  parameters: LedgerEntry['parameters'],
  why: string,
): PeriodState {
  return addLedger(state, { step, version, parameters, changes: {}, summary: why });
}

/** What the ledger says of every step that finds the period stopped. */
export const alreadyStopped = 'Not done: the period was stopped before.';

/**
 * Grade of a value above two limits; a value on a limit is still inside it.
 *
 * @param value statistic; NaN grades 0, because a test that could not run finds nothing
 * @param soft null switches the soft limit off
 * @param hard null switches the hard limit off
 */
export function gradeAbove(
  value: number,
  soft: number | null,
  hard: number | null,
  softGrade: Grade = 1,
  hardGrade: Grade = 2,
): Grade {
  if (hard !== null && value > hard) return hardGrade;
  if (soft !== null && value > soft) return softGrade;
  return 0;
}

/**
 * A number as it stands in a sentence: fixed decimals, true minus sign, from five digits on in groups of three parted by a
 * narrow no-break space, as on screen; the same in every locale.
 *
 * @param value not a number gives "no value"
 * @param decimals digits after the point
 */
export function formatNumber(value: number | null, decimals = 0): string {
  if (value === null || !Number.isFinite(value)) return 'no value';
  const fixed = Math.abs(value).toFixed(decimals);
  const [whole, fraction] = fixed.split('.');
  const grouped = whole.length > 4 ? whole.replace(/\B(?=(\d{3})+(?!\d))/g, '\u202f') : whole;
  const text = fraction === undefined ? grouped : `${grouped}.${fraction}`;
  const isZero = !/[1-9]/.test(fixed);
  return value < 0 && !isZero ? `\u2212${text}` : text;
}

/**
 * A share as a percentage in a sentence, with one decimal below 10 % and as many as it takes not to write a small share as zero.
 *
 * @param share 0 … 1
 */
export function formatPercent(share: number): string {
  if (!Number.isFinite(share)) return 'no value';
  const percent = share * 100;
  const size = Math.abs(percent);
  const decimals = size === 0 || size >= 10 ? 0 : size >= 0.1 ? 1 : size >= 0.01 ? 2 : 3;
  return `${formatNumber(percent, decimals)} %`;
}

/** "1 sample", "2 samples". */
export function countOf(count: number, singular: string, plural = `${singular}s`): string {
  return `${formatNumber(count)} ${count === 1 ? singular : plural}`;
}

/** A length of time as it stands in a sentence: "0.35 s", "12 s", "4 min 3 s". */
export function formatDuration(seconds: number): string {
  if (!Number.isFinite(seconds)) return 'no value';
  if (seconds === 0) return '0 s';
  if (seconds < 10) return `${formatNumber(seconds, seconds < 1 ? 2 : 1)} s`;
  const whole = Math.round(seconds);
  if (whole < 60) return `${whole} s`;
  const minutes = Math.floor(whole / 60);
  const rest = whole % 60;
  return rest === 0 ? `${formatNumber(minutes)} min` : `${formatNumber(minutes)} min ${rest} s`;
}

/** Where in a period something begins: "from 12 min 4 s on". */
export function formatPlace(secondsFromStart: number): string {
  return `from ${formatDuration(secondsFromStart)} on`;
}

/** "u, v and w". */
export function listOf(words: readonly string[]): string {
  if (words.length < 2) return words.join('');
  return `${words.slice(0, -1).join(', ')} and ${words[words.length - 1]}`;
}

/** A label at the beginning of a sentence: "Vertical wind". */
export function capitalised(label: string): string {
  return label.charAt(0).toUpperCase() + label.slice(1);
}
