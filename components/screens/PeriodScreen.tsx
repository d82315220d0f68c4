import { useEffect, useState } from 'react';
import { View } from 'react-native';
import { router } from 'expo-router';
import type { Href } from 'expo-router';
import { fluxLabels, quantity } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import type { PeriodDetail } from '../../server/contract/api';
import { usePeriod } from '../data/use-run-results';
import { useRuns } from '../data/use-runs';
import { useStation } from '../data/use-stations';
import { formatNumber } from '../format/numbers';
import { formatQuantity, formatQuantityUncertainty, shownSpread, shownValue } from '../format/quantities';
import { useClock } from '../format/useClock';
import { CurvePlot } from '../plots/CurvePlot';
import {
  Button,
  ButtonRow,
  ErrorNotice,
  FactRow,
  GradeMark,
  Icon,
  IconButton,
  Ledger,
  LoadingLine,
  Section,
  SegmentChoice,
  Text,
  UnitText,
  ValueRow,
} from '../primitives';
import { fluxGrade, shownFluxes, valueGroups, verdictFlux, verdictWords } from '../series/period-view';
import { weatherLine } from '../series/PeriodInspector';
import { ReasonList } from '../series/ReasonList';
import { StepLedger } from '../series/StepLedger';
import { useWidth } from '../series/use-width';
import { AppShell, periodPath, stationPath } from '../shell';
import { space, useWide } from '../tokens';

export interface PeriodScreenProps {
  group: string;
  station: string;
  startMs: number;
  run?: string;
}

/** One half hour: the verdict, the reasons behind it, every value, and what each step did. */
export function PeriodScreen({ group, station, startMs, run: wantedRun }: PeriodScreenProps) {
  const stationQuery = useStation(group, station);
  const runsQuery = useRuns(group, station);
  const run =
    (runsQuery.data ?? []).find((one) => one.id === wantedRun) ??
    runsQuery.data?.find((one) => one.periodsDone > 0);
  const periodQuery = usePeriod(group, run?.id ?? null, startMs);
  const period = periodQuery.data;
  const previous = period?.previousStartMs ?? null;
  const next = period?.nextStartMs ?? null;
  const hrefOf = (start: number) => `${periodPath(group, station, start)}${run ? `?run=${run.id}` : ''}`;
  const clock = useClock(stationQuery.data?.station.utcOffsetMinutes ?? 0);

  useEffect(() => {
    const onKey = (event: KeyboardEvent) => {
      if (event.ctrlKey || event.metaKey || event.altKey) return;
      if ((event.target as HTMLElement | null)?.closest('input, textarea, select, dialog')) return;
      const to = event.key === '[' ? previous : event.key === ']' ? next : null;
      if (to === null) return;
      event.preventDefault();
      router.replace(`${periodPath(group, station, to)}${run ? `?run=${run.id}` : ''}` as Href);
    };
    globalThis.addEventListener('keydown', onKey);
    return () => globalThis.removeEventListener('keydown', onKey);
  }, [previous, next, group, station, run]);

  const shell = {
    title: period ? `Period ${clock.period(period.startMs, period.endMs)}` : 'Period',
    place: 'series' as const,
    groupSlug: group,
    stationSlug: station,
    stationName: stationQuery.data?.station.name,
    stationOffsetMinutes: stationQuery.data?.station.utcOffsetMinutes,
    chip: run ? (
      <Text variant="small" soft nowrap>
        run {run.number} · recipe <Text strong>{run.recipeName}</Text> {run.recipeHash.slice(0, 8)}
      </Text>
    ) : undefined,
    actions: [
      {
        key: 'previous',
        label: 'Previous',
        icon: 'back' as const,
        isDisabled: previous === null,
        onPress: () => previous !== null && router.replace(hrefOf(previous) as Href),
      },
      {
        key: 'next',
        label: 'Next',
        icon: 'forward' as const,
        isDisabled: next === null,
        onPress: () => next !== null && router.replace(hrefOf(next) as Href),
      },
      {
        key: 'series',
        label: 'Series',
        icon: 'evidence' as const,
        href: stationPath(group, station, 'series'),
      },
    ],
  };
  const error = stationQuery.error ?? runsQuery.error ?? periodQuery.error;
  if (error) {
    return (
      <AppShell {...shell}>
        <View style={{ padding: space.xl, gap: space.l }}>
          <ErrorNotice
            error={error}
            safe="Nothing was changed."
            onRetry={() =>
              void Promise.all([stationQuery.refetch(), runsQuery.refetch(), periodQuery.refetch()])
            }
          />
          <Button label="Back to the series" href={stationPath(group, station, 'series')} />
        </View>
      </AppShell>
    );
  }
  if (!period) {
    return (
      <AppShell {...shell}>
        <View style={{ padding: space.xl }}>
          <LoadingLine label="reading the period" />
        </View>
      </AppShell>
    );
  }
  return (
    <AppShell {...shell}>
      <PeriodPage
        key={period.startMs}
        {...{ period, clock, station, group }}
        stationName={stationQuery.data?.station.name ?? station}
        isInvented={stationQuery.data?.station.invented ?? false}
        previousHref={previous === null ? null : hrefOf(previous)}
        nextHref={next === null ? null : hrefOf(next)}
      />
    </AppShell>
  );
}

