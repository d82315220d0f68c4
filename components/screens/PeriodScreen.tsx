import { useEffect, useState } from 'react';
import { Pressable, View } from 'react-native';
import { router } from 'expo-router';
import type { Href } from 'expo-router';
import { fluxLabels, quantity } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import type { PeriodDetail } from '../../server/contract/api';
import { useGroupEvents } from '../data/use-group-events';
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
  Rule,
  Section,
  SegmentChoice,
  Text,
  UnitText,
  ValueRow,
} from '../primitives';
import { fluxGrade, shownFluxes, valueGroups, verdictFlux, verdictWords } from '../series/period-view';
import type { ValueGroup } from '../series/period-view';
import { DensityTerms, densityRows } from '../series/DensityTerms';
import { WeatherLine } from '../series/PeriodInspector';
import { ReasonList } from '../series/ReasonList';
import { StepLedger } from '../series/StepLedger';
import { useWidth } from '../series/use-width';
import { rememberPeriod } from '../series/view-memory';
import { AppShell, periodPath, stationPath } from '../shell';
import { space, useTheme, useWide, webStyle } from '../tokens';

export interface PeriodScreenProps {
  group: string;
  station: string;
  startMs: number;
  run?: string;
}

const keyedTo = (event: KeyboardEvent, previous: number | null, next: number | null) =>
  event.key === '[' ? previous : event.key === ']' ? next : null;

