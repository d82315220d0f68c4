import { STATUS_MISSING } from '../chunks/chunk';
import { seriesKernel } from '../numerics/series-kernel';
import type { RecipeSettings } from '../schemas/recipe';
import type { ChannelKey } from '../schemas/layout';
import type { Grade, PeriodContext, PeriodState, SeriesKey, Step } from '../state';
import {
  addLedger,
  addReason,
  addSkipped,
  alreadyStopped,
  fluxesOfAll,
  formatNumber,
  formatPercent,
  gradeAbove,
  listOf,
} from './ledger';

const version = 1;

export type GoodCodeRule = NonNullable<PeriodContext['goodCodes'][ChannelKey]>;

const sonicSeries: readonly SeriesKey[] = ['windU', 'windV', 'windW', 'sonicTemperature'];
const analyserSeries: readonly SeriesKey[] = ['co2', 'h2o'];

/**
 * Whether an instrument calls a scan good.
 *
 * A code is good if it is listed, or if (code & mask) = equals.
 *
 * @param code status code of the scan; a missing code is not good
 * @param rule the layout's rule
 * @returns true when good
 * @assumes 32-bit codes
 * @reference project choice
 * @deviates none
 */
export function isGoodCode(code: number, rule: GoodCodeRule): boolean {
  if (code === STATUS_MISSING) return false;
  if (rule.codes.includes(code)) return true;
  return rule.mask !== null && rule.equals !== null && (code & rule.mask) === rule.equals;
}

/** A rule that names no good code cannot judge anything. */
function judges(rule: GoodCodeRule | undefined): rule is GoodCodeRule {
  return rule !== undefined && (rule.codes.length > 0 || (rule.mask !== null && rule.equals !== null));
}

/**
 * Marks the scans that an instrument calls bad.
 *
 * @param status code per scan, n samples, not mutated
 * @param present 1 where a scan was recorded; other slots are neither good nor bad
 * @param rule which codes are good
 * @param bad receives 1 where bad; other entries stay as they are
 * @returns number of bad scans
 * @assumes arrays of the same length
 * @reference project choice
 * @deviates none
 */
export function markBadStatus(
  status: Int32Array,
  present: Uint8Array,
  rule: GoodCodeRule,
  bad: Uint8Array,
): number {
  // Nearly always one good code throughout.
  if (status.length > 0 && isGoodCode(status[0], rule) && areAllSame(status)) return 0;
  let count = 0;
  // Codes come in long runs: the last answer is nearly always the next one.
  let lastCode = NaN;
  let lastIsGood = true;
  for (let i = 0; i < status.length; i++) {
    if (present[i] === 0) continue;
    const code = status[i];
    if (code !== lastCode) {
      lastCode = code;
      lastIsGood = isGoodCode(code, rule);
    }
    if (!lastIsGood) {
      bad[i] = 1;
      count++;
    }
  }
  return count;
}

/**
 * The limit of signal strength that holds for the period.
 *
 * The relative limit lies some points beyond the running reference of clean windows; an absolute one counts only where the set-up
 * states it, because scales differ between instruments. Where both hold the stricter one does.
 *
 * @param reference running reference [%]; null when unknown
 * @param dropPoints allowed distance from it [percentage points]; null: off
 * @param absoluteLimit limit of the set-up [%]; null: none
 * @param higherIsBetter whether a higher number means a cleaner window
 * @returns the limit [%], NaN when there is none, and which rule it comes from
 * @assumes reference and limit on the scale of the channel
 * @reference project choice
 * @deviates none
 */
export function signalStrengthLimit(
  reference: number | null,
  dropPoints: number | null,
  absoluteLimit: number | null,
  higherIsBetter: boolean,
): { limit: number; rule: 'relative' | 'absolute' | 'none' } {
  const towardsBad = higherIsBetter ? -1 : 1;
  const relative = reference === null || dropPoints === null ? NaN : reference + towardsBad * dropPoints;
  if (absoluteLimit === null) {
    return Number.isNaN(relative) ? { limit: NaN, rule: 'none' } : { limit: relative, rule: 'relative' };
  }
  const relativeIsStricter = higherIsBetter ? relative > absoluteLimit : relative < absoluteLimit;
  return relativeIsStricter
    ? { limit: relative, rule: 'relative' }
    : { limit: absoluteLimit, rule: 'absolute' };
}

/**
 * Marks the scans with too little signal.
 *
 * @param signal signal strength [%], NaN where not reported; not mutated. A scan without a report is not judged
 * @param present 1 where a scan was recorded
 * @param limit a value on the limit is accepted; NaN judges nothing
 * @param higherIsBetter whether a higher number means a cleaner window
 * @param low receives 1 where too low; other entries stay as they are
 * @returns marked scans, and mean and minimum of the channel [%] (NaN when nothing was reported)
 * @assumes arrays of the same length
 * @reference project choice
 * @deviates none
 */
