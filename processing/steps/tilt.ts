import { countValid } from '../numerics/moments';
import { seriesKernel } from '../numerics/series-kernel';
import type { RecipeSettings } from '../schemas/recipe';
import type { PeriodState, TiltState } from '../state';
import { everyFlux, addLedger, addReason, addSkipped, formatNumber } from './ledger';

const version = 1;

/** Rows of a rotation from instrument to streamline axes. */
export type RotationMatrix = TiltState['matrix'];

export interface MeanWind {
  /** Means over the samples in which u, v and w are all valid [m s-1]; NaN with none. */
  u: number;
  v: number;
  w: number;
  /** Samples behind the means. */
  samples: number;
}

/**
 * Mean wind vector over the samples in which all three components are valid.
 *
 * @param u,v,w components in instrument axes, n samples, NaN where missing (not changed) [m s-1]
 * @returns means and their number of samples
 * @assumes right-handed axes
 * @reference definition
 * @deviates none
 */
export function meanWind(u: Float64Array, v: Float64Array, w: Float64Array): MeanWind {
  const kernel = seriesKernel(u.length);
  kernel.run.vectorSums(
    kernel.pointerOf(u, 0),
    kernel.pointerOf(v, 1),
    kernel.pointerOf(w, 2),
    u.length,
    kernel.out,
  );
  const [samples, sumU, sumV, sumW] = kernel.results;
  if (samples === 0) return { u: Number.NaN, v: Number.NaN, w: Number.NaN, samples };
  return { u: sumU / samples, v: sumV / samples, w: sumW / samples, samples };
}

export interface Rotation {
  yawRad: number;
  pitchRad: number;
  matrix: RotationMatrix;
}

/**
 * Double rotation: turned about the vertical until mean v vanishes, then about the new lateral axis until mean w vanishes.
 *
 * η = atan2(v̄, ū), θ = atan2(w̄, √(ū² + v̄²)), R = R₂(θ) R₁(η)
 *
 * @param u,v,w mean wind in instrument axes [m s-1]
 * @returns angles [rad] and the rotation matrix, row by row; NaN angles give a NaN matrix
 * @assumes the mean flow is along the surface: a mean vertical wind, an offset of w and a roll of the sonic cannot be told apart
 * @reference Kaimal & Finnigan (1994), Atmospheric Boundary Layer Flows, ch. 6; McMillen (1988), Boundary-Layer Meteorol. 43:231–245
 *   (from memory)
 * @deviates none
 */
export function doubleRotation(u: number, v: number, w: number): Rotation {
  const yawRad = Math.atan2(v, u);
  const pitchRad = Math.atan2(w, Math.hypot(u, v));
  const cosYaw = Math.cos(yawRad);
  const sinYaw = Math.sin(yawRad);
  const cosPitch = Math.cos(pitchRad);
  const sinPitch = Math.sin(pitchRad);
  return {
    yawRad,
    pitchRad,
    matrix: [
      cosPitch * cosYaw,
      cosPitch * sinYaw,
      sinPitch,
      -sinYaw,
      cosYaw,
      0,
      -sinPitch * cosYaw,
      -sinPitch * sinYaw,
      cosPitch,
    ],
  };
}

/**
 * Rotates three components in place. A sample with any component missing loses all three: a rotated component is made of all.
 *
 * @param u,v,w components, n samples, NaN where missing; replaced by the rotated ones [m s-1]
 * @param matrix rows of the rotation
 * @returns samples that have all three components
 */
export function rotateInPlace(
  u: Float64Array,
  v: Float64Array,
  w: Float64Array,
  matrix: RotationMatrix,
): number {
  const kernel = seriesKernel(u.length);
  const places = [kernel.pointerOf(u, 0), kernel.pointerOf(v, 1), kernel.pointerOf(w, 2)] as const;
  kernel.results.set(matrix);
  kernel.run.rotate(...places, u.length, kernel.out);
  kernel.bringBack(u, 0);
  kernel.bringBack(v, 1);
  kernel.bringBack(w, 2);
  return countValid(w);
}

/**
 * Turns the axes into the mean flow. Afterwards `state.series` holds wind along, across and normal to the streamline.
 *
 * A further method (planar fit) is one more member of the recipe's union; it writes the same `TiltState`.
 */
export function tiltStep(state: PeriodState, settings: RecipeSettings['tilt']): PeriodState {
  const parameters = { method: settings.method };
  const { windU, windV, windW } = state.series;
  if (state.stopped)
    return addSkipped(state, 'tilt', version, parameters, 'Not done: the period was stopped before.');
  const before = windU && windV && windW ? meanWind(windU, windV, windW) : null;
  if (!windU || !windV || !windW || !before || before.samples === 0) {
    state.stopped = true;
    addReason(state, {
      key: 'tilt.noWind',
      step: 'tilt',
      fluxes: everyFlux(),
      grade: 2,
      statistic: { label: 'samples with u, v and w', value: before?.samples ?? 0, unit: '1' },
      limits: { hardLow: 1 },
      finding: 'No complete wind sample',
      sentence:
        'No sample holds all three wind components, so the axes cannot follow the flow and there is no flux.',
    });
    return addSkipped(
      state,
      'tilt',
      version,
      parameters,
      'Not done: no sample holds all three wind components.',
    );
  }
  const counts = {
    windU: { before: countValid(windU), after: before.samples },
    windV: { before: countValid(windV), after: before.samples },
    windW: { before: countValid(windW), after: before.samples },
  };
  const { yawRad, pitchRad, matrix } = doubleRotation(before.u, before.v, before.w);
  rotateInPlace(windU, windV, windW, matrix);
  const after = meanWind(windU, windV, windW);
  state.tilt = {
    method: settings.method,
    yawRad,
    pitchRad,
    rollRad: 0,
    matrix,
    meanWBeforeMs: before.w,
    meanWAfterMs: after.w,
  };
  state.values.yawAngle = yawRad;
  state.values.pitchAngle = pitchRad;
  state.values.meanWUnrotated = before.w;
  const degrees = 180 / Math.PI;
  return addLedger(state, {
    step: 'tilt',
    version,
    parameters,
    counts,
    changes: {
      yawAngle: yawRad,
      pitchAngle: pitchRad,
      meanWUnrotated: before.w,
      meanWAfterMs: after.w,
    },
    summary: `Turned by ${formatNumber(yawRad * degrees, 1)}° about the vertical and ${formatNumber(pitchRad * degrees, 2)}° in the wind's plane, so that mean v and mean w vanish; mean w was ${formatNumber(before.w, 3)} m s-1.`,
  });
}
