import { View } from 'react-native';
import type { Run } from '../../server/contract/api';
import { GradeMark, GradeShares, Text } from '../primitives';
import { sharesInPercent } from '../primitives/grade-counts';
import { gradeOrder, gradeWord, useTheme } from '../tokens';
import { gradedFluxes } from './run-words';

/** Shares of grades, one bar a flux, with the percents beside it. */
export function GradeTable({ grades, label }: { grades: Run['grades']; label: string }) {
  const { colour } = useTheme();
  const fluxes = gradedFluxes(grades);
  if (fluxes.length === 0) return null;
  const row = { flexDirection: 'row', alignItems: 'center', gap: 10, paddingVertical: 4 } as const;
  return (
    <View role="table" aria-label={label} style={{ alignSelf: 'stretch', minWidth: 0 }}>
      <View role="row" style={row}>
        <View role="columnheader" style={{ flex: 1, minWidth: 0 }}>
          <Text variant="small" soft>
            {label}
          </Text>
        </View>
        {gradeOrder.map((grade) => (
          <View
            role="columnheader"
            aria-label={gradeWord(grade)}
            key={gradeWord(grade)}
            style={{ width: 30, alignItems: 'flex-end' }}
          >
            <GradeMark grade={grade} show="none" />
          </View>
        ))}
      </View>
      {fluxes.map(({ flux, symbol, counts }) => (
        <View role="row" key={flux} style={[row, { borderTopWidth: 1, borderTopColor: colour.hair }]}>
          <View role="rowheader" style={{ width: 26 }}>
            <Text variant="label">{symbol}</Text>
          </View>
          <View role="cell" style={{ flex: 1, minWidth: 0 }}>
            <GradeShares counts={counts} label={symbol} />
          </View>
          {sharesInPercent(counts).map((percent, index) => (
            <View role="cell" key={gradeWord(gradeOrder[index] ?? null)} style={{ width: 30 }}>
              <Text variant="figure" size={13} align="right">
                {percent}
              </Text>
            </View>
          ))}
        </View>
      ))}
    </View>
  );
}