export function markLowSignal(
  signal: Float64Array,
  present: Uint8Array,
  limit: number,
  higherIsBetter: boolean,
  low: Uint8Array,
): { low: number; mean: number; min: number } {
  // Nothing beyond the limit, and nothing reported where no scan was recorded: then the sums of the channel are all there is to know.
  const whole = sumsOf(signal);
  const isBeyond = higherIsBetter ? whole.min < limit : whole.max > limit;
  if (!isBeyond && !present.includes(0)) {
    return { low: 0, mean: whole.mean, min: whole.n === 0 ? NaN : whole.min };
  }
  let n = 0;
  let sum = 0;
  let min = Infinity;
  let count = 0;
  for (let i = 0; i < signal.length; i++) {
    const value = signal[i];
    if (present[i] === 0 || value !== value) continue;
    n++;
    sum += value;
    if (value < min) min = value;
    if (higherIsBetter ? value < limit : value > limit) {
      low[i] = 1;
      count++;
    }
  }
  return { low: count, mean: n === 0 ? NaN : sum / n, min: n === 0 ? NaN : min };
}

/** Whether every code is the first. */
function areAllSame(status: Int32Array): boolean {
  const kernel = seriesKernel(status.length);
  return kernel.run.areAll(kernel.pointerOfCodes(status), status.length, status[0]) !== 0;
}

function sumsOf(values: Float64Array): { n: number; mean: number; min: number; max: number } {
  const kernel = seriesKernel(values.length);
  kernel.run.sums(kernel.pointerOf(values), values.length, 0, kernel.out);
  const [n, sum, , min, max] = kernel.results;
  return { n, mean: n === 0 ? NaN : sum / n, min, max };
}

/**
 * Makes marked samples missing.
 *
 * @param values changed in place: NaN where marked
 * @param marked 1 where to be left out
 * @returns how many of them had been valid
 */
export function leaveOut(values: Float64Array, marked: Uint8Array): number {
  let count = 0;
  for (let i = 0; i < values.length; i++) {
    if (marked[i] !== 0 && values[i] === values[i]) {
      values[i] = NaN;
      count++;
    }
  }
  return count;
}

/**
 * Leaves out the samples that the instruments themselves call bad, and those seen through dirty windows.
 *
 * A bad scan is missing for all series of its instrument.
 */
