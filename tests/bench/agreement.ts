import type { FluxKey, PeriodResult } from '../../processing/state';

/** Whether our periods and those of the numpy chain say the same, value by value. Speed of different answers is not compared. */

interface Comparison {
  /** Column of the reference's table. */
  column: string;
  /** Key of our value, and what turns it into the reference's unit. */
  key: string;
  factor?: number;
  /** Allowed difference: the larger of relative × size and absolute [unit of the reference]. */
  relative: number;
  absolute: number;
  /** Where one side has no value, this flux must be rejected on ours. */
  flux: FluxKey;
  /** Not compared where the reference has no heat flux, which it drops with a frozen series while we keep and reject it. */
  needsHeat?: true;
}

/** Chunks hold single precision: 6e-8 of a value, which for CO2 is 1e-4 of its fluctuations, averaged over the samples. */
const storedInSingles = 1e-5;
/** The two integrate transfer functions on grids of their own. */
const integrals = 2e-4;
/** Values beside spikes that the numpy chain leaves in what it averages for storage [µmol m-2 s-1]. */
const spikesAtEdges = 0.02;

const same = { relative: storedInSingles, absolute: 0 };
const corrected = { relative: integrals, absolute: 0, needsHeat: true } as const;

export const comparisons: readonly Comparison[] = [
  { column: 'cov_uw', key: 'covUW', ...same, flux: 'momentum' },
  { column: 'cov_vw', key: 'covVW', relative: storedInSingles, absolute: 1e-9, flux: 'momentum' },
  { column: 'cov_wts', key: 'covWTs', ...same, flux: 'sensibleHeat' },
  { column: 'cov_wh2o', key: 'covWH2o', factor: 1e3, ...same, flux: 'latentHeat' },
  { column: 'cov_wco2', key: 'covWCo2', factor: 1e3, ...same, flux: 'co2Flux' },
  { column: 'sigma_u', key: 'uSigma', ...same, flux: 'momentum' },
  { column: 'sigma_v', key: 'vSigma', ...same, flux: 'momentum' },
  { column: 'sigma_w', key: 'wSigma', ...same, flux: 'momentum' },
  { column: 'sigma_ts', key: 'sonicTemperatureSigma', ...same, flux: 'sensibleHeat' },
  { column: 'sigma_co2', key: 'co2Sigma', factor: 1e3, ...same, flux: 'co2Flux' },
  { column: 'sigma_h2o', key: 'h2oSigma', factor: 1e3, ...same, flux: 'latentHeat' },
  { column: 'lag_co2', key: 'lagCo2', relative: 0, absolute: 1e-9, flux: 'co2Flux' },
  { column: 'lag_h2o', key: 'lagH2o', relative: 0, absolute: 1e-9, flux: 'latentHeat' },
  { column: 'wind_dir', key: 'windDirection', relative: 0, absolute: 0.01, flux: 'momentum' },
  { column: 't_air', key: 'airTemperature', relative: 1e-6, absolute: 0, flux: 'sensibleHeat' },
  { column: 'ustar', key: 'ustar', ...corrected, flux: 'momentum' },
  { column: 'H', key: 'sensibleHeat', ...corrected, flux: 'sensibleHeat' },
  { column: 'LE', key: 'latentHeat', ...corrected, flux: 'latentHeat' },
  { column: 'FC', key: 'co2Flux', factor: 1e6, ...corrected, flux: 'co2Flux' },
  { column: 'wT', key: 'covWT', ...corrected, flux: 'sensibleHeat' },
  { column: 'E', key: 'evaporation', ...corrected, flux: 'latentHeat' },
  { column: 'zeta', key: 'zeta', ...corrected, flux: 'sensibleHeat' },
  { column: 'L', key: 'obukhovLength', ...corrected, flux: 'sensibleHeat' },
  { column: 'cf_tau', key: 'spectralFactorMomentum', ...corrected, flux: 'momentum' },
  { column: 'cf_H', key: 'spectralFactorHeat', ...corrected, flux: 'sensibleHeat' },
  { column: 'cf_h2o', key: 'spectralFactorH2o', ...corrected, flux: 'latentHeat' },
  { column: 'cf_co2', key: 'spectralFactorCo2', ...corrected, flux: 'co2Flux' },
  { column: 'ru_ustar', key: 'ustarRandom', ...corrected, flux: 'momentum' },
  { column: 'ru_H', key: 'sensibleHeatRandom', ...corrected, flux: 'sensibleHeat' },
  { column: 'ru_LE', key: 'latentHeatRandom', ...corrected, flux: 'latentHeat' },
  { column: 'ru_FC', key: 'co2FluxRandom', factor: 1e6, ...corrected, flux: 'co2Flux' },
  // Shares that may be next to nothing: differences of nearly equal numbers.
  { column: 'rn_tau', key: 'steadyState.momentum', relative: 1e-5, absolute: 1e-7, flux: 'momentum' },
  { column: 'rn_H', key: 'steadyState.sensibleHeat', relative: 1e-5, absolute: 1e-7, flux: 'sensibleHeat' },
  { column: 'rn_LE', key: 'steadyState.latentHeat', relative: 1e-5, absolute: 1e-7, flux: 'latentHeat' },
  { column: 'rn_FC', key: 'steadyState.co2Flux', relative: 1e-5, absolute: 1e-7, flux: 'co2Flux' },
  { column: 'itc_w', key: 'integralTurbulence.windW', relative: 0, absolute: 1e-4, flux: 'momentum' },
  { column: 'itc_u', key: 'integralTurbulence.windU', relative: 0, absolute: 1e-4, flux: 'momentum' },
  {
    column: 'SC',
    key: 'co2Storage',
    factor: 1e6,
    relative: 1e-3,
    absolute: spikesAtEdges,
    flux: 'co2Flux',
  },
];

