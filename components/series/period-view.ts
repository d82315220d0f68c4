import { catalogue } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import type { PeriodDetail, PeriodRow } from '../../server/contract/api';
import type { GradeValue } from '../tokens';
import { gradeValue } from '../plots/series-plot';

/** The graded fluxes in the order people read them. */
export const shownFluxes: readonly FluxKey[] = ['co2Flux', 'latentHeat', 'sensibleHeat', 'momentum'];

export type PeriodReason = PeriodDetail['reasons'][number];

export function fluxGrade(period: Pick<PeriodRow, 'grades'>, flux: FluxKey): GradeValue {
  return gradeValue(period.grades[flux]?.grade);
}

/** Reasons that bear on a flux: what decides its grade first, then the worst. */
export function reasonsOf(period: PeriodDetail, flux: FluxKey): PeriodReason[] {
  const decided = period.grades[flux]?.decidedBy ?? [];
  const rank = (reason: PeriodReason) => {
    const at = decided.indexOf(reason.key);
    return at < 0 ? decided.length + (2 - reason.grade) : at;
  };
  return period.reasons.filter((reason) => reason.fluxes.includes(flux)).sort((a, b) => rank(a) - rank(b));
}

/**
 * The flux that speaks for a period: the worst grade, the first of equals. A flux that was rejected so thoroughly that it has no value
 * counts as rejected; one that is missing for no found reason (no such instrument) does not speak.
 */
export function verdictFlux(period: Pick<PeriodRow, 'grades'>): FluxKey {
  const rank = (flux: FluxKey) =>
    fluxGrade(period, flux) ?? ((period.grades[flux]?.decidedBy.length ?? 0) > 0 ? 2 : -1);
  return shownFluxes.reduce((worst, flux) => (rank(flux) > rank(worst) ? flux : worst));
}

/** What decides a flux's grade, as the end of a sentence: "steady-state deviation 178 %". */
export function verdictWords(period: PeriodDetail, flux: FluxKey): string {
  if (period.outcome === 'empty') return 'nothing was recorded';
  if (period.outcome === 'crossing') return 'something changed within this period';
  const deciding = reasonsOf(period, flux).find((reason) => reason.grade > 0);
  if (deciding) return lowerFirst(deciding.finding);
  return fluxGrade(period, flux) === null ? 'not measured' : 'every test within its limits';
}

/** Lower-cases the first letter of a sentence that begins with a plain word; symbols (CO2, H2O, Ts) stay. */
export function lowerFirst(text: string): string {
  return /^[A-Z][a-z]+[ -]/.test(text) && !/^Ts\b/.test(text)
    ? text.charAt(0).toLowerCase() + text.slice(1)
    : text;
}

export interface ValueGroup {
  group: string;
  title: string;
  rows: { key: string; value: number | null }[];
}

const groupTitles: [string, string][] = [
  ['flux', 'Fluxes'],
  ['wind', 'Wind'],
  ['air', 'Air'],
  ['gas', 'Gases'],
  ['turbulence', 'Turbulence'],
  ['correction', 'Corrections'],
  ['test', 'Steady state and integral turbulence'],
  ['count', 'Samples'],
  ['screening', 'Screening'],
];

/** All values of a period, grouped and ordered as the catalogue does; keys the catalogue does not know are left out. */
export function valueGroups(values: Record<string, number | null>): ValueGroup[] {
  return groupTitles.flatMap(([group, title]) => {
    const rows = catalogue
      .filter((entry) => entry.group === group && entry.key in values)
      .map(({ key }) => ({ key, value: values[key] ?? null }));
    return rows.length > 0 ? [{ group, title, rows }] : [];
  });
}

/** Names of the pipeline's steps as the ledger shows them. */
export const stepTitles: Record<string, string> = {
  completeness: 'Time base and completeness',
  diagnostics: 'Diagnostics and signal strength',
  plausibility: 'Plausibility limits',
  units: 'Unit conversion',
  despiking: 'Despiking',
  screening: 'Screening tests',
  crosswind: 'Crosswind correction',
  windDirection: 'Wind direction and sectors',
  tilt: 'Tilt correction',
  detrending: 'Detrending',
  lag: 'Time lag',
  moments: 'Moments and covariances',
  spectralLoss: 'Spectral correction',
  density: 'Humidity and density terms',
  fluxes: 'Fluxes and stability',
  steadyState: 'Steady-state test',
  integralTurbulence: 'Integral turbulence',
  uncertainty: 'Random uncertainty',
  storage: 'Storage',
  grades: 'Grades',
};
