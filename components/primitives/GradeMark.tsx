import { View } from 'react-native';
import Svg, { Circle, G, Path } from 'react-native-svg';
import { gradeSpoken, gradeWord, useTheme } from '../tokens';
import type { GradeValue } from '../tokens';
import { Text } from './Text';

export type GradeMarkSize = 9 | 12 | 14 | 18 | 22;

/**
 * The bare shape as SVG content centred on (x, y), for plots and limit bars. The shape tells the grade
 * without colour: filled disc, half triangle, cross, dashed ring.
 */
export function GradeShape({
  grade,
  x,
  y,
  size = 14,
}: {
  grade: GradeValue;
  x: number;
  y: number;
  size?: number;
}) {
  const { colour } = useTheme();
  const scale = size / 14;
  return (
    <G transform={`translate(${x - size / 2} ${y - size / 2}) scale(${scale})`}>
      {grade === 0 ? <Circle cx={7} cy={7} r={5} fill={colour.good} /> : null}
      {grade === 1 ? (
        <>
          <Path
            d="M7 1.6 12.8 12H1.2Z"
            fill={colour.panel}
            stroke={colour.usable}
            strokeWidth={1.5}
            strokeLinejoin="round"
          />
          <Path d="M7 1.6V12H1.2Z" fill={colour.usable} />
        </>
      ) : null}
      {grade === 2 ? (
        <Path
          d="M2.4 2.4 11.6 11.6M11.6 2.4 2.4 11.6"
          stroke={colour.rejected}
          strokeWidth={2.4}
          strokeLinecap="round"
        />
      ) : null}
      {grade === null ? (
        <Circle
          cx={7}
          cy={7}
          r={5}
          fill="none"
          stroke={colour.missing}
          strokeWidth={1.5}
          strokeDasharray="2.6 2"
        />
      ) : null}
    </G>
  );
}

export interface GradeMarkProps {
  grade: GradeValue;
  size?: GradeMarkSize;
  /** What stands beside the shape; 'none' only where the grade is written right beside it. */
  show?: 'number' | 'word' | 'both' | 'none';
  /** A count before the word, as in "131 good". */
  count?: string;
}

export function GradeMark({ grade, size = 14, show = 'number', count }: GradeMarkProps) {
  const number = grade !== null && (show === 'number' || show === 'both') ? String(grade) : null;
  const word = show === 'word' || show === 'both' ? gradeWord(grade) : null;
  const figure = count ?? number;
  return (
    <View
      style={{ flexDirection: 'row', alignItems: 'center', gap: 5 }}
      role="img"
      aria-label={count === undefined ? gradeSpoken(grade) : `${count} ${gradeWord(grade)}`}
    >
      <Svg width={size} height={size} viewBox={`0 0 ${size} ${size}`} aria-hidden>
        <GradeShape grade={grade} x={size / 2} y={size / 2} size={size} />
      </Svg>
      {figure !== null ? (
        <Text variant="figure" strong size={size >= 18 ? 15 : 13} ariaHidden>
          {figure}
        </Text>
      ) : null}
      {word !== null ? (
        <Text variant="label" ariaHidden nowrap>
          {word}
        </Text>
      ) : null}
    </View>
  );
}

/** A grade that somebody overruled: the first grade stays in sight. */
export function RuledGrade({ computed, ruled }: { computed: GradeValue; ruled: GradeValue }) {
  const { colour } = useTheme();
  return (
    <View
      role="img"
      aria-label={`computed ${gradeSpoken(computed)}, ruled ${gradeSpoken(ruled)}`}
      style={{ flexDirection: 'row', alignItems: 'center', gap: 6 }}
    >
      <Svg width={14} height={14} viewBox="0 0 14 14" aria-hidden>
        <GradeShape grade={computed} x={7} y={7} />
      </Svg>
      <Svg width={16} height={10} viewBox="0 0 16 10" aria-hidden>
        <Path d="M1 5h12M9.5 1.5 13.5 5 9.5 8.5" fill="none" stroke={colour.ink} strokeWidth={1.6} />
      </Svg>
      <Svg width={14} height={14} viewBox="0 0 14 14" aria-hidden>
        <GradeShape grade={ruled} x={7} y={7} />
      </Svg>
      <Text variant="label" ariaHidden nowrap>
        {ruled === null ? 'ruled' : `${ruled} ruled`}
      </Text>
    </View>
  );
}
