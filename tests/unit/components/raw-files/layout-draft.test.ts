import { describe, expect, it } from 'vitest';
import { guessLayout } from '../../../../processing/records/guess-layout';
import { previewLayout } from '../../../../processing/records/preview';
import {
  changeColumn,
  changeColumnDetail,
  changeField,
  draftOfGuess,
  draftOfSaved,
  equalLayout,
  openProblems,
} from '../../../../components/raw-files/layout-draft';
import type { LayoutDraft } from '../../../../components/raw-files/layout-draft';
import { dialectSentence, quantityRows, timeSentence } from '../../../../components/raw-files/layout-words';
import { joinSpans, overlapMs, runsTouching, spansOf } from '../../../../components/raw-files/coverage';

// invented rows, 10 a second; CO2 720.5 to 730.5 mg m-3, no units written
const rows = Array.from(
  { length: 50 },
  (_, i) =>
    `2027-06-22T11:30:0${Math.floor(i / 10)}.${i % 10},${(2 + (i % 5) / 10).toFixed(1)},-1.1,0.${1 + (i % 3)},18.${i % 9},${720 + (i % 11)}.5,0`,
);
const text = ['time,u,v,w,ts,co2,gas_status', ...rows, ''].join('\n');
const guess = guessLayout({
  text,
  isCutOff: false,
  fileName: 'a.csv',
  sampleRateHz: 10,
  utcOffsetMinutes: 60,
});
const open = (draft: LayoutDraft): string[] =>
  openProblems(draft, previewLayout(text, false, 'a.csv', draft.layout)).map(
    (problem) => `${problem.code} ${problem.channel ?? problem.field}`,
  );

describe('a layout draft', () => {
  it('begins with the doubts of the proposal and drops each that a person settles', () => {
    const draft = draftOfGuess(guess);
    expect(open(draft)).toEqual([
      'unit-from-range sonicTemperature',
      'unit-from-range co2',
      'clock-unsaid clock',
    ]);
    const clocked = changeField(draft, 'clock', { kind: 'utc' });
    expect(open(clocked)).toEqual(['unit-from-range sonicTemperature', 'unit-from-range co2']);
    const united = changeColumnDetail(clocked, 'co2', { unit: 'mg m-3' });
    expect(open(united)).toEqual(['unit-from-range sonicTemperature']);
    expect(united.layout.columns.find((column) => column.channel === 'co2')?.knownBy).toBe('person');
    expect(draft.layout.clock).toEqual({ kind: 'fixed', offsetMinutes: 60 });
  });

  it('still says when a unit that a person chose does not fit the values', () => {
    const draft = changeColumnDetail(draftOfGuess(guess), 'co2', { unit: 'mmol m-3' });
    expect(open(draft)).toContain('unit-contradicts-range co2');
  });

  it('moves a column from one quantity to another', () => {
    const draft = changeColumn(draftOfGuess(guess), 'h2o', 5, 'co2');
    expect(draft.layout.columns.find((column) => column.channel === 'co2')).toBeUndefined();
    expect(draft.layout.columns.find((column) => column.channel === 'h2o')).toMatchObject({
      index: 5,
      name: 'co2',
      knownBy: 'person',
    });
    expect(
      changeColumn(draft, 'h2o', null, null).layout.columns.some((column) => column.channel === 'h2o'),
    ).toBe(false);
  });

  it('blocks a layout without a needed quantity, with words for numbers, or with unreadable stamps', () => {
    const without = changeColumn(draftOfGuess(guess), 'windW', null, null);
    const rowsOfIt = quantityRows(without.layout, guess, []);
    expect(rowsOfIt.find((row) => row.channel === 'windW')).toMatchObject({
      mark: 2,
      how: 'needed for every flux',
    });
    const onTime = changeColumn(draftOfGuess(guess), 'airPressure', 0, 'time');
    expect(open(onTime)).toContain('no-columns airPressure');
    const blind = changeField(draftOfGuess(guess), 'time', { kind: 'stamp', column: 1, format: 'iso' });
    expect(open(blind)).toContain('stamps-unreadable time');
    const twice = changeField(draftOfGuess(guess), 'decimal', ',');
    expect(
      openProblems(twice, previewLayout(text, false, 'a.csv', twice.layout)).some(
        (problem) => problem.severity === 'blocks',
      ),
    ).toBe(true);
  });

  it('finds the saved layout that is equal', () => {
    const saved = [
      { id: 'x', layout: { ...guess.layout, name: 'other' } },
      { id: 'y', layout: structuredClone(guess.layout) },
    ];
    expect(equalLayout(saved, guess.layout)?.id).toBe('y');
    expect(equalLayout(saved.slice(0, 1), guess.layout)).toBeNull();
    expect(open(draftOfSaved({ id: 'y', layout: guess.layout }))).toEqual([]);
  });

  it('reads as sentences', () => {
    expect(dialectSentence(guess.layout)).toBe(
      'Parted by comma, decimal point, one header line, 10 rows a second.',
    );
    expect(timeSentence(guess.layout, ['time'])).toBe(
      'Date and time from column 1 (time), written as ISO 8601',
    );
    const line = quantityRows(guess.layout, guess, guess.problems).find((row) => row.channel === 'co2');
    expect(line).toMatchObject({
      mark: 1,
      how: 'name from the header; range 721 to 731 fits mg m-3, not mmol m-3',
    });
  });
});

describe('where raw files fall', () => {
  const file = (fromMs: number, toMs: number, more: object = {}) =>
    ({ state: 'read', supersededBy: null, firstScanMs: fromMs, lastScanMs: toMs, ...more }) as Parameters<
      typeof spansOf
    >[0][number];

  it('leaves out what does not count', () => {
    expect(
      spansOf([
        file(0, 10),
        file(20, 30, { state: 'withdrawn' }),
        file(40, 50, { supersededBy: 'x' }),
        file(60, 70, { firstScanMs: null }),
      ]),
    ).toEqual([{ fromMs: 0, toMs: 10 }]);
  });

  it('joins touching spans and measures overlap', () => {
    const joined = joinSpans([
      { fromMs: 10_000, toMs: 20_000 },
      { fromMs: 0, toMs: 9_000 },
      { fromMs: 50_000, toMs: 60_000 },
    ]);
    expect(joined).toEqual([
      { fromMs: 0, toMs: 20_000 },
      { fromMs: 50_000, toMs: 60_000 },
    ]);
    // 15–20 s and 50–52 s: 7 s
    expect(overlapMs(joined, [{ fromMs: 15_000, toMs: 52_000 }])).toBe(7_000);
  });

  it('names finished runs that used the time of a file', () => {
    const runs = [
      { number: 1, state: 'done', fromMs: 0, toMs: 100 },
      { number: 2, state: 'failed', fromMs: 0, toMs: 100 },
      { number: 3, state: 'done', fromMs: 200, toMs: 300 },
      { number: 4, state: 'done', fromMs: 0, toMs: 50 },
    ];
    expect(runsTouching(runs, { firstScanMs: 50, lastScanMs: 150 }).map((run) => run.number)).toEqual([1]);
    expect(runsTouching(runs, { firstScanMs: null, lastScanMs: null })).toEqual([]);
  });
});
