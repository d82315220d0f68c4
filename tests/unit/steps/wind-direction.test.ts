import * as fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { SetUp } from '../../../processing/schemas/set-up';
import {
  angularDistanceDeg,
  horizontalWind,
  isInSector,
  mastSectorCentreDeg,
  vAxisAzimuthDeg,
  windDirectionDeg,
  windDirectionStep,
} from '../../../processing/steps/wind-direction';
import { plainChannels, recordedState, slowSeries } from './recorded-state';

type Geometry = Pick<SetUp, 'boomAzimuthDeg' | 'azimuthReference' | 'magneticDeclinationDeg' | 'axes'>;
const boom = (
  boomAzimuthDeg: number,
  uTowards: SetUp['axes']['uTowards'] = 'mast',
  more: Partial<Geometry> = {},
): Geometry => ({
  boomAzimuthDeg,
  azimuthReference: 'true',
  magneticDeclinationDeg: 0,
  axes: { handedness: 'right', uTowards },
  ...more,
});

describe('axes', () => {
  it('place +v a quarter turn counter-clockwise of +u', () => {
    expect(vAxisAzimuthDeg(boom(0))).toBe(90);
    expect(vAxisAzimuthDeg(boom(225))).toBe(315);
    expect(vAxisAzimuthDeg(boom(0, 'away-from-mast'))).toBe(270);
    expect(vAxisAzimuthDeg(boom(0, 'right-of-boom'))).toBe(0);
    expect(vAxisAzimuthDeg(boom(0, 'left-of-boom'))).toBe(180);
  });

  it('give the same direction however the sonic is turned on its boom', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 359 }),
        fc.integer({ min: 0, max: 359 }),
        fc.constantFrom(
          ['mast', 180] as const,
          ['away-from-mast', 0] as const,
          ['right-of-boom', 90] as const,
          ['left-of-boom', 270] as const,
        ),
        (boomDeg, fromDeg, [uTowards, turn]) => {
          // Wind towards fromDeg + 180; +u points to boomDeg + turn. Component along an axis: speed × cos of the angle between.
          const towards = ((fromDeg + 180) * Math.PI) / 180;
          const uAzimuth = ((boomDeg + turn) * Math.PI) / 180;
          const u = 4 * Math.cos(towards - uAzimuth);
          const v = 4 * Math.cos(towards - (uAzimuth - Math.PI / 2));
          const found = windDirectionDeg(u, v, vAxisAzimuthDeg(boom(boomDeg, uTowards)));
          expect(angularDistanceDeg(found, fromDeg)).toBeLessThan(1e-9);
        },
      ),
    );
  });

  it('count declination once, and only for magnetic azimuths', () => {
    expect(vAxisAzimuthDeg(boom(100, 'mast', { magneticDeclinationDeg: 5 }))).toBe(190);
    const magnetic = { azimuthReference: 'magnetic' as const, magneticDeclinationDeg: 5 };
    expect(vAxisAzimuthDeg(boom(100, 'mast', magnetic))).toBe(195);
    expect(mastSectorCentreDeg(boom(100, 'mast', magnetic))).toBe(285);
  });
});

describe('mean wind', () => {
  it('agrees with numpy in direction and spread', () => {
    // numpy: vector mean, and Yamartino's formula over the sample directions; azimuth of +v 120°.
    const found = horizontalWind(slowSeries(11, 3000, 4), slowSeries(12, 3000, 2));
    expect(windDirectionDeg(found.meanU, found.meanV, 120)).toBeCloseTo(4.545680812709449, 10);
    expect(found.spreadDeg).toBeCloseTo(12.0323277560229, 9);
  });

  it('has no direction in a calm', () => {
    expect(windDirectionDeg(0.06, 0.07, 0)).toBeNaN();
    expect(windDirectionDeg(0.1, 0, 0)).toBe(270);
    expect(windDirectionDeg(NaN, 1, 0)).toBeNaN();
  });

  it('counts samples that have both components', () => {
    const found = horizontalWind(Float64Array.of(1, 2, NaN), Float64Array.of(0, NaN, 5));
    expect(found).toMatchObject({ n: 1, meanU: 1, meanV: 0, spreadDeg: 0 });
    expect(horizontalWind(Float64Array.of(NaN), Float64Array.of(1)).meanU).toBeNaN();
  });
});

