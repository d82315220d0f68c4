import { View } from 'react-native';
import { space, useTheme } from '../tokens';
import { formatCount } from '../format/numbers';
import { Text } from './Text';

export interface ProgressLineProps {
  /** What is going on: "Reading raw files". */
  label: string;
  done: number;
  total: number;
  /** What is counted: "periods". */
  unit?: string;
  /** Instead of "12 of 48 periods". */
  detail?: string;
}

/** A ruled line filled from the left, dotted beyond. */
export function ProgressLine({ label, done, total, unit, detail }: ProgressLineProps) {
  const { colour } = useTheme();
  const share = total > 0 ? Math.min(1, Math.max(0, done / total)) : 0;
  const words = detail ?? `${formatCount(done)} of ${formatCount(total)}${unit ? ` ${unit}` : ''}`;
  return (
    <View style={{ gap: space.xs, alignSelf: 'stretch' }}>
      <View style={{ flexDirection: 'row', justifyContent: 'space-between', gap: space.m, flexWrap: 'wrap' }}>
        <Text variant="label">{label}</Text>
        <Text variant="figure" size={13} soft>
          {words}
        </Text>
      </View>
      <View
        role="progressbar"
        aria-label={label}
        aria-valuemin={0}
        aria-valuemax={100}
        aria-valuenow={Math.round(share * 100)}
        aria-valuetext={words}
        style={{ flexDirection: 'row', height: 6, alignItems: 'center' }}
      >
        <View style={{ width: `${share * 100}%`, height: 6, backgroundColor: colour.ink }} />
        <View
          style={{
            flex: 1,
            height: 0,
            borderTopWidth: 2,
            borderStyle: 'dotted',
            borderTopColor: colour.rule,
          }}
        />
      </View>
    </View>
  );
}
