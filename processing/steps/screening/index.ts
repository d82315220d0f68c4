import { seriesLabels } from '../../catalogue';
import { defaultValue } from '../../defaults';
import { removeLine } from '../../numerics/regression';
import { scratch } from '../../numerics/selection';
import type { RecipeSettings } from '../../schemas/recipe';
import type { GasKey, Grade, PeriodState, Reason, SeriesKey, Step } from '../../state';
import { gasKeys, seriesKeys } from '../../state';
import {
  addLedger,
  addReason,
  addSkipped,
  alreadyStopped,
  capitalised,
  countOf,
  fluxesOf,
  fluxesOfAll,
  formatDuration,
  formatNumber,
  formatPlace,
} from '../ledger';
import type { AmplitudeFindings } from './amplitude';
import { amplitudeTests } from './amplitude';
import { angleOfAttack } from './angle-of-attack';
import { discontinuities } from './discontinuities';
import type { LagTest } from './lag';
import { lagTests } from './lag';
import type { RecordStatistics } from './record';
import { recordStatistics } from './record';
import { windNonstationarity } from './wind-nonstationarity';

const version = 1;

const windowStepPoints = defaultValue('screening.windowStepPoints');
const fallbackNoiseFactor = defaultValue('recipe.lag.noiseFactor');

type Settings = RecipeSettings['screening'];

/** 0: passed or not judged, 1: soft (unusual, look first), 2: hard (probably broken). */
export type Flag = 0 | 1 | 2;

/** Flag of a value above two limits; null switches a limit off, a value on a limit passes, NaN is not judged. */
export function flagAbove(value: number, limits: { soft: number | null; hard: number | null }): Flag {
  if (limits.hard !== null && value > limits.hard) return 2;
  if (limits.soft !== null && value > limits.soft) return 1;
  return 0;
}

/** Flag of a value outside of two bands; a value on an edge passes, NaN is not judged. */
export function flagOutside(
  value: number,
  bands: { soft: { low: number; high: number }; hard: { low: number; high: number } },
): Flag {
  if (value < bands.hard.low || value > bands.hard.high) return 2;
  if (value < bands.soft.low || value > bands.soft.high) return 1;
  return 0;
}

function upperLimits(limits: { soft: number | null; hard: number | null }): Partial<Reason['limits']> {
  return { softHigh: limits.soft, hardHigh: limits.hard };
}

function bandLimits(bands: Settings['skewness']): Reason['limits'] {
  return {
    softLow: bands.soft.low,
    softHigh: bands.soft.high,
    hardLow: bands.hard.low,
    hardHigh: bands.hard.high,
  };
}

/**
 * Looks for instrument faults and unusual records, in the axes of the instrument and on despiked data.
 *
 * Hard flags mean that something is probably broken, soft ones that the record is unusual but possibly real. Nothing is changed here:
 * flags become reasons with the grades that the recipe gives them.
 *
 * Tests: share of spikes, amplitude resolution, dropouts, skewness and kurtosis of the detrended record, steps in mean and variance,
 * lag, angle of attack, change of the horizontal wind. Absolute limits are judged where the values are removed.
 */
