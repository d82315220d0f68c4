import { describe, expect, it } from 'vitest';
import { crosswindCovariance, crosswindWeights } from '../../processing/steps/crosswind';

/**
 * Liu, Peters & Foken (2001), New equations for sonic temperature variance and buoyancy heat flux with an omnidirectional sonic
 * anemometer, Boundary-Layer Meteorol. 100:459–468 (from memory; 3/4 and 7/8 follow from the geometry of the paths).
 */
describe('crosswind correction', () => {
  it('weighs both components 3/4 for paths at 45° and 7/8 at 60°', () => {
    expect(crosswindWeights(45).a).toBeCloseTo(3 / 4, 14);
    expect(crosswindWeights(60).a).toBeCloseTo(7 / 8, 14);
    expect(crosswindWeights(60).b).toBeCloseTo(7 / 8, 14);
    expect(crosswindWeights(48.75).a).toBeCloseTo(0.7826315480550129, 14);
  });

  it('weighs what three slanting paths lose on average', () => {
    // Wind across a path: V² − (V·path)². Mean over azimuths 0°, 120°, 240°, for wind along x and along y.
    const elevation = (52 * Math.PI) / 180;
    const acrossMean = (ux: number, uy: number) =>
      [0, 120, 240]
        .map((deg) => (deg * Math.PI) / 180)
        .map((azimuth) => {
          const along = (ux * Math.cos(azimuth) + uy * Math.sin(azimuth)) * Math.cos(elevation);
          return ux * ux + uy * uy - along * along;
        })
        .reduce((sum, square) => sum + square / 3, 0);
    const { a, b } = crosswindWeights(52);
    expect(acrossMean(3, 0)).toBeCloseTo(9 * a, 12);
    expect(acrossMean(0, 4)).toBeCloseTo(16 * b, 12);
    expect(acrossMean(3, 4)).toBeCloseTo(9 * a + 16 * b, 12);
  });

  it('takes 0.00195 K m/s off the heat flux at 5 m/s', () => {
    // 2/403 × 7/8 × 5 × (−0.09).
    expect(crosswindCovariance(5, 0, -0.09, 0, { a: 7 / 8, b: 7 / 8 })).toBeCloseTo(
      -0.0019540942928039703,
      16,
    );
  });
});
