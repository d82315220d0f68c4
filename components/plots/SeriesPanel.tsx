import { memo, useDeferredValue, useEffect, useLayoutEffect, useMemo, useRef } from 'react';
import { View } from 'react-native';
import uPlot from 'uplot';
import 'uplot/dist/uPlot.min.css';
import { quantity } from '../../processing/catalogue';
import { formatNumber } from '../format/numbers';
import { face, useTheme, webStyle, withAlpha } from '../tokens';
import { drawBehind, drawMarks } from './panel-drawing';
import type { PanelScene } from './panel-drawing';
import { lookColour, lookDash, panelLook } from './panel-looks';
import { PanelCursor } from './PanelCursor';
import { axisRange, decimalsOf, describePanel } from './series-plot';
import type { PlotSeries } from './series-plot';
import { usePanelGestures } from './use-panel-gestures';

export interface SeriesPanelProps {
  series: PlotSeries;
  window: { fromMs: number; toMs: number };
  nights: readonly { fromMs: number; toMs: number }[];
  width: number;
  height: number;
  /** Instants of the vertical lines. */
  ticksMs: readonly number[];
  onHover: (atMs: number | null) => void;
  onChoose: (atMs: number) => void;
  onOpen: (atMs: number) => void;
  /** Drag with a mouse, or two fingers, zooms into a span. */
  onZoom: (fromMs: number, toMs: number) => void;
  /** Readout beside the cursor; on a phone it stands above the panel instead. */
  readout: boolean;
  /** Space of the value axis [px]. */
  axisWidth: number;
  showTruth?: boolean;
  /** The run is still computing. */
  isPending?: boolean;
}

/** Height of the readout with its distance to the line [px]. */
const readoutRoomPx = 30;
const padTop = 4;
const padBottom = 4;

/** One quantity over time: line, band of uncertainty, grades by shape, hatched gaps, grey nights. The cursor is drawn over it. */
export const SeriesPanel = memo(function SeriesPanel(props: SeriesPanelProps) {
  const { colour } = useTheme();
  const hostRef = useRef<View>(null);
  const plotRef = useRef<uPlot | null>(null);
  const { series, width, height, axisWidth, window } = props;
  const { fromMs, toMs } = window;
  const look = panelLook(series.key);
  const traceColour = lookColour(look, colour);
  const dash = lookDash(look);
  const innerHeight = height - padTop - padBottom;
  const readoutShare = props.readout ? Math.min(0.32, readoutRoomPx / innerHeight) : 0.06;
  const range = useMemo(
    () => axisRange(series, fromMs, toMs, readoutShare),
    [series, fromMs, toMs, readoutShare],
  );
  const showTruth = props.showTruth === true && series.truth !== null;
  const current: PanelScene & { range: [number, number] } = {
    series,
    nights: props.nights,
    colour,
    fromMs,
    toMs,
    ticksMs: props.ticksMs,
    showTruth,
    range,
    isPending: props.isPending === true,
    lineColour: traceColour,
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
        padding: [padTop, 1, padBottom, 0],
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
            space: 30,
            ...(look.splits ? { splits: [...look.splits] } : {}),
            values: (_plot, splits) => splits.map((split) => formatNumber(split, decimalsOf(splits))),
          },
        ],
        series: [
          {},
          {
            stroke: traceColour,
            width: 1.9,
            // uPlot takes dashes in canvas pixels
            dash: dash.map((length) => length * uPlot.pxRatio),
            spanGaps: false,
            points: { show: false },
          },
          { stroke: 'transparent', width: 0, points: { show: false } },
          { stroke: 'transparent', width: 0, points: { show: false } },
          { stroke: colour.ink, width: 1, points: { show: false }, show: showTruth },
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
    const plot = plotRef.current;
    plot?.batch(() => {
      plot.setScale('x', { min: fromMs / 1000, max: toMs / 1000 });
      plot.setScale('y', { min: range[0], max: range[1] });
      plot.redraw(false, true);
    });
  }, [fromMs, toMs, range, props.nights, props.ticksMs, props.isPending]);

  const plotWidth = width - axisWidth - 1;
  const { span, handlers } = usePanelGestures({
    window,
    bounds: { left: axisWidth, right: width - 1 },
    onHover: props.onHover,
    onChoose: props.onChoose,
    onOpen: props.onOpen,
    onZoom: props.onZoom,
  });
  const settledWindow = useDeferredValue(window);
  const spoken = useMemo(() => describePanel(series, settledWindow), [series, settledWindow]);

  return (
    <View
      style={[{ width, height }, webStyle({ touchAction: 'pan-y', cursor: 'crosshair', userSelect: 'none' })]}
      role="img"
      aria-label={spoken}
      testID={`panel-${series.key}`}
      {...(handlers as object)}
    >
      <View ref={hostRef} style={{ width, height }} />
      {span ? (
        <View
          style={{
            position: 'absolute',
            left: span[0],
            width: span[1] - span[0],
            top: padTop,
            height: innerHeight,
            backgroundColor: withAlpha(colour.beam, 0.16),
            borderLeftWidth: 1,
            borderRightWidth: 1,
            borderColor: colour.beam,
          }}
        />
      ) : null}
      <PanelCursor
        series={series}
        window={window}
        range={range}
        left={axisWidth}
        plotWidth={plotWidth}
        top={padTop}
        innerHeight={innerHeight}
        decimals={quantity(series.key).decimals}
        readout={props.readout ? look.headroom : null}
      />
    </View>
  );
});
