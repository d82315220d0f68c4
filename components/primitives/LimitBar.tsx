import { useId, useState } from 'react';
import { View } from 'react-native';
import Svg, { Defs, G, Line, Path, Pattern, Rect, Text as SvgText } from 'react-native-svg';
import { face, gradeColour, gradeSpoken, useTheme } from '../tokens';
import type { GradeValue } from '../tokens';
import { formatNumber } from '../format/numbers';
import { GradeShape } from './GradeMark';

export interface LimitBarProps {
  /** What is measured, for the spoken text: "Steady-state deviation". */
  label: string;
  /** NaN or null draws the ruler without a mark. */
  value: number | null;
  unit?: string;
  decimals?: number;
  /** The mark the value gets. */
  grade: GradeValue;
  /** Good up to here. */
  softHigh?: number | null;
  /** Rejected above. */
  hardHigh?: number | null;
  /** Good down to here. */
  softLow?: number | null;
  /** Rejected below. */
  hardLow?: number | null;
  /** A limit of the parent recipe, dashed. */
  parentLimit?: number | null;
  /** Words of the limit, instead of "limit 30" / "at least 90" / "−2.0 to 2.0". */
  limitText?: string;
  /** An informative limit ("usual up to 15"): changes no grade. */
  usual?: boolean;
  /** Ends of the ruler; chosen from limits and value when left out. */
  from?: number;
  to?: number;
  /** px; otherwise as wide as the container. */
  width?: number;
}

function isNumber(value: number | null | undefined): value is number {
  return value !== null && value !== undefined && Number.isFinite(value);
}

const niceSteps = [1, 2, 2.5, 5, 10];

/** Ticks at a round step, at most ten over the ruler. */
export function rulerTicks(from: number, to: number): number[] {
  const span = to - from;
  if (!(span > 0)) return [];
  const rough = span / 8;
  const magnitude = 10 ** Math.floor(Math.log10(rough));
  const step = (niceSteps.find((nice) => nice * magnitude >= rough) ?? 10) * magnitude;
  const ticks: number[] = [];
  for (let index = Math.ceil(from / step - 1e-9); index * step <= to + step * 1e-9; index += 1)
    ticks.push(index * step);
  return ticks;
}

/** Ends of a ruler on which limits and value all have room. */
export function rulerSpan(props: LimitBarProps): { from: number; to: number } {
  const { softHigh, hardHigh, softLow, hardLow, parentLimit, value } = props;
  const limits = [softHigh, hardHigh, softLow, hardLow, parentLimit].filter(isNumber);
  const high = Math.max(0, ...limits);
  const low = Math.min(0, ...limits);
  const reach = Math.max(high - low, 1e-9);
  const isHighSided = isNumber(softHigh) || isNumber(hardHigh);
  const isLowSided = isNumber(softLow) || isNumber(hardLow);
  let to =
    high + reach * (isHighSided && !isLowSided && !isNumber(hardHigh) && !isNumber(parentLimit) ? 1 : 0.25);
  let from = isLowSided && isHighSided ? low - reach * 0.25 : low < 0 ? low - reach * 0.25 : 0;
  if (isNumber(value)) {
    // a value far outside is drawn at the end of the ruler, not at the price of the limits' legibility
    to = Math.max(to, Math.min(value + reach * 0.1, high + reach * 2));
    from = Math.min(from, Math.max(value - reach * 0.1, low - reach * 2));
  }
  return { from: props.from ?? from, to: props.to ?? to };
}

function limitWords(props: LimitBarProps): { at: number; text: string }[] {
  const { softHigh, hardHigh, softLow, hardLow, usual } = props;
  const decimals = props.decimals ?? 0;
  const figure = (value: number): string => trimFigure(value, decimals);
  if (isNumber(softLow) && isNumber(softHigh)) {
    return [{ at: (softLow + softHigh) / 2, text: `${figure(softLow)} to ${figure(softHigh)}` }];
  }
  const words: { at: number; text: string }[] = [];
  if (isNumber(softHigh)) {
    const text = usual ? 'usual up to' : isNumber(hardHigh) ? 'good up to' : 'limit';
    words.push({ at: softHigh, text: `${text} ${figure(softHigh)}` });
  }
  if (isNumber(hardHigh)) {
    words.push({
      at: hardHigh,
      text: `${isNumber(softHigh) ? 'rejected above' : 'limit'} ${figure(hardHigh)}`,
    });
  }
  if (isNumber(softLow)) {
    const text = usual ? 'usually at least' : isNumber(hardLow) ? 'good from' : 'at least';
    words.push({ at: softLow, text: `${text} ${figure(softLow)}` });
  }
  if (isNumber(hardLow)) {
    words.push({
      at: hardLow,
      text: `${isNumber(softLow) ? 'rejected below' : 'at least'} ${figure(hardLow)}`,
    });
  }
  return words;
}

/** Limits are round numbers: written with as many decimals as they need, at most those of the value + 1. */
function trimFigure(value: number, decimals: number): string {
  for (let digits = 0; digits <= decimals + 1; digits += 1) {
    if (Math.abs(Number(value.toFixed(digits)) - value) < 1e-9) return formatNumber(value, digits);
  }
  return formatNumber(value, decimals + 1);
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
      ? [{ at: softHigh ?? hardHigh ?? softLow ?? hardLow ?? from, text: props.limitText }]
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
