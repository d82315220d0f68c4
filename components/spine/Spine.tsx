import { useId, useMemo, useRef, useState } from 'react';
import { View } from 'react-native';
import Svg, { Defs, G, Line, Path, Pattern, Rect, Text as SvgText } from 'react-native-svg';
import { fluxLabels } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import type { SpineData } from '../../server/contract/api';
import { formatShare } from '../format/numbers';
import { formatSpan } from '../format/times';
import { Text } from '../primitives';
import { face, useTheme, webStyle } from '../tokens';
import { windowWords } from './window-words';
import { clampWindow, instantOf, spineBars, timeTicks, xOf } from './spine-geometry';
import type { SpineBar } from './spine-geometry';

export interface TimeWindow {
  fromMs: number;
  toMs: number;
}

export interface SpineProps {
  data: SpineData | null;
  /** px; the strip is redrawn for each width instead of scaled. */
  width: number;
  height?: number;
  offsetMinutes: number;
  /** The window that the rest of the page shows; left out, the strip only shows coverage and grades. */
  window?: TimeWindow;
  onWindow?: (window: TimeWindow) => void;
  /** Raw files on their way in. */
  comingIn?: TimeWindow | null;
  loading?: boolean;
  /** Small strip on a station card: no flag, no words at the side. */
  compact?: boolean;
  /** "recorded" and "FC grades" at the left, for wide strips; takes `spineNameWidth` of the width. */
  named?: boolean;
}

/** Room of the words at the left of a named strip [px]. */
export const spineNameWidth = 76;

const flagHeight = 16;

/**
 * The persistent strip: above the mid-line what was recorded, below it how it was graded. Drag it to move everything else; arrow keys
 * move the window by a tenth of it, Shift by its whole length, Home and End to the ends.
 */
export function Spine(props: SpineProps) {
  if (!props.named) return <Strip {...props} />;
  const height = props.height ?? 72;
  const { middle } = stripLines(height);
  const flux = props.data ? (fluxLabels[props.data.gradedFlux as FluxKey]?.symbol ?? '') : '';
  return (
    <View style={{ flexDirection: 'row', width: props.width, height }}>
      <View aria-hidden style={{ width: spineNameWidth, height }}>
        <Text variant="small" size={12} soft style={{ position: 'absolute', right: 10, top: middle - 19 }}>
          recorded
        </Text>
        <Text variant="small" size={12} soft style={{ position: 'absolute', right: 10, top: middle + 3 }}>
          {flux === '' ? 'grades' : `${flux} grades`}
        </Text>
      </View>
      <Strip {...props} height={height} width={props.width - spineNameWidth} />
    </View>
  );
}

/** Where the parts of a strip lie [px from its top]. */
function stripLines(height: number) {
  const top = flagHeight + 2;
  const bottom = height - 4;
  return { top, bottom, middle: top + (bottom - top) * 0.42 };
}