export const screeningStep: Step<Settings> = (state, settings) => {
  if (state.stopped) return addSkipped(state, 'screening', version, {}, alreadyStopped);
  const { sampleRateHz, length } = state.block;
  const changes: Record<string, number | string | null> = {};
  const records: Partial<Record<SeriesKey, RecordStatistics>> = {};
  let soft = 0;
  let hard = 0;

  const note = (
    flag: Flag,
    test: string,
    series: SeriesKey | null,
    statistic: Reason['statistic'],
    limits: Partial<Reason['limits']>,
    finding: string,
    sentence: string,
    extra: Partial<Pick<Reason, 'fluxes' | 'atS'>> = {},
  ): void => {
    if (flag === 0) return;
    if (flag === 1) soft++;
    else hard++;
    const grade: Grade = flag === 1 ? settings.softGrade : settings.hardGrade;
    addReason(state, {
      key: `screening.${test}${series === null ? '' : `.${series}`}`,
      step: 'screening',
      // A hard flag speaks of a broken signal: every flux that needs the series falls with it.
      fluxes: extra.fluxes ?? (series === null ? [] : fluxesOf(series, flag === 2 ? 'absent' : 'doubtful')),
      series,
      grade,
      statistic,
      limits,
      finding,
      sentence,
      ...(extra.atS === undefined ? {} : { atS: extra.atS }),
    });
  };

  for (const key of seriesKeys) {
    const values = state.series[key];
    if (!values) continue;
    const { label } = seriesLabels[key];
    const name = capitalised(label);
    const record = recordStatistics(values);
    records[key] = record;

    const spikePercent = (state.values[`spikes.${key}`] ?? NaN) * 100;
    note(
      flagAbove(spikePercent, settings.spikeSharePercent),
      'spikes',
      key,
      { label: `spikes, ${label}`, value: spikePercent, unit: '%' },
      upperLimits(settings.spikeSharePercent),
      `${name} spikes ${formatNumber(spikePercent, 1)} %`,
      `${countOf(state.counts[key]?.spikes ?? 0, 'spike')} of ${label} were left out. That many do not come from the air: look at the cables, the windows, and rain.`,
    );

    const amplitude = amplitudeTests(
      values,
      settings.amplitudeResolution.windowPoints,
      windowStepPoints,
      settings.amplitudeResolution.bins,
    );
    state.values[`screening.emptyBins.${key}`] = amplitude.emptyShare;
    state.values[`screening.dropoutInterior.${key}`] = amplitude.interiorShare;
    state.values[`screening.dropoutExtreme.${key}`] = amplitude.extremeShare;
    changes[`sameBinPercent.${key}`] = finiteOrNull(amplitude.sameBinShare * 100);
    noteAmplitude(note, settings, key, amplitude, sampleRateHz);

    state.values[`screening.skewness.${key}`] = record.skewness;
    state.values[`screening.kurtosis.${key}`] = record.kurtosis;
    note(
      flagOutside(record.skewness, settings.skewness),
      'skewness',
      key,
      { label: `skewness, ${label}`, value: record.skewness, unit: '1' },
      bandLimits(settings.skewness),
      `${name} skewness ${formatNumber(record.skewness, 1)}`,
      `The detrended ${label} leans to one side: skewness ${formatNumber(record.skewness, 2)}, a symmetric record has 0. A few strong plumes can do that, and so can a fault that shows on one side only.`,
    );
    note(
      flagOutside(record.kurtosis, settings.kurtosis),
      'kurtosis',
      key,
      { label: `kurtosis, ${label}`, value: record.kurtosis, unit: '1' },
      bandLimits(settings.kurtosis),
      `${name} kurtosis ${formatNumber(record.kurtosis, 1)}`,
      record.kurtosis > 3
        ? `The detrended ${label} is quiet with rare large swings: kurtosis ${formatNumber(record.kurtosis, 2)}, a Gaussian record has 3. Turbulence that comes in bursts looks like this, and so do remaining spikes.`
        : `The detrended ${label} dwells at two values: kurtosis ${formatNumber(record.kurtosis, 2)}, a Gaussian record has 3. A square-shaped signal looks like this.`,
    );

    noteSteps(state, note, settings, key, values, record);
  }

  noteLags(state, note, settings, records, changes);

  const { windU, windV, windW } = state.series;
  if (windU && windV && windW) {
    const { acceptanceAngleDeg } = state.setUp.sonic;
    const found = angleOfAttack(windU, windV, windW, acceptanceAngleDeg);
    state.values['screening.angleOfAttack'] = found.steepShare;
    changes.angleOfAttackP1Deg = finiteOrNull(found.percentilesDeg[0]);
    changes.angleOfAttackP50Deg = finiteOrNull(found.percentilesDeg[1]);
    changes.angleOfAttackP99Deg = finiteOrNull(found.percentilesDeg[2]);
    const percent = found.steepShare * 100;
    note(
      flagAbove(percent, settings.angleOfAttack.sharePercent),
      'angleOfAttack',
      null,
      { label: 'samples beyond the acceptance angle', value: percent, unit: '%' },
      upperLimits(settings.angleOfAttack.sharePercent),
      `Steep wind ${formatNumber(percent, 1)} % of samples`,
      `In ${formatNumber(percent, 1)} % of the samples the wind met the sonic more steeply than the ${formatNumber(acceptanceAngleDeg)}° it accepts. Its frame then shades its paths, and vertical wind reads too small.`,
      { fluxes: fluxesOf('windW') },
    );
  }
  if (records.windU && records.windV) {
    const found = windNonstationarity(records.windU, records.windV, length);
    state.values['screening.windNonstationarity'] = found.vector;
    changes.windChangeAlong = finiteOrNull(found.alongWind);
    changes.windChangeCross = finiteOrNull(found.crossWind);
    note(
      flagAbove(found.vector, settings.windNonstationarity.ratio),
      'windNonstationarity',
      null,
      { label: 'nonstationarity of the horizontal wind', value: found.vector, unit: '1' },
      upperLimits(settings.windNonstationarity.ratio),
      `Wind changed by ${formatNumber(found.vector * 100)} %`,
      `Over the period the wind changed by ${formatNumber(found.vector, 2)} of its mean speed (along it ${formatNumber(found.alongWind, 2)}, across ${formatNumber(found.crossWind, 2)}). The mean is then no good reference for fluctuations.`,
      { fluxes: fluxesOfAll(['windU', 'windV']) },
    );
  }

  return addLedger(state, {
    step: 'screening',
    version,
    parameters: {
      windowPoints: settings.amplitudeResolution.windowPoints,
      windowStepPoints,
      bins: settings.amplitudeResolution.bins,
      discontinuityWindowS: settings.discontinuities.windowS,
      lagWindowS: settings.lag.windowS,
      acceptanceAngleDeg: state.setUp.sonic.acceptanceAngleDeg,
      softGrade: settings.softGrade,
      hardGrade: settings.hardGrade,
    },
    changes: { softFlags: soft, hardFlags: hard, ...changes },
    summary:
      soft + hard === 0
        ? 'No test of the record raised a flag.'
        : `${countOf(hard, 'hard flag')} and ${countOf(soft, 'soft flag')}.`,
  });
};

