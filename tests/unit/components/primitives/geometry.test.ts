import { describe, expect, it } from 'vitest';
import { rulerSpan, rulerTicks } from '../../../../components/primitives/limit-ruler';
import { sharesInPercent } from '../../../../components/primitives/grade-counts';
import { splitUnit } from '../../../../components/primitives/unit-pieces';

const base = { label: 'deviation', unit: '%', grade: 0 as const };

describe('the ruler of a limit bar', () => {
  it('starts at zero and leaves as much room beyond one limit as before it', () => {
    expect(rulerSpan({ ...base, value: 12, softHigh: 30 })).toEqual({ from: 0, to: 60 });
  });

  it('always holds both limits and a value close to them', () => {
    const { from, to } = rulerSpan({ ...base, value: 47, softHigh: 30, hardHigh: 100 });
    expect(from).toBe(0);
    expect(to).toBeGreaterThan(100);
  });

  it('does not let a far value squeeze the limits out of sight', () => {
    const { to } = rulerSpan({ ...base, value: 1e6, softHigh: 30, hardHigh: 100 });
    expect(100 / to).toBeGreaterThan(0.25);
  });

  it('reaches to both sides of a two-sided limit', () => {
    const { from, to } = rulerSpan({ ...base, value: 0.4, softLow: -2, softHigh: 2 });
    expect(from).toBeLessThan(-2);
    expect(to).toBeGreaterThan(2);
  });

  it('has at most ten ticks at round steps', () => {
    expect(rulerTicks(0, 60)).toEqual([0, 10, 20, 30, 40, 50, 60]);
    for (const [from, to] of [
      [0, 1],
      [-2.5, 2.5],
      [0, 137],
      [0, 3e-4],
    ] as const) {
      const ticks = rulerTicks(from, to);
      expect(ticks.length).toBeGreaterThan(3);
      expect(ticks.length).toBeLessThanOrEqual(10);
      expect(Math.min(...ticks)).toBeGreaterThanOrEqual(from - 1e-12);
      expect(Math.max(...ticks)).toBeLessThanOrEqual(to + 1e-12);
    }
    expect(rulerTicks(1, 1)).toEqual([]);
  });
});

describe('shares in percent', () => {
  it('add up to a hundred', () => {
    expect(sharesInPercent({ good: 1, usable: 1, rejected: 1, missing: 0 })).toEqual([34, 33, 33, 0]);
    expect(sharesInPercent({ good: 62, usable: 15, rejected: 18, missing: 5 })).toEqual([62, 15, 18, 5]);
  });

  it('are all zero where nothing was counted', () => {
    expect(sharesInPercent({ good: 0, usable: 0, rejected: 0, missing: 0 })).toEqual([0, 0, 0, 0]);
  });
});

describe('raised and lowered text', () => {
  const marked = (text: string): string =>
    splitUnit(text)
      .map(({ text: piece, place }) =>
        place === 'line' ? piece : place === 'raised' ? `^${piece}^` : `_${piece}_`,
      )
      .join('');

  it.each([
    ['µmol m-2 s-1', 'µmol m^\u22122^ s^\u22121^'],
    ['W m-2', 'W m^\u22122^'],
    ['m2 s-2', 'm^2^ s^\u22122^'],
    ['kg m-3', 'kg m^\u22123^'],
    ['CO2', 'CO_2_'],
    ['lag of CO2 and H2O', 'lag of CO_2_ and H_2_O'],
    ['FH2O', 'FH_2_O'],
    ['CH4, N2O', 'CH_4_, N_2_O'],
    ['°C', '°C'],
    ['−10.8', '−10.8'],
    ['14-17 June', '14-17 June'],
    ['set-up 4', 'set-up 4'],
    ['u*', 'u*'],
  ])('sets %s', (text, expected) => {
    expect(marked(text)).toBe(expected);
  });
});
