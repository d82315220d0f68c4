import { View } from 'react-native';
import { gradeColour, gradeOrder, gradeWord, useTheme } from '../tokens';
import { countOf, sharesInPercent } from './grade-counts';
import type { GradeCounts } from './grade-counts';

export interface GradeSharesProps {
  counts: GradeCounts;
  /** Whose grades these are: "FC, last 30 days". */
  label: string;
  height?: number;
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
