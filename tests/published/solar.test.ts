import { describe, expect, it } from 'vitest';
import { dayLight, nights, sunPosition } from '../../processing/solar';

const seconds = 1000;
const clock = (text: string, day: string) => Date.parse(`${day}T${text}Z`);

describe('sun position', () => {
  it('matches Meeus example 25.a: declination −7.78507° at 1992-10-13 0 h', () => {
    // Meeus gives the instant in dynamical time; 1 min of it moves the declination by 0.0003°.
    expect(sunPosition(Date.parse('1992-10-13T00:00:00Z')).declinationDeg).toBeCloseTo(-7.78507, 3);
  });
});

describe('sunrise and sunset', () => {
  // NREL/TP-560-34302, table A2.1: Greenwich, universal time; our series is good to about 1.2 s there.
  it.each([
    ['1994-01-02', 35, '07:08:12.800', '16:59:55.900'],
    ['1996-07-05', -35, '07:08:15.400', '17:01:04.500'],
    ['2004-12-04', -35, '04:38:57.100', '19:02:02.500'],
  ])('matches NREL table A2.1 on %s at latitude %d', (day, latitude, rise, set) => {
    const light = dayLight(Date.parse(`${day}T12:00:00Z`), latitude, 0);
    if (light.kind !== 'rises-and-sets') throw new Error(light.kind);
    expect(Math.abs(light.sunriseMs - clock(rise, day))).toBeLessThan(2 * seconds);
    expect(Math.abs(light.sunsetMs - clock(set, day))).toBeLessThan(2 * seconds);
  });

  it('knows polar day and polar night', () => {
    expect(dayLight(Date.parse('2027-06-21T12:00:00Z'), 75, 0).kind).toBe('polar-day');
    expect(dayLight(Date.parse('2027-12-21T12:00:00Z'), 75, 0).kind).toBe('polar-night');
  });

  it('finds the sunrise that belongs to the day at longitudes far from Greenwich', () => {
    for (const longitude of [-170, -90, 90, 170]) {
      const noon = Date.parse('2027-03-20T12:00:00Z') - longitude * 240 * seconds;
      const light = dayLight(noon, 50, longitude);
      if (light.kind !== 'rises-and-sets') throw new Error(light.kind);
      expect(light.sunriseMs).toBeLessThan(noon);
      expect(light.sunsetMs).toBeGreaterThan(noon);
      expect(noon - light.sunriseMs).toBeLessThan(7 * 3_600 * seconds);
      expect(light.sunsetMs - noon).toBeLessThan(7 * 3_600 * seconds);
    }
  });
});

describe('nights of a span', () => {
  it('shades before sunrise and after sunset of a midsummer day', () => {
    const from = Date.parse('2027-06-17T00:00:00Z') - 3_600_000;
    const spans = nights(from, from + 86_400_000, 52, 10);
    expect(spans).toHaveLength(2);
    expect(spans[0].fromMs).toBe(from);
    expect(spans[1].toMs).toBe(from + 86_400_000);
    // By hand: δ = 23.4°, ω0 = arccos(−tan 52° tan 23.4°) = 123.6°, so 2 ω0/15 = 16.5 h, and about 0.25 h for refraction and limb.
    expect((spans[1].fromMs - spans[0].toMs) / 3_600_000).toBeGreaterThan(16.3);
    expect((spans[1].fromMs - spans[0].toMs) / 3_600_000).toBeLessThan(17.1);
  });
});
