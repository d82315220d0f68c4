import { View } from 'react-native';
import Svg from 'react-native-svg';
import type { ReactNode } from 'react';
import { gradeSpoken, useTheme } from '../tokens';
import type { GradeValue } from '../tokens';
import { GradeShape } from './GradeMark';
import { LimitBar } from './LimitBar';
import type { LimitBarProps } from './LimitBar';
import { Text } from './Text';
import { UnitText } from './UnitText';

export interface ReasonCardProps {
  grade: GradeValue;
  /** The finding in about five words: "Steady-state deviation 47 %". */
  finding: string;
  /** One sentence. */
  sentence?: ReactNode;
  /** The test that decides the grade gets the heavy rule on top. */
  decides?: boolean;
  /** A person's ruling instead of a test. */
  isRuling?: boolean;
  limit?: LimitBarProps;
  /** "Vickers & Mahrt 1997", "project choice": where the limit comes from. */
  source?: string;
  children?: ReactNode;
}

export function ReasonCard(props: ReasonCardProps) {
  const { colour } = useTheme();
  const isHeavy = props.decides === true || props.isRuling === true;
  return (
    <View
      style={{
        flexDirection: 'row',
        gap: 8,
        paddingVertical: 10,
        borderTopWidth: isHeavy ? 2 : 1,
        borderTopColor: props.isRuling ? colour.ink : props.decides ? colour.rejected : colour.hair,
      }}
    >
      <View style={{ width: 18, paddingTop: 3 }} role="img" aria-label={gradeSpoken(props.grade)}>
        <Svg width={14} height={14} viewBox="0 0 14 14" aria-hidden>
          <GradeShape grade={props.grade} x={7} y={7} />
        </Svg>
      </View>
      <View style={{ flex: 1, gap: 4, minWidth: 0 }}>
        <Text strong>
          <UnitText>{props.finding}</UnitText>
        </Text>
        {props.sentence ? <Text variant="small">{props.sentence}</Text> : null}
        {props.limit ? <LimitBar {...props.limit} /> : null}
        {props.source ? (
          <Text variant="small" soft>
            {props.source}
          </Text>
        ) : null}
        {props.children}
      </View>
    </View>
  );
}
