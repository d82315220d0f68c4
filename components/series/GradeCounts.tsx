import { View } from 'react-native';
import { fluxLabels } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import { GradeMark, Text, UnitText } from '../primitives';

export interface GradeCountsProps {
  flux: FluxKey;
  grades: (number | null | undefined)[];
}

/** "FC grades ● 31 good ▲ 9 usable ✕ 8 rejected ○ 0 missing": the strip says which flux it grades. */
export function GradeCounts({ flux, grades }: GradeCountsProps) {
  const count = (grade: number | null) => grades.filter((one) => (one ?? null) === grade).length;
  return (
    <View style={{ flexDirection: 'row', flexWrap: 'wrap', gap: 14, alignItems: 'center' }}>
      <Text variant="label">
        <UnitText>{fluxLabels[flux].symbol}</UnitText> grades
      </Text>
      {([0, 1, 2, null] as const).map((grade) => (
        <GradeMark key={String(grade)} grade={grade} show="word" count={String(count(grade))} />
      ))}
    </View>
  );
}
