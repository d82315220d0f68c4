import { useId, useState } from 'react';
import { View } from 'react-native';
import Svg, { Defs, G, Line, Path, Pattern, Rect, Text as SvgText } from 'react-native-svg';
import { face, gradeColour, gradeSpoken, useTheme } from '../tokens';
import type { GradeValue } from '../tokens';
import { formatNumber } from '../format/numbers';
import { GradeShape } from './GradeMark';
import { isNumber, limitWords, rulerSpan, rulerTicks, trimFigure } from './limit-ruler';
import type { RulerInput } from './limit-ruler';

export interface LimitBarProps extends RulerInput {
  /** What is measured, for the spoken text: "Steady-state deviation". */
  label: string;
  unit?: string;
  /** The mark the value gets. */
  grade: GradeValue;
  /** Words of the limit, instead of "limit 30" / "at least 90" / "−2.0 to 2.0". */
  limitText?: string;
  /** px; otherwise as wide as the container. */
  width?: number;
}

/**
 * A ruler to scale: the allowed span filled, limits as plumb lines, what is beyond them hatched, the value
 * as its grade's mark.
 */
export function LimitBar(props: LimitBarProps) {
  const { colour } = useTheme();
  const [measured, setMeasured] = useState(248);
  const patternId = `hatch-${useId().replace(/[^a-zA-Z0-9]/g, '')}`;
  const width = props.width ?? measured;
  const { from, to } = rulerSpan(props);
  const left = 8;
  const right = width - 8;
  const x = (value: number): number =>
    left + ((Math.min(to, Math.max(from, value)) - from) / (to - from)) * (right - left);

  const { softHigh, hardHigh, softLow, hardLow, parentLimit, value, grade } = props;
  const allowedLow = softLow ?? hardLow ?? from;
  const allowedHigh = softHigh ?? hardHigh ?? to;
  const words = limitWords(props);
  const valueText = isNumber(value)
    ? `${formatNumber(value, props.decimals ?? 0)}${props.unit ? ` ${props.unit}` : ''}`
    : 'no value';
  const limitText = props.limitText ?? words.map((word) => word.text).join(', ');
  const parentText = isNumber(parentLimit) ? `parent ${trimFigure(parentLimit, props.decimals ?? 0)}` : null;
  const overshoot = isNumber(value)
    ? value > allowedHigh
      ? [allowedHigh, value]
      : value < allowedLow
        ? [value, allowedLow]
        : null
    : null;

  // 12 px mono is 7.2 px a character; labels that would touch go to a second line
  const labels = [
    ...(props.limitText
      ? [{ at: words.length === 1 ? words[0].at : (allowedLow + allowedHigh) / 2, text: props.limitText }]
      : words),
    ...(parentText && isNumber(parentLimit) ? [{ at: parentLimit, text: parentText }] : []),
  ].map((label) => {
    const half = (label.text.length * 7.2) / 2;
    return { text: label.text, centre: Math.max(half, Math.min(width - half, x(label.at))), half };
  });
  const rows: number[] = [];
  labels.forEach((label, index) => {
    const isClash = labels
      .slice(0, index)
      .some(
        (other, at) => rows[at] === 0 && Math.abs(other.centre - label.centre) < other.half + label.half + 8,
      );
    rows.push(isClash ? 1 : 0);
  });
  const height = rows.includes(1) ? 74 : 58;
  const valueHalf = (valueText.length * 7.2) / 2;
  const valueX = isNumber(value) ? Math.max(valueHalf, Math.min(width - valueHalf, x(value))) : 0;

  return (
    <View
      role="img"
      aria-label={`${props.label}: ${valueText}, ${limitText}${parentText ? `, ${parentText}` : ''}; ${gradeSpoken(grade)}`}
      onLayout={(event) => {
        if (props.width === undefined && event.nativeEvent.layout.width > 0) {
          setMeasured(Math.min(420, Math.round(event.nativeEvent.layout.width)));
        }
      }}
      style={{ alignSelf: 'stretch', height }}
    >
      <Svg width={width} height={height} viewBox={`0 0 ${width} ${height}`} aria-hidden>
        <Defs>
          <Pattern
            id={patternId}
            width={5}
            height={5}
            patternUnits="userSpaceOnUse"
            patternTransform="rotate(-45)"
          >
            <Path d="M0 0V5" stroke={gradeColour(grade, colour)} strokeWidth={1.2} opacity={0.55} />
          </Pattern>
        </Defs>
        <Rect
          x={x(allowedLow)}
          y={25}
          width={Math.max(0, x(allowedHigh) - x(allowedLow))}
          height={10}
          fill={colour.wash}
          stroke={colour.rule}
          strokeWidth={1}
        />
        {overshoot ? (
          <Rect
            x={x(overshoot[0] ?? 0)}
            y={25}
            width={Math.max(0, x(overshoot[1] ?? 0) - x(overshoot[0] ?? 0))}
            height={10}
            fill={`url(#${patternId})`}
          />
        ) : null}
        {rulerTicks(from, to).map((tick, index) => (
          <Line
            key={tick}
            x1={x(tick)}
            x2={x(tick)}
            y1={35}
            y2={index % 2 === 0 ? 40 : 38}
            stroke={colour.rule}
          />
        ))}
        <Line x1={left} x2={right} y1={35} y2={35} stroke={colour.rule} />
        {[softLow, softHigh, hardLow, hardHigh].map((limit, index) =>
          isNumber(limit) ? (
            <Line
              key={index}
              x1={x(limit)}
              x2={x(limit)}
              y1={21}
              y2={40}
              stroke={colour.ink}
              strokeWidth={2}
            />
          ) : null,
        )}
        {isNumber(parentLimit) ? (
          <Line
            x1={x(parentLimit)}
            x2={x(parentLimit)}
            y1={21}
            y2={40}
            stroke={colour.ink}
            strokeWidth={1.5}
            strokeDasharray="3 3"
          />
        ) : null}
        {isNumber(value) ? (
          <G>
            <GradeShape grade={grade} x={x(value)} y={30} />
            <SvgText
              x={valueX}
              y={15}
              textAnchor="middle"
              fontFamily={face.figure}
              fontSize={12}
              fontWeight="600"
              fill={colour.ink}
            >
              {valueText}
            </SvgText>
          </G>
        ) : null}
        {labels.map((label, index) => (
          <SvgText
            key={label.text}
            x={label.centre}
            y={rows[index] === 1 ? 70 : 54}
            textAnchor="middle"
            fontFamily={face.figure}
            fontSize={12}
            fill={colour.inkSoft}
          >
            {label.text}
          </SvgText>
        ))}
      </Svg>
    </View>
  );
}
