import { View } from 'react-native';
import Svg from 'react-native-svg';
import { GradeShape } from '../primitives';
import type { GradeValue } from '../tokens';

/** The shape of a grade for a finding that is no grade of a flux; `label` says what it means here, '' where words beside it do. */
export function FindingMark({ mark, label, size = 14 }: { mark: GradeValue; label: string; size?: number }) {
  return (
    <View
      {...(label === '' ? { 'aria-hidden': true } : { role: 'img' as const, 'aria-label': label })}
      style={{ width: size + 4, paddingTop: 3 }}
    >
      <Svg width={size} height={size} viewBox={`0 0 ${size} ${size}`} aria-hidden>
        <GradeShape grade={mark} x={size / 2} y={size / 2} size={size} />
      </Svg>
    </View>
  );
}
