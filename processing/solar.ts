/**
 * Where the sun stands, for the grey of night behind plots.
 *
 * @reference Meeus, Astronomical Algorithms, chapter 25 (low accuracy), from memory; reproduces example 25.a and the almanac values of
 *   NREL/TP-560-34302 table A2.1 within 1.2 s of time (tests/published/solar.test.ts)
 */

const rad = Math.PI / 180;

export interface SunPosition {
  /** [deg] */
  declinationDeg: number;
  /** Apparent minus mean solar time [min]. */
  equationOfTimeMin: number;
}

/**
 * Declination and equation of time.
 *
 * @param instantMs ms since 1970-01-01 UTC; the difference between universal and terrestrial time (about 1 min) is left out
 */
export function sunPosition(instantMs: number): SunPosition {
  const julianDay = instantMs / 86_400_000 + 2_440_587.5;
  const t = (julianDay - 2_451_545) / 36_525;
  const meanLongitude = (280.46646 + t * (36_000.76983 + 0.0003032 * t)) * rad;
  const meanAnomaly = (357.52911 + t * (35_999.05029 - 0.0001537 * t)) * rad;
  const eccentricity = 0.016708634 - t * (0.000042037 + 1.267e-7 * t);
  const centre =
    (1.914602 - t * (0.004817 + 0.000014 * t)) * Math.sin(meanAnomaly) +
    (0.019993 - 0.000101 * t) * Math.sin(2 * meanAnomaly) +
    0.000289 * Math.sin(3 * meanAnomaly);
  const node = (125.04 - 1934.136 * t) * rad;
  const apparentLongitude = meanLongitude + (centre - 0.00569 - 0.00478 * Math.sin(node)) * rad;
  const meanObliquity = 23 + (26 + (21.448 - t * (46.815 + t * (0.00059 - 0.001813 * t))) / 60) / 60;
  const obliquity = (meanObliquity + 0.00256 * Math.cos(node)) * rad;
  const y = Math.tan(obliquity / 2) ** 2;
  const equation =
    y * Math.sin(2 * meanLongitude) -
    2 * eccentricity * Math.sin(meanAnomaly) +
    4 * eccentricity * y * Math.sin(meanAnomaly) * Math.cos(2 * meanLongitude) -
    0.5 * y * y * Math.sin(4 * meanLongitude) -
    1.25 * eccentricity * eccentricity * Math.sin(2 * meanAnomaly);
  return {
    declinationDeg: Math.asin(Math.sin(obliquity) * Math.sin(apparentLongitude)) / rad,
    equationOfTimeMin: (4 * equation) / rad,
  };
}

export type DayLight =
  | { kind: 'rises-and-sets'; sunriseMs: number; sunsetMs: number }
  | { kind: 'polar-day' }
  | { kind: 'polar-night' };

/**
 * Sunrise and sunset around one solar noon: upper limb with standard refraction (zenith 90.833°).
 *
 * @param dayMs an instant near local solar noon of the day asked for
 * @param latitudeDeg north positive
 * @param longitudeDeg east positive
 */
export function dayLight(dayMs: number, latitudeDeg: number, longitudeDeg: number): DayLight {
  const midnightUtcMs = Math.floor((dayMs + longitudeDeg * 240_000) / 86_400_000) * 86_400_000;
  const event = (sign: 1 | -1): number | null | 'always-up' => {
    let instantMs = midnightUtcMs + (720 - 4 * longitudeDeg) * 60_000;
    for (let pass = 0; pass < 3; pass += 1) {
      const { declinationDeg, equationOfTimeMin } = sunPosition(instantMs);
      const cosine =
        Math.cos(90.833 * rad) / (Math.cos(latitudeDeg * rad) * Math.cos(declinationDeg * rad)) -
        Math.tan(latitudeDeg * rad) * Math.tan(declinationDeg * rad);
      if (cosine > 1) return null;
      if (cosine < -1) return 'always-up';
      const hourAngleDeg = Math.acos(cosine) / rad;
      instantMs =
        midnightUtcMs + (720 - 4 * (longitudeDeg + sign * hourAngleDeg) - equationOfTimeMin) * 60_000;
    }
    return instantMs;
  };
  const sunriseMs = event(1);
  const sunsetMs = event(-1);
  if (sunriseMs === 'always-up' || sunsetMs === 'always-up') return { kind: 'polar-day' };
  if (sunriseMs === null || sunsetMs === null) return { kind: 'polar-night' };
  return { kind: 'rises-and-sets', sunriseMs, sunsetMs };
}

/** Spans of night within [fromMs, toMs], for shading. At most 400 days are looked at; longer spans return none. */
export function nights(
  fromMs: number,
  toMs: number,
  latitudeDeg: number,
  longitudeDeg: number,
): { fromMs: number; toMs: number }[] {
  const day = 86_400_000;
  if (!(toMs > fromMs) || toMs - fromMs > 400 * day) return [];
  const spans: { fromMs: number; toMs: number }[] = [];
  let darkFrom: number | null = fromMs;
  for (let at = fromMs - day; at <= toMs + day; at += day) {
    const light = dayLight(at, latitudeDeg, longitudeDeg);
    if (light.kind === 'polar-night') continue;
    if (light.kind === 'polar-day') {
      darkFrom = null;
      continue;
    }
    if (darkFrom !== null && light.sunriseMs > fromMs) {
      spans.push({ fromMs: Math.max(darkFrom, fromMs), toMs: Math.min(light.sunriseMs, toMs) });
    }
    darkFrom = light.sunsetMs;
  }
  if (darkFrom !== null && darkFrom < toMs) spans.push({ fromMs: Math.max(darkFrom, fromMs), toMs });
  return spans.filter((span) => span.toMs > span.fromMs);
}
