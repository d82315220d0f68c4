import { describe, expect, it } from 'vitest';
import {
  inputManifest,
  marginSeconds,
  periodStartMs,
  planRun,
  type PlanFile,
  type PlanRequest,
} from '../../processing/run-plan';
import { defaultRecipe } from '../../processing/schemas/recipe';
import type { SetUp } from '../../processing/schemas/set-up';
import { demoSetUp } from '../../processing/synthetic/demo-scenario';
import {
  DAY_START_MS,
  fileOf,
  HOUR_MS,
  ingest,
  reportOf,
  rows,
  smallLayout,
} from './records/record-fixtures';

const { settings } = defaultRecipe;
const HALF = HOUR_MS / 2;
const setUp: SetUp = { ...demoSetUp, sampleRateHz: 10 };

function file(n: number, startMs: number, hash: string, beginsWith: string[] = []): PlanFile {
  const report = reportOf(ingest(fileOf(rows(n, startMs))));
  return { report: { ...report, contentHash: hash, beginsWith }, layout: smallLayout };
}

function plan(files: PlanFile[], more: Partial<PlanRequest<PlanFile>> = {}) {
  return planRun({ files, setUps: [{ validFromMs: 0, setUp }], settings, utcOffsetMinutes: 0, ...more });
}

const starts = (p: ReturnType<typeof plan>): number[] =>
  p.periods.map((x) => (x.startMs - DAY_START_MS) / HALF);

