import { seriesLabels } from '../catalogue';
import { defaultValue } from '../defaults';
import { countValid } from '../numerics/moments';
import type { RecipeSettings } from '../schemas/recipe';
import type { Grade, PeriodState, SeriesKey, Step } from '../state';
import { seriesKeys } from '../state';
import {
  addLedger,
  addReason,
  capitalised,
  countOf,
  everyFlux,
  fluxesOf,
  fluxesOfAll,
  formatDuration,
  formatNumber,
  formatPercent,
  formatPlace,
  gradeAbove,
  listOf,
} from './ledger';

const version = 1;

/** A fitted rate further from the nominal one than this is worth a word [%]. */
const driftPercent = defaultValue('clock.rateDriftPercent');

/** A clock jump that leaves less of the period empty than this was a correction of the clock, not an outage [1]. */
const outageShare = defaultValue('clock.outagePercent') / 100;

/** A series is told apart from the scans only when it lost this much more of the period [1]. */
const extraLossShare = defaultValue('clock.extraLossPercent') / 100;

const sonicSeries: readonly SeriesKey[] = ['windU', 'windV', 'windW', 'sonicTemperature'];
const windSeries: readonly SeriesKey[] = ['windU', 'windV', 'windW'];

/**
 * Number of samples a period should hold.
 *
 * N = round(f T)
 *
 * @param sampleRateHz nominal rate [Hz]
 * @param durationS length of the half-open period [s]
 * @returns samples; a sample stamped exactly at the end belongs to the next period
 * @assumes periods have a fixed length in elapsed time, whatever the civil clock does
 * @reference definition
 * @deviates none
 */
export function expectedSamples(sampleRateHz: number, durationS: number): number {
  return Math.round(sampleRateHz * durationS);
}

/**
 * Which slots of a period hold a scan.
 *
 * @param present 1 where a scan was recorded, one entry per expected sample, not mutated
 * @returns recorded slots, number of gaps, longest gap [slots] and the slot it begins at (−1 without a gap)
 * @assumes one entry per slot
 * @reference definition
 * @deviates none
 */
export function gapsIn(present: Uint8Array): {
  recorded: number;
  gaps: number;
  longestGap: number;
  longestGapAt: number;
} {
  if (!present.includes(0)) return { recorded: present.length, gaps: 0, longestGap: 0, longestGapAt: -1 };
  let recorded = 0;
  let gaps = 0;
  let run = 0;
  let longestGap = 0;
  let longestGapAt = -1;
  for (let i = 0; i < present.length; i++) {
    if (present[i] !== 0) {
      recorded++;
      run = 0;
      continue;
    }
    if (run === 0) gaps++;
    run++;
    if (run > longestGap) {
      longestGap = run;
      longestGapAt = i - run + 1;
    }
  }
  return { recorded, gaps, longestGap, longestGapAt };
}

/**
 * Grade of a missing share.
 *
 * @param valid samples that are there
 * @param expected samples that should be
 * @param limits soft and hard limit of the missing share [%]; a share on a limit is still inside it
 * @returns 0, 1 above the soft, 2 above the hard limit
 * @assumes expected > 0
 * @reference project choice; 10 % is common practice, no source
 * @deviates none
 */
export function gradeOfMissing(
  valid: number,
  expected: number,
  limits: RecipeSettings['completeness'],
): Grade {
  // Percent from whole numbers: 1 − 0.9 would miss 0.1 by a rounding.
  const missingPercent = ((expected - valid) * 100) / expected;
  return gradeAbove(missingPercent, limits.softMissingPercent, limits.hardMissingPercent);
}

/**
 * Relative difference of the rate fitted to the stamps from the nominal one.
 *
 * @param fittedRateHz (rows − 1)/(last − first) [Hz]; null when the files carry no stamps
 * @param nominalRateHz [Hz]
 * @returns fitted/nominal − 1; NaN when there is no fitted rate
 * @assumes stamps of the logger's own clock
 * @reference definition
 * @deviates none
 */
export function clockDrift(fittedRateHz: number | null, nominalRateHz: number): number {
  return fittedRateHz === null ? NaN : fittedRateHz / nominalRateHz - 1;
}

