import { describe, expect, it } from 'vitest';
import {
  angularDistanceDeg,
  horizontalWind,
  isInSector,
  mastSectorCentreDeg,
  vAxisAzimuthDeg,
  windDirectionDeg,
  yamartinoSpreadDeg,
} from '../../processing/steps/wind-direction';

const boomNorth = {
  boomAzimuthDeg: 0,
  azimuthReference: 'true' as const,
  magneticDeclinationDeg: 0,
  axes: { handedness: 'right' as const, uTowards: 'mast' as const },
};

/** NCAR surface-flux facility, technical note "Wind direction quick reference": dir = atan2(−u, −v) + azimuth of +v. */
describe('wind direction from instrument axes', () => {
  it('matches the worked cases', () => {
    expect(windDirectionDeg(0, 1, 0)).toBe(180);
    expect(windDirectionDeg(1, 0, 0)).toBe(270);
    expect(windDirectionDeg(3, 1, 0)).toBeCloseTo(251.56505117707798, 12);
    expect(windDirectionDeg(3, 1, 120)).toBeCloseTo(11.565051177077983, 12);
  });

  it('gives the azimuth of the boom for wind from the front', () => {
    expect(vAxisAzimuthDeg(boomNorth)).toBe(90);
    expect(windDirectionDeg(5, 0, 90)).toBe(0);
  });

  it('has no direction below 0.1 m/s', () => {
    expect(windDirectionDeg(0.05, 0.05, 0)).toBeNaN();
  });
});

/** Yamartino (1984), A comparison of several "single-pass" estimators of the standard deviation of wind direction, 23:1362–1366. */
describe('spread of direction', () => {
  it('is 15.84° for 350°, 10°, 20° and 340°', () => {
    const angles = [350, 10, 20, 340].map((deg) => (deg * Math.PI) / 180);
    const mean = (f: (x: number) => number) => angles.reduce((sum, angle) => sum + f(angle), 0) / 4;
    expect(yamartinoSpreadDeg(mean(Math.sin), mean(Math.cos))).toBeCloseTo(15.842480803481015, 11);
    const wind = horizontalWind(
      Float64Array.from(angles, (angle) => -3 * Math.sin(angle)),
      Float64Array.from(angles, (angle) => -3 * Math.cos(angle)),
    );
    expect(wind.spreadDeg).toBeCloseTo(15.842480803481015, 11);
  });
});

/** Sector rules: common practice; centre and distance follow from the geometry. */
describe('disturbed sectors', () => {
  it('centre the wake of the mast opposite to the boom', () => {
    expect(mastSectorCentreDeg(boomNorth)).toBe(180);
    expect(mastSectorCentreDeg({ ...boomNorth, boomAzimuthDeg: 225 })).toBe(45);
  });

  it('hold 135° and not 134.999° with a half-width of 45° around 180°', () => {
    expect(angularDistanceDeg(135, 180)).toBeLessThanOrEqual(45);
    expect(angularDistanceDeg(134.999, 180)).toBeGreaterThan(45);
    expect(angularDistanceDeg(359, 1)).toBe(2);
    expect(angularDistanceDeg(0, 180)).toBe(180);
  });

  it('wrap: 350° to 20° holds 0° and 355°, not 21°', () => {
    expect(isInSector(0, 350, 20)).toBe(true);
    expect(isInSector(355, 350, 20)).toBe(true);
    expect(isInSector(21, 350, 20)).toBe(false);
  });
});
