import { View } from 'react-native';
import { fluxLabels, quantity } from '../../processing/catalogue';
import type { PeriodDetail, PeriodRow } from '../../server/contract/api';
import { formatNumber } from '../format/numbers';
import { formatQuantity, shownSpread, shownValue } from '../format/quantities';
import type { StationClock } from '../format/useClock';
import { Button, Icon, IconButton, Ledger, LoadingLine, Text, ValueRow } from '../primitives';
import { space } from '../tokens';
import { fluxGrade, shownFluxes, verdictFlux } from './period-view';
import { ReasonList } from './ReasonList';

export interface PeriodInspectorProps {
  row: PeriodRow | null;
  detail: PeriodDetail | null;
  index: number;
  count: number;
  clock: StationClock;
  hrefOf: (startMs: number) => string;
  onStep: (by: number) => void;
}

/** The period under the cursor: values with their grades, and why. */
export function PeriodInspector(props: PeriodInspectorProps) {
  const { row, detail, clock } = props;
  if (!row) {
    return (
      <Text soft>
        Move along the panels, or press the arrow keys: the period under the cursor shows here with its grades
        and reasons.
      </Text>
    );
  }
  const flux = verdictFlux(row);
  const href = props.hrefOf(row.startMs);
  return (
    <View style={{ gap: space.l }}>
      <View style={{ flexDirection: 'row', alignItems: 'center', gap: space.s }}>
        <IconButton
          label="Previous period"
          icon={<Icon name="back" />}
          onPress={() => props.onStep(-1)}
          disabled={props.index <= 0}
        />
        <View style={{ flex: 1, alignItems: 'center' }}>
          <Text variant="section" level={2}>
            {clock.periodClock(row.startMs, row.endMs)}
          </Text>
          <Text variant="small" soft>
            {clock.day(row.startMs)} · period {props.index + 1} of {props.count}
          </Text>
        </View>
        <IconButton
          label="Next period"
          icon={<Icon name="forward" />}
          onPress={() => props.onStep(1)}
          disabled={props.index >= props.count - 1}
        />
      </View>
      <Ledger label="Fluxes of this period">
        {shownFluxes.map((key) => {
          const valueKey = fluxLabels[key].valueKey;
          const entry = quantity(valueKey);
          return (
            <ValueRow
              key={key}
              label={entry.symbol}
              value={shownValue(valueKey, row.values[valueKey])}
              decimals={entry.decimals}
              uncertainty={
                entry.uncertaintyKey
                  ? shownSpread(entry.uncertaintyKey, row.values[entry.uncertaintyKey])
                  : null
              }
              unit={entry.unit}
              grade={fluxGrade(row, key)}
              href={href}
            />
          );
        })}
      </Ledger>
      <Text variant="small" soft>
        {weatherLine(row)}
      </Text>
      {detail ? (
        <ReasonList period={detail} flux={flux} most={3} />
      ) : (
        <LoadingLine label="reading its reasons" />
      )}
      <Button kind="primary" wide label="Open this period" href={href} />
    </View>
  );
}

/** "Wind from 214° at 3.1 m/s · z/L −0.18 · air 17.8 °C". */
export function weatherLine(row: Pick<PeriodRow, 'values'>): string {
  const { values } = row;
  const parts: string[] = [];
  if (values.windSpeed != null) {
    const direction =
      values.windDirection == null ? '' : `from ${formatQuantity('windDirection', values.windDirection)}° `;
    parts.push(`Wind ${direction}at ${formatQuantity('windSpeed', values.windSpeed)} m/s`);
  }
  if (values.zeta != null) parts.push(`z/L ${formatNumber(values.zeta, 2)}`);
  if (values.airTemperature != null)
    parts.push(`air ${formatQuantity('airTemperature', values.airTemperature)} °C`);
  return parts.join(' · ');
}
