import { defaultValue } from '../defaults';
import { seriesKernel } from '../numerics/series-kernel';
import type { RecipeSettings } from '../schemas/recipe';
import type { SetUp } from '../schemas/set-up';
import { trueBoomAzimuthDeg } from '../schemas/set-up';
import type { Grade, Step } from '../state';
import { addLedger, addReason, addSkipped, alreadyStopped, everyFlux, formatNumber } from './ledger';

const version = 1;

/** Below this mean speed there is no direction [m s-1]. */
const calmSpeedMs = defaultValue('wind.calmMs');

const yamartinoCoefficient = defaultValue('wind.yamartino');

const degrees = 180 / Math.PI;

function wrap(angleDeg: number): number {
  const wrapped = ((angleDeg % 360) + 360) % 360;
  // −1e-15 wraps to 360 by rounding.
  return wrapped === 360 ? 0 : wrapped;
}

/**
 * True azimuth of the +v axis, once the axes are right-handed.
 *
 * +v lies 90° counter-clockwise of +u. With +u towards the mast: azimuth of the boom + 90°.
 *
 * @param setUp boom azimuth (mast to sensor, corrected for declination where it is magnetic) and the way +u points
 * @returns azimuth of +v [deg, 0–360)
 * @assumes +w upward; a left-handed v has been turned round before
 * @reference derived from the geometry; NCAR surface-flux facility note "Wind direction quick reference" states the case of +u towards
 *   the mast
 * @deviates none
 */
export function vAxisAzimuthDeg(
  setUp: Pick<SetUp, 'boomAzimuthDeg' | 'azimuthReference' | 'magneticDeclinationDeg' | 'axes'>,
): number {
  const fromBoom: Record<SetUp['axes']['uTowards'], number> = {
    mast: 180,
    'away-from-mast': 0,
    'right-of-boom': 90,
    'left-of-boom': -90,
  };
  return wrap(trueBoomAzimuthDeg(setUp) + fromBoom[setUp.axes.uTowards] - 90);
}

/**
 * Direction the wind comes from.
 *
 * dir = atan2(−u, −v) + azimuth of +v
 *
 * @param u,v mean components in right-handed instrument axes, before tilt correction [m s⁻¹]
 * @param vAzimuthDeg true azimuth of the +v axis [deg]
 * @returns direction [deg, 0–360), clockwise from true north; NaN when calm (speed below 0.1 m s⁻¹)
 * @assumes right-handed axes
 * @reference NCAR surface-flux facility note "Wind direction quick reference"
 * @deviates none
 */
export function windDirectionDeg(u: number, v: number, vAzimuthDeg: number): number {
  if (!(Math.hypot(u, v) >= calmSpeedMs)) return NaN;
  return wrap(Math.atan2(-u, -v) * degrees + vAzimuthDeg);
}

export interface HorizontalWind {
  /** Samples that have both components. */
  n: number;
  meanU: number;
  meanV: number;
  /** Standard deviation of direction [deg]. */
  spreadDeg: number;
}

/**
 * Standard deviation of direction from the mean sine and cosine.
 *
 * ε = √(1 − s² − c²), σ = asin(ε) (1 + 0.1547 ε³)
 *
 * @param meanSine,meanCosine of the sample directions [1]
 * @returns σ [deg]
 * @assumes single-peaked directions
 * @reference Yamartino (1984), J. Clim. Appl. Meteorol. 23:1362–1366 (formula verified in an encyclopaedia article; 0.1547 = 2/√3 − 1)
 * @deviates none
 */
export function yamartinoSpreadDeg(meanSine: number, meanCosine: number): number {
  const e = Math.sqrt(Math.max(0, 1 - (meanSine * meanSine + meanCosine * meanCosine)));
  return Math.asin(Math.min(1, e)) * (1 + yamartinoCoefficient * e * e * e) * degrees;
}

/**
 * Mean horizontal wind vector and spread of direction.
 *
 * @param windU,windV n samples, not mutated [m s⁻¹]; a sample counts where both are there
 * @returns vector mean, and Yamartino's spread over the samples that move at all
 * @assumes any horizontal axes: the spread does not depend on them
 * @reference Yamartino (1984), J. Clim. Appl. Meteorol. 23:1362–1366
 * @deviates none
 */
export function horizontalWind(windU: Float64Array, windV: Float64Array): HorizontalWind {
  const kernel = seriesKernel(windU.length);
  kernel.run.directionSums(kernel.pointerOf(windU, 0), kernel.pointerOf(windV, 1), windU.length, kernel.out);
  const [n, sumU, sumV, moving, sumSine, sumCosine] = kernel.results;
  return {
    n,
    meanU: n === 0 ? NaN : sumU / n,
    meanV: n === 0 ? NaN : sumV / n,
    spreadDeg: moving === 0 ? NaN : yamartinoSpreadDeg(sumSine / moving, sumCosine / moving),
  };
}

/**
 * Angle between a direction and the centre of a sector.
 *
 * |((dir − centre + 540) mod 360) − 180|
 *
 * @param directionDeg,centreDeg [deg]
 * @returns 0 … 180 [deg]
 * @assumes finite angles
 * @reference definition
 * @deviates none
 */
export function angularDistanceDeg(directionDeg: number, centreDeg: number): number {
  return Math.abs(wrap(directionDeg - centreDeg + 540) - 180);
}

/**
 * Whether a direction lies in a sector counted clockwise; both ends belong to it.
 *
 * @param directionDeg [deg]
 * @param fromDeg,toDeg ends [deg]; may wrap through north; 0 to 360 is the full circle, equal ends are one direction
 * @returns true when inside
 */
