import { memo } from 'react';
import { View } from 'react-native';
import { fluxLabels } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import { formatCount } from '../format/numbers';
import { GradeMark, Text, UnitText } from '../primitives';
import type { GradeCounts as Counts } from '../primitives/grade-counts';

/** "FC grades ● 31 good ▲ 9 usable ✕ 8 rejected ○ 0 missing": the strip says which flux it grades. */
export const GradeCounts = memo(function GradeCounts({ flux, counts }: { flux: FluxKey; counts: Counts }) {
  return (
    <View style={{ flexDirection: 'row', flexWrap: 'wrap', columnGap: 14, rowGap: 6, alignItems: 'center' }}>
      <Text variant="label">
        <UnitText>{fluxLabels[flux].symbol}</UnitText> grades
      </Text>
      <GradeMark grade={0} show="word" count={formatCount(counts.good)} />
      <GradeMark grade={1} show="word" count={formatCount(counts.usable)} />
      <GradeMark grade={2} show="word" count={formatCount(counts.rejected)} />
      <GradeMark grade={null} show="word" count={formatCount(counts.missing)} />
    </View>
  );
});
