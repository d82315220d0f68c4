import { memo } from 'react';
import { View } from 'react-native';
import { formatDay, formatOffset, startOfDayMs } from '../format/times';
import { Text } from '../primitives';
import { useCursorMs } from './series-cursor';
import { timeTicks, xOf } from '../spine/spine-geometry';
import { face, useTheme } from '../tokens';

export interface TimeAxisProps {
  window: { fromMs: number; toMs: number };
  width: number;
  axisWidth: number;
  offsetMinutes: number;
  /** Words of the period that begins at an instant, written on the axis under the cursor; null when there is none. */
  periodAt: (startMs: number) => { middleMs: number; label: string } | null;
}

const dayMs = 86_400_000;
const height = 44;

/** Hours and day names of the station's clock under the panels, with the zone stated. */
export const TimeAxis = memo(function TimeAxis(props: TimeAxisProps) {
  const { window, width, axisWidth, offsetMinutes } = props;
  const { colour } = useTheme();
  const plotWidth = Math.max(1, width - axisWidth - 1);
  const scale = { ...window, width: plotWidth };
  const ticks = timeTicks(scale, offsetMinutes, 58);
  // hours stand above, the days they belong to below; in a longer window the ticks themselves are days
  const hasDays = ticks.some((tick) => tick.label.includes(':'));
  const days: number[] = [];
  if (hasDays) {
    for (let start = startOfDayMs(window.fromMs, offsetMinutes); start < window.toMs; start += dayMs)
      days.push(start);
  }
  return (
    <View aria-hidden style={{ width, height }}>
      <svg width={width} height={height} viewBox={`0 0 ${width} ${height}`} style={{ display: 'block' }}>
        <line x1={axisWidth} x2={width} y1={1} y2={1} stroke={colour.rule} strokeWidth={1} />
        <text
          x={axisWidth - 6}
          y={37}
          textAnchor="end"
          fill={colour.inkSoft}
          fontFamily={face.figure}
          fontSize={11}
        >
          {formatOffset(offsetMinutes)}
        </text>
        {ticks.map((tick) => {
          const x = axisWidth + xOf(tick.atMs, scale);
          const isDayName = hasDays && tick.major;
          const anchor = x < axisWidth + 20 ? 'start' : x > width - 20 ? 'end' : 'middle';
          return (
            <g key={tick.atMs}>
              <line x1={x} x2={x} y1={1} y2={tick.major ? 9 : 6} stroke={colour.rule} strokeWidth={1} />
              <text
                x={anchor === 'start' ? Math.max(axisWidth, x) : x}
                y={20}
                fill={colour.inkSoft}
                textAnchor={anchor}
                fontFamily={face.figure}
                fontSize={12}
              >
                {isDayName ? '00:00' : tick.label}
              </text>
            </g>
          );
        })}
        {days.map((start) => {
          const x = Math.max(axisWidth, axisWidth + xOf(start, scale));
          const right = Math.min(width, axisWidth + xOf(start + dayMs, scale));
          const text = dayName(start, offsetMinutes, right - x - 8);
          return text === '' ? null : (
            <g key={start}>
              <line x1={x} x2={x} y1={1} y2={42} stroke={colour.rule} strokeWidth={1} />
              <text x={x + 5} y={38} fill={colour.ink} fontFamily={face.text} fontSize={13} fontWeight="600">
                {text}
              </text>
            </g>
          );
        })}
      </svg>
      <CursorTag {...props} plotWidth={plotWidth} />
    </View>
  );
});

/** "Thu 17 June 2027", shorter where there is less room, nothing where there is none. */
function dayName(start: number, offsetMinutes: number, roomPx: number): string {
  const whole = formatDay(start, offsetMinutes);
  const short = whole.replace(/ \d{4}$/, '');
  const [weekday = '', day = ''] = whole.split(' ');
  return [whole, short, `${weekday} ${day}`, day].find((text) => text.length * 7 <= roomPx) ?? '';
}

/** Both ends of the period under the cursor, on the axis. */
function CursorTag({ window, width, axisWidth, plotWidth, periodAt }: TimeAxisProps & { plotWidth: number }) {
  const { colour } = useTheme();
  const cursorMs = useCursorMs();
  const period = cursorMs === null ? null : periodAt(cursorMs);
  if (!period) return null;
  const x = axisWidth + xOf(period.middleMs, { ...window, width: plotWidth });
  if (x < axisWidth || x > width) return null;
  const tagWidth = period.label.length * 7.3 + 14;
  return (
    <View
      style={{
        position: 'absolute',
        top: 3,
        left: Math.min(width - tagWidth, Math.max(0, x - tagWidth / 2)),
        width: tagWidth,
        height: 21,
        borderRadius: 2,
        backgroundColor: colour.beam,
        alignItems: 'center',
        justifyContent: 'center',
        pointerEvents: 'none',
      }}
    >
      <Text variant="figure" size={12} strong colour={colour.panel}>
        {period.label}
      </Text>
    </View>
  );
}
