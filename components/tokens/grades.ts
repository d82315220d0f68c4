import type { ThemeColours } from './theme';

/** 0 good, 1 usable, 2 rejected, null missing. */
export type GradeValue = 0 | 1 | 2 | null;

export const gradeOrder: readonly GradeValue[] = [0, 1, 2, null];

export function gradeWord(grade: GradeValue): string {
  if (grade === null) return 'missing';
  return (['good', 'usable', 'rejected'] as const)[grade];
}

export function gradeColour(grade: GradeValue, colour: ThemeColours): string {
  if (grade === null) return colour.missing;
  return [colour.good, colour.usable, colour.rejected][grade] ?? colour.missing;
}

/** "0 good", "2 rejected", "missing": how a grade is spoken. */
export function gradeSpoken(grade: GradeValue): string {
  return grade === null ? 'missing' : `${grade} ${gradeWord(grade)}`;
}
