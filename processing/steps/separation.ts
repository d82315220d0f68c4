/**
 * Where the analyser stands seen from the sonic, in the axes of the wind.
 */

/** Analyser centre minus sonic centre in geographic axes [m], as a set-up states it. */
export interface GeographicSeparation {
  northM: number;
  eastM: number;
  upM: number;
}

/** The same, in the axes of the wind. */
export interface WindSeparation {
  /** Along the wind [m]; positive: the analyser stands downwind and sees a gust later than the sonic. */
  alongM: number;
  /** Across the wind [m]; positive to the left of someone who looks downwind. */
  acrossM: number;
  /** Vertical [m]; positive: the analyser stands higher. */
  upM: number;
}

/**
 * Turns a geographic separation into the axes of the wind.
 *
 * Wind from direction D blows towards (−sin D, −cos D) in (east, north): along = −(east sin D + north cos D).
 *
 * @param separation analyser minus sonic [m]
 * @param windDirectionDeg where the wind comes from, true north, clockwise [deg]; NaN when calm
 * @returns components [m]; along and across are NaN when the direction is NaN
 * @assumes azimuths already against true north
 * @reference geometry only (derived)
 * @deviates none
 */
export function separationComponents(
  separation: GeographicSeparation,
  windDirectionDeg: number,
): WindSeparation {
  const direction = (windDirectionDeg * Math.PI) / 180;
  const towardsEast = -Math.sin(direction);
  const towardsNorth = -Math.cos(direction);
  return {
    alongM: separation.eastM * towardsEast + separation.northM * towardsNorth,
    acrossM: separation.northM * towardsEast - separation.eastM * towardsNorth,
    upM: separation.upM,
  };
}
