import { View } from 'react-native';
import { fluxLabels, quantity } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import type { PeriodRow } from '../../server/contract/api';
import { formatQuantity, formatQuantityUncertainty } from '../format/quantities';
import type { StationClock } from '../format/useClock';
import { DataTable, GradeMark, Text, TextLink, UnitText } from '../primitives';
import type { DataColumn } from '../primitives';
import { fluxGrade, shownFluxes, verdictFlux } from './period-view';

export interface PeriodTableProps {
  periods: readonly PeriodRow[];
  clock: StationClock;
  hrefOf: (startMs: number) => string;
}

function FluxCell({
  row,
  flux,
  withUncertainty,
}: {
  row: PeriodRow;
  flux: FluxKey;
  withUncertainty: boolean;
}) {
  const { valueKey } = fluxLabels[flux];
  const { uncertaintyKey } = quantity(valueKey);
  return (
    <View style={{ flexDirection: 'row', gap: 8, justifyContent: 'flex-end', alignItems: 'center' }}>
      <Text variant="figure" size={14}>
        {formatQuantity(valueKey, row.values[valueKey])}
      </Text>
      {withUncertainty && uncertaintyKey ? (
        <Text variant="figure" size={13} soft style={{ minWidth: 58 }} align="right">
          {formatQuantityUncertainty(valueKey, row.values[uncertaintyKey])}
        </Text>
      ) : null}
      <GradeMark grade={fluxGrade(row, flux)} />
    </View>
  );
}

const outcomeWords: Partial<Record<PeriodRow['outcome'], string>> = {
  empty: 'nothing recorded',
  stopped: 'not processed',
  crossing: 'set-up changed within it',
};

function finding(row: PeriodRow): string {
  const special = outcomeWords[row.outcome];
  const flux = verdictFlux(row);
  const main = row.mainFinding[flux];
  if (main) return `${fluxLabels[flux].symbol}: ${main}`;
  return special ?? '';
}

/** The periods of a window as a table; each row leads to its page. */
export function PeriodTable({ periods, clock, hrefOf }: PeriodTableProps) {
  const columns: DataColumn<PeriodRow>[] = [
    {
      key: 'time',
      head: `Period, ${clock.zone}`,
      cell: (row) => (
        <TextLink label={clock.periodClock(row.startMs, row.endMs)} href={hrefOf(row.startMs)} />
      ),
    },
    ...shownFluxes.map((flux): DataColumn<PeriodRow> => ({
      key: flux,
      head: `${fluxLabels[flux].symbol}, ${quantity(fluxLabels[flux].valueKey).unit.replace('-2', '⁻²').replace('-1', '⁻¹')}`,
      align: 'right',
      cell: (row) => <FluxCell row={row} flux={flux} withUncertainty />,
    })),
    {
      key: 'wind',
      head: 'wind',
      align: 'right',
      cell: (row) => (
        <Text variant="figure" size={14}>
          {row.values.windSpeed == null
            ? ''
            : `${formatQuantity('windSpeed', row.values.windSpeed)} m/s ${formatQuantity('windDirection', row.values.windDirection)}°`}
        </Text>
      ),
    },
    {
      key: 'temperature',
      head: 'air, °C',
      align: 'right',
      cell: (row) => (
        <Text variant="figure" size={14}>
          {formatQuantity('airTemperature', row.values.airTemperature)}
        </Text>
      ),
    },
    { key: 'finding', head: 'what decided', cell: (row) => <Text variant="small">{finding(row)}</Text> },
  ];
  return (
    <DataTable
      caption="Periods in the window"
      columns={columns}
      rows={periods}
      rowKey={(row) => String(row.startMs)}
      phoneRow={(row) => (
        <View style={{ gap: 4 }}>
          <View style={{ flexDirection: 'row', justifyContent: 'space-between', alignItems: 'center' }}>
            <TextLink standing label={clock.periodClock(row.startMs, row.endMs)} href={hrefOf(row.startMs)} />
            <Text variant="small" soft>
              {clock.day(row.startMs)}
            </Text>
          </View>
          <View style={{ flexDirection: 'row', flexWrap: 'wrap', columnGap: 18, rowGap: 4 }}>
            {shownFluxes.map((flux) => (
              <View key={flux} style={{ flexDirection: 'row', gap: 6, alignItems: 'center' }}>
                <Text variant="label">
                  <UnitText>{fluxLabels[flux].symbol}</UnitText>
                </Text>
                <FluxCell row={row} flux={flux} withUncertainty={false} />
              </View>
            ))}
          </View>
          {finding(row) ? (
            <Text variant="small" soft>
              {finding(row)}
            </Text>
          ) : null}
        </View>
      )}
    />
  );
}
