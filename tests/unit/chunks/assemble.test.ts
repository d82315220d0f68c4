import { describe, expect, it } from 'vitest';
import { assembleBlock, type BlockSource } from '../../../processing/chunks/assemble';
import { STATUS_MISSING } from '../../../processing/chunks/chunk';
import { comparePrecedence, filesThatCount, signalReference } from '../../../processing/chunks/precedence';
import type { ChannelKey, Layout } from '../../../processing/schemas/layout';
import {
  DAY_START_MS,
  fileOf,
  HOUR_MS,
  ingest,
  reportOf,
  rows,
  smallLayout,
} from '../records/record-fixtures';

const HALF_HOUR_MS = HOUR_MS / 2;

function source(
  lines: string[],
  hash: string,
  layout: Layout = smallLayout,
  beginsWith: string[] = [],
): BlockSource {
  const read = ingest(fileOf(lines), layout);
  return { report: { ...reportOf(read), contentHash: hash, beginsWith }, layout, chunks: read.chunks };
}

function block(
  sources: BlockSource[],
  startMs = DAY_START_MS,
  endMs = DAY_START_MS + HALF_HOUR_MS,
  marginS = 0,
) {
  return assembleBlock({ startMs, endMs, sampleRateHz: 10, sources, marginS });
}

/** Value of the u column of scan i as a chunk holds it. */
const u = (i: number): number => Math.fround((i % 1000) / 100);