/**
 * Counts the scans of the period, judges its gaps and its clock, and starts the sample counts of each series.
 *
 * A period with more than the hard share of its scans missing is stopped: later steps pass it through and it has no fluxes.
 */
export const completenessStep: Step<RecipeSettings['completeness']> = (state, settings) => {
  if (state.stopped) return state;
  const { block } = state;
  const expected = block.length;
  const rate = block.sampleRateHz;
  const { recorded, gaps, longestGap, longestGapAt } = gapsIn(block.present);
  const missing = expected === 0 ? 1 : (expected - recorded) / expected;
  const longestGapS = longestGap / rate;

  state.values.samplesExpected = expected;
  state.values.samplesRead = recorded;
  state.values.longestGap = longestGapS;
  state.values.duplicates = block.intake.duplicates;
  state.values.clockJumps = block.intake.clockJumps + block.intake.backwardSteps;

  const countsBySeries: Partial<Record<SeriesKey, { before: number; after: number }>> = {};
  for (const key of seriesKeys) {
    const values = state.series[key];
    if (!values) continue;
    const valid = countValid(values);
    state.counts[key] = {
      expected,
      valid,
      badStatus: 0,
      lowSignal: 0,
      outLow: 0,
      outHigh: 0,
      spikes: 0,
    };
    state.values[`missing.${key}`] = expected === 0 ? NaN : (expected - valid) / expected;
    countsBySeries[key] = { before: expected, after: valid };
  }

  const grade = expected === 0 ? 2 : gradeOfMissing(recorded, expected, settings);
  if (grade > 0) {
    state.stopped = grade === 2;
    const howMuch = `${formatNumber(recorded)} of ${countOf(expected, 'expected scan')} were recorded`;
    const where =
      recorded === 0
        ? ''
        : `; the longest gap lasts ${formatDuration(longestGapS)}, ${formatPlace(longestGapAt / rate)}`;
    addReason(state, {
      key: 'completeness.scans',
      step: 'completeness',
      fluxes: everyFlux(),
      grade,
      statistic: { label: 'missing scans', value: missing * 100, unit: '%' },
      limits: { softHigh: settings.softMissingPercent, hardHigh: settings.hardMissingPercent },
      finding: recorded === 0 ? 'No scans recorded' : `Scans missing ${formatPercent(missing)}`,
      sentence:
        recorded === 0
          ? `None of ${countOf(expected, 'expected scan')} was recorded, so there is nothing to compute. Look for a raw file that was not brought in, or for a stop of the logger.`
          : grade === 2
            ? `${howMuch}${where}. With more than ${formatNumber(settings.hardMissingPercent)} % missing the period is not processed: it would be another, shorter measurement.`
            : `${howMuch}${where}. A long hole means that a shorter, different period was measured.`,
      ...(longestGapAt >= 0 ? { atS: longestGapAt / rate } : {}),
    });
  }

  const absentWind = windSeries.filter((key) => !state.series[key]);
  for (const key of seriesKeys) {
    if (!state.series[key]) noteAbsent(state, key);
  }
  if (absentWind.length > 0) state.stopped = true;

  judgeClock(state, settings, recorded, missing);

  return addLedger(state, {
    step: 'completeness',
    version,
    parameters: {
      softMissingPercent: settings.softMissingPercent,
      hardMissingPercent: settings.hardMissingPercent,
      sampleRateHz: rate,
    },
    counts: countsBySeries,
    changes: {
      scansExpected: expected,
      scansRecorded: recorded,
      gaps,
      longestGapS,
      rowsRead: block.intake.rowsRead,
      duplicates: block.intake.duplicates,
      clockJumps: block.intake.clockJumps,
      backwardSteps: block.intake.backwardSteps,
      largestJumpS: block.intake.largestJumpS,
      fittedRateHz: block.intake.fittedRateHz,
    },
    summary: state.stopped
      ? 'Too little was recorded; the period is not processed.'
      : `${formatNumber(recorded)} of ${countOf(expected, 'scan')} recorded${
          gaps === 0
            ? ', without a gap.'
            : `, ${countOf(gaps, 'gap')}, the longest ${formatDuration(longestGapS)}.`
        }`,
  });
};

