import { memo } from 'react';
import { View } from 'react-native';
import { fluxLabels, quantity } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import type { PeriodRow } from '../../server/contract/api';
import { formatQuantity } from '../format/quantities';
import { startOfDayMs } from '../format/times';
import type { StationClock } from '../format/useClock';
import { DataTable, GradeMark, Text, TextLink, UnitText } from '../primitives';
import type { DataColumn } from '../primitives';
import { face } from '../tokens';
import { fluxGrade, lowerFirst, shownFluxes, verdictFlux } from './period-view';

export interface PeriodTableProps {
  periods: readonly PeriodRow[];
  clock: StationClock;
  hrefOf: (startMs: number) => string;
}

/** Whether any flux of a period is worse than good, or missing. */
export function isFlagged(row: Pick<PeriodRow, 'grades'>): boolean {
  return shownFluxes.some((flux) => fluxGrade(row, flux) !== 0);
}

function FluxCell({ row, flux }: { row: PeriodRow; flux: FluxKey }) {
  const { valueKey } = fluxLabels[flux];
  return (
    <View style={{ flexDirection: 'row', gap: 8, justifyContent: 'flex-end', alignItems: 'center' }}>
      <Text variant="figure" size={14}>
        {formatQuantity(valueKey, row.values[valueKey])}
      </Text>
      <View style={{ width: 28 }}>
        <GradeMark grade={fluxGrade(row, flux)} />
      </View>
    </View>
  );
}

const outcomeWords: Partial<Record<PeriodRow['outcome'], string>> = {
  empty: 'nothing recorded',
  stopped: 'not processed',
  crossing: 'set-up changed within it',
};

/** What decided the worst grade of a period; '' where all is good. */
export function mainFindingWords(row: PeriodRow): string {
  if (row.outcome === 'empty' || row.outcome === 'crossing') return outcomeWords[row.outcome] ?? '';
  const flux = verdictFlux(row);
  const main = row.mainFinding[flux];
  if (!main) return outcomeWords[row.outcome] ?? '';
  return row.outcome === 'stopped' ? main : `${fluxLabels[flux].symbol}: ${lowerFirst(main)}`;
}

function Head({ symbol, unit }: { symbol: string; unit: string }) {
  return (
    <>
      <UnitText>{symbol}</UnitText>
      <br />
      <span style={{ whiteSpace: 'nowrap', fontSize: 11, fontFamily: face.figure, fontWeight: 400 }}>
        <UnitText>{unit}</UnitText>
      </span>
    </>
  );
}

/** The periods of a window as a table; each row leads to its page. */
export const PeriodTable = memo(function PeriodTable({ periods, clock, hrefOf }: PeriodTableProps) {
  const first = periods[0];
  const last = periods.at(-1);
  const offset = clock.offsetMinutes;
  const hasDays =
    first !== undefined &&
    last !== undefined &&
    startOfDayMs(first.startMs, offset) !== startOfDayMs(last.startMs, offset);
  const columns: DataColumn<PeriodRow>[] = [
    ...(hasDays
      ? [
          {
            key: 'day',
            head: 'Day',
            width: 96,
            cell: (row: PeriodRow) => (
              <Text variant="small" soft nowrap>
                {clock.day(row.startMs).replace(/ \d{4}$/, '')}
              </Text>
            ),
          },
        ]
      : []),
    {
      key: 'time',
      head: `Period, ${clock.zone}`,
      // the joiner after the dash keeps both ends on one line
      cell: (row) => (
        <TextLink
          label={clock.periodClock(row.startMs, row.endMs).replace('\u2013', '\u2013\u2060')}
          ariaLabel={clock.period(row.startMs, row.endMs)}
          href={hrefOf(row.startMs)}
        />
      ),
    },
    ...shownFluxes.map((flux): DataColumn<PeriodRow> => ({
      key: flux,
      head: (
        <span style={{ display: 'inline-block', paddingRight: 36 }}>
          <Head symbol={fluxLabels[flux].symbol} unit={quantity(fluxLabels[flux].valueKey).unit} />
        </span>
      ),
      align: 'right',
      cell: (row) => <FluxCell row={row} flux={flux} />,
    })),
    {
      key: 'wind',
      head: <Head symbol="wind" unit="m s-1" />,
      align: 'right',
      cell: (row) => (
        <Text variant="figure" size={14}>
          {formatQuantity('windSpeed', row.values.windSpeed)}
        </Text>
      ),
    },
    {
      key: 'direction',
      head: <Head symbol="from" unit="°" />,
      align: 'right',
      cell: (row) => (
        <Text variant="figure" size={14}>
          {formatQuantity('windDirection', row.values.windDirection)}
        </Text>
      ),
    },
    {
      key: 'finding',
      head: 'What decided',
      width: '34%',
      cell: (row) => (
        <Text variant="small">
          <UnitText>{mainFindingWords(row)}</UnitText>
        </Text>
      ),
    },
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
            <TextLink
              standing
              label={clock.periodClock(row.startMs, row.endMs)}
              ariaLabel={clock.period(row.startMs, row.endMs)}
              href={hrefOf(row.startMs)}
            />
            <Text variant="small" soft>
              {clock.day(row.startMs)}
            </Text>
          </View>
          <View style={{ flexDirection: 'row', flexWrap: 'wrap', rowGap: 4 }}>
            {shownFluxes.map((flux) => (
              <View key={flux} style={{ flexDirection: 'row', gap: 6, alignItems: 'center', width: '50%' }}>
                <Text variant="label" style={{ width: 28 }}>
                  <UnitText>{fluxLabels[flux].symbol}</UnitText>
                </Text>
                <FluxCell row={row} flux={flux} />
              </View>
            ))}
          </View>
          {mainFindingWords(row) ? (
            <Text variant="small" soft>
              <UnitText>{mainFindingWords(row)}</UnitText>
            </Text>
          ) : null}
        </View>
      )}
    />
  );
});