export function isInSector(directionDeg: number, fromDeg: number, toDeg: number): boolean {
  if (toDeg - fromDeg >= 360) return true;
  return wrap(directionDeg - fromDeg) <= wrap(toDeg - fromDeg);
}

/** Direction from which the wind passes the mast before the sonic [deg, 0–360): azimuth of the boom + 180°. */
export function mastSectorCentreDeg(
  setUp: Pick<SetUp, 'boomAzimuthDeg' | 'azimuthReference' | 'magneticDeclinationDeg'>,
): number {
  return wrap(trueBoomAzimuthDeg(setUp) + 180);
}

/**
 * Finds where the wind came from and whether it had passed the mast or another disturbed sector.
 *
 * From here on the axes are right-handed: a left-handed v is turned round.
 */
export const windDirectionStep: Step<RecipeSettings['sectors']> = (state, settings) => {
  if (state.stopped) return addSkipped(state, 'windDirection', version, {}, alreadyStopped);
  const { setUp } = state;
  const { windU, windV } = state.series;
  if (!windU || !windV) {
    return addSkipped(state, 'windDirection', version, {}, 'No horizontal wind, so no direction.');
  }
  if (setUp.axes.handedness === 'left') {
    for (let i = 0; i < windV.length; i++) windV[i] = -windV[i];
  }
  const vAzimuthDeg = vAxisAzimuthDeg(setUp);
  const { meanU, meanV, spreadDeg } = horizontalWind(windU, windV);
  const meanSpeedMs = Math.hypot(meanU, meanV);
  const directionDeg = windDirectionDeg(meanU, meanV, vAzimuthDeg);
  const known = directionDeg === directionDeg;
  state.values.windSpeed = meanSpeedMs;
  state.values.windDirection = directionDeg;
  state.values.windDirectionSpread = spreadDeg;

  const verdict: { grade: Grade; reason: string | null } = { grade: 0, reason: null };
  const judge = (grade: Grade, why: string) => {
    if (grade > verdict.grade) {
      verdict.grade = grade;
      verdict.reason = why;
    }
  };
  const mastWidth = settings.useMastSector ? setUp.mastSectorHalfWidthDeg : 0;
  const listed = settings.useListedSectors ? setUp.disturbedSectors : [];
  const mastCentre = mastSectorCentreDeg(setUp);
  const shown = `${formatNumber(directionDeg)}°`;

  if (!known && (mastWidth > 0 || listed.length > 0)) {
    judge(1, 'direction unknown');
    addReason(state, {
      key: 'sectors.unknown',
      step: 'windDirection',
      fluxes: everyFlux(),
      grade: 1,
      statistic: { label: 'mean wind speed', value: meanSpeedMs, unit: 'm s-1' },
      limits: { softLow: calmSpeedMs },
      finding: 'Wind direction unknown',
      sentence: `The mean wind is ${formatNumber(meanSpeedMs, 2)} m s-1, too weak to have a direction, so nobody can say whether it passed the mast first.`,
    });
  }
  if (known && mastWidth > 0) {
    const distance = angularDistanceDeg(directionDeg, mastCentre);
    if (distance <= mastWidth) {
      judge(2, 'behind the mast');
      addReason(state, {
        key: 'sectors.mast',
        step: 'windDirection',
        fluxes: everyFlux(),
        grade: 2,
        statistic: { label: 'angle from the mast', value: distance, unit: 'deg' },
        limits: { hardLow: mastWidth },
        finding: `Wind from ${shown}, behind mast`,
        sentence: `The wind came from ${shown} and passed the mast before the sonic: the mast lies towards ${formatNumber(mastCentre)}°, and ${formatNumber(mastWidth)}° to either side count as its wake.`,
      });
    }
  }
  if (known) {
    listed.forEach((sector, index) => {
      if (!isInSector(directionDeg, sector.fromDeg, sector.toDeg)) return;
      judge(sector.grade, sector.reason);
      addReason(state, {
        key: `sectors.${index + 1}`,
        step: 'windDirection',
        fluxes: everyFlux(),
        grade: sector.grade,
        statistic: { label: 'wind direction', value: directionDeg, unit: 'deg' },
        finding: `Wind from ${shown}, disturbed sector`,
        sentence: `The wind came from ${shown}, inside the sector ${formatNumber(sector.fromDeg)}° to ${formatNumber(sector.toDeg)}° that the set-up lists as disturbed: ${sector.reason}.`,
      });
    });
  }

  state.wind = {
    meanSpeedMs,
    directionDeg,
    directionSpreadDeg: spreadDeg,
    sectorGrade: verdict.grade,
    sectorReason: verdict.reason,
  };
  return addLedger(state, {
    step: 'windDirection',
    version,
    parameters: {
      useMastSector: settings.useMastSector,
      useListedSectors: settings.useListedSectors,
      boomAzimuthTrueDeg: trueBoomAzimuthDeg(setUp),
      vAxisAzimuthDeg: vAzimuthDeg,
      handedness: setUp.axes.handedness,
      mastSectorHalfWidthDeg: setUp.mastSectorHalfWidthDeg,
    },
    changes: {
      windSpeedMs: Number.isNaN(meanSpeedMs) ? null : meanSpeedMs,
      windDirectionDeg: known ? directionDeg : null,
      sector: verdict.reason,
    },
    summary: known
      ? `Wind from ${shown} at ${formatNumber(meanSpeedMs, 1)} m s-1${verdict.reason === null ? '.' : `: ${verdict.reason}.`}`
      : 'Too calm for a wind direction.',
  });
};
