import { useMemo } from 'react';
import { View } from 'react-native';
import Svg, { G, Line, Path, Text as SvgText } from 'react-native-svg';
import { formatNumber } from '../format/numbers';
import { rulerTicks } from '../primitives/limit-ruler';
import { face, traceDashes, useTheme } from '../tokens';
import { decimalsOf } from './series-plot';

export interface CurvePlotProps {
  /** What it shows, for those who hear it. */
  label: string;
  x: readonly number[];
  y: readonly number[];
  xUnit: string;
  yUnit: string;
  /** Marked with a plumb line: the lag that was chosen. */
  markX?: number | null;
  markLabel?: string;
  width: number;
  height?: number;
  trace?: number;
}

/** A short curve drawn once (a lag curve, a share), not a time series. */
export function CurvePlot(props: CurvePlotProps) {
  const { colour } = useTheme();
  const { x, y, width, height = 150, trace = 0 } = props;
  const shape = useMemo(() => {
    const finite = y.filter((value) => Number.isFinite(value));
    if (finite.length === 0 || x.length === 0) return null;
    const low = Math.min(0, ...finite);
    const high = Math.max(0, ...finite);
    const reach = high - low || 1;
    return { low: low - 0.08 * reach, high: high + 0.12 * reach, from: x[0] ?? 0, to: x[x.length - 1] ?? 1 };
  }, [x, y]);
  if (!shape || width <= 0) return null;
  const left = 64;
  const right = width - 8;
  const bottom = height - 30;
  const top = 16;
  const xAt = (value: number) =>
    left + ((value - shape.from) / (shape.to - shape.from || 1)) * (right - left);
  const yAt = (value: number) => bottom - ((value - shape.low) / (shape.high - shape.low)) * (bottom - top);
  const path = x
    .flatMap((value, index) => {
      const at = y[index];
      return at === undefined || !Number.isFinite(at)
        ? []
        : [`${xAt(value).toFixed(1)} ${yAt(at).toFixed(1)}`];
    })
    .join('L');
  const yTicks = rulerTicks(shape.low, shape.high).filter(
    (_, index, all) => index % Math.ceil(all.length / 4) === 0,
  );
  const xTicks = rulerTicks(shape.from, shape.to).filter(
    (_, index, all) => index % Math.ceil(all.length / 6) === 0,
  );
  const stroke = colour.traces[trace % colour.traces.length] ?? colour.ink;
  const isMarked = props.markX !== null && props.markX !== undefined;
  return (
    <View role="img" aria-label={`${props.label}${isMarked ? `, ${props.markLabel ?? ''}` : ''}`}>
      <Svg width={width} height={height} viewBox={`0 0 ${width} ${height}`} aria-hidden>
        {yTicks.map((tick) => (
          <G key={tick}>
            <Line
              x1={left}
              x2={right}
              y1={yAt(tick)}
              y2={yAt(tick)}
              stroke={Math.abs(tick) < 1e-12 ? colour.rule : colour.hair}
              strokeWidth={1}
            />
            <SvgText
              x={left - 6}
              y={yAt(tick) + 4}
              textAnchor="end"
              fill={colour.inkSoft}
              fontFamily={face.figure}
              fontSize={12}
            >
              {formatNumber(tick, decimalsOf(yTicks))}
            </SvgText>
          </G>
        ))}
        {xTicks.map((tick) => (
          <SvgText
            key={tick}
            x={xAt(tick)}
            y={height - 14}
            textAnchor="middle"
            fill={colour.inkSoft}
            fontFamily={face.figure}
            fontSize={12}
          >
            {formatNumber(tick, decimalsOf(xTicks))}
          </SvgText>
        ))}
        <SvgText
          x={right}
          y={height - 1}
          textAnchor="end"
          fill={colour.inkSoft}
          fontFamily={face.figure}
          fontSize={11}
        >
          {props.xUnit}
        </SvgText>
        <SvgText x={0} y={11} fill={colour.inkSoft} fontFamily={face.figure} fontSize={11}>
          {raisedUnit(props.yUnit)}
        </SvgText>
        <Path
          d={`M${path}`}
          fill="none"
          stroke={stroke}
          strokeWidth={1.9}
          strokeDasharray={(traceDashes[trace % traceDashes.length] ?? []).join(' ')}
        />
        {isMarked ? (
          <G>
            <Line
              x1={xAt(props.markX ?? 0)}
              x2={xAt(props.markX ?? 0)}
              y1={top}
              y2={bottom}
              stroke={colour.ink}
              strokeWidth={1.5}
            />
            <SvgText
              x={Math.min(right - 40, Math.max(left + 40, xAt(props.markX ?? 0)))}
              y={11}
              textAnchor="middle"
              fill={colour.ink}
              fontFamily={face.figure}
              fontSize={12}
              fontWeight="600"
            >
              {props.markLabel ?? ''}
            </SvgText>
          </G>
        ) : null}
      </Svg>
    </View>
  );
}

/** "µmol m-2 s-1" with dots, because SVG text cannot raise: "µmol/(m² s)". The mono face has ² and ³. */
function raisedUnit(unit: string): string {
  const parts = unit.split(' ');
  const over = parts.filter((part) => /-\d$/.test(part));
  const above = parts.filter((part) => !/-\d$/.test(part)).join(' ');
  if (over.length === 0) return above;
  const below = over
    .map((part) => part.replace('-', '').replace(/1$/, '').replace(/2$/, '²').replace(/3$/, '³'))
    .join(' ');
  return over.length === 1 ? `${above || '1'}/${below}` : `${above || '1'}/(${below})`;
}
