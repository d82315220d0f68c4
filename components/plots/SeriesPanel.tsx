import { useEffect, useLayoutEffect, useMemo, useRef, useState } from 'react';
import { View } from 'react-native';
import uPlot from 'uplot';
import 'uplot/dist/uPlot.min.css';
import { quantity } from '../../processing/catalogue';
import { formatNumber, formatUncertainty } from '../format/numbers';
import { GradeMark, Text } from '../primitives';
import { face, traceDashes, useTheme, webStyle, withAlpha } from '../tokens';
import { drawBehind, drawMarks } from './panel-drawing';
import type { PanelScene } from './panel-drawing';
import { axisRange, decimalsOf, describePanel, gradeValue } from './series-plot';
import type { PlotSeries } from './series-plot';

export interface SeriesPanelProps {
  series: PlotSeries;
  /** Which trace colour and dash; one per quantity all over the page. */
  trace: number;
  window: { fromMs: number; toMs: number };
  nights: { fromMs: number; toMs: number }[];
  width: number;
  height: number;
  /** Instants of the vertical lines. */
  ticksMs: number[];
  /** Index of the period under the cursor, −1 for none. */
  cursorIndex: number;
  onCursor: (atMs: number) => void;
  onOpen: (startMs: number) => void;
  /** Drag with a mouse, or two fingers, zooms into a span. */
  onZoom: (fromMs: number, toMs: number) => void;
  /** Readout beside the cursor; on a phone it stands above the panel instead. */
  readout: boolean;
  /** Space of the value axis [px]. */
  axisWidth: number;
  showTruth?: boolean;
}