describe('assembling a block', () => {
  it('takes a whole half hour with status, in inner units', () => {
    const { values, status, present, length, intake } = block([source(rows(18_000), 'a')]);
    expect(length).toBe(18_000);
    expect(present.every((p) => p === 1)).toBe(true);
    expect(values.windU?.[777]).toBe(u(777));
    // 15 °C + 273.15
    expect(values.sonicTemperature?.[0]).toBeCloseTo(288.15, 10);
    expect(status.sonicStatus?.[5]).toBe(0);
    expect(intake).toMatchObject({ rowsRead: 18_000, rawFiles: ['a'] });
  });

  it.each([10, 15, 60])('cuts periods of %i minutes from half-hour chunks', (minutes) => {
    const whole = source(rows(40_000, DAY_START_MS - 60_000), 'a');
    const startMs = DAY_START_MS + (minutes === 60 ? 0 : minutes * 60_000);
    const cut = block([whole], startMs, startMs + minutes * 60_000);
    expect(cut.length).toBe(minutes * 600);
    // The file begins 600 scans before midnight.
    const first = 600 + (startMs - DAY_START_MS) / 100;
    expect(cut.values.windU?.[0]).toBe(u(first));
    expect(cut.values.windU?.[cut.length - 1]).toBe(u(first + cut.length - 1));
    expect(cut.present.every((p) => p === 1)).toBe(true);
  });

  it('gives the samples just outside as margins, in order of time', () => {
    const { margins } = block([source(rows(20_000, DAY_START_MS - 100_000), 'a')], undefined, undefined, 150);
    expect(margins.before?.length).toBe(1500);
    // Recording began 1000 scans before the period.
    expect(margins.before?.values.windU?.[499]).toBeNaN();
    expect(margins.before?.values.windU?.[500]).toBe(u(0));
    expect(margins.before?.values.windU?.[1499]).toBe(u(999));
    expect(margins.after?.values.windU?.[0]).toBe(u(19_000));
    expect(margins.after?.values.windU?.[999]).toBe(u(19_999));
    expect(margins.after?.values.windU?.[1000]).toBeNaN();
  });

  it('has no margin where nothing was recorded', () => {
    expect(block([source(rows(18_000), 'a')], undefined, undefined, 60).margins).toEqual({
      before: null,
      after: null,
    });
  });

  it('is all missing, of full length, where nothing was recorded', () => {
    const empty = block([]);
    expect(empty.length).toBe(18_000);
    expect(empty.present.some((p) => p === 1)).toBe(false);
    expect(empty.intake.rawFiles).toEqual([]);
  });

  it('does not depend on the order of the files', () => {
    const early = source(rows(12_000), 'b');
    const late = source(rows(12_000, DAY_START_MS + 600_000, 500), 'a');
    const one = block([early, late]);
    const other = block([late, early]);
    expect(other).toEqual(one);
    // Overlap of 10 to 20 min: the file that began earlier wins; the later one only adds the end.
    expect(one.values.windU?.[11_999]).toBe(u(11_999));
    expect(one.values.windU?.[12_000]).toBe(u(500 + 6000));
    expect(one.intake.rawFiles).toEqual(['b', 'a']);
  });

  it('fills a hole of one file from another', () => {
    const holed = source(
      rows(18_000).filter((_, i) => i < 5000 || i >= 6000),
      'b',
    );
    const filled = block([holed, source(rows(17_000, DAY_START_MS + 50_000, 900), 'a')]);
    expect(filled.values.windU?.[4999]).toBe(u(4999));
    expect(filled.values.windU?.[5500]).toBe(u(900 + 5000));
    expect(filled.values.windU?.[6000]).toBe(u(6000));
  });

  it('takes each channel from the first file that has it', () => {
    const windOnly: Layout = {
      ...smallLayout,
      columns: smallLayout.columns.filter((c) => c.channel === 'windU'),
    };
    const others: Layout = {
      ...smallLayout,
      columns: smallLayout.columns.filter((c) => c.channel !== 'windU'),
    };
    const merged = block([source(rows(18_000), 'a', windOnly), source(rows(18_000), 'b', others)]);
    expect(merged.values.windU?.[10]).toBe(u(10));
    expect(merged.values.sonicTemperature?.[10]).toBeCloseTo(288.15, 10);
    expect(merged.status.sonicStatus?.[10]).toBe(0);
  });

  it('keeps the first scan of a half hour that a file holds in two parts', () => {
    const lines = [0, 1, 2, 3, 4, 5].flatMap((h) => rows(10, DAY_START_MS + h * HOUR_MS, h * 10));
    const merged = block([source([...lines, ...rows(20, DAY_START_MS + 500, 900)], 'a')]);
    expect(merged.values.windU?.[7]).toBe(u(7));
    expect(merged.values.windU?.[12]).toBe(u(907));
    expect(merged.intake.rowsRead).toBe(30);
  });

  it('leaves files of another rate out', () => {
    const slow = ingest(fileOf(rows(900, DAY_START_MS, 0, 1000)), { ...smallLayout, sampleRateHz: 1 });
    expect(
      block([{ report: reportOf(slow), layout: smallLayout, chunks: slow.chunks }]).intake.rawFiles,
    ).toEqual([]);
  });

  // Expected values by hand: molar masses 44.0095 and 18.01528 g mol-1, Ts = c²/403.
  it.each<[ChannelKey, string, number, number]>([
    ['windU', 'cm s-1', 250, 2.5],
    ['windU', 'km h-1', 36, 10],
    ['sonicTemperature', 'degC', 20, 293.15],
    ['sonicTemperature', 'm s-1', 343.5, 117_992.25 / 403],
    ['co2', 'mg m-3', 704.152, 16],
    ['co2', 'umol m-3', 16_000, 16],
    ['co2', 'umol mol-1', 400, 400],
    ['h2o', 'g m-3', 10.809168, 600],
    ['h2o', 'mol m-3', 0.5, 500],
    ['airTemperature', 'degC', -40, 233.15],
    ['airPressure', 'hPa', 1013.25, 101_325],
    ['airPressure', 'kPa', 98, 98_000],
    ['signalStrength', '1', 0.5, 50],
  ])('converts %s from %s', (channel, unit, written, inner) => {
    const layout: Layout = {
      ...smallLayout,
      columns: [{ channel, index: 1, name: null, unit, knownBy: 'person' }],
    };
    const lines = rows(100).map((line) => line.replace(/^([^,]+),[^,]+/, `$1,${written}`));
    const value = block([source(lines, 'a', layout)]).values[channel]?.[50] ?? NaN;
    // Chunks are float32: 6e-8 relative.
    expect(Math.abs(value / inner - 1)).toBeLessThan(1e-7);
  });

  it('says how each gas was measured and does not mix ways of measuring', () => {
    const gas = (unit: string): Layout => ({
      ...smallLayout,
      columns: [{ channel: 'co2', index: 1, name: null, unit, knownBy: 'person' }],
    });
    expect(block([source(rows(10), 'a', gas('umol mol-1 dry'))]).gasMeasures).toEqual({
      co2: 'dry-mole-fraction',
    });
    const mixed = block([source(rows(100), 'a', gas('mmol m-3')), source(rows(300), 'b', gas('umol mol-1'))]);
    // The longer file comes first and sets the way.
    expect(mixed.gasMeasures).toEqual({ co2: 'mole-fraction' });
    expect(mixed.values.co2?.[50]).toBe(u(50));
  });

  it('gives NaN, not infinity, for a number too large for a chunk', () => {
    const lines = rows(10).map((line, i) => (i === 3 ? line.replace(/^([^,]+),[^,]+/, '$1,1e60') : line));
    expect(block([source(lines, 'a')]).values.windU?.[3]).toBeNaN();
  });

  it('marks scans that were recorded without a code', () => {
    const lines = rows(10).map((line, i) => (i === 3 ? line.replace(/,0$/, ',') : line));
    const { status, present } = block([source(lines, 'a')]);
    expect(status.sonicStatus?.[3]).toBe(STATUS_MISSING);
    expect(present[3]).toBe(1);
  });
});

