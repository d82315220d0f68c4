import Svg, { Line, Path, Text as SvgText } from 'react-native-svg';
import { face, useTheme } from '../tokens';

/** How restless each hour of a fair summer day is: calm night, lively noon (invented for the picture). */
const restlessness = [
  0.08, 0.07, 0.08, 0.07, 0.1, 0.18, 0.32, 0.5, 0.62, 0.78, 0.86, 0.96, 1, 0.98, 0.9, 0.78, 0.62, 0.42, 0.26,
  0.14, 0.1, 0.08, 0.07, 0.06,
];

/** Small deterministic sequence in [−1, 1) so that the picture is the same each time. */
function sequence(seed: number): () => number {
  let state = seed;
  return () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state / 2 ** 31 - 1;
  };
}

function hourPath(hour: number, left: number, right: number, baseline: number, reach: number): string {
  const next = sequence(97 + hour * 7919);
  const points = Math.round((right - left) / 3);
  let slow = 0;
  let fast = 0;
  let path = '';
  for (let index = 0; index <= points; index += 1) {
    slow = 0.94 * slow + 0.34 * next();
    fast = 0.35 * fast + 0.6 * next();
    const y = baseline - (slow * 0.9 + fast) * reach * (restlessness[hour] ?? 0);
    path += `${index === 0 ? 'M' : 'L'}${(left + ((right - left) * index) / points).toFixed(1)} ${y.toFixed(1)}`;
  }
  return path;
}

/** Decoration of the sign-in page: one line of vertical wind an hour, drawn per width. */
export function WindDay({ width, rowHeight }: { width: number; rowHeight: number }) {
  const { colour } = useTheme();
  const left = 40;
  const height = rowHeight * 24 + 12;
  return (
    <Svg width={width} height={height} viewBox={`0 0 ${width} ${height}`} aria-hidden>
      {restlessness.map((_, hour) => {
        const y = rowHeight * (hour + 0.5) + 6;
        return <Line key={hour} x1={left} x2={width} y1={y} y2={y} stroke={colour.hair} />;
      })}
      {restlessness.map((_, hour) => (
        <Path
          key={hour}
          d={hourPath(hour, left, width - 8, rowHeight * (hour + 0.5) + 6, rowHeight * 0.62)}
          fill="none"
          stroke={colour.traces[0]}
          strokeWidth={1.15}
          strokeLinejoin="round"
        />
      ))}
      {restlessness.map((_, hour) =>
        hour % 3 === 0 ? (
          <SvgText
            key={hour}
            x={left - 10}
            y={rowHeight * (hour + 0.5) + 10}
            textAnchor="end"
            fontFamily={face.figure}
            fontSize={12}
            fill={colour.inkSoft}
          >
            {String(hour).padStart(2, '0')}
          </SvgText>
        ) : null,
      )}
    </Svg>
  );
}