/** One quantity over time: line, band of uncertainty, grades by shape, hatched gaps, grey nights. */
export function SeriesPanel(props: SeriesPanelProps) {
  const { colour } = useTheme();
  const hostRef = useRef<View>(null);
  const plotRef = useRef<uPlot | null>(null);
  const { series, trace, width, height, axisWidth } = props;
  const entry = quantity(series.key);
  const traceColour = colour.traces[trace % colour.traces.length] ?? colour.ink;
  const dash = traceDashes[trace % traceDashes.length] ?? [];
  const range = useMemo(
    () => axisRange(series, props.window.fromMs, props.window.toMs),
    [series, props.window.fromMs, props.window.toMs],
  );
  const showTruth = props.showTruth === true;
  const current: PanelScene & { range: [number, number] } = {
    series,
    nights: props.nights,
    colour,
    fromMs: props.window.fromMs,
    toMs: props.window.toMs,
    ticksMs: props.ticksMs,
    showTruth,
    range,
  };
  const scene = useRef(current);
  // The hooks of one uPlot instance always see the newest scene; layout effects run before the effects below.
  useLayoutEffect(() => {
    scene.current = current;
  });
  const data = useMemo<uPlot.AlignedData>(
    () => [series.x, series.line, series.upper, series.lower, series.truth ?? series.x.map(() => null)],
    [series],
  );

  useEffect(() => {
    const host = hostRef.current as unknown as HTMLDivElement | null;
    if (!host) return;
    const plot = new uPlot(
      {
        width,
        height,
        ms: 1e-3,
        cursor: { show: false },
        legend: { show: false },
        padding: [6, 1, 6, 0],
        scales: {
          x: { time: false, range: () => [scene.current.fromMs / 1000, scene.current.toMs / 1000] },
          y: { range: () => scene.current.range },
        },
        axes: [
          { show: false },
          {
            size: axisWidth,
            gap: 6,
            font: `12px ${face.figure}`,
            stroke: () => scene.current.colour.inkSoft,
            grid: { stroke: () => scene.current.colour.hair, width: 1 },
            ticks: { show: false },
            space: 34,
            values: (_plot, splits) => splits.map((split) => formatNumber(split, decimalsOf(splits))),
          },
        ],
        series: [
          {},
          { stroke: traceColour, width: 1.9, dash: [...dash], spanGaps: false, points: { show: false } },
          { stroke: 'transparent', width: 0, points: { show: false } },
          { stroke: 'transparent', width: 0, points: { show: false } },
          {
            stroke: withAlpha(colour.ink, 0.55),
            width: 1,
            points: { show: false },
            show: showTruth,
          },
        ],
        bands: [{ series: [2, 3], fill: withAlpha(traceColour, 0.24) }],
        hooks: {
          drawClear: [(u) => drawBehind(u, scene.current)],
          draw: [(u) => drawMarks(u, scene.current)],
        },
      },
      data,
      host,
    );
    plotRef.current = plot;
    return () => {
      plot.destroy();
      plotRef.current = null;
    };
    // A new instance only where options that uPlot cannot change are concerned.
    // eslint-disable-next-line react-hooks/exhaustive-deps
  }, [traceColour, axisWidth, showTruth, colour]);

  useEffect(() => plotRef.current?.setSize({ width, height }), [width, height]);
  useEffect(() => plotRef.current?.setData(data), [data]);
  useEffect(() => {
    plotRef.current?.redraw(true, true);
    plotRef.current?.setScale('x', { min: props.window.fromMs / 1000, max: props.window.toMs / 1000 });
  }, [props.window.fromMs, props.window.toMs, range, props.nights]);

  const plotLeft = axisWidth;
  const plotWidth = width - axisWidth - 1;
  const xAt = (atMs: number) =>
    plotLeft + ((atMs - props.window.fromMs) / (props.window.toMs - props.window.fromMs)) * plotWidth;
  const instantAt = (x: number) =>
    props.window.fromMs + ((x - plotLeft) / plotWidth) * (props.window.toMs - props.window.fromMs);
  const index = props.cursorIndex;
  const value = index >= 0 ? (series.value[index] ?? null) : null;
  const middleMs = index >= 0 ? ((series.startMs[index] ?? 0) + (series.endMs[index] ?? 0)) / 2 : 0;
  const cursorX = index >= 0 ? xAt(middleMs) : -1;
  const innerTop = 6;
  const innerHeight = height - 12;
  const yAt = (shown: number) => innerTop + (1 - (shown - range[0]) / (range[1] - range[0])) * innerHeight;
  const sigma =
    index >= 0 && series.upper[index] != null && value !== null
      ? (series.upper[index] ?? value) - value
      : null;

  const gesture = useRef<{ x: number; kind: 'mouse' | 'touch' } | null>(null);
  const [span, setSpan] = useState<[number, number] | null>(null);
  const pointer = (event: React.PointerEvent<HTMLElement>) => {
    const box = event.currentTarget.getBoundingClientRect();
    return Math.min(width, Math.max(plotLeft, event.clientX - box.left));
  };

  return (
    <View
      style={[{ width, height }, webStyle({ touchAction: 'pan-y', cursor: 'crosshair', userSelect: 'none' })]}
      role="img"
      aria-label={describePanel(series, props.window)}
      {...({
        onPointerDown: (event: React.PointerEvent<HTMLElement>) => {
          const x = pointer(event);
          gesture.current = { x, kind: event.pointerType === 'mouse' ? 'mouse' : 'touch' };
          props.onCursor(instantAt(x));
        },
        onPointerMove: (event: React.PointerEvent<HTMLElement>) => {
          const x = pointer(event);
          props.onCursor(instantAt(x));
          if (gesture.current?.kind === 'mouse' && Math.abs(x - gesture.current.x) > 6) {
            setSpan([Math.min(x, gesture.current.x), Math.max(x, gesture.current.x)]);
          }
        },
        onPointerUp: () => {
          if (span) props.onZoom(instantAt(span[0]), instantAt(span[1]));
          setSpan(null);
          gesture.current = null;
        },
        onPointerLeave: () => {
          setSpan(null);
          gesture.current = null;
        },
        onDoubleClick: () => {
          if (index >= 0) props.onOpen(series.startMs[index] ?? 0);
        },
      } as object)}
    >
      <View ref={hostRef} style={{ width, height }} />
      {span ? (
        <View
          style={{
            position: 'absolute',
            left: span[0],
            width: span[1] - span[0],
            top: innerTop,
            height: innerHeight,
            backgroundColor: withAlpha(colour.beam, 0.16),
            borderLeftWidth: 1,
            borderRightWidth: 1,
            borderColor: colour.beam,
          }}
        />
      ) : null}
      {index >= 0 && cursorX >= plotLeft && cursorX <= width ? (
        <View style={{ position: 'absolute', left: 0, top: 0, width, height, pointerEvents: 'none' }}>
          <View
            style={{
              position: 'absolute',
              left: cursorX - 1,
              top: 0,
              bottom: 0,
              width: 2,
              backgroundColor: colour.beam,
            }}
          />
          {value !== null ? (
            <View
              style={{
                position: 'absolute',
                left: cursorX - 7,
                top: Math.max(innerTop, Math.min(innerTop + innerHeight, yAt(value))) - 7,
                width: 14,
                height: 14,
                borderRadius: 7,
                borderWidth: 2,
                borderColor: colour.beam,
              }}
            />
          ) : null}
          {props.readout ? (
            <View
              style={{
                position: 'absolute',
                top: 2,
                ...(cursorX > width / 2 ? { right: width - cursorX + 8 } : { left: cursorX + 8 }),
                flexDirection: 'row',
                alignItems: 'center',
                gap: 6,
                paddingHorizontal: 8,
                height: 24,
                borderWidth: 1.5,
                borderColor: colour.beam,
                borderRadius: 2,
                backgroundColor: colour.panel,
              }}
            >
              <Readout
                grade={index >= 0 ? (series.grade[index] ?? null) : null}
                graded={entry.gradedBy !== null}
                text={
                  value === null
                    ? 'no data'
                    : `${formatNumber(value, entry.decimals)}${sigma === null ? '' : ` ${formatUncertainty(sigma, entry.decimals)}`}`
                }
              />
            </View>
          ) : null}
        </View>
      ) : null}
    </View>
  );
}

function Readout({ grade, graded, text }: { grade: number | null; graded: boolean; text: string }) {
  return (
    <>
      {graded ? <GradeMark grade={gradeValue(grade)} size={14} show="none" /> : null}
      <Text variant="figure" size={13}>
        {text}
      </Text>
    </>
  );
}