interface PeriodPageProps {
  group: string;
  station: string;
  stationName: string;
  isInvented: boolean;
  period: PeriodDetail;
  clock: ReturnType<typeof useClock>;
  previousHref: string | null;
  nextHref: string | null;
}

function PeriodPage(props: PeriodPageProps) {
  const { period, clock } = props;
  const wide = useWide();
  const [flux, setFlux] = useState<FluxKey>(verdictFlux(period));
  const [curveWidth, onCurveLayout] = useWidth();
  const grade = fluxGrade(period, flux);
  const { symbol, valueKey } = fluxLabels[flux];
  const entry = quantity(valueKey);
  const value = period.values[valueKey] ?? null;
  const test = period.grades[flux];
  const go = (href: string | null) => href !== null && router.replace(href as Href);

  return (
    <View style={{ padding: wide ? space.xl : space.l, gap: space.xl, maxWidth: 1180 }}>
      <View style={{ gap: space.s }}>
        <View style={{ flexDirection: 'row', alignItems: 'center', gap: space.s, flexWrap: 'wrap' }}>
          <Text variant="small" soft>
            {props.stationName}, {clock.day(period.startMs)},{' '}
            {clock.label.toLowerCase().replace('utc', 'UTC')}
            {props.isInvented ? ', invented records' : ''}
          </Text>
          <View style={{ flexGrow: 1 }} />
          {wide ? (
            <View style={{ flexDirection: 'row', gap: space.xs }}>
              <IconButton
                label="Previous period, key ["
                icon={<Icon name="back" />}
                disabled={props.previousHref === null}
                onPress={() => go(props.previousHref)}
              />
              <IconButton
                label="Next period, key ]"
                icon={<Icon name="forward" />}
                disabled={props.nextHref === null}
                onPress={() => go(props.nextHref)}
              />
            </View>
          ) : null}
        </View>
        <Text variant="verdict">
          <UnitText>{symbol}</UnitText> {clock.periodClock(period.startMs, period.endMs)}{' '}
          {grade === null ? '' : `graded ${grade}`}
          {': '}
          {verdictWords(period, flux)}
        </Text>
        <View style={{ flexDirection: 'row', flexWrap: 'wrap', gap: space.s, alignItems: 'center' }}>
          <GradeMark grade={grade} show="both" size={18} />
          <Text>
            {value === null ? (
              <>
                <UnitText>{symbol}</UnitText> has no value in this period.
              </>
            ) : (
              <>
                <UnitText>{symbol}</UnitText> is{' '}
                <Text variant="figure" strong>
                  {formatQuantity(valueKey, value)}{' '}
                  {entry.uncertaintyKey
                    ? formatQuantityUncertainty(valueKey, period.values[entry.uncertaintyKey])
                    : ''}
                </Text>{' '}
                <UnitText>{entry.unit}</UnitText>.
              </>
            )}
          </Text>
          {test && test.class9 !== null ? (
            <Text soft>
              Steady state and turbulence alone: grade {test.ssitc ?? 'none'}, class {test.class9} of 9.
            </Text>
          ) : null}
        </View>
        <Text variant="small" soft>
          {weatherLine(period)}
        </Text>
      </View>

      <View
        style={{
          flexDirection: wide ? 'row' : 'column',
          gap: wide ? 32 : space.xl,
          alignItems: 'flex-start',
        }}
      >
        <View style={{ flex: wide ? 1 : undefined, alignSelf: 'stretch', gap: space.m, minWidth: 0 }}>
          <Section title="Why">
            <SegmentChoice
              label="Reasons for"
              value={flux}
              options={shownFluxes.map((key) => ({ value: key, label: fluxLabels[key].symbol }))}
              onChange={setFlux}
            />
            <ReasonList period={period} flux={flux} />
          </Section>
        </View>
        <View style={{ width: wide ? 440 : undefined, alignSelf: 'stretch', gap: space.xl }}>
          <Section title="Fluxes">
            <Ledger label="Fluxes with grades">
              {shownFluxes.map((key) => {
                const one = quantity(fluxLabels[key].valueKey);
                return (
                  <ValueRow
                    key={key}
                    label={one.symbol}
                    value={shownValue(one.key, period.values[one.key])}
                    decimals={one.decimals}
                    uncertainty={
                      one.uncertaintyKey
                        ? shownSpread(one.uncertaintyKey, period.values[one.uncertaintyKey])
                        : null
                    }
                    unit={one.unit}
                    grade={fluxGrade(period, key)}
                  />
                );
              })}
            </Ledger>
          </Section>
          <CurveSection period={period} width={curveWidth} onLayout={onCurveLayout} />
        </View>
      </View>

      <Section
        title="What each step did"
        subtitle="In the order of the pipeline. Open a row for its settings and counts."
      >
        {period.ledger.length > 0 ? (
          <StepLedger entries={period.ledger} />
        ) : (
          <Text soft>No step ran: there was nothing to compute.</Text>
        )}
      </Section>

      <Section title="All values">
        <View style={{ flexDirection: 'row', flexWrap: 'wrap', columnGap: 40, rowGap: space.xl }}>
          {valueGroups(period.values).map((group) => (
            <View key={group.group} style={{ width: wide ? 500 : '100%' }}>
              <Text variant="part" level={3}>
                {group.title}
              </Text>
              {group.rows.map((row) => {
                const one = quantity(row.key);
                return (
                  <FactRow key={row.key} label={one.label}>
                    <View style={{ flexDirection: 'row', gap: 8, alignItems: 'baseline' }}>
                      <Text variant="figure" size={14}>
                        {row.value === null
                          ? 'missing'
                          : formatNumber(shownValue(row.key, row.value), one.decimals)}
                      </Text>
                      <Text variant="small" soft style={{ minWidth: 84 }}>
                        <UnitText>{one.unit === '1' ? '' : one.unit}</UnitText>
                      </Text>
                    </View>
                  </FactRow>
                );
              })}
            </View>
          ))}
        </View>
      </Section>

      <Section title="Raw files behind it">
        {period.rawFiles.length === 0 ? (
          <Text soft>None: nothing was recorded in this half hour.</Text>
        ) : (
          <View style={{ gap: 4 }}>
            {period.rawFiles.map((file) => (
              <Text key={file.id} variant="figure" size={13} style={{ whiteSpace: 'normal' } as object}>
                {file.fileName}
              </Text>
            ))}
          </View>
        )}
        <ButtonRow>
          <Button label="Raw files" href={stationPath(props.group, props.station, 'raw-files')} />
          <Button label="Back to the series" href={stationPath(props.group, props.station, 'series')} />
        </ButtonRow>
      </Section>
    </View>
  );
}