function noteAbsent(state: PeriodState, key: SeriesKey): void {
  const { label } = seriesLabels[key];
  addReason(state, {
    key: `completeness.${key}`,
    step: 'completeness',
    fluxes: fluxesOf(key, 'absent'),
    series: key,
    grade: 2,
    statistic: { label: `missing samples, ${label}`, value: 100, unit: '%' },
    finding: `No ${label} in the records`,
    sentence: `The raw files of this period have no column for ${label}. Fluxes that need it cannot be computed; check the layout and the logger's list of columns.`,
  });
}

function judgeClock(
  state: PeriodState,
  settings: RecipeSettings['completeness'],
  recorded: number,
  missing: number,
): void {
  const { intake, length: expected, sampleRateHz } = state.block;
  const jump = formatDuration(Math.abs(intake.largestJumpS));
  const missingLimits = {
    softHigh: settings.softMissingPercent,
    hardHigh: settings.hardMissingPercent,
  };
  if (intake.backwardSteps > 0) {
    addReason(state, {
      key: 'completeness.clock',
      step: 'completeness',
      fluxes: everyFlux(),
      grade: 2,
      statistic: { label: 'steps back in time', value: intake.backwardSteps, unit: '1' },
      limits: { hardHigh: 0 },
      finding: `Clock went back ${countOf(intake.backwardSteps, 'time')}`,
      sentence: `Stamps step back in time (largest step ${jump}), so some scans stand in the wrong place and the period is rejected. Check what sets the logger's clock, its battery, and whether two programs write to one file.`,
    });
  } else if (intake.clockJumps > 0) {
    const corrected = missing < outageShare;
    const grade: Grade = corrected ? 1 : gradeOfMissing(recorded, expected, settings);
    addReason(state, {
      key: 'completeness.clock',
      step: 'completeness',
      fluxes: everyFlux(),
      grade,
      statistic: corrected
        ? { label: 'clock jumps', value: intake.clockJumps, unit: '1' }
        : { label: 'missing scans', value: missing * 100, unit: '%' },
      limits: corrected ? { softHigh: 0 } : missingLimits,
      finding: corrected
        ? `Clock jumped ${jump} ahead`
        : `Recording stopped ${countOf(intake.clockJumps, 'time')}`,
      sentence: corrected
        ? `The clock jumped ahead by up to ${jump} (${countOf(intake.clockJumps, 'jump')}) while hardly any scan is missing: it was probably set while the logger ran. Check its time source; scans near the jump may be misplaced.`
        : `Stamps jump ahead by up to ${jump} and ${formatPercent(missing)} of the scans are missing: recording stopped and went on. Check power, memory card and connection of the logger.`,
    });
  }

  const drift = clockDrift(intake.fittedRateHz, sampleRateHz);
  if (Math.abs(drift) * 100 > driftPercent) {
    addReason(state, {
      key: 'completeness.drift',
      step: 'completeness',
      fluxes: everyFlux(),
      grade: 0,
      statistic: { label: 'clock drift', value: drift * 100, unit: '%' },
      limits: { softLow: -driftPercent, softHigh: driftPercent },
      finding: `Clock drifts ${formatNumber(drift * 100, 2)} %`,
      sentence: `By its stamps the logger wrote ${formatNumber(intake.fittedRateHz, 4)} scans a second instead of ${formatNumber(sampleRateHz, 2)}. Its clock and its sampling do not agree; check the clock, and the rate in the layout.`,
    });
  }
}

/** Where the samples of a series went, in words, largest part first. */
function lossesInWords(state: PeriodState, key: SeriesKey): string {
  const counts = state.counts[key]!;
  const removed = counts.badStatus + counts.lowSignal + counts.outLow + counts.outHigh + counts.spikes;
  const parts: [number, string][] = [
    [counts.expected - counts.valid - removed, 'not recorded'],
    [counts.badStatus, 'called bad by the instrument'],
    [counts.lowSignal, 'with low signal strength'],
    [counts.outLow + counts.outHigh, 'outside the limits'],
    [counts.spikes, 'spikes'],
  ];
  const words = parts
    .filter(([count]) => count > 0)
    .sort((a, b) => b[0] - a[0])
    .map(([count, what]) => `${formatPercent(count / counts.expected)} ${what}`);
  return listOf(words);
}

