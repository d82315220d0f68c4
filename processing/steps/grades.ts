import { fluxLabels } from '../catalogue';
import { defaultValue } from '../defaults';
import type { RecipeSettings } from '../schemas/recipe';
import type { FluxGrade, FluxKey, Grade, PeriodState, Reason } from '../state';
import { fluxKeys } from '../state';
import { addLedger } from './ledger';

const version = 1;

const classLimitsPercent = [1, 2, 3, 4, 5, 6, 7, 8].map((n) => defaultValue(`class9.limit${n}`));

/**
 * Class 1 to 9 of a deviation; a value on a limit belongs to the better class.
 *
 * @param percent deviation [%]
 * @returns class; NaN for NaN
 * @reference Foken et al. (2004), Handbook of Micrometeorology, ch. 9 (from memory)
 */
export function deviationClass(percent: number): number {
  if (!Number.isFinite(percent)) return percent === Infinity ? 9 : Number.NaN;
  const found = classLimitsPercent.findIndex((limit) => percent <= limit);
  return found === -1 ? 9 : found + 1;
}

/** Rows of the combination: overall class when all three classes lie within; the first row that matches counts. */
const combinationRows: readonly {
  overall: number;
  steady: [number, number];
  turbulence: [number, number];
  orientation: number;
}[] = [
  { overall: 1, steady: [1, 1], turbulence: [1, 2], orientation: 5 },
  { overall: 2, steady: [2, 2], turbulence: [1, 2], orientation: 5 },
  { overall: 3, steady: [1, 2], turbulence: [3, 4], orientation: 5 },
  { overall: 4, steady: [3, 4], turbulence: [1, 2], orientation: 5 },
  { overall: 5, steady: [1, 4], turbulence: [3, 5], orientation: 5 },
  { overall: 6, steady: [5, 5], turbulence: [1, 5], orientation: 5 },
  { overall: 7, steady: [1, 6], turbulence: [1, 6], orientation: 8 },
  { overall: 8, steady: [1, 8], turbulence: [1, 8], orientation: 8 },
];

/**
 * Overall class 1 to 9 from the classes of steady state, integral turbulence and sonic orientation.
 *
 * @param steady class of the steady-state deviation, 1 … 9
 * @param turbulence class of the integral turbulence deviation, 1 … 9
 * @param orientation class of the angle between wind and sensor, 1 … 9
 * @returns 1–3 fundamental research, 4–6 continuous observation, 7–8 orientation only, 9 discard
 * @reference Foken et al. (2004), Handbook of Micrometeorology, ch. 9 (from memory, doubtful: the printed table is to be compared)
 * @deviates a worse input never gives a better result, which holds for these rows and is tested over all combinations
 */
export function combinedClass(steady: number, turbulence: number, orientation: number): number {
  const row = combinationRows.find(
    (one) =>
      steady >= one.steady[0] &&
      steady <= one.steady[1] &&
      turbulence >= one.turbulence[0] &&
      turbulence <= one.turbulence[1] &&
      orientation <= one.orientation,
  );
  return row?.overall ?? 9;
}

/**
 * Grade 0, 1 or 2 from steady state and integral turbulence.
 *
 * 0: both within `good`; 1: both within `usable`; 2: otherwise. Without integral turbulence steady state stands alone.
 *
 * @param steadyPercent steady-state deviation [%]; NaN when not testable
 * @param turbulencePercent integral turbulence deviation [%]; NaN when not testable
 * @param limits of the two tests [%]
 * @returns grade; null when steady state is not testable
 * @reference Mauder & Foken (2004), Arbeitsergebnisse Univ. Bayreuth 26; Mauder et al. (2013), Agric. For. Meteorol. 169:122–135 (from
 *   memory; the outer limit of the later paper may be narrower, which is why it is a setting)
 */
export function steadyStateTurbulenceGrade(
  steadyPercent: number,
  turbulencePercent: number,
  limits: Pick<RecipeSettings, 'steadyState' | 'integralTurbulence'>,
): Grade | null {
  if (Number.isNaN(steadyPercent)) return null;
  const of = (
    percent: number,
    { goodPercent, usablePercent }: { goodPercent: number; usablePercent: number },
  ): Grade => (percent > usablePercent ? 2 : percent > goodPercent ? 1 : 0);
  const steady = of(steadyPercent, limits.steadyState);
  const turbulence = Number.isNaN(turbulencePercent) ? 0 : of(turbulencePercent, limits.integralTurbulence);
  return worse(steady, turbulence);
}

function worse(a: Grade, b: Grade): Grade {
  return a > b ? a : b;
}

/**
 * How many times its limit a finding's statistic is, so that findings of different tests can be put in order.
 *
 * Against a lower limit it is the limit over the value. A finding without statistic or limits gives 0.
 *
 * @returns ≥ 0; Infinity for a value of 0 below a lower limit
 * @reference project choice
 */