const gradeColumns: Record<FluxKey, string> = {
  momentum: 'q_tau',
  sensibleHeat: 'q_H',
  latentHeat: 'q_LE',
  co2Flux: 'q_FC',
};

export type ReferenceRow = Record<string, string>;

export function readReference(csv: string): ReferenceRow[] {
  const [head, ...rows] = csv.trim().split(/\r?\n/);
  const names = head.split(',');
  return rows.map((row) => {
    const fields = row.split(',');
    return Object.fromEntries(names.map((name, i) => [name, fields[i] ?? '']));
  });
}

export interface Agreement {
  values: number;
  grades: number;
  /** What differs by more than is allowed; empty: the two agree. */
  problems: string[];
  /** Largest difference of each value, by what is allowed. */
  largest: { column: string; period: number; ours: number; reference: number; ofAllowed: number }[];
}

export function compare(ours: readonly PeriodResult[], reference: readonly ReferenceRow[]): Agreement {
  const agreement: Agreement = { values: 0, grades: 0, problems: [], largest: [] };
  const { problems } = agreement;
  if (ours.length !== reference.length) {
    problems.push(`${ours.length} periods against ${reference.length}`);
    return agreement;
  }
  for (const { column, key, factor = 1, relative, absolute, flux, needsHeat } of comparisons) {
    let worst: Agreement['largest'][number] | null = null;
    reference.forEach((row, period) => {
      if (needsHeat && !Number.isFinite(parseFloat(row.H))) return;
      const expected = parseFloat(row[column]);
      const value = ours[period].values[key];
      const found = value === null || value === undefined ? NaN : value * factor;
      if (Number.isNaN(expected) && Number.isNaN(found)) return;
      if (Number.isNaN(expected) !== Number.isNaN(found)) {
        const { grade } = ours[period].grades[flux];
        if (grade !== 2 && grade !== null)
          problems.push(`period ${period}, ${column}: ${found} against ${expected}`);
        return;
      }
      agreement.values++;
      const allowed = Math.max(relative * Math.max(Math.abs(expected), Math.abs(found)), absolute);
      const ofAllowed = Math.abs(found - expected) / allowed;
      if (ofAllowed > 1) problems.push(`period ${period}, ${column}: ${found} against ${expected}`);
      if (worst === null || ofAllowed > worst.ofAllowed)
        worst = { column, period, ours: found, reference: expected, ofAllowed };
    });
    if (worst !== null) agreement.largest.push(worst);
  }
  for (const [flux, column] of Object.entries(gradeColumns)) {
    reference.forEach((row, period) => {
      // A flux that is not there is as good as rejected.
      const expected = Number.isFinite(parseFloat(row[column])) ? parseFloat(row[column]) : 2;
      const found = ours[period].grades[flux as FluxKey].grade ?? 2;
      agreement.grades++;
      if (found !== expected)
        problems.push(
          `period ${period}, grade of ${flux}: ${found} (${ours[period].grades[flux as FluxKey].decidedBy.join(', ')}) against ${expected} (${row.flags})`,
        );
    });
  }
  return agreement;
}