export const diagnosticsStep: Step<RecipeSettings['diagnostics']> = (state, settings) => {
  if (state.stopped) return addSkipped(state, 'diagnostics', version, {}, alreadyStopped);
  const { block, context, setUp } = state;
  const recorded = state.values.samplesRead;
  const counts: Partial<Record<SeriesKey, { before: number; after: number }>> = {};

  // The sonic.
  const sonicRule = context.goodCodes.sonicStatus;
  const sonicStatus = block.status.sonicStatus;
  let sonicBad = 0;
  const sonicJudged = judges(sonicRule) && sonicStatus !== undefined;
  if (sonicJudged) {
    const bad = new Uint8Array(block.length);
    sonicBad = markBadStatus(sonicStatus, block.present, sonicRule, bad);
    if (sonicBad > 0) removeFrom(state, sonicSeries, bad, 'badStatus', counts);
    state.values['rejectedByStatus.sonic'] = recorded === 0 ? NaN : sonicBad / recorded;
  }

  // The analyser: status and signal strength together.
  const analyserRule = context.goodCodes.analyserStatus;
  const analyserStatus = block.status.analyserStatus;
  const signal = block.values.signalStrength;
  const analyserJudged = judges(analyserRule) && analyserStatus !== undefined;
  const { limit, rule } = signalStrengthLimit(
    context.signalStrengthReference,
    settings.signalStrength.relativeDropPoints,
    settings.signalStrength.useAbsoluteLimit ? setUp.analyser.signalStrengthLimitPercent : null,
    context.signalHigherIsBetter,
  );
  let analyserBad = 0;
  let lowSignal = 0;
  let meanSignal = NaN;
  const bad = new Uint8Array(block.length);
  if (analyserJudged) {
    analyserBad = markBadStatus(analyserStatus, block.present, analyserRule, bad);
    if (analyserBad > 0) removeFrom(state, analyserSeries, bad, 'badStatus', counts);
  }
  if (signal) {
    const low = new Uint8Array(block.length);
    const found = markLowSignal(signal, block.present, limit, context.signalHigherIsBetter, low);
    meanSignal = found.mean;
    state.values.signalStrength = found.mean;
    state.values.signalStrengthMin = found.min;
    if (found.low > 0) {
      for (let i = 0; i < low.length; i++) {
        if (low[i] !== 0 && bad[i] === 0) lowSignal++;
      }
      removeFrom(state, analyserSeries, low, 'lowSignal', counts);
    }
  }
  if (analyserJudged || (signal && rule !== 'none')) {
    state.values['rejectedByStatus.analyser'] = recorded === 0 ? NaN : (analyserBad + lowSignal) / recorded;
  }

  const gradeOf = (count: number): Grade =>
    gradeAbove((count * 100) / recorded, settings.softRejectedPercent, settings.hardRejectedPercent);
  const limits = { softHigh: settings.softRejectedPercent, hardHigh: settings.hardRejectedPercent };

  const sonicGrade = gradeOf(sonicBad);
  if (sonicGrade > 0) {
    addReason(state, {
      key: 'diagnostics.sonic',
      step: 'diagnostics',
      fluxes: fluxesOfAll(sonicSeries),
      series: 'sonicStatus',
      grade: sonicGrade,
      statistic: { label: 'bad sonic status', value: (sonicBad / recorded) * 100, unit: '%' },
      limits,
      finding: `Sonic status bad ${formatPercent(sonicBad / recorded)}`,
      sentence: `The sonic itself called ${formatNumber(sonicBad)} of ${formatNumber(recorded)} scans bad; they are left out of every series of the sonic. Rain, ice or dirt on the transducers are the usual causes.`,
    });
  }

  const analyserGrade = gradeOf(analyserBad + lowSignal);
  if (analyserGrade > 0) {
    const rejected = (analyserBad + lowSignal) / recorded;
    const mostlyWindow = lowSignal > analyserBad;
    const cause = mostlyWindow
      ? `Mean signal strength was ${formatNumber(meanSignal, 1)} %, the limit is ${formatNumber(limit, 1)} %${rule === 'relative' && context.signalStrengthReference !== null ? ` (clean windows here: ${formatNumber(context.signalStrengthReference, 1)} %)` : ''}. Dirt, dew or rain on the windows: clean them at the next visit.`
      : 'Rain, dew or a fault of the instrument: look up its status codes.';
    const seen: string[] = [];
    if (analyserBad > 0) seen.push(`${formatNumber(analyserBad)} have a bad analyser status`);
    if (lowSignal > 0) seen.push(`${formatNumber(lowSignal)} have too little signal`);
    addReason(state, {
      key: mostlyWindow ? 'diagnostics.signalStrength' : 'diagnostics.analyser',
      step: 'diagnostics',
      fluxes: fluxesOfAll(analyserSeries),
      series: mostlyWindow ? 'signalStrength' : 'analyserStatus',
      grade: analyserGrade,
      statistic: {
        label: 'bad analyser status or low signal',
        value: rejected * 100,
        unit: '%',
      },
      limits,
      finding: mostlyWindow
        ? `Signal strength low ${formatPercent(rejected)}`
        : `Analyser status bad ${formatPercent(rejected)}`,
      sentence: `Of ${formatNumber(recorded)} scans ${listOf(seen)}; they are left out of CO2 and H2O. ${cause}`,
    });
  }

  const parts: string[] = [];
  parts.push(
    sonicJudged
      ? `Sonic: ${formatPercent(recorded === 0 ? NaN : sonicBad / recorded)} of the scans bad.`
      : 'Sonic status not recorded or not explained in the layout.',
  );
  parts.push(
    analyserJudged
      ? `Analyser: ${formatPercent(recorded === 0 ? NaN : analyserBad / recorded)} bad.`
      : 'Analyser status not recorded or not explained in the layout.',
  );
  if (signal && rule === 'none') parts.push('Signal strength has no reference yet and was not judged.');
  if (signal && rule !== 'none') {
    parts.push(`Low signal: ${formatPercent(recorded === 0 ? NaN : lowSignal / recorded)}.`);
  }

  return addLedger(state, {
    step: 'diagnostics',
    version,
    parameters: {
      softRejectedPercent: settings.softRejectedPercent,
      hardRejectedPercent: settings.hardRejectedPercent,
      relativeDropPoints: settings.signalStrength.relativeDropPoints,
      signalReferencePercent: context.signalStrengthReference,
      signalLimitPercent: Number.isNaN(limit) ? null : limit,
      signalRule: rule,
    },
    counts,
    changes: { sonicBad, analyserBad, lowSignal },
    summary: parts.join(' '),
  });
};

function removeFrom(
  state: PeriodState,
  keys: readonly SeriesKey[],
  marked: Uint8Array,
  into: 'badStatus' | 'lowSignal',
  counts: Partial<Record<SeriesKey, { before: number; after: number }>>,
): void {
  for (const key of keys) {
    const values = state.series[key];
    const own = state.counts[key];
    if (!values || !own) continue;
    const before = counts[key]?.before ?? own.valid;
    const removed = leaveOut(values, marked);
    own.valid -= removed;
    own[into] += removed;
    counts[key] = { before, after: own.valid };
  }
}
