import { View } from 'react-native';
import { quantity } from '../../processing/catalogue';
import { GradeMark, Text } from '../primitives';
import { useCursorMs } from './series-cursor';
import { useTheme, webStyle } from '../tokens';
import { gradeValue, periodIndexAt, readoutText } from './series-plot';
import type { PlotSeries } from './series-plot';

export interface PanelCursorProps {
  series: PlotSeries;
  window: { fromMs: number; toMs: number };
  range: [number, number];
  left: number;
  plotWidth: number;
  top: number;
  innerHeight: number;
  decimals: number;
  /** Where the readout stands; null: elsewhere on the page. */
  readout: 'top' | 'bottom' | null;
}

/** Half of a grade mark: how far from the edge it stands for a value beyond the axis [px]. */
const markInset = 5;

const layer = webStyle({ willChange: 'transform', contain: 'layout style' });

/** Beam line, ring on the value, readout in the headroom; the only part of a panel that moves with the cursor. */
export function PanelCursor(props: PanelCursorProps) {
  const { colour } = useTheme();
  const cursorMs = useCursorMs();
  const { series, window, range, left, plotWidth, top, innerHeight } = props;
  const index = cursorMs === null ? -1 : periodIndexAt(series.startMs, series.endMs, cursorMs);
  if (index < 0) return null;
  const middleMs = ((series.startMs[index] ?? 0) + (series.endMs[index] ?? 0)) / 2;
  const x = left + ((middleMs - window.fromMs) / (window.toMs - window.fromMs)) * plotWidth;
  if (x < left || x > left + plotWidth) return null;
  const value = series.value[index] ?? null;
  const y = value === null ? 0 : top + (1 - (value - range[0]) / (range[1] - range[0])) * innerHeight;
  const isGraded = quantity(series.key).gradedBy !== null;
  return (
    <View
      style={[
        {
          position: 'absolute',
          left: 0,
          top: 0,
          width: left + plotWidth,
          height: '100%',
          pointerEvents: 'none',
        },
        // a layer of its own: moving the cursor repaints no canvas
        layer,
      ]}
    >
      <View
        style={{
          position: 'absolute',
          left: x - 1,
          top: -2,
          bottom: -2,
          width: 2,
          backgroundColor: colour.beam,
        }}
      />
      {value !== null ? (
        <View
          style={{
            position: 'absolute',
            left: x - 8,
            // a value beyond the axis has its mark on the edge
            top: Math.max(top + markInset, Math.min(top + innerHeight - markInset, y)) - 8,
            width: 16,
            height: 16,
            borderRadius: 8,
            borderWidth: 2,
            borderColor: colour.beam,
          }}
        />
      ) : null}
      {props.readout !== null ? (
        <View
          style={{
            position: 'absolute',
            ...(props.readout === 'top' ? { top: top - 2 } : { top: top + innerHeight - 22 }),
            ...(x > left + plotWidth / 2 ? { right: left + plotWidth - x + 10 } : { left: x + 10 }),
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
          {isGraded ? <GradeMark grade={gradeValue(series.grade[index])} size={14} show="none" /> : null}
          <Text variant="figure" size={13}>
            {readoutText(series, index)}
          </Text>
        </View>
      ) : null}
    </View>
  );
}

/** The value under the cursor above a panel, where there is no room inside (phone). */
export function PanelValue({ series }: { series: PlotSeries }) {
  const cursorMs = useCursorMs();
  const index = cursorMs === null ? -1 : periodIndexAt(series.startMs, series.endMs, cursorMs);
  if (index < 0) return null;
  return (
    <View style={{ flexDirection: 'row', gap: 8, alignItems: 'center' }}>
      {quantity(series.key).gradedBy ? (
        <GradeMark grade={gradeValue(series.grade[index])} show="none" />
      ) : null}
      <Text variant="figure" size={14}>
        {readoutText(series, index)}
      </Text>
    </View>
  );
}
