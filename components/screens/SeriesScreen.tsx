import { useCallback, useDeferredValue, useMemo, useState } from 'react';
import { View } from 'react-native';
import { router } from 'expo-router';
import type { Href } from 'expo-router';
import { quantity } from '../../processing/catalogue';
import type { FluxKey } from '../../processing/state';
import { nights as nightsOf } from '../../processing/solar';
import type { Run, StationSummary } from '../../server/contract/api';
import { useRuns } from '../data/use-runs';
import { usePeriod, usePeriods, useSeries, useSpine } from '../data/use-run-results';
import { useStation } from '../data/use-stations';
import { formatNumber, formatUncertainty } from '../format/numbers';
import { useClock } from '../format/useClock';
import { SeriesPanel } from '../plots/SeriesPanel';
import { gradeValue, periodIndexAt, plotSeries } from '../plots/series-plot';
import type { PlotSeries } from '../plots/series-plot';
import { TimeAxis } from '../plots/TimeAxis';
import {
  Button,
  ButtonRow,
  ChoiceInput,
  EmptyState,
  ErrorNotice,
  GradeMark,
  Icon,
  IconButton,
  LoadingLine,
  Notice,
  ProgressLine,
  Section,
  Sheet,
  Text,
  UnitText,
} from '../primitives';
import { ExportSheet } from '../series/ExportSheet';
import { GradeCounts } from '../series/GradeCounts';
import { PeriodInspector } from '../series/PeriodInspector';
import { PeriodTable } from '../series/PeriodTable';
import { useWidth } from '../series/use-width';
import { useWindowKeys, windowKeyWords } from '../series/use-window-keys';
import { AppShell, periodPath, stationPath } from '../shell';
import { clampWindow, timeTicks } from '../spine/spine-geometry';
import { Spine } from '../spine/Spine';
import type { TimeWindow } from '../spine/Spine';
import { space, traceDashes, useTheme, useWide } from '../tokens';

const panelKeys = [
  'co2Flux',
  'latentHeat',
  'sensibleHeat',
  'ustar',
  'windSpeed',
  'windDirection',
  'airTemperature',
];
const columnKeys = [
  ...panelKeys,
  'co2FluxRandom',
  'latentHeatRandom',
  'sensibleHeatRandom',
  'ustarRandom',
  'zeta',
];
const dayMs = 86_400_000;
const gradedFlux: FluxKey = 'co2Flux';

export interface SeriesScreenProps {
  group: string;
  station: string;
  /** Run to show; the newest with results when left out. */
  run?: string;
}

/** The day, the month, the years of one station: stacked panels over one time axis, the spine moves them. */
export function SeriesScreen({ group, station, run: wantedRun }: SeriesScreenProps) {
  const stationQuery = useStation(group, station);
  const runsQuery = useRuns(group, station);
  const runs = runsQuery.data ?? [];
  const run =
    runs.find((one) => one.id === wantedRun) ??
    runs.find((one) => one.periodsDone > 0 || one.state === 'computing') ??
    runs[0] ??
    null;
  const shell = {
    title: 'Series',
    place: 'series' as const,
    groupSlug: group,
    stationSlug: station,
    stationName: stationQuery.data?.station.name,
    stationOffsetMinutes: stationQuery.data?.station.utcOffsetMinutes,
  };
  const error = stationQuery.error ?? runsQuery.error;
  if (error) {
    return (
      <AppShell {...shell}>
        <View style={{ padding: space.xl }}>
          <ErrorNotice
            error={error}
            onRetry={() => void Promise.all([stationQuery.refetch(), runsQuery.refetch()])}
          />
        </View>
      </AppShell>
    );
  }
  if (!stationQuery.data || runsQuery.isPending) {
    return (
      <AppShell {...shell}>
        <View style={{ padding: space.xl }}>
          <LoadingLine label="reading the station" />
        </View>
      </AppShell>
    );
  }
  if (!run) {
    return (
      <AppShell {...shell}>
        <View style={{ padding: space.xl, gap: space.l }}>
          <Text variant="title">Nothing computed yet</Text>
          <EmptyState
            title={
              stationQuery.data.rawFiles > 0
                ? `${stationQuery.data.rawFiles} raw files are here, no run has been made of them.`
                : 'No raw files yet.'
            }
            action={
              <Button
                kind="primary"
                label={stationQuery.data.rawFiles > 0 ? 'Compute fluxes' : 'Bring in records'}
                href={stationPath(group, station, stationQuery.data.rawFiles > 0 ? 'runs' : 'raw-files')}
              />
            }
          >
            Fluxes show here, half hour by half hour, as soon as they are computed.
          </EmptyState>
        </View>
      </AppShell>
    );
  }
  return <RunSeries key={run.id} {...{ group, station, run, runs, shell }} summary={stationQuery.data} />;
}

