import { View } from 'react-native';
import { gradeColour, gradeOrder, gradeWord, useTheme } from '../tokens';
import type { GradeValue } from '../tokens';

export interface GradeCounts {
  good: number;
  usable: number;
  rejected: number;
  missing: number;
}

export interface GradeSharesProps {
  counts: GradeCounts;
  /** Whose grades these are: "FC, last 30 days". */
  label: string;
  height?: number;
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

/** One bar to scale: good, usable, rejected filled, missing hollow and dashed. */
export function GradeShares({ counts, label, height = 12 }: GradeSharesProps) {
  const { colour } = useTheme();
  const percents = sharesInPercent(counts);
  const spoken = gradeOrder.map((grade, index) => `${percents[index]} % ${gradeWord(grade)}`).join(', ');
  return (
    <View
      role="img"
      aria-label={`${label}: ${spoken}`}
      style={{ flexDirection: 'row', height, gap: 2, alignSelf: 'stretch' }}
    >
      {gradeOrder.map((grade) => {
        const count = countOf(counts, grade);
        if (count === 0) return null;
        return (
          <View
            key={gradeWord(grade)}
            style={
              grade === null
                ? {
                    flexGrow: count,
                    flexBasis: 0,
                    minWidth: 3,
                    borderWidth: 1,
                    borderStyle: 'dashed',
                    borderColor: colour.missing,
                  }
                : { flexGrow: count, flexBasis: 0, minWidth: 2, backgroundColor: gradeColour(grade, colour) }
            }
          />
        );
      })}
    </View>
  );
}