type Note = (
  flag: Flag,
  test: string,
  series: SeriesKey | null,
  statistic: Reason['statistic'],
  limits: Partial<Reason['limits']>,
  finding: string,
  sentence: string,
  extra?: Partial<Pick<Reason, 'fluxes' | 'atS'>>,
) => void;

function noteAmplitude(
  note: Note,
  settings: Settings,
  key: SeriesKey,
  found: AmplitudeFindings,
  sampleRateHz: number,
): void {
  const { label } = seriesLabels[key];
  const name = capitalised(label);
  const windowS = settings.amplitudeResolution.windowPoints / sampleRateHz;

  const empty = found.emptyShare * 100;
  const emptyAtS = found.emptyAt / sampleRateHz;
  const { bins } = settings.amplitudeResolution;
  const isFrozen = found.emptyShare >= (bins - 1) / bins;
  note(
    flagAbove(empty, settings.amplitudeResolution.emptyPercent),
    'amplitudeResolution',
    key,
    { label: `empty histogram bins, ${label}`, value: empty, unit: '%' },
    upperLimits(settings.amplitudeResolution.emptyPercent),
    isFrozen ? `${name} frozen at one value` : `${name} too coarse: ${formatNumber(empty)} % gaps`,
    isFrozen
      ? `${windowWords(windowS, emptyAtS)} all samples of ${label} are the same. Moving air does not stand still: the signal froze.`
      : `${windowWords(windowS, emptyAtS)}, ${formatNumber(empty)} % of the histogram bins of ${label} are empty: the signal moves in steps, like a comb, and small fluctuations are lost.`,
    { atS: emptyAtS },
  );

  const interior = found.interiorShare * 100;
  const extreme = found.extremeShare * 100;
  const interiorFlag = flagAbove(interior, settings.dropouts.interiorPercent);
  const extremeFlag = flagAbove(extreme, settings.dropouts.extremePercent);
  const isExtreme = extremeFlag > interiorFlag;
  const worst = isExtreme ? extreme : interior;
  const limits = isExtreme ? settings.dropouts.extremePercent : settings.dropouts.interiorPercent;
  const atS = (isExtreme ? found.extremeAt : found.interiorAt) / sampleRateHz;
  note(
    isExtreme ? extremeFlag : interiorFlag,
    'dropouts',
    key,
    { label: `longest run in one bin, ${label}`, value: worst, unit: '%' },
    upperLimits(limits),
    `${name} stuck for ${formatDuration((worst / 100) * windowS)}${worst >= 99.95 ? ' or more' : ''}`,
    `${windowWords(windowS, atS)}, ${label} stays at one value${isExtreme ? ' far from its usual ones' : ''} for ${percentText(worst)} of the samples in a row. Moving air does not stand still: the signal froze or dropped out.`,
    { atS },
  );
}

/** "In the first 50 s", "In the 50 s from 10 min 25 s on". */
function windowWords(windowS: number, atS: number): string {
  return atS === 0
    ? `In the first ${formatDuration(windowS)}`
    : `In the ${formatDuration(windowS)} ${formatPlace(atS)}`;
}

