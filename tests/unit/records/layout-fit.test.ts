import { describe, expect, it } from 'vitest';
import { guessLayout } from '../../../processing/records/guess-layout';
import { bestLayout, layoutFit } from '../../../processing/records/layout-fit';
import { fieldsOf, spacingOf } from '../../../processing/records/preview';

// invented rows: 10 a second, names and stamps of an ordinary file
const rows = Array.from(
  { length: 60 },
  (_, i) =>
    `2027-06-22T11:30:${String(Math.floor(i / 10)).padStart(2, '0')}.${i % 10}Z,${(2 + Math.sin(i)).toFixed(2)},-1.10,0.${10 + (i % 7)},18.${10 + (i % 9)}`,
);
const text = ['time,u,v,w,ts', ...rows, ''].join('\n');
const layout = guessLayout({
  text,
  isCutOff: false,
  fileName: 'a.csv',
  sampleRateHz: 10,
  utcOffsetMinutes: 0,
}).layout;

describe('layoutFit', () => {
  it('gives 1 to the layout of the very file', () => {
    expect(layoutFit(layout, text, false, 'a.csv')).toEqual({ score: 1, misfits: [] });
  });

  it('says which name is not where the layout expects it', () => {
    const swapped = text.replace('time,u,v,w,ts', 'time,u,w,v,ts');
    const fit = layoutFit(layout, swapped, false, 'a.csv');
    expect(fit.score).toBeCloseTo(0.5, 10);
    expect(fit.misfits[0]).toBe('column 3 is named “w”, not “v”');
  });

  it('gives nothing to rows that are too short, and little to another rate or header', () => {
    expect(layoutFit(layout, text.replaceAll(/,18\.\d+/g, ''), false, 'a.csv').score).toBe(0);
    expect(layoutFit({ ...layout, sampleRateHz: 20 }, text, false, 'a.csv')).toEqual({
      score: 0.6,
      misfits: ['10 rows a second, the layout says 20'],
    });
    expect(layoutFit(layout, rows.join('\n'), false, 'a.csv').misfits).toContain(
      'the header holds a row of numbers',
    );
    expect(layoutFit(layout, '', false, 'a.csv').score).toBe(0);
  });

  it('chooses the newest of equally good layouts and none that does not fit', () => {
    const saved = [
      { id: 'old', layout, createdAtMs: 1 },
      { id: 'new', layout, createdAtMs: 2 },
      { id: 'other', layout: { ...layout, sampleRateHz: 20 }, createdAtMs: 3 },
    ];
    expect(bestLayout(saved, text, false, 'a.csv')?.saved.id).toBe('new');
    expect(bestLayout(saved.slice(2), text, false, 'a.csv')).toBeNull();
  });
});

describe('rows of the preview', () => {
  it('splits quoted fields, runs of blanks, and empty fields', () => {
    expect(fieldsOf('"a, b",2,,"3"', 'comma')).toEqual(['a, b', '2', '', '3']);
    expect(fieldsOf('  1\t 2   3 ', 'blanks')).toEqual(['1', '2', '3']);
    expect(fieldsOf('1;;3', 'semicolon')).toEqual(['1', '', '3']);
  });

  it('splits rows with blanks around values and quoted words', () => {
    expect(fieldsOf(' 1 , 2 ,3', 'comma')).toEqual(['1', '2', '3']);
    expect(fieldsOf('"2027-06-22 11:30:00.05",918273,"NAN",-1.2', 'comma')).toEqual([
      '2027-06-22 11:30:00.05',
      '918273',
      'NAN',
      '-1.2',
    ]);
  });

  it('tells even, jumping and shared stamps apart', () => {
    expect(spacingOf([0, 100, 200, 300])).toMatchObject({
      rateHz: 10,
      irregular: 0,
      isEven: true,
      isCoarse: false,
    });
    expect(spacingOf([0, 100, 200, 1200, 1100])).toMatchObject({ irregular: 2, backward: 1, isEven: false });
    expect(spacingOf([0, 0, 1000, 1000, 1000, 1000, 2000, 2000, 2000, 2000, 3000])).toMatchObject({
      rateHz: 4,
      isCoarse: true,
      isEven: true,
    });
    expect(spacingOf([0, 100])).toBeNull();
  });
});