describe('planning a run', () => {
  it('has whole periods from the first to the last scan', () => {
    const p = plan([file(30_000, DAY_START_MS + 60_000, 'a')]);
    expect([p.fromMs, p.toMs]).toEqual([DAY_START_MS, DAY_START_MS + HOUR_MS]);
    expect(starts(p)).toEqual([0, 1]);
  });

  it('does not begin a period with the instant at which the last one ends', () => {
    // 18 000 rows at 10 Hz fill exactly half an hour.
    expect(starts(plan([file(18_000, DAY_START_MS, 'a')]))).toEqual([0]);
  });

  it('counts periods from midnight of station standard time', () => {
    expect(periodStartMs(DAY_START_MS, 60, 345)).toBe(DAY_START_MS - 45 * 60_000);
    expect(periodStartMs(DAY_START_MS, 30, -210)).toBe(DAY_START_MS);
  });

  it('names the chunks of the period and of its margins, in order of precedence', () => {
    const [, middle] = plan([
      file(54_000, DAY_START_MS, 'b'),
      file(54_000, DAY_START_MS + 1000, 'a'),
    ]).periods;
    if (middle.kind !== 'compute') throw new Error(middle.kind);
    expect(middle.sources.map((s) => [s.file.report.contentHash, s.parts])).toEqual([
      ['b', [0, 1, 2]],
      ['a', [0, 1, 2]],
    ]);
    // Means of 5 min centred on the ends reach 2.5 min out.
    expect(middle.marginS).toBe(150);
    expect(marginSeconds({ storage: { method: 'none' } })).toBe(0);
  });

  it('leaves a file out that another one begins with', () => {
    const p = plan([file(1000, DAY_START_MS, 'short'), file(2000, DAY_START_MS, 'grown', ['short'])]);
    expect(p.files.map((f) => f.report.contentHash)).toEqual(['grown']);
  });

  it('has no result where the set-up changes within the period, and says when', () => {
    const changeMs = DAY_START_MS + HALF + 600_000;
    const later = { ...setUp, sonicHeightM: 5 };
    const p = plan([file(54_000, DAY_START_MS, 'a')], {
      setUps: [
        { validFromMs: changeMs, setUp: later },
        { validFromMs: 0, setUp },
      ],
    });
    expect(p.periods.map((x) => x.kind)).toEqual(['compute', 'crossing', 'compute']);
    expect(p.periods[1]).toMatchObject({ what: 'Set-up changed', atMs: changeMs });
    expect(p.periods[2]).toMatchObject({ setUp: later });
  });

  it('takes a set-up that begins with the period', () => {
    const p = plan([file(36_000, DAY_START_MS, 'a')], {
      setUps: [
        { validFromMs: 0, setUp },
        { validFromMs: DAY_START_MS + HALF, setUp: { ...setUp, sonicHeightM: 5 } },
      ],
    });
    expect(p.periods.map((x) => (x.kind === 'compute' ? x.setUp.sonicHeightM : x.kind))).toEqual([
      setUp.sonicHeightM,
      5,
    ]);
  });

  it('marks periods before the first set-up', () => {
    const p = plan([file(36_000, DAY_START_MS, 'a')], {
      setUps: [{ validFromMs: DAY_START_MS + HALF, setUp }],
    });
    expect(p.periods.map((x) => x.kind)).toEqual(['no-set-up', 'compute']);
  });

  it('has no result where the sampling rate changes within the period', () => {
    const layout = { ...smallLayout, sampleRateHz: 10.4 };
    const read = ingest(fileOf(rows(18_000, DAY_START_MS + 900_000, 0, 1000 / 10.4)), layout);
    const faster: PlanFile = { report: { ...reportOf(read), contentHash: 'b' }, layout };
    const p = plan([file(9000, DAY_START_MS, 'a'), faster]);
    expect(p.periods.map((x) => x.kind)).toEqual(['crossing', 'compute']);
    expect(p.periods[0]).toMatchObject({ what: 'Sampling rate changed' });
    // To one scan: chunks know slots.
    expect(
      p.periods[0].kind === 'crossing' && Math.abs(p.periods[0].atMs - DAY_START_MS - 900_000),
    ).toBeLessThan(100);
    expect(p.periods[1]).toMatchObject({ sampleRateHz: 10.4 });
  });

  it('does not use a file whose rate differs from the set-up by more than 5 %, naming both rates', () => {
    const p = plan([file(18_000, DAY_START_MS, 'a')], {
      setUps: [{ validFromMs: 0, setUp: { ...setUp, sampleRateHz: 20 } }],
    });
    expect(p.files).toEqual([]);
    expect(p.problems).toMatchObject([{ contentHash: 'a', code: 'rate-mismatch', isExcluded: true }]);
    expect(p.problems[0].message).toContain('read at 10 Hz, the set-up says 20 Hz');
  });

  it('uses a file whose rate differs a little, and says so', () => {
    const p = plan([file(18_000, DAY_START_MS, 'a')], {
      setUps: [{ validFromMs: 0, setUp: { ...setUp, sampleRateHz: 10.1 } }],
    });
    expect(p.problems).toMatchObject([{ code: 'rate-differs', isExcluded: false }]);
    expect(p.periods).toHaveLength(1);
  });

  it('plans the span asked for, rounded outwards, whether recorded or not', () => {
    const p = plan([file(18_000, DAY_START_MS, 'a')], {
      fromMs: DAY_START_MS - HALF - 1,
      toMs: DAY_START_MS + HOUR_MS + 1,
    });
    expect(starts(p)).toEqual([-2, -1, 0, 1, 2]);
  });

  it('bridges gaps of days, not the decades to a stamp that is far off', () => {
    const days = plan([file(100, DAY_START_MS, 'a'), file(100, DAY_START_MS + 2 * 24 * HOUR_MS, 'b')]);
    expect(days.periods).toHaveLength(97);
    const decades = plan([
      file(100, DAY_START_MS, 'a'),
      file(100, DAY_START_MS + 20 * 365 * 24 * HOUR_MS, 'b'),
    ]);
    expect(decades.periods).toHaveLength(2);
  });

  it('gives the running reference of signal strength and the rules for codes to each period', () => {
    const [period] = plan([file(18_000, DAY_START_MS, 'a')]).periods;
    expect(period).toMatchObject({
      context: {
        signalStrengthReference: 92,
        signalHigherIsBetter: true,
        goodCodes: { sonicStatus: { codes: [0] } },
      },
    });
  });

  it('does not depend on the order of files and set-ups, nor does the manifest', () => {
    const files = [
      file(30_000, DAY_START_MS, 'a'),
      file(30_000, DAY_START_MS + 600_000, 'b'),
      file(500, DAY_START_MS, 'c'),
    ];
    const setUps = [
      { validFromMs: 0, setUp },
      { validFromMs: DAY_START_MS + HALF, setUp: { ...setUp, sonicHeightM: 5 } },
    ];
    const request = { files, setUps, settings, utcOffsetMinutes: 0 };
    const turned = { ...request, files: [...files].reverse(), setUps: [...setUps].reverse() };
    expect(planRun(turned)).toEqual(planRun(request));
    expect(inputManifest(turned, planRun(turned), '1')).toEqual(
      inputManifest(request, planRun(request), '1'),
    );
    expect(inputManifest(request, planRun(request), '1').rawFiles.map((f) => f.contentHash)).toEqual([
      'a',
      'c',
      'b',
    ]);
  });

  it('is empty without files', () => expect(plan([]).periods).toEqual([]));
});
