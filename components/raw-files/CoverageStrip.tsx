import { View } from 'react-native';
import Svg, { Defs, G, Line, Path, Pattern, Rect, Text as SvgText } from 'react-native-svg';
import { formatDuration } from '../format/times';
import type { StationClock } from '../format/useClock';
import { Text } from '../primitives';
import { useWidth } from '../series/use-width';
import { timeTicks } from '../spine/spine-geometry';
import { face, space, useTheme } from '../tokens';
import { joinSpans, overlapMs } from './coverage';
import type { FileSpan } from './coverage';

export interface CoverageStripProps {
  /** Kept already. */
  kept: readonly FileSpan[];
  /** Chosen and not sent yet; ends are estimated from the size. */
  chosen: readonly FileSpan[];
  clock: StationClock;
}

const height = 58;
const axis = 20;

/** Where the chosen files fall beside what is here already. */
export function CoverageStrip({ kept, chosen, clock }: CoverageStripProps) {
  const { colour } = useTheme();
  const [width, onLayout] = useWidth();
  const all = [...kept, ...chosen];
  if (all.length === 0) return null;
  const chosenFrom = Math.min(...chosen.map((span) => span.fromMs));
  const chosenTo = Math.max(...chosen.map((span) => span.toMs));
  const first = Math.min(...all.map((span) => span.fromMs));
  const last = Math.max(...all.map((span) => span.toMs));
  // around the new files when the rest is far longer, so that they stay visible
  const reach = chosen.length > 0 ? Math.max((chosenTo - chosenFrom) * 6, 86_400_000) : last - first;
  const middle = chosen.length > 0 ? (chosenFrom + chosenTo) / 2 : (first + last) / 2;
  const fromMs = Math.max(first, middle - reach);
  const toMs = Math.max(fromMs + 3_600_000, Math.min(last, middle + reach));
  const x = (ms: number): number =>
    ((Math.min(toMs, Math.max(fromMs, ms)) - fromMs) / (toMs - fromMs)) * width;
  const ticks = width > 0 ? timeTicks({ fromMs, toMs, width }, clock.offsetMinutes, 72) : [];
  const doubled = overlapMs(kept, chosen);
  const words =
    chosen.length === 0
      ? joinSpans(kept).length === 1
        ? `${clock.span(first, last)}, no gap between one file and the next.`
        : `${clock.span(first, last)} in ${joinSpans(kept).length} pieces.`
      : `Hatched: the chosen files, about ${clock.moment(chosenFrom)} to ${clock.moment(chosenTo)} (${clock.zone}). ${
          doubled > 1000
            ? `${formatDuration(doubled)} of it is here already; where two files hold the same instant, the earlier file counts.`
            : 'Nothing overlaps what is here already.'
        }`;
  return (
    <View style={{ gap: space.s, alignSelf: 'stretch' }} onLayout={onLayout}>
      <Text variant="small" soft>
        {words}
      </Text>
      {width > 0 ? (
        <View role="img" aria-label={words}>
          <Svg width={width} height={height} aria-hidden>
            <Defs>
              <Pattern
                id="chosen-hatch"
                width={6}
                height={6}
                patternUnits="userSpaceOnUse"
                patternTransform="rotate(45)"
              >
                <Path d="M0 0V6" stroke={colour.ink} strokeWidth={1.4} />
              </Pattern>
            </Defs>
            {ticks.map((tick) => (
              <G key={tick.atMs}>
                <Line x1={x(tick.atMs)} x2={x(tick.atMs)} y1={axis - 6} y2={axis} stroke={colour.rule} />
                <SvgText
                  x={Math.min(x(tick.atMs) + 4, width - 50)}
                  y={axis - 6}
                  fontFamily={face.figure}
                  fontSize={12}
                  fill={colour.inkSoft}
                >
                  {tick.label}
                </SvgText>
              </G>
            ))}
            <Line
              x1={0}
              x2={width}
              y1={height - 2}
              y2={height - 2}
              stroke={colour.rule}
              strokeDasharray="2 3"
            />
            {joinSpans(kept).map((span) => (
              <Rect
                key={span.fromMs}
                x={x(span.fromMs)}
                width={Math.max(1, x(span.toMs) - x(span.fromMs))}
                y={axis + 4}
                height={height - axis - 6}
                fill={colour.rule}
              />
            ))}
            {joinSpans(chosen).map((span) => (
              <Rect
                key={span.fromMs}
                x={x(span.fromMs)}
                width={Math.max(3, x(span.toMs) - x(span.fromMs))}
                y={axis + 2}
                height={height - axis - 3}
                fill="url(#chosen-hatch)"
                stroke={colour.ink}
                strokeDasharray="4 3"
              />
            ))}
          </Svg>
        </View>
      ) : null}
    </View>
  );
}