describe('sectors', () => {
  it('wrap through north', () => {
    for (const inside of [350, 355, 0, 20]) expect(isInSector(inside, 350, 20)).toBe(true);
    for (const outside of [21, 349.9, 180]) expect(isInSector(outside, 350, 20)).toBe(false);
  });

  it('may be the full circle or one direction', () => {
    expect(isInSector(123, 0, 360)).toBe(true);
    expect(isInSector(90, 90, 90)).toBe(true);
    expect(isInSector(91, 90, 90)).toBe(false);
  });
});

describe('wind direction step', () => {
  /** Steady wind from `fromDeg` on a boom pointing north with +u to the mast. */
  const run = (fromDeg: number, setUp: Partial<SetUp> = {}, speed = 4) => {
    const n = 50;
    const towards = ((fromDeg + 180) * Math.PI) / 180;
    const values = {
      ...plainChannels(n),
      windU: new Float64Array(n).fill(speed * Math.cos(towards - Math.PI)),
      windV: new Float64Array(n).fill(speed * Math.cos(towards - Math.PI / 2)),
    };
    const state = recordedState({ values, setUp: { boomAzimuthDeg: 0, ...setUp } });
    return windDirectionStep(state, state.settings.sectors);
  };
  const keys = (state: ReturnType<typeof run>) => state.reasons.map(({ key, grade }) => `${key} ${grade}`);

  it('passes wind from the front', () => {
    const state = run(10);
    expect(state.reasons).toEqual([]);
    expect(state.wind).toMatchObject({ sectorGrade: 0, sectorReason: null });
    expect(state.values.windDirection).toBeCloseTo(10, 9);
    expect(state.values.windSpeed).toBeCloseTo(4, 12);
    expect(state.values.windDirectionSpread).toBeCloseTo(0, 4);
  });

  it('rejects wind that passed the mast', () => {
    const state = run(190);
    expect(keys(state)).toEqual(['sectors.mast 2']);
    expect(state.reasons[0].fluxes).toHaveLength(4);
    expect(state.reasons[0].statistic.value).toBeCloseTo(10, 9);
    expect(state.wind?.sectorGrade).toBe(2);
    expect(keys(run(134))).toEqual([]);
    expect(keys(run(136))).toEqual(['sectors.mast 2']);
    expect(keys(run(224))).toEqual(['sectors.mast 2']);
    expect(keys(run(226))).toEqual([]);
  });

  it('can be told to leave the mast or the list out', () => {
    expect(keys(run(190, { mastSectorHalfWidthDeg: 0 }))).toEqual([]);
    const state = run(10);
    const listed = {
      ...state,
      reasons: [],
      ledger: [],
      setUp: { ...state.setUp, disturbedSectors: [sector(0, 20, 1)] },
    };
    expect(keys(windDirectionStep({ ...listed }, { useMastSector: true, useListedSectors: false }))).toEqual(
      [],
    );
  });

  const sector = (fromDeg: number, toDeg: number, grade: 1 | 2) => ({
    fromDeg,
    toDeg,
    grade,
    reason: 'barn at 60 m',
  });

  it('grades by the listed sectors and says why', () => {
    const disturbedSectors = [sector(200, 220, 2), sector(350, 20, 1)];
    const state = run(5, { disturbedSectors });
    expect(keys(state)).toEqual(['sectors.2 1']);
    expect(state.reasons[0].sentence).toContain('barn at 60 m');
    expect(state.wind).toMatchObject({ sectorGrade: 1, sectorReason: 'barn at 60 m' });
    expect(keys(run(210, { disturbedSectors }))).toEqual(['sectors.mast 2', 'sectors.1 2']);
  });

  it('grades an unknown direction 1 where sectors matter', () => {
    const calm = run(5, {}, 0.05);
    expect(keys(calm)).toEqual(['sectors.unknown 1']);
    expect(calm.values.windDirection).toBeNaN();
    expect(keys(run(5, { mastSectorHalfWidthDeg: 0 }, 0.05))).toEqual([]);
  });

  it('turns a left-handed v round, once and for all later steps', () => {
    const values = {
      ...plainChannels(3),
      windU: Float64Array.of(3, 3, 3),
      windV: Float64Array.of(-1, -1, NaN),
    };
    const state = recordedState({
      values,
      setUp: { boomAzimuthDeg: 30, axes: { handedness: 'left', uTowards: 'mast' } },
    });
    windDirectionStep(state, state.settings.sectors);
    expect(Array.from(state.series.windV!)).toEqual([1, 1, NaN]);
    // Azimuth of +v 120°, (3, 1): 11.565051177077983°.
    expect(state.values.windDirection).toBeCloseTo(11.565051177077983, 10);
  });
});