describe('precedence of raw files', () => {
  const facts = (firstScanMs: number, n: number, contentHash: string) => ({
    firstScanMs,
    rows: n,
    contentHash,
  });

  it('goes by first scan, then by number of scans, then by hash', () => {
    const ordered = [facts(1, 5, 'z'), facts(2, 9, 'y'), facts(2, 8, 'a'), facts(2, 8, 'b')];
    expect([ordered[3], ordered[1], ordered[0], ordered[2]].sort(comparePrecedence)).toEqual(ordered);
  });

  it('drops the same content and a file that another one begins with', () => {
    const short = source(rows(1000), 'short');
    const grown = source(rows(3000), 'grown', smallLayout, ['short']);
    const kept = filesThatCount([short, grown, grown], (s) => s.report);
    expect(kept.map((s) => s.report.contentHash)).toEqual(['grown']);
    expect(block([short, grown]).intake.rawFiles).toEqual(['grown']);
  });
});

describe('reference of signal strength', () => {
  const report = (starts: [number, number | null][], unit = '%') => ({
    ...reportOf(ingest(fileOf(rows(10)))),
    units: { signalStrength: unit },
    chunks: starts.map(([startMs, signalStrengthP95]) => ({
      ...ingest(fileOf(rows(10))).chunks[0].intake,
      startMs,
      signalStrengthP95,
    })),
  });
  const DAY = 86_400_000;

  it('looks back over the given days and no further, the period included', () => {
    const reports = [
      report([
        [0, 99],
        [8 * DAY, 80],
        [9 * DAY, 90],
        [10 * DAY, null],
        [10 * DAY + 1, 100],
      ]),
    ];
    // Of 80 and 90 the 50th percentile is 85, by linear interpolation.
    expect(signalReference(reports, 10 * DAY, 7, 50)).toBe(85);
  });

  it('is null when no signal strength was recorded', () => {
    expect(signalReference([report([[0, null]])], 0, 7, 95)).toBeNull();
    expect(signalReference([], 0, 7, 95)).toBeNull();
  });

  it('is in percent for files that write a share', () => {
    expect(signalReference([report([[5, 0.5]], '1')], 5, 7, 95)).toBe(50);
  });
});