interface RunSeriesProps {
  group: string;
  station: string;
  run: Run;
  runs: readonly Run[];
  summary: StationSummary;
  shell: object & { title: string };
}

function RunSeries({ group, station, run, runs, summary, shell }: RunSeriesProps) {
  const wide = useWide();
  const { colour } = useTheme();
  const clock = useClock(summary.station.utcOffsetMinutes);
  const bounds = useMemo(
    () => ({ fromMs: run.fromMs, toMs: Math.max(run.toMs, run.fromMs + 1_800_000) }),
    [run.fromMs, run.toMs],
  );
  const whole = useMemo(
    () =>
      clampWindow({ fromMs: Math.max(bounds.fromMs, bounds.toMs - 4 * dayMs), toMs: bounds.toMs }, bounds),
    [bounds],
  );
  const [window, setWindow] = useState<TimeWindow>(whole);
  const [cursorMs, setCursorMs] = useState<number | null>(null);
  const [isHelpOpen, setHelpOpen] = useState(false);
  const [isExportOpen, setExportOpen] = useState(false);
  const [isTruthShown, setTruthShown] = useState(false);
  const [plotWidth, onPlotLayout] = useWidth();
  const [spineWidth, onSpineLayout] = useWidth();

  const seriesQuery = useSeries(group, run.id, columnKeys, bounds);
  const periodsQuery = usePeriods(group, run.id, window);
  const spineQuery = useSpine(group, station, run.id, Math.max(0, Math.floor(spineWidth / 3)));
  const data = seriesQuery.data ?? null;

  const series = useMemo<PlotSeries[]>(
    () => (data ? panelKeys.map((key) => plotSeries(data, key)) : []),
    [data],
  );
  const starts = data?.startMs ?? emptyColumn;
  const ends = data?.endMs ?? emptyColumn;
  const index = cursorMs === null ? -1 : periodIndexAt(starts, ends, cursorMs);
  const settledIndex = useDeferredValue(index);
  const selectedStart = settledIndex >= 0 ? (starts[settledIndex] ?? Number.NaN) : Number.NaN;
  const detailQuery = usePeriod(group, run.id, selectedStart);
  const rows = periodsQuery.data ?? [];
  const row = rows.find((one) => one.startMs === selectedStart) ?? null;

  const nights = useMemo(
    () =>
      summary.setUp
        ? nightsOf(
            window.fromMs,
            window.toMs,
            summary.setUp.setUp.latitudeDeg,
            summary.setUp.setUp.longitudeDeg,
          )
        : [],
    [summary.setUp, window.fromMs, window.toMs],
  );
  const axisWidth = wide ? 58 : 46;
  const ticksMs = useMemo(
    () =>
      plotWidth > axisWidth
        ? timeTicks({ ...window, width: plotWidth - axisWidth - 1 }, clock.offsetMinutes, 58).map(
            (tick) => tick.atMs,
          )
        : [],
    [window, plotWidth, axisWidth, clock.offsetMinutes],
  );

  const hrefOf = useCallback(
    (startMs: number) => `${periodPath(group, station, startMs)}?run=${run.id}`,
    [group, station, run.id],
  );
  const open = useCallback((startMs: number) => router.push(hrefOf(startMs) as Href), [hrefOf]);
  const step = useCallback(
    (by: number) => {
      if (starts.length === 0) return;
      const inWindow = starts.findIndex((start) => start >= window.fromMs);
      const next = Math.max(0, Math.min(starts.length - 1, index < 0 ? Math.max(0, inWindow) : index + by));
      const start = starts[next] ?? 0;
      const end = ends[next] ?? start;
      setCursorMs((start + end) / 2);
      if (start < window.fromMs || end > window.toMs) {
        const length = window.toMs - window.fromMs;
        setWindow(clampWindow({ fromMs: start - length / 2, toMs: start + length / 2 }, bounds));
      }
    },
    [starts, ends, index, window, bounds],
  );
  const zoom = useCallback(
    (factor: number) => {
      const length = Math.min(
        bounds.toMs - bounds.fromMs,
        Math.max(3_600_000, (window.toMs - window.fromMs) * factor),
      );
      const centre = cursorMs ?? (window.fromMs + window.toMs) / 2;
      const share = (centre - window.fromMs) / (window.toMs - window.fromMs);
      setWindow(
        clampWindow({ fromMs: centre - share * length, toMs: centre + (1 - share) * length }, bounds),
      );
    },
    [window, cursorMs, bounds],
  );
  const move = useCallback(
    (share: number) => {
      const length = window.toMs - window.fromMs;
      setWindow(
        clampWindow({ fromMs: window.fromMs + share * length, toMs: window.toMs + share * length }, bounds),
      );
    },
    [window, bounds],
  );
  const reset = useCallback(() => setWindow({ ...bounds }), [bounds]);
  const keys = useMemo(
    () => ({
      step,
      zoom,
      move,
      reset,
      open: () => {
        if (index >= 0) open(starts[index] ?? 0);
      },
      help: () => setHelpOpen(true),
    }),
    [step, zoom, move, reset, open, index, starts],
  );
  useWindowKeys(keys);

  const cursor =
    index >= 0
      ? {
          startMs: starts[index] ?? 0,
          endMs: ends[index] ?? 0,
          label: clock.periodClock(starts[index] ?? 0, ends[index] ?? 0),
        }
      : null;
  const gradesInWindow = starts.flatMap((start, at) =>
    (ends[at] ?? start) > window.fromMs && start < window.toMs
      ? [data?.grades[gradedFlux]?.[at] ?? null]
      : [],
  );
  const spine = (
    <View onLayout={onSpineLayout} style={{ paddingHorizontal: 0 }}>
      <Spine
        data={spineQuery.data ?? null}
        loading={spineQuery.isPending}
        width={spineWidth}
        height={wide ? 78 : 60}
        offsetMinutes={clock.offsetMinutes}
        window={window}
        onWindow={setWindow}
      />
    </View>
  );
  const isWorking = run.state === 'waiting' || run.state === 'reading' || run.state === 'computing';

  return (
    <AppShell
      {...shell}
      chip={
        <Text variant="small" soft nowrap>
          run {run.number} · recipe <Text strong>{run.recipeName}</Text> {run.recipeHash.slice(0, 8)}
        </Text>
      }
      strip={
        <View style={{ paddingHorizontal: wide ? space.xl : space.l, paddingVertical: 4 }}>{spine}</View>
      }
      actions={[
        {
          key: 'open',
          label: 'Period',
          icon: 'evidence',
          isDisabled: index < 0,
          onPress: () => index >= 0 && open(starts[index] ?? 0),
        },
        { key: 'wider', label: 'Wider', icon: 'minus', onPress: () => zoom(2) },
        { key: 'closer', label: 'Closer', icon: 'plus', onPress: () => zoom(0.5) },
        { key: 'export', label: 'Export', icon: 'export', onPress: () => setExportOpen(true) },
      ]}
      side={
        wide ? (
          <PeriodInspector
            row={row}
            detail={detailQuery.data ?? null}
            index={index}
            count={starts.length}
            clock={clock}
            hrefOf={hrefOf}
            onStep={step}
          />
        ) : undefined
      }
    >
      <View
        style={{ padding: wide ? space.l : space.m, paddingHorizontal: wide ? 20 : space.l, gap: space.m }}
      >
        <View
          style={{
            flexDirection: 'row',
            flexWrap: 'wrap',
            alignItems: 'center',
            columnGap: space.l,
            rowGap: space.s,
          }}
        >
          <Text variant={wide ? 'section' : 'part'} level={1} strong>
            {clock.span(window.fromMs, window.toMs)}
          </Text>
          {wide ? (
            <View style={{ flexDirection: 'row', gap: space.xs }}>
              <IconButton label="Earlier" icon={<Icon name="back" />} onPress={() => move(-0.5)} />
              <IconButton label="Later" icon={<Icon name="forward" />} onPress={() => move(0.5)} />
              <IconButton label="Wider" icon={<Icon name="minus" />} onPress={() => zoom(2)} />
              <IconButton label="Closer" icon={<Icon name="plus" />} onPress={() => zoom(0.5)} />
              <IconButton label="Everything" icon={<Icon name="reset" />} onPress={reset} />
            </View>
          ) : null}
          {runs.length > 1 ? (
            <ChoiceInput
              label="Run"
              value={run.id}
              options={runs.map((one) => ({
                value: one.id,
                label: `run ${one.number} · ${one.recipeName}${one.stale.length > 0 ? ' · stale' : ''}`,
              }))}
              onChange={(id) => router.setParams({ run: id })}
            />
          ) : null}
          <View style={{ flexGrow: 1 }} />
          <GradeCounts flux={gradedFlux} grades={gradesInWindow} />
        </View>
        {summary.station.invented ? (
          <Text variant="small" soft>
            Invented records of an invented station, made to show how Gustbook works.
          </Text>
        ) : null}
        {isWorking ? (
          <ProgressLine
            label={`Run ${run.number}: ${run.state === 'computing' ? 'computing' : run.state === 'reading' ? 'reading raw files' : 'waiting'}`}
            done={run.periodsDone}
            total={run.periodsTotal}
            unit="periods"
          />
        ) : null}
        {run.state === 'failed' ? (
          <Notice
            kind="error"
            title={`Run ${run.number} stopped.`}
            safe="The raw files are safe, and so is every period that was computed."
            next={run.problem ?? 'Start it again from Runs.'}
          />
        ) : null}
        {run.stale.length > 0 ? (
          <Notice
            kind="info"
            title="This run is stale."
            safe={run.stale.join(' ')}
            next="Its values stay as they are; computing again makes a new run."
            action={{
              label: 'Go to runs',
              onPress: () => router.push(stationPath(group, station, 'runs') as Href),
            }}
          />
        ) : null}
        {seriesQuery.error ? (
          <ErrorNotice error={seriesQuery.error} onRetry={() => void seriesQuery.refetch()} />
        ) : null}
        <View onLayout={onPlotLayout} style={{ gap: wide ? 4 : 8 }}>
          {plotWidth > 0 && data
            ? series.map((one, at) => {
                const entry = quantity(one.key);
                const dash = traceDashes[at % traceDashes.length] ?? [];
                const value = index >= 0 ? (one.value[seriesIndex(one, starts[index] ?? 0)] ?? null) : null;
                const cursorAt = index >= 0 ? seriesIndex(one, starts[index] ?? 0) : -1;
                const upper = cursorAt >= 0 ? (one.upper[cursorAt] ?? null) : null;
                return (
                  <View key={one.key}>
                    <View style={{ flexDirection: 'row', alignItems: 'baseline', gap: space.s }}>
                      <Text variant="label" size={15}>
                        <UnitText>{entry.symbol}</UnitText>
                      </Text>
                      <Text variant="small" soft>
                        {entry.label}
                      </Text>
                      <Text variant="figure" size={11} soft>
                        <UnitText>{entry.unit}</UnitText>
                      </Text>
                      <DashSample colour={colour.traces[at % 5] ?? colour.ink} dash={dash} />
                      <View style={{ flex: 1 }} />
                      {!wide && index >= 0 ? (
                        <View style={{ flexDirection: 'row', gap: 6, alignItems: 'center' }}>
                          {entry.gradedBy ? (
                            <GradeMark grade={gradeValue(one.grade[cursorAt])} show="none" />
                          ) : null}
                          <Text variant="figure" size={14}>
                            {value === null
                              ? 'no data'
                              : `${formatNumber(value, entry.decimals)}${upper === null ? '' : ` ${formatUncertainty(upper - value, entry.decimals)}`}`}
                          </Text>
                        </View>
                      ) : null}
                    </View>
                    <SeriesPanel
                      series={one}
                      trace={at}
                      window={window}
                      nights={nights}
                      width={plotWidth}
                      height={panelHeight(one.key, wide)}
                      ticksMs={ticksMs}
                      cursorIndex={cursorAt}
                      onCursor={setCursorMs}
                      onOpen={open}
                      onZoom={(fromMs, toMs) => {
                        if (toMs - fromMs > 1_800_000) setWindow(clampWindow({ fromMs, toMs }, bounds));
                      }}
                      readout={wide}
                      axisWidth={axisWidth}
                      showTruth={isTruthShown}
                    />
                  </View>
                );
              })
            : null}
          {plotWidth > 0 && data ? (
            <TimeAxis
              window={window}
              width={plotWidth}
              axisWidth={axisWidth}
              offsetMinutes={clock.offsetMinutes}
              cursor={cursor}
            />
          ) : seriesQuery.isPending ? (
            <LoadingLine label="reading the series" />
          ) : null}
        </View>
        <Text variant="small" soft>
          Band: random uncertainty, ± 1 standard deviation. Grey: night. Usable values carry ▲, rejected ones
          ✕ and are never joined.
        </Text>
        <ButtonRow>
          <Button
            label="Export"
            icon={<Icon name="export" size={18} />}
            onPress={() => setExportOpen(true)}
          />
          {data?.truth ? (
            <Button
              label={isTruthShown ? 'Hide the known truth' : 'Show the known truth'}
              onPress={() => setTruthShown((shown) => !shown)}
            />
          ) : null}
          {wide ? <Button kind="quiet" label="Keys" onPress={() => setHelpOpen(true)} /> : null}
        </ButtonRow>
        {!wide && row ? (
          <Section title="Under the cursor">
            <PeriodInspector
              row={row}
              detail={detailQuery.data ?? null}
              index={index}
              count={starts.length}
              clock={clock}
              hrefOf={hrefOf}
              onStep={step}
            />
          </Section>
        ) : null}
        <Section title="Periods" subtitle={`${rows.length} in ${clock.span(window.fromMs, window.toMs)}`}>
          {periodsQuery.isPending ? (
            <LoadingLine label="reading the periods" />
          ) : rows.length > 400 ? (
            <Text soft>More than 400 periods are in view: zoom closer to read them as a table.</Text>
          ) : (
            <PeriodTable periods={rows} clock={clock} hrefOf={hrefOf} />
          )}
        </Section>
      </View>
      <Sheet open={isHelpOpen} onClose={() => setHelpOpen(false)} title="Keys">
        <View style={{ gap: space.s }}>
          {windowKeyWords.map(([key, words]) => (
            <View key={key} style={{ flexDirection: 'row', gap: space.m }}>
              <Text variant="figure" style={{ width: 72 }}>
                {key}
              </Text>
              <Text style={{ flex: 1 }}>{words}</Text>
            </View>
          ))}
        </View>
      </Sheet>
      <ExportSheet
        open={isExportOpen}
        onClose={() => setExportOpen(false)}
        group={group}
        runId={run.id}
        runNumber={run.number}
        spanWords={clock.span(window.fromMs, window.toMs)}
        fromMs={window.fromMs}
        toMs={window.toMs}
      />
    </AppShell>
  );
}

const emptyColumn: number[] = [];

/** Plot columns carry extra entries for holes between periods, so indices differ from those of the run's columns. */
function seriesIndex(series: PlotSeries, startMs: number): number {
  return periodIndexAt(series.startMs, series.endMs, startMs);
}

function panelHeight(key: string, wide: boolean): number {
  const isFlux = quantity(key).group === 'flux';
  if (wide) return key === 'co2Flux' ? 168 : isFlux ? 128 : 88;
  return key === 'co2Flux' ? 150 : isFlux ? 112 : 84;
}

function DashSample({ colour, dash }: { colour: string; dash: readonly number[] }) {
  return (
    <svg width={34} height={6} aria-hidden style={{ alignSelf: 'center' }}>
      <line x1={0} x2={34} y1={3} y2={3} stroke={colour} strokeWidth={2} strokeDasharray={dash.join(' ')} />
    </svg>
  );
}
