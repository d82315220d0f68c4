import { defaultValue } from '../../defaults';
import type { RecordStatistics } from './record';

const calmSpeedMs = defaultValue('screening.calmForNonstationarityMs');

export interface WindNonstationarity {
  /** Change of the along-wind component over the record, by mean speed [1]. */
  alongWind: number;
  /** Change of the cross-wind component, by mean speed [1]. */
  crossWind: number;
  /** Change of the wind vector, by mean speed [1]. */
  vector: number;
}

/**
 * Change of the horizontal wind over the record, from least-squares lines.
 *
 * du = b_u (N − 1), RNu = du/U, RNv = dv/U, RNS = √(du² + dv²)/U, along and across the mean wind
 *
 * Lines are linear in their values, so the slopes are turned into the mean wind instead of the series.
 *
 * @param windU,windV statistics of both components, in any horizontal axes
 * @param length N, samples of the record, valid or not
 * @returns all three ratios; NaN in calm (mean speed below 0.1 m s⁻¹)
 * @assumes both components are valid at about the same samples
 * @reference Vickers & Mahrt (1997), J. Atmos. Oceanic Technol. 14:512–526 (from memory)
 * @deviates none
 */
export function windNonstationarity(
  windU: Pick<RecordStatistics, 'mean' | 'line'>,
  windV: Pick<RecordStatistics, 'mean' | 'line'>,
  length: number,
): WindNonstationarity {
  const speed = Math.hypot(windU.mean, windV.mean);
  if (!(speed >= calmSpeedMs)) return { alongWind: NaN, crossWind: NaN, vector: NaN };
  const cosine = windU.mean / speed;
  const sine = windV.mean / speed;
  const du = windU.line.slope * (length - 1);
  const dv = windV.line.slope * (length - 1);
  return {
    alongWind: (cosine * du + sine * dv) / speed,
    crossWind: (-sine * du + cosine * dv) / speed,
    vector: Math.hypot(du, dv) / speed,
  };
}
