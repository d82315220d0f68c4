import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { defaultRecipe } from '../../processing/schemas/recipe';
import { combinedClass, deviationClass, steadyStateTurbulenceGrade } from '../../processing/steps/grades';

/**
 * Nine classes of Foken et al. (2004), Handbook of Micrometeorology, ch. 9 (limits and rows from memory), and the 0/1/2 scheme of
 * Mauder & Foken (2004). The 9 × 9 table was worked out from the rows by an independent program.
 */
const table = [
  [1, 1, 3, 3, 5, 7, 8, 8, 9],
  [2, 2, 3, 3, 5, 7, 8, 8, 9],
  [4, 4, 5, 5, 5, 7, 8, 8, 9],
  [4, 4, 5, 5, 5, 7, 8, 8, 9],
  [6, 6, 6, 6, 6, 7, 8, 8, 9],
  [7, 7, 7, 7, 7, 7, 8, 8, 9],
  [8, 8, 8, 8, 8, 8, 8, 8, 9],
  [8, 8, 8, 8, 8, 8, 8, 8, 9],
  [9, 9, 9, 9, 9, 9, 9, 9, 9],
];
const classes = [1, 2, 3, 4, 5, 6, 7, 8, 9];

describe('nine classes', () => {
  it.each([
    [0, 1],
    [15, 1],
    [15.0001, 2],
    [30, 2],
    [50, 3],
    [75, 4],
    [100, 5],
    [250, 6],
    [500, 7],
    [1000, 8],
    [1000.1, 9],
    [Infinity, 9],
  ])('puts a deviation of %f %% into class %i', (percent, expected) => {
    expect(deviationClass(percent)).toBe(expected);
  });

  it('has no class for a deviation that is not known', () => {
    expect(deviationClass(Number.NaN)).toBeNaN();
  });

  it('combines as the table for orientations 1, 6 and 9, over all pairs', () => {
    for (const steady of classes) {
      for (const turbulence of classes) {
        const expected = table[steady - 1][turbulence - 1];
        expect(combinedClass(steady, turbulence, 1)).toBe(expected);
        expect(combinedClass(steady, turbulence, 5)).toBe(expected);
        expect(combinedClass(steady, turbulence, 6)).toBe(Math.max(7, expected));
        expect(combinedClass(steady, turbulence, 8)).toBe(Math.max(7, expected));
        expect(combinedClass(steady, turbulence, 9)).toBe(9);
      }
    }
  });

  it('never gets better when an input gets worse, over all 729 triples', () => {
    let triples = 0;
    for (const steady of classes) {
      for (const turbulence of classes) {
        for (const orientation of classes) {
          triples++;
          const here = combinedClass(steady, turbulence, orientation);
          if (steady < 9)
            expect(combinedClass(steady + 1, turbulence, orientation)).toBeGreaterThanOrEqual(here);
          if (turbulence < 9)
            expect(combinedClass(steady, turbulence + 1, orientation)).toBeGreaterThanOrEqual(here);
          if (orientation < 9)
            expect(combinedClass(steady, turbulence, orientation + 1)).toBeGreaterThanOrEqual(here);
        }
      }
    }
    expect(triples).toBe(729);
  });
});

describe('0/1/2 scheme', () => {
  const limits = defaultRecipe.settings;

  it.each([
    [30, 30, 0],
    [30.001, 30, 1],
    [30, 30.001, 1],
    [100, 100, 1],
    [100.001, 0, 2],
    [0, 100.001, 2],
    [20, Number.NaN, 0],
    [60, Number.NaN, 1],
    [Number.NaN, 10, null],
  ])('grades steady state %f %% and turbulence %f %% as %s', (steady, turbulence, expected) => {
    expect(steadyStateTurbulenceGrade(steady, turbulence, limits)).toBe(expected);
  });

  it('agrees with the classes: both at most 2 is grade 0, both at most 5 grade 1', () => {
    fc.assert(
      fc.property(
        fc.double({ min: 0, max: 2000, noNaN: true }),
        fc.double({ min: 0, max: 2000, noNaN: true }),
        (steady, turbulence) => {
          const worst = Math.max(deviationClass(steady), deviationClass(turbulence));
          expect(steadyStateTurbulenceGrade(steady, turbulence, limits)).toBe(
            worst <= 2 ? 0 : worst <= 5 ? 1 : 2,
          );
        },
      ),
    );
  });
});
