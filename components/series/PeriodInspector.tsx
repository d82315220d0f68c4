import { memo, useMemo } from 'react';
import { View } from 'react-native';
import { fluxLabels, quantity } from '../../processing/catalogue';
import type { PeriodRow, SeriesData } from '../../server/contract/api';
import { usePeriod } from '../data/use-run-results';
import { formatNumber } from '../format/numbers';
import { formatQuantity, shownSpread, shownValue } from '../format/quantities';
import type { StationClock } from '../format/useClock';
import { useCursorMs } from '../plots/series-cursor';
import { periodIndexAt } from '../plots/series-plot';
import { Button, Icon, IconButton, Ledger, LoadingLine, Rule, Text, UnitText, ValueRow } from '../primitives';
import { space } from '../tokens';
import { glanceAt } from './period-columns';
import { fluxGrade, shownFluxes, verdictFlux } from './period-view';
import { ReasonList } from './ReasonList';
import { useSettled } from './use-settled';

export interface PeriodInspectorProps {
  group: string;
  runId: string;
  data: SeriesData;
  clock: StationClock;
  hrefOf: (startMs: number) => string;
  onStep: (by: number) => void;
}

/** The period under the cursor: values with their grades, and why. Values come from the columns at once, reasons when it stands still. */
export const PeriodInspector = memo(function PeriodInspector(props: PeriodInspectorProps) {
  const { data, clock } = props;
  const cursorMs = useCursorMs();
  const index = cursorMs === null ? -1 : periodIndexAt(data.startMs, data.endMs, cursorMs);
  const glance = useMemo(() => (index < 0 ? null : glanceAt(data, index)), [data, index]);
  const settledStart = useSettled(glance?.startMs ?? Number.NaN, 140);
  const detailQuery = usePeriod(props.group, props.runId, settledStart);
  const detail = detailQuery.data?.startMs === glance?.startMs ? detailQuery.data : undefined;
  if (!glance) {
    return (
      <View style={{ gap: space.m }}>
        <Text variant="section" level={2}>
          No period here
        </Text>
        <Text soft>
          {data.startMs.length === 0
            ? 'Periods show here as they are computed.'
            : 'Nothing was computed at this place. Point at a panel, or press the arrow keys: the period under the cursor shows here with its grades and reasons.'}
        </Text>
      </View>
    );
  }
  const flux = detail ? verdictFlux(detail) : verdictFlux(glance);
  const href = props.hrefOf(glance.startMs);
  return (
    <View style={{ gap: space.m }}>
      <View style={{ flexDirection: 'row', alignItems: 'center', gap: space.s }}>
        <IconButton
          label="Previous period"
          icon={<Icon name="back" />}
          onPress={() => props.onStep(-1)}
          disabled={index <= 0}
        />
        <View style={{ flex: 1, alignItems: 'center' }}>
          <Text variant="section" level={2}>
            {clock.periodClock(glance.startMs, glance.endMs)}
          </Text>
          <Text variant="small" soft align="center">
            {clock.day(glance.startMs)}
          </Text>
          <Text variant="small" soft align="center">
            period {formatNumber(index + 1)} of {formatNumber(data.startMs.length)}
          </Text>
        </View>
        <IconButton
          label="Next period"
          icon={<Icon name="forward" />}
          onPress={() => props.onStep(1)}
          disabled={index >= data.startMs.length - 1}
        />
      </View>
      <Rule double />
      <Ledger label="Fluxes of this period">
        {shownFluxes.map((key) => {
          const valueKey = fluxLabels[key].valueKey;
          const entry = quantity(valueKey);
          return (
            <ValueRow
              key={key}
              label={entry.symbol}
              value={shownValue(valueKey, glance.values[valueKey])}
              decimals={entry.decimals}
              uncertainty={
                entry.uncertaintyKey
                  ? shownSpread(entry.uncertaintyKey, glance.values[entry.uncertaintyKey])
                  : null
              }
              unit={entry.unit}
              grade={fluxGrade(glance, key)}
              href={href}
            />
          );
        })}
      </Ledger>
      <WeatherLine values={glance.values} />
      <Button kind="primary" wide label="Open this period" href={href} />
      {detail ? (
        <ReasonList period={detail} flux={flux} most={2} moreHref={href} />
      ) : detailQuery.error ? (
        <Text soft>The reasons could not be read. Opening the period asks again.</Text>
      ) : (
        <LoadingLine label="reading its reasons" />
      )}
    </View>
  );
});

/** "Wind from 214° at 3.1 m s⁻¹ · z/L −0.18 · air 17.8 °C". */
export function WeatherLine({ values }: Pick<PeriodRow, 'values'>) {
  const words = weatherWords(values);
  return words === '' ? null : (
    <Text variant="small" soft>
      <UnitText>{words}</UnitText>
    </Text>
  );
}

export function weatherWords(values: PeriodRow['values']): string {
  const parts: string[] = [];
  if (values.windSpeed != null) {
    const direction =
      values.windDirection == null ? '' : `from ${formatQuantity('windDirection', values.windDirection)}° `;
    parts.push(`Wind ${direction}at ${formatQuantity('windSpeed', values.windSpeed)} m s-1`);
  }
  if (values.zeta != null) parts.push(`z/L ${formatNumber(values.zeta, 2)}`);
  if (values.airTemperature != null)
    parts.push(`air ${formatQuantity('airTemperature', values.airTemperature)} °C`);
  return parts.join(' · ');
}