/** "11.1 %", but "100 %". */
function percentText(percent: number): string {
  return `${formatNumber(percent, Number.isInteger(Math.round(percent * 10) / 10) ? 0 : 1)} %`;
}

function noteSteps(
  state: PeriodState,
  note: Note,
  settings: Settings,
  key: SeriesKey,
  values: Float64Array,
  record: RecordStatistics,
): void {
  const { label } = seriesLabels[key];
  const name = capitalised(label);
  const { sampleRateHz } = state.block;
  const { windowS } = settings.discontinuities;
  const found = discontinuities(values, Math.round(windowS * sampleRateHz), record);
  state.values[`screening.haarMean.${key}`] = found.meanStep;
  state.values[`screening.haarVariance.${key}`] = found.varianceStep;
  const minutes = formatDuration(windowS / 2);

  const meanAtS = found.meanStepAt / sampleRateHz;
  note(
    flagAbove(found.meanStep, settings.discontinuities.mean),
    'discontinuityMean',
    key,
    { label: `step in the mean, ${label}`, value: found.meanStep, unit: '1' },
    upperLimits(settings.discontinuities.mean),
    `${name} steps by ${formatNumber(found.meanStep, 2)} spreads`,
    `The ${minutes} means of ${label} before and after ${formatDuration(meanAtS)} differ by ${formatNumber(found.meanStep, 2)} times its spread. A step widens that spread itself, so even a large one gives only a moderate number.`,
    { atS: meanAtS },
  );

  const varianceAtS = found.varianceStepAt / sampleRateHz;
  note(
    flagAbove(found.varianceStep, settings.discontinuities.variance),
    'discontinuityVariance',
    key,
    { label: `step in the variance, ${label}`, value: found.varianceStep, unit: '1' },
    upperLimits(settings.discontinuities.variance),
    `${name} variance steps by ${formatNumber(found.varianceStep, 1)}`,
    `The ${minutes} variances of ${label} before and after ${formatDuration(varianceAtS)} differ by ${formatNumber(found.varianceStep, 1)} times that of the whole record. A burst of noise, a dropout or a squall begins or ends there.`,
    { atS: varianceAtS },
  );
}

function noteLags(
  state: PeriodState,
  note: Note,
  settings: Settings,
  records: Partial<Record<SeriesKey, RecordStatistics>>,
  changes: Record<string, number | string | null>,
): void {
  const { sampleRateHz } = state.block;
  const detrended = (key: SeriesKey, slot: number): Float64Array | null => {
    const values = state.series[key];
    if (!values) return null;
    const into = scratch(values.length, slot).subarray(0, values.length);
    removeLine(values, into, records[key]?.line);
    return into;
  };
  const windW = detrended('windW', 4);
  if (!windW) return;
  const gases = gasKeys.filter((gas) => state.series[gas]);
  const scalars = gases.map((gas, index) => detrended(gas, 5 + index) as Float64Array);
  const noiseFactor =
    state.settings.lag.method === 'covariance-maximisation'
      ? state.settings.lag.noiseFactor
      : fallbackNoiseFactor;
  const windowPoints = Math.round(settings.lag.windowS * sampleRateHz);
  const found = lagTests(windW, scalars, windowPoints, sampleRateHz, noiseFactor);
  gases.forEach((gas, index) => noteLag(state, note, settings, gas, found[index], changes));
}

function noteLag(
  state: PeriodState,
  note: Note,
  settings: Settings,
  gas: GasKey,
  found: LagTest,
  changes: Record<string, number | string | null>,
): void {
  const { sampleRateHz } = state.block;
  state.values[`screening.lag.${gas}`] = found.difference;
  const lagS = found.lagSamples / sampleRateHz;
  changes[`lagS.${gas}`] = lagS;
  const percent = found.difference * 100;
  const { label } = seriesLabels[gas];
  note(
    flagAbove(percent, settings.lag.differencePercent),
    'lag',
    gas,
    { label: `covariance gained by lag, ${label}`, value: percent, unit: '%' },
    upperLimits(settings.lag.differencePercent),
    `${label} lag costs ${formatNumber(percent)} %`,
    `At lag zero ${formatNumber(percent)} % of the covariance of w and ${label} would be missing; it is largest at a lag of ${formatNumber(lagS, 2)} s. The lag step pairs them properly; a lag this strong still asks whether clock, separation and filters are what the set-up says.`,
  );
}

function finiteOrNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}