/**
 * Judges once more, after all removals, how much of each series is left.
 *
 * Called after despiking. A series with more than the hard share missing is dropped; without a wind component the period is stopped,
 * because nothing can be rotated. What the missing scans alone explain is not told twice.
 *
 * @param state its series hold what is left; changed in place and returned
 */
export function finalCompleteness(state: PeriodState): PeriodState {
  if (state.stopped) return state;
  const limits = state.settings.completeness;
  const expected = state.block.length;
  const recorded = state.values.samplesRead;
  const scansTold = state.reasons.some((reason) => reason.key === 'completeness.scans' && reason.grade > 0);
  const dropped: SeriesKey[] = [];
  const found: { key: SeriesKey; valid: number; grade: Grade }[] = [];

  for (const key of seriesKeys) {
    const values = state.series[key];
    const counts = state.counts[key];
    if (!values || !counts) continue;
    const valid = countValid(values);
    counts.valid = valid;
    state.values[`missing.${key}`] = (expected - valid) / expected;
    const grade = gradeOfMissing(valid, expected, limits);
    if (grade === 2) {
      delete state.series[key];
      dropped.push(key);
    }
    if (grade === 0) continue;
    if (grade === 1 && scansTold && recorded - valid < extraLossShare * expected) continue;
    found.push({ key, valid, grade });
  }

  // What takes the whole sonic is one finding, not four.
  const ofSonic = found.filter(({ key }) => sonicSeries.includes(key));
  const together =
    ofSonic.length === sonicSeries.length &&
    ofSonic.every(
      ({ grade, valid }) =>
        grade === ofSonic[0].grade && Math.abs(valid - ofSonic[0].valid) < extraLossShare * expected,
    );
  if (together) {
    const lowest = ofSonic.reduce((a, b) => (b.valid < a.valid ? b : a));
    noteLoss(state, lowest, 'completeness.sonic', null, 'sonic', sonicSeries);
  }
  for (const one of found) {
    if (together && sonicSeries.includes(one.key)) continue;
    noteLoss(state, one, `completeness.${one.key}`, one.key, seriesLabels[one.key].label, [one.key]);
  }

  if (windSeries.some((key) => dropped.includes(key))) state.stopped = true;

  const entry = state.ledger.find((line) => line.step === 'completeness');
  if (entry) {
    entry.changes.droppedSeries = dropped.length === 0 ? null : dropped.join(' ');
    if (dropped.length > 0) {
      const names = listOf(dropped.map((key) => seriesLabels[key].label));
      entry.summary += ` After all removals too little was left of ${names}.`;
    }
  }
  return state;
}

function noteLoss(
  state: PeriodState,
  { key, valid, grade }: { key: SeriesKey; valid: number; grade: Grade },
  reasonKey: string,
  series: SeriesKey | null,
  label: string,
  about: readonly SeriesKey[],
): void {
  const limits = state.settings.completeness;
  const expected = state.block.length;
  const missing = (expected - valid) / expected;
  const consequence =
    grade === 2
      ? `More than ${formatNumber(limits.hardMissingPercent)} % are gone, so it is left out altogether.`
      : `More than ${formatNumber(limits.softMissingPercent)} % are gone: the fluxes rest on fewer pairs than they should.`;
  addReason(state, {
    key: reasonKey,
    step: 'completeness',
    fluxes: fluxesOfAll(about, grade === 2 ? 'absent' : 'doubtful'),
    series,
    grade,
    statistic: { label: `missing samples, ${label}`, value: missing * 100, unit: '%' },
    limits: { softHigh: limits.softMissingPercent, hardHigh: limits.hardMissingPercent },
    finding: `${capitalised(label)} missing ${formatPercent(missing)}`,
    sentence: `${capitalised(label)} samples lost: ${lossesInWords(state, key)}. ${consequence}`,
  });
}