export function overshoot(reason: Partial<Pick<Reason, 'statistic' | 'limits'>>): number {
  const value = reason.statistic?.value ?? null;
  if (value === null || !reason.limits) return 0;
  const { softLow, softHigh, hardLow, hardHigh } = reason.limits;
  const high = hardHigh ?? softHigh;
  const low = hardLow ?? softLow;
  const above = high !== null && high > 0 && value > high ? value / high : 0;
  const below = low !== null && low > 0 && value < low ? (value > 0 ? low / value : Infinity) : 0;
  return Math.max(above, below);
}

/**
 * The worst grade among findings, and which findings have it: the one farthest beyond its limit first, equals in the order of the chain.
 *
 * @param reasons findings that bear on one flux
 * @returns grade 0 and no key when nothing was found against it
 */
export function worstOf(
  reasons: readonly (Pick<Reason, 'key' | 'grade'> & Partial<Pick<Reason, 'statistic' | 'limits'>>)[],
): {
  grade: Grade;
  decidedBy: string[];
} {
  const grade = reasons.reduce<Grade>((worst, reason) => worse(worst, reason.grade), 0);
  const deciding = grade === 0 ? [] : reasons.filter((reason) => reason.grade === grade);
  return {
    grade,
    decidedBy: deciding
      .map((reason) => ({ key: reason.key, beyond: overshoot(reason) }))
      .sort((a, b) => (a.beyond === b.beyond ? 0 : b.beyond - a.beyond))
      .map(({ key }) => key),
  };
}

/** Integral turbulence deviation that counts for a flux [%]: w for scalars, the worse of u and w for momentum. */
function turbulencePercentOf(flux: FluxKey, values: PeriodState['values']): number {
  const w = (values['integralTurbulence.windW'] ?? Number.NaN) * 100;
  if (flux !== 'momentum') return w;
  const u = (values['integralTurbulence.windU'] ?? Number.NaN) * 100;
  if (Number.isNaN(u)) return w;
  return Number.isNaN(w) ? u : Math.max(u, w);
}

/**
 * Grades of the four fluxes from all that was found.
 *
 * The overall grade is the worst of all findings that bear on a flux. Beside it stand, unaffected by other findings, the 0/1/2 grade of
 * steady state and integral turbulence, and the nine classes. An omnidirectional sonic is in orientation class 1 unless the wind came from
 * an excluded sector, then in class 9. Where integral turbulence is not testable its class is taken as 1 (project choice).
 *
 * @param state after all steps
 * @returns a grade per flux; without a value there is none, and `decidedBy` says what rejected it
 */
export function gradePeriod(state: PeriodState): Record<FluxKey, FluxGrade> {
  const grades = {} as Record<FluxKey, FluxGrade>;
  for (const flux of fluxKeys) {
    const { grade, decidedBy } = worstOf(state.reasons.filter((reason) => reason.fluxes.includes(flux)));
    if (!Number.isFinite(state.values[fluxLabels[flux].valueKey])) {
      grades[flux] = { grade: null, ssitc: null, class9: null, decidedBy: grade === 2 ? decidedBy : [] };
      continue;
    }
    const steadyPercent = (state.values[`steadyState.${flux}`] ?? Number.NaN) * 100;
    const turbulencePercent = turbulencePercentOf(flux, state.values);
    const steadyClass = deviationClass(steadyPercent);
    const turbulenceClass = deviationClass(turbulencePercent);
    const orientationClass = state.wind?.sectorGrade === 2 ? 9 : 1;
    grades[flux] = {
      grade,
      ssitc: steadyStateTurbulenceGrade(steadyPercent, turbulencePercent, state.settings),
      class9: Number.isNaN(steadyClass)
        ? null
        : combinedClass(steadyClass, Number.isNaN(turbulenceClass) ? 1 : turbulenceClass, orientationClass),
      decidedBy,
    };
  }
  return grades;
}

const gradeWords: Record<Grade, string> = { 0: 'good', 1: 'usable', 2: 'rejected' };

/** Writes the grades into the ledger; the grades themselves go into the result through `gradePeriod`. */
export function gradesStep(
  state: PeriodState,
  settings: Pick<RecipeSettings, 'steadyState' | 'integralTurbulence'>,
): PeriodState {
  const grades = gradePeriod(state);
  const changes: Record<string, number | string | null> = {};
  const told: string[] = [];
  for (const flux of fluxKeys) {
    const { grade, ssitc, class9, decidedBy } = grades[flux];
    changes[`grade.${flux}`] = grade;
    changes[`ssitc.${flux}`] = ssitc;
    changes[`class9.${flux}`] = class9;
    changes[`decidedBy.${flux}`] = decidedBy.length > 0 ? decidedBy.join(', ') : null;
    told.push(`${fluxLabels[flux].symbol} ${grade === null ? 'no value' : gradeWords[grade]}`);
  }
  return addLedger(state, {
    step: 'grades',
    version,
    parameters: {
      steadyStateGoodPercent: settings.steadyState.goodPercent,
      steadyStateUsablePercent: settings.steadyState.usablePercent,
      integralTurbulenceGoodPercent: settings.integralTurbulence.goodPercent,
      integralTurbulenceUsablePercent: settings.integralTurbulence.usablePercent,
    },
    changes,
    summary: `Grades by the worst finding: ${told.join(', ')}.`,
  });
}