function CurveSection({
  period,
  width,
  onLayout,
}: {
  period: PeriodDetail;
  width: number;
  onLayout: ReturnType<typeof useWidth>[1];
}) {
  const lags = [
    { curve: period.curves['lag.co2'], lagS: period.values.lagCo2, name: 'CO2' },
    { curve: period.curves['lag.h2o'], lagS: period.values.lagH2o, name: 'H2O' },
  ].filter((one) => one.curve !== undefined);
  return (
    <View onLayout={onLayout}>
      {lags.length > 0 ? (
        <Section
          title="Time lag"
          subtitle="Covariance with w against the shift of the gas; the plumb line is the lag that was used."
        >
          {lags.map(({ curve, lagS, name }, index) =>
            curve ? (
              <View key={name}>
                <Text variant="label">
                  <UnitText>{name}</UnitText>
                </Text>
                <CurvePlot
                  label={`Lag curve of ${name}`}
                  x={curve.x}
                  y={curve.y}
                  xUnit={`lag, ${curve.xUnit}`}
                  yUnit={curve.yUnit}
                  markX={lagS ?? null}
                  markLabel={lagS == null ? '' : `${formatNumber(lagS, 2)} s`}
                  width={width}
                  trace={index}
                />
              </View>
            ) : null,
          )}
        </Section>
      ) : null}
    </View>
  );
}
