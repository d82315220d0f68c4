import Svg, { G, Line, Rect, Text as SvgText } from 'react-native-svg';
import { View } from 'react-native';
import { formatDay, formatOffset } from '../format/times';
import { face, useTheme } from '../tokens';
import { timeTicks, xOf } from '../spine/spine-geometry';

export interface TimeAxisProps {
  window: { fromMs: number; toMs: number };
  width: number;
  axisWidth: number;
  offsetMinutes: number;
  /** Both ends of the period under the cursor, written on the axis. */
  cursor: { startMs: number; endMs: number; label: string } | null;
}

const dayMs = 86_400_000;

/** Hours and day names of the station's clock under the panels, with the zone stated. */
export function TimeAxis({ window, width, axisWidth, offsetMinutes, cursor }: TimeAxisProps) {
  const { colour } = useTheme();
  const plotWidth = Math.max(1, width - axisWidth - 1);
  const scale = { ...window, width: plotWidth };
  const ticks = timeTicks(scale, offsetMinutes, 58);
  const offsetMs = offsetMinutes * 60_000;
  const days: number[] = [];
  if (window.toMs - window.fromMs <= 14 * dayMs) {
    for (
      let local = Math.floor((window.fromMs + offsetMs) / dayMs) * dayMs;
      local < window.toMs + offsetMs;
      local += dayMs
    ) {
      days.push(local - offsetMs);
    }
  }
  const clock = (ms: number) => new Date(ms + offsetMs).toISOString().slice(11, 16);
  const tagWidth = cursor ? cursor.label.length * 7.3 + 14 : 0;
  const tagX = cursor
    ? Math.min(
        width - tagWidth,
        Math.max(0, axisWidth + xOf((cursor.startMs + cursor.endMs) / 2, scale) - tagWidth / 2),
      )
    : 0;
  return (
    <View aria-hidden style={{ width, height: 46 }}>
      <Svg width={width} height={46} viewBox={`0 0 ${width} 46`}>
        <Line x1={axisWidth} x2={width} y1={1} y2={1} stroke={colour.rule} strokeWidth={1} />
        <SvgText x={0} y={17} fill={colour.inkSoft} fontFamily={face.figure} fontSize={11}>
          {axisWidth > 60 ? `station ${formatOffset(offsetMinutes)}` : formatOffset(offsetMinutes)}
        </SvgText>
        {ticks.map((tick) => {
          const x = axisWidth + xOf(tick.atMs, scale);
          const label =
            window.toMs - window.fromMs <= 14 * dayMs && /\d+ \w+/.test(tick.label)
              ? clock(tick.atMs)
              : tick.label;
          const anchor = x < axisWidth + 20 ? 'start' : x > width - 20 ? 'end' : 'middle';
          return (
            <G key={tick.atMs}>
              <Line x1={x} x2={x} y1={1} y2={tick.major ? 9 : 6} stroke={colour.rule} strokeWidth={1} />
              <SvgText
                x={x}
                y={21}
                fill={colour.inkSoft}
                textAnchor={anchor}
                fontFamily={face.figure}
                fontSize={12}
              >
                {label}
              </SvgText>
            </G>
          );
        })}
        {days.map((start) => {
          const x = Math.max(axisWidth, axisWidth + xOf(start, scale));
          const right = Math.min(width, axisWidth + xOf(start + dayMs, scale));
          if (right - x < 40) return null;
          const name = formatDay(start, offsetMinutes);
          const fits = Math.floor((right - x - 6) / 7);
          const text = name.length <= fits ? name : name.replace(/ \d{4}$/, '').slice(0, Math.max(0, fits));
          return (
            <G key={start}>
              <Line x1={x} x2={x} y1={1} y2={42} stroke={colour.rule} strokeWidth={1} />
              <SvgText
                x={x + 5}
                y={39}
                fill={colour.ink}
                fontFamily={face.text}
                fontSize={13}
                fontWeight="600"
              >
                {text}
              </SvgText>
            </G>
          );
        })}
        {cursor ? (
          <G>
            <Rect x={tagX} y={4} width={tagWidth} height={21} rx={2} fill={colour.beam} />
            <SvgText
              x={tagX + tagWidth / 2}
              y={19}
              fill={colour.panel}
              textAnchor="middle"
              fontFamily={face.figure}
              fontSize={12}
              fontWeight="600"
            >
              {cursor.label}
            </SvgText>
          </G>
        ) : null}
      </Svg>
    </View>
  );
}