function Strip(props: SpineProps) {
  const { colour } = useTheme();
  const { data, width, offsetMinutes, compact = false } = props;
  const height = props.height ?? (compact ? 52 : 72);
  const { top, bottom, middle } = stripLines(height);
  const upper = middle - top;
  const lower = bottom - middle;
  const comingId = `coming-${useId().replace(/[^a-zA-Z0-9]/g, '')}`;
  const bars = useMemo(
    () => barPaths(data ? spineBars(data, width) : [], middle, upper, lower),
    [data, width, middle, upper, lower],
  );
  const spoken = useMemo(() => (data ? describeSpine(data, offsetMinutes) : ''), [data, offsetMinutes]);
  const drag = useRef<{ x: number; window: TimeWindow } | null>(null);
  const [dragging, setDragging] = useState(false);

  if (!data || width <= 0) {
    return (
      <View style={{ height, justifyContent: 'center', alignItems: 'center' }}>
        <Text variant="small" soft>
          {props.loading ? 'reading what was recorded' : 'no records yet'}
        </Text>
        <View
          aria-hidden
          style={{
            position: 'absolute',
            left: 0,
            right: 0,
            top: middle,
            borderTopWidth: 2,
            borderStyle: 'dotted',
            borderTopColor: colour.hair,
            zIndex: -1,
          }}
        />
      </View>
    );
  }

  const scale = { fromMs: data.fromMs, toMs: data.toMs, width };
  const window = props.window;
  const ticks = timeTicks(scale, offsetMinutes, compact ? 80 : 70);
  const move = (next: TimeWindow) => props.onWindow?.(clampWindow(next, data));

  const windowX = window ? xOf(window.fromMs, scale) : 0;
  const windowWidth = window ? Math.max(7, xOf(window.toMs, scale) - windowX) : 0;
  const flag = window ? windowWords(window.fromMs, window.toMs, offsetMinutes) : '';
  const flagWidth = flag.length * 7 + 16;
  const flagX = Math.max(0, Math.min(width - flagWidth, windowX + windowWidth / 2 - flagWidth / 2));

  const interactive = props.onWindow !== undefined && window !== undefined;

  const handlers = interactive
    ? {
        onPointerDown: (event: React.PointerEvent<HTMLElement>) => {
          const box = event.currentTarget.getBoundingClientRect();
          const x = event.clientX - box.left;
          const at = instantOf(x, scale);
          const inside = at >= window.fromMs && at <= window.toMs;
          const length = window.toMs - window.fromMs;
          const start = inside
            ? window
            : clampWindow({ fromMs: at - length / 2, toMs: at + length / 2 }, data);
          if (!inside) move(start);
          drag.current = { x: event.clientX, window: start };
          setDragging(true);
          event.currentTarget.setPointerCapture(event.pointerId);
        },
        onPointerMove: (event: React.PointerEvent<HTMLElement>) => {
          if (!drag.current) return;
          const shift = ((event.clientX - drag.current.x) / width) * (data.toMs - data.fromMs);
          move({ fromMs: drag.current.window.fromMs + shift, toMs: drag.current.window.toMs + shift });
        },
        onPointerUp: () => {
          drag.current = null;
          setDragging(false);
        },
        onPointerCancel: () => {
          drag.current = null;
          setDragging(false);
        },
        onKeyDown: (event: React.KeyboardEvent<HTMLElement>) => {
          const length = window.toMs - window.fromMs;
          const by = event.shiftKey ? length : length / 10;
          const shifts: Record<string, number> = {
            ArrowLeft: -by,
            ArrowRight: by,
            PageUp: -length,
            PageDown: length,
            Home: data.fromMs - window.fromMs,
            End: data.toMs - window.toMs,
          };
          const shift = shifts[event.key];
          if (shift === undefined) return;
          event.preventDefault();
          move({ fromMs: window.fromMs + shift, toMs: window.toMs + shift });
        },
      }
    : {};

  return (
    <View
      style={[
        { height, width },
        interactive &&
          webStyle({ cursor: dragging ? 'grabbing' : 'grab', touchAction: 'none', userSelect: 'none' }),
      ]}
      {...(interactive
        ? {
            role: 'slider' as const,
            tabIndex: 0 as const,
            'aria-label': 'Time window',
            'aria-valuemin': Math.round(data.fromMs / 60000),
            'aria-valuemax': Math.round(data.toMs / 60000),
            'aria-valuenow': Math.round(window.fromMs / 60000),
            'aria-valuetext': `${flag}. ${spoken}`,
          }
        : { role: 'img' as const, 'aria-label': spoken })}
      {...(handlers as object)}
      testID="spine"
    >
      <Svg width={width} height={height} viewBox={`0 0 ${width} ${height}`} aria-hidden>
        <Defs>
          <Pattern
            id={comingId}
            width={6}
            height={6}
            patternUnits="userSpaceOnUse"
            patternTransform="rotate(-45)"
          >
            <Path d="M0 0V6" stroke={colour.rule} strokeWidth={1.2} />
          </Pattern>
        </Defs>
        {ticks.map((tick) => {
          const x = xOf(tick.atMs, scale);
          return (
            <G key={tick.atMs}>
              <Line
                x1={x}
                x2={x}
                y1={tick.major ? 2 : 8}
                y2={tick.major ? bottom : 14}
                stroke={tick.major ? colour.hair : colour.rule}
                strokeWidth={1}
              />
              {x < width - tick.label.length * 7 &&
              !(
                flag !== '' &&
                !compact &&
                x + 6 + tick.label.length * 7.2 > flagX &&
                x < flagX + flagWidth + 2
              ) ? (
                <SvgText
                  x={x + 4}
                  y={12}
                  fill={tick.major ? colour.ink : colour.inkSoft}
                  fontFamily={face.figure}
                  fontSize={12}
                  fontWeight={tick.major ? '600' : '400'}
                >
                  {tick.label}
                </SvgText>
              ) : null}
            </G>
          );
        })}
        <Line
          x1={0}
          x2={width}
          y1={middle}
          y2={middle}
          stroke={colour.rule}
          strokeWidth={1}
          strokeDasharray="1.5 3"
        />
        <Path d={bars.recorded} fill={colour.rule} />
        <Path d={bars.good} fill={colour.good} />
        <Path d={bars.usable} fill={colour.usable} />
        <Path d={bars.rejected} fill={colour.rejected} />
        {data.setUpChangesMs.map((at) => (
          <Line
            key={at}
            x1={xOf(at, scale)}
            x2={xOf(at, scale)}
            y1={top - 2}
            y2={bottom}
            stroke={colour.ink}
            strokeWidth={1.5}
            strokeDasharray="4 2"
          />
        ))}
        {props.comingIn ? (
          <Rect
            x={xOf(props.comingIn.fromMs, scale)}
            y={top}
            width={Math.max(3, xOf(props.comingIn.toMs, scale) - xOf(props.comingIn.fromMs, scale))}
            height={bottom - top}
            fill={`url(#${comingId})`}
            stroke={colour.rule}
            strokeDasharray="3 2"
          />
        ) : null}
        {window ? (
          <G>
            <Rect
              x={windowX}
              y={top - 2}
              width={windowWidth}
              height={bottom - top + 4}
              fill="none"
              stroke={colour.beam}
              strokeWidth={2}
            />
            <Rect x={windowX - 2} y={middle - 8} width={4} height={16} fill={colour.beam} />
            <Rect x={windowX + windowWidth - 2} y={middle - 8} width={4} height={16} fill={colour.beam} />
            {!compact ? (
              <G>
                <Rect x={flagX} y={0} width={flagWidth} height={flagHeight} rx={2} fill={colour.beam} />
                <SvgText
                  x={flagX + flagWidth / 2}
                  y={12}
                  fill={colour.panel}
                  textAnchor="middle"
                  fontFamily={face.figure}
                  fontSize={12}
                  fontWeight="600"
                >
                  {flag}
                </SvgText>
              </G>
            ) : null}
          </G>
        ) : null}
      </Svg>
    </View>
  );
}