/** One half hour: the verdict, the reasons behind it, every value, and what each step did. */
export function PeriodScreen({ group, station, startMs, run: wantedRun }: PeriodScreenProps) {
  useGroupEvents(group);
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
    if (run && Number.isFinite(startMs)) rememberPeriod(run.id, startMs);
  }, [run, startMs]);

  useEffect(() => {
    const onKey = (event: KeyboardEvent) => {
      if (event.ctrlKey || event.metaKey || event.altKey) return;
      if ((event.target as HTMLElement | null)?.closest('input, textarea, select, dialog')) return;
      const to = keyedTo(event, previous, next);
      if (to === null) return;
      event.preventDefault();
      router.replace(`${periodPath(group, station, to)}${run ? `?run=${run.id}` : ''}` as Href);
    };
    globalThis.addEventListener('keydown', onKey);
    return () => globalThis.removeEventListener('keydown', onKey);
  }, [previous, next, group, station, run]);

  const seriesHref = `${stationPath(group, station, 'series')}${run ? `?run=${run.id}` : ''}`;
  const shell = {
    title: period ? `Period ${clock.period(period.startMs, period.endMs)}` : 'Period',
    place: 'series' as const,
    groupSlug: group,
    stationSlug: station,
    stationName: stationQuery.data?.station.name,
    stationOffsetMinutes: stationQuery.data?.station.utcOffsetMinutes,
    chip: run ? (
      <Text variant="small" soft nowrap>
        run {run.number} · recipe{' '}
        <Text variant="small" strong>
          {run.recipeName}
        </Text>{' '}
        <Text variant="figure" size={12} soft>
          {run.recipeHash.slice(0, 8)}
        </Text>
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
      { key: 'series', label: 'Series', icon: 'evidence' as const, href: seriesHref },
      {
        key: 'next',
        label: 'Next',
        icon: 'forward' as const,
        isDisabled: next === null,
        onPress: () => next !== null && router.replace(hrefOf(next) as Href),
      },
    ],
  };
  const wide = useWide();
  const plainPage = (title: string, children: React.ReactNode) => (
    <AppShell {...shell}>
      <View style={{ padding: wide ? space.xl : space.l, gap: space.l, maxWidth: 760 }}>
        <Text variant="title">{title}</Text>
        {children}
      </View>
    </AppShell>
  );
  const error = stationQuery.error ?? runsQuery.error ?? periodQuery.error;
  if (error) {
    return plainPage(
      'This period cannot be shown',
      <>
        <ErrorNotice
          error={error}
          onRetry={() =>
            void Promise.all([stationQuery.refetch(), runsQuery.refetch(), periodQuery.refetch()])
          }
        />
        <ButtonRow>
          <Button label="Back to the series" href={seriesHref} />
        </ButtonRow>
      </>,
    );
  }
  if (!Number.isFinite(startMs) || (runsQuery.data && !run)) {
    return plainPage(
      'There is no such period',
      <>
        <Text>
          {Number.isFinite(startMs)
            ? 'No run of this station has computed periods yet.'
            : 'The address does not name the start of a period.'}
        </Text>
        <ButtonRow>
          <Button label="Back to the series" href={seriesHref} />
        </ButtonRow>
      </>,
    );
  }
  if (!period) {
    return plainPage('Period', <LoadingLine label="reading the period" />);
  }
  return (
    <AppShell {...shell}>
      <PeriodPage
        key={period.startMs}
        {...{ period, clock, station, group, seriesHref }}
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
  seriesHref: string;
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

  const outcomeWords: Partial<Record<PeriodDetail['outcome'], string>> = {
    empty:
      'Nothing was recorded in this period, so there is nothing to compute. Missing is shown as missing, never as zero.',
    stopped: 'Too little is left to compute a flux from, so the period was not processed.',
    crossing:
      'Two different measurements meet in this period. Mixing them would give a number that means nothing.',
  };
  const hasFluxes = shownFluxes.some((key) => fluxGrade(period, key) !== null);

  return (
    <View style={{ padding: wide ? space.xl : space.l, gap: space.xl, maxWidth: 1180 }}>
      <View style={{ gap: space.s }}>
        <View style={{ flexDirection: 'row', alignItems: 'center', gap: space.l }}>
          <View style={{ flex: 1, gap: 6, minWidth: 0 }}>
            <Text variant="small" soft>
              {props.stationName}, {clock.day(period.startMs)},{' '}
              {clock.label === 'UTC' ? 'UTC' : `station time, ${clock.zone}`}
              {props.isInvented ? ', invented records' : ''}
            </Text>
            <Text variant="verdict">
              <UnitText>{symbol}</UnitText> {clock.periodClock(period.startMs, period.endMs)}{' '}
              {grade === null ? 'has no value' : 'graded '}
              {grade === null ? null : <GradeMark grade={grade} size={wide ? 22 : 18} show="none" />}
              {grade === null ? ': ' : ` ${grade}: `}
              <UnitText>{verdictWords(period, flux)}</UnitText>
            </Text>
          </View>
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
        {outcomeWords[period.outcome] ? <Text>{outcomeWords[period.outcome]}</Text> : null}
        {value !== null ? (
          <Text>
            <UnitText>{symbol}</UnitText> is{' '}
            <Text variant="figure" strong>
              {formatQuantity(valueKey, value)}
              {entry.uncertaintyKey && period.values[entry.uncertaintyKey] != null
                ? ` ${formatQuantityUncertainty(valueKey, period.values[entry.uncertaintyKey])}`
                : ''}
            </Text>{' '}
            <UnitText>{entry.unit}</UnitText>.{' '}
            {test && test.ssitc !== null
              ? `Steady state and integral turbulence alone give grade ${test.ssitc}${test.class9 === null ? '' : `, class ${test.class9} of 9`}.`
              : ''}
          </Text>
        ) : null}
        <WeatherLine values={period.values} />
      </View>

      <View
        style={{
          flexDirection: wide ? 'row' : 'column',
          gap: wide ? 40 : space.xl,
          alignItems: 'flex-start',
        }}
      >
        <View style={{ flex: wide ? 1 : undefined, alignSelf: 'stretch', gap: space.m, minWidth: 0 }}>
          <Rule />
          <SegmentChoice
            label="Reasons for"
            value={flux}
            options={shownFluxes.map((key) => ({ value: key, label: fluxLabels[key].symbol }))}
            onChange={setFlux}
          />
          <ReasonList period={period} flux={flux} clock={clock} withPassed level={2} />
        </View>
        <View
          onLayout={onCurveLayout}
          style={{ width: wide ? 440 : undefined, alignSelf: 'stretch', gap: space.xl }}
        >
          {hasFluxes ? (
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
          ) : null}
          {densityRows(period.values) !== null ? (
            <Section
              title="How FC adds up"
              subtitle="Warm, moist eddies dilute the gas without any exchange; vapour and heat terms put that back."
              aside={
                <Text variant="figure" size={12} soft>
                  <UnitText>{quantity('co2Flux').unit}</UnitText>
                </Text>
              }
            >
              <DensityTerms values={period.values} width={curveWidth} />
            </Section>
          ) : null}
          <CurveSection period={period} width={curveWidth} />
        </View>
      </View>

      <Section
        title="What each step did"
        subtitle="In the order of the pipeline. Open a row for its settings, counts and findings."
      >
        {period.ledger.length > 0 ? (
          <StepLedger period={period} />
        ) : (
          <Text soft>No step ran: there was nothing to compute.</Text>
        )}
      </Section>

      {Object.keys(period.values).length > 0 ? (
        <Section title="All values">
          <ValueGroups values={period.values} />
        </Section>
      ) : null}

      <Section title="Raw files behind it">
        {period.rawFiles.length === 0 ? (
          <Text soft>None: nothing was recorded in this period.</Text>
        ) : (
          <View style={{ gap: 4 }}>
            {period.rawFiles.map((file) => (
              <Text
                key={file.id}
                variant="figure"
                size={13}
                style={webStyle({ whiteSpace: 'normal', overflowWrap: 'anywhere' })}
              >
                {file.fileName}
              </Text>
            ))}
          </View>
        )}
        <ButtonRow>
          <Button label="Raw files" href={stationPath(props.group, props.station, 'raw-files')} />
          <Button label="Back to the series" href={props.seriesHref} />
        </ButtonRow>
      </Section>
    </View>
  );
}

