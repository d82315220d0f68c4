import { fluxLabels, isQuantity, quantity } from '../../processing/catalogue';
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

/** "FC 12:30–13:00 graded 2: steady-state deviation 47 %" without the mark; the flux with the worst grade speaks. */
export function verdictFlux(period: Pick<PeriodRow, 'grades'>): FluxKey {
  const worst = [...shownFluxes].sort(
    (a, b) => (fluxGrade(period, b) ?? -1) - (fluxGrade(period, a) ?? -1),
  )[0];
  return worst ?? 'co2Flux';
}

export function verdictWords(period: PeriodDetail, flux: FluxKey): string {
  const { symbol } = fluxLabels[flux];
  if (period.outcome === 'empty') return 'nothing was recorded in this period';
  if (period.outcome === 'crossing') return 'no result: something changed within this period';
  const grade = fluxGrade(period, flux);
  if (grade === null) return `${symbol} has no value`;
  const deciding = reasonsOf(period, flux).find((reason) => reason.grade > 0);
  return deciding ? lowerFirst(deciding.finding) : 'every test within its limits';
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

/** All values of a period, grouped as the catalogue groups them; keys the catalogue does not know are left out. */
export function valueGroups(values: Record<string, number | null>): ValueGroup[] {
  return groupTitles.flatMap(([group, title]) => {
    const rows = Object.entries(values)
      .filter(([key]) => isQuantity(key) && quantity(key).group === group)
      .map(([key, value]) => ({ key, value }));
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
