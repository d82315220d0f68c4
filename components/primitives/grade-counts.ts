import { gradeOrder, gradeWord } from '../tokens/grades';
import type { GradeValue } from '../tokens/grades';

export interface GradeCounts {
  good: number;
  usable: number;
  rejected: number;
  missing: number;
}

export function countOf(counts: GradeCounts, grade: GradeValue): number {
  return counts[gradeWord(grade) as keyof GradeCounts];
}

/** Whole percents that add up to 100 (largest remainders get the odd ones). */
export function sharesInPercent(counts: GradeCounts): number[] {
  const values = gradeOrder.map((grade) => countOf(counts, grade));
  const total = values.reduce((sum, value) => sum + value, 0);
  if (total === 0) return values.map(() => 0);
  const exact = values.map((value) => (value / total) * 100);
  const whole = exact.map(Math.floor);
  const left = 100 - whole.reduce((sum, value) => sum + value, 0);
  const byRemainder = exact
    .map((value, index) => ({ index, remainder: value - Math.floor(value) }))
    .sort((a, b) => b.remainder - a.remainder);
  for (const { index } of byRemainder.slice(0, left)) whole[index] = (whole[index] ?? 0) + 1;
  return whole;
}