/** Every value under the heading of its kind: in two columns where there is room, folded away on a phone. */
function ValueGroups({ values }: { values: PeriodDetail['values'] }) {
  const wide = useWide();
  return (
    <View style={wide ? webStyle({ display: 'block', columnCount: 2, columnGap: '40px' }) : undefined}>
      {valueGroups(values).map((group) => (
        <ValueGroupRows key={group.group} group={group} />
      ))}
    </View>
  );
}

function ValueGroupRows({ group }: { group: ValueGroup }) {
  const wide = useWide();
  const { colour } = useTheme();
  const [isOpen, setOpen] = useState(false);
  const title = (
    <Text variant="part" level={3}>
      {group.title}
    </Text>
  );
  const rows = group.rows.map((row) => {
    const one = quantity(row.key);
    return (
      <View key={row.key} style={webStyle({ breakInside: 'avoid' })}>
        <FactRow label={capitalised(one.label)}>
          <View style={{ flexDirection: 'row', gap: 8, alignItems: 'baseline' }}>
            {row.value === null ? (
              <Text variant="small" soft>
                missing
              </Text>
            ) : (
              <Text variant="figure" size={14}>
                {formatNumber(shownValue(row.key, row.value), one.decimals)}
              </Text>
            )}
            <Text variant="small" soft style={{ minWidth: 84 }}>
              <UnitText>{one.unit === '1' ? '' : one.unit}</UnitText>
            </Text>
          </View>
        </FactRow>
      </View>
    );
  });
  if (wide) {
    return (
      <View
        style={webStyle({
          display: 'block',
          breakInside: group.rows.length > 20 ? 'auto' : 'avoid',
          paddingBottom: 24,
        })}
      >
        {title}
        {rows}
      </View>
    );
  }
  return (
    <View style={{ borderBottomWidth: 1, borderBottomColor: colour.hair }}>
      <Pressable
        role="button"
        aria-expanded={isOpen}
        onPress={() => setOpen((open) => !open)}
        style={{ flexDirection: 'row', alignItems: 'center', minHeight: 48, gap: space.m }}
      >
        <View style={{ flex: 1, flexDirection: 'row', alignItems: 'baseline', gap: space.s }}>
          <Text variant="part" level={0}>
            {group.title}
          </Text>
          <Text variant="small" soft>
            {group.rows.length}
          </Text>
        </View>
        <Icon name={isOpen ? 'up' : 'down'} size={16} />
      </Pressable>
      {isOpen ? <View style={{ paddingBottom: space.l }}>{rows}</View> : null}
    </View>
  );
}

const capitalised = (text: string) => text.charAt(0).toUpperCase() + text.slice(1);

function CurveSection({ period, width }: { period: PeriodDetail; width: number }) {
  const lags = [
    {
      curve: period.curves['lag.co2'],
      lagS: period.values.lagCo2,
      valueKey: 'covWCo2',
      name: 'CO2',
      trace: 0,
    },
    {
      curve: period.curves['lag.h2o'],
      lagS: period.values.lagH2o,
      valueKey: 'covWH2o',
      name: 'H2O',
      trace: 1,
    },
  ];
  if (lags.every(({ curve }) => curve === undefined)) return null;
  return (
    <Section
      title="Time lag"
      subtitle="Covariance with w against the shift of the gas; the plumb line is the lag that was used."
    >
      {lags.map(({ curve, lagS, valueKey, name, trace }) =>
        curve ? (
          <View key={name}>
            <Text variant="label">
              <UnitText>{name}</UnitText>
            </Text>
            <CurvePlot
              label={`Lag curve of ${name}`}
              x={curve.x}
              y={curve.y.map((value) => shownValue(valueKey, value) ?? Number.NaN)}
              xUnit="lag, s"
              yUnit={quantity(valueKey).unit}
              markX={lagS ?? null}
              markLabel={lagS == null ? '' : `${formatNumber(lagS, 2)} s`}
              width={width}
              trace={trace}
            />
          </View>
        ) : null,
      )}
    </Section>
  );
}
