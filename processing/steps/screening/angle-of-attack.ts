import { countValid } from '../../numerics/moments';
import { quantiles } from '../../numerics/selection';
import { seriesKernel } from '../../numerics/series-kernel';

const degrees = 180 / Math.PI;

export interface AngleOfAttack {
  /** Samples with all three components. */
  n: number;
  /** Share of samples steeper than the acceptance angle, up or down [1]; NaN when n = 0. */
  steepShare: number;
  /** 1st, 50th and 99th percentile of the angle [deg]. */
  percentilesDeg: [number, number, number];
}

/**
 * How often the wind meets the sonic more steeply than it accepts.
 *
 * α = atan2(w, √(u² + v²)), in the axes of the instrument
 *
 * The angle rises with w/√(u² + v²), so the ratio is compared and ordered instead of the angle.
 *
 * @param windU,windV,windW n samples, not mutated [m s⁻¹]; a sample counts where all three are there
 * @param acceptanceDeg largest angle accepted; an angle on it is still accepted [deg]
 * @returns share and percentiles
 * @assumes the axes of the instrument, before any rotation
 * @reference project choice; Gash & Dolman (2003), Agric. For. Meteorol. 119, found 20–50 % of daytime flux outside of acceptance angles
 * @deviates none
 */
export function angleOfAttack(
  windU: Float64Array,
  windV: Float64Array,
  windW: Float64Array,
  acceptanceDeg: number,
): AngleOfAttack {
  const steepest = acceptanceDeg >= 90 ? Infinity : Math.tan(acceptanceDeg / degrees);
  // A ratio one rounding above the limit is the limit.
  const limit = steepest * (1 + 4 * Number.EPSILON);
  const { length } = windW;
  const kernel = seriesKernel(length);
  const [, into] = kernel.work;
  // Still air has no angle; it counts as level.
  const steep = kernel.run.slopes(
    kernel.pointerOf(windU, 0),
    kernel.pointerOf(windV, 1),
    kernel.pointerOf(windW, 2),
    ...([length, limit, into] as const),
  );
  const ratios = kernel.valuesAt(into, length);
  const n = countValid(ratios);
  const [p1, p50, p99] = quantiles(ratios, [0.01, 0.5, 0.99]);
  return {
    n,
    steepShare: n === 0 ? NaN : steep / n,
    percentilesDeg: [angleDeg(p1), angleDeg(p50), angleDeg(p99)],
  };
}

function angleDeg(ratio: number): number {
  return Math.atan(ratio) * degrees;
}