/** All bars of a kind as one path: a strip of years is redrawn with each move of its window. */
function barPaths(bars: readonly SpineBar[], middle: number, upper: number, lower: number) {
  const paths = { recorded: '', good: '', usable: '', rejected: '' };
  const put = (kind: keyof typeof paths, bar: SpineBar, top: number, height: number) => {
    if (height > 0)
      paths[kind] += `M${bar.x} ${top.toFixed(2)}h${bar.width}v${height.toFixed(2)}h${-bar.width}z`;
  };
  for (const bar of bars) {
    const good = lower * bar.good;
    const usable = lower * bar.usable;
    put('recorded', bar, middle - upper * bar.recorded, upper * bar.recorded);
    put('good', bar, middle, good);
    put('usable', bar, middle + good, usable);
    put('rejected', bar, middle + good + usable, lower * bar.rejected);
  }
  return paths;
}

function mean(values: readonly number[]): number {
  return values.length === 0 ? 0 : values.reduce((sum, value) => sum + value, 0) / values.length;
}

/** What the strip says, for those who hear it. */
export function describeSpine(data: SpineData, offsetMinutes: number): string {
  return (
    `${formatSpan(data.fromMs, data.toMs, offsetMinutes)}: ${formatShare(mean(data.recorded))} recorded; ` +
    `${fluxLabels[data.gradedFlux as FluxKey]?.symbol ?? data.gradedFlux} good ${formatShare(mean(data.good))}, usable ${formatShare(mean(data.usable))}, rejected ${formatShare(mean(data.rejected))}`
  );
}
