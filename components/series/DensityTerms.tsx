import { View } from 'react-native';
import Svg, { G, Line, Rect, Text as SvgText } from 'react-native-svg';
import { quantity } from '../../processing/catalogue';
import { formatNumber, formatSigned } from '../format/numbers';
import { shownValue } from '../format/quantities';
import { face, useTheme } from '../tokens';

export interface DensityTermsProps {
  values: Record<string, number | null>;
  width: number;
}

const rowHeight = 26;
const labelWidth = 96;
const figureWidth = 62;

/** How the CO2 flux adds up: what was measured, what the spectral loss adds, what vapour and heat add; each bar begins where the last ended. */
export function DensityTerms({ values, width }: DensityTermsProps) {
  const { colour } = useTheme();
  const rows = densityRows(values);
  if (rows === null || width < 240) return null;
  const { decimals, unit } = quantity('co2Flux');
  const ends = rows.flatMap((row) => [row.from, row.to]);
  const low = Math.min(0, ...ends);
  const high = Math.max(0, ...ends);
  const left = labelWidth;
  const right = width - figureWidth;
  const x = (value: number) => left + ((value - low) / (high - low || 1)) * (right - left);
  const height = rows.length * rowHeight + 8;
  const fills = [colour.traces[0], colour.traces[0], colour.traces[1], colour.traces[2]];
  const spoken = rows.map((row) => `${row.label} ${formatNumber(row.shown, decimals)}`).join(', ');
  return (
    <View role="img" aria-label={`CO2 flux in ${unit}: ${spoken}`}>
      <Svg width={width} height={height} viewBox={`0 0 ${width} ${height}`} aria-hidden>
        <Line x1={x(0)} x2={x(0)} y1={2} y2={height - 2} stroke={colour.rule} strokeWidth={1} />
        {rows.map((row, index) => {
          const y = index * rowHeight + 6;
          const start = Math.min(x(row.from), x(row.to));
          const length = Math.max(1, Math.abs(x(row.to) - x(row.from)));
          return (
            <G key={row.label}>
              <SvgText
                x={labelWidth - 10}
                y={y + 13}
                textAnchor="end"
                fill={colour.ink}
                fontFamily={face.text}
                fontSize={13}
              >
                {row.label}
              </SvgText>
              <Rect
                x={start}
                y={y}
                width={length}
                height={16}
                fill={row.isSum ? colour.panel : (fills[index] ?? colour.rule)}
                stroke={row.isSum ? colour.ink : 'none'}
                strokeWidth={1.5}
              />
              {index > 0 && !row.isSum ? (
                <Line
                  x1={x(row.from)}
                  x2={x(row.from)}
                  y1={y - 10}
                  y2={y}
                  stroke={colour.rule}
                  strokeWidth={1}
                />
              ) : null}
              <SvgText
                x={width}
                y={y + 13}
                textAnchor="end"
                fill={colour.ink}
                fontFamily={face.figure}
                fontSize={13}
                fontWeight={row.isSum ? '600' : '400'}
              >
                {index === 0 || row.isSum
                  ? formatNumber(row.shown, decimals)
                  : formatSigned(row.shown, decimals)}
              </SvgText>
            </G>
          );
        })}
      </Svg>
    </View>
  );
}

export interface DensityRow {
  label: string;
  /** Where the bar begins and ends, in the shown unit. */
  from: number;
  to: number;
  /** The number beside it. */
  shown: number;
  isSum: boolean;
}

/** The parts of the CO2 flux in order; null when one of them is missing. */
export function densityRows(values: Record<string, number | null>): DensityRow[] | null {
  const at = (key: string) => shownValue(key, values[key]);
  const measured = at('covWCo2');
  const corrected = at('co2CovarianceTerm');
  const vapour = at('co2VapourTerm');
  const heat = at('co2HeatTerm');
  const sum = at('co2Flux');
  if (measured === null || corrected === null || vapour === null || heat === null || sum === null)
    return null;
  const rows: DensityRow[] = [];
  let reached = 0;
  for (const [label, part] of [
    ['covariance', measured],
    ['spectral loss', corrected - measured],
    ['water vapour', vapour],
    ['heat', heat],
  ] as const) {
    rows.push({ label, from: reached, to: reached + part, shown: part, isSum: false });
    reached += part;
  }
  rows.push({ label: 'FC', from: 0, to: sum, shown: sum, isSum: true });
  return rows;
}
