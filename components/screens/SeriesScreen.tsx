import { useCallback, useEffect, useMemo, useState } from 'react';
import { View } from 'react-native';
import { router } from 'expo-router';
import type { Href } from 'expo-router';
import { quantity } from '../../processing/catalogue';
import { nights as nightsOf } from '../../processing/solar';
import type { FluxKey } from '../../processing/state';
import type { Run, SeriesData, StationSummary } from '../../server/contract/api';
import { useGroupEvents } from '../data/use-group-events';
import { usePeriods, useSeries, useSpine } from '../data/use-run-results';
import { isUnderWay, useRuns } from '../data/use-runs';
import { useStation } from '../data/use-stations';
import { formatPlural } from '../format/numbers';
import { useClock } from '../format/useClock';
import { PanelValue } from '../plots/PanelCursor';
import { createSeriesCursor, SeriesCursorContext } from '../plots/series-cursor';
import { SeriesPanel } from '../plots/SeriesPanel';
import { periodIndexAt, plotSeries } from '../plots/series-plot';
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
  SegmentChoice,
  Sheet,
  Text,
  TextLink,
} from '../primitives';
import { CursorBar, CursorSpoken, CursorVerdict } from '../series/CursorBar';
import { EmptyPanel } from '../series/EmptyPanel';
import { ExportSheet } from '../series/ExportSheet';
import { GradeCounts } from '../series/GradeCounts';
import { PanelHead, PanelName } from '../series/PanelName';
import { gradeCounts, tellingPeriod } from '../series/period-columns';
import { PeriodInspector } from '../series/PeriodInspector';
import { isFlagged, PeriodTable } from '../series/PeriodTable';
import { useSettled } from '../series/use-settled';
import { useWidth } from '../series/use-width';
import { useWindowKeys, windowKeyWords } from '../series/use-window-keys';
import { createTimeView, useTimeWindow } from '../series/time-view';
import type { TimeView, TimeWindow } from '../series/time-view';
import { rememberedView, rememberView } from '../series/view-memory';
import { AppShell, periodPath, stationPath } from '../shell';
import type { AppShellProps } from '../shell';
import { clampWindow, gridInstants, zoomedWindow } from '../spine/spine-geometry';
import { Spine } from '../spine/Spine';
import { windowWords } from '../spine/window-words';
import { space, useTheme, useWide, webStyle } from '../tokens';

const fluxPanels = ['co2Flux', 'latentHeat', 'sensibleHeat', 'ustar'] as const;
const airPanels = ['windSpeed', 'windDirection', 'airTemperature'] as const;
const columnKeys = [
  ...fluxPanels,
  ...airPanels,
  ...fluxPanels.flatMap((key) => quantity(key).uncertaintyKey ?? []),
  'zeta',
];
const dayMs = 86_400_000;
const halfHourMs = 1_800_000;
/** Shortest window [ms]. */
const leastWindowMs = 2 * halfHourMs;
/** More rows than this are no table that anybody reads. */
const mostTableRows = 400;
const gradedFlux: FluxKey = 'co2Flux';
const noColumn: number[] = [];

export interface SeriesScreenProps {
  group: string;
  station: string;
  /** Run to show; the newest with results when left out. */
  run?: string;
}

type Shell = Omit<AppShellProps, 'children'>;

/** The day, the month, the years of one station: stacked panels over one time axis, the spine moves them. */
export function SeriesScreen({ group, station, run: wantedRun }: SeriesScreenProps) {
  useGroupEvents(group);
  const stationQuery = useStation(group, station);
  const runsQuery = useRuns(group, station);
  const runs = runsQuery.data ?? [];
  const run =
    runs.find((one) => one.id === wantedRun) ??
    runs.find((one) => one.periodsDone > 0 || one.state === 'computing') ??
    runs[0] ??
    null;
  const summary = stationQuery.data;
  const shell: Shell = {
    title: 'Series',
    place: 'series',
    groupSlug: group,
    stationSlug: station,
    stationName: summary?.station.name,
    stationOffsetMinutes: summary?.station.utcOffsetMinutes,
  };
  const error = stationQuery.error ?? runsQuery.error;
  if (error) {
    return (
      <PlainPage shell={shell} title="The series cannot be shown">
        <ErrorNotice
          error={error}
          onRetry={() => void Promise.all([stationQuery.refetch(), runsQuery.refetch()])}
        />
      </PlainPage>
    );
  }
  if (!summary || runsQuery.isPending) {
    return (
      <PlainPage shell={shell} title="Series">
        <LoadingLine label="reading the station" />
      </PlainPage>
    );
  }
  if (!run) {
    const hasFiles = summary.rawFiles > 0;
    return (
      <PlainPage shell={shell} title="Nothing computed yet">
        <EmptyState
          title={
            hasFiles
              ? `${formatPlural(summary.rawFiles, 'raw file')} ${summary.rawFiles === 1 ? 'is' : 'are'} here; no run has been made of them.`
              : 'No raw files yet.'
          }
          action={
            <Button
              kind="primary"
              label={hasFiles ? 'Compute fluxes' : 'Bring in raw files'}
              href={stationPath(group, station, hasFiles ? 'runs' : 'raw-files')}
            />
          }
        >
          Fluxes show here, half hour by half hour, as soon as they are computed.
        </EmptyState>
      </PlainPage>
    );
  }
  // stopped before its records were known, or still reading them: there is no time axis yet
  if (run.fromMs >= run.toMs) {
    return (
      <PlainPage shell={shell} title={`Run ${run.number} has no half hours yet`}>
        <RunState run={run} runsHref={stationPath(group, station, 'runs')} />
      </PlainPage>
    );
  }
  return <RunSeries key={run.id} {...{ group, station, run, runs, shell, summary }} />;
}

function PlainPage({ shell, title, children }: { shell: Shell; title: string; children: React.ReactNode }) {
  const wide = useWide();
  return (
    <AppShell {...shell}>
      <View style={{ padding: wide ? space.xl : space.l, gap: space.l, maxWidth: 760 }}>
        <Text variant="title">{title}</Text>
        {children}
      </View>
    </AppShell>
  );
}

interface RunSeriesProps {
  group: string;
  station: string;
  run: Run;
  runs: readonly Run[];
  summary: StationSummary;
  shell: Shell;
}

function RunSeries({ group, station, run, runs, summary, shell }: RunSeriesProps) {
  const wide = useWide();
  const clock = useClock(summary.station.utcOffsetMinutes);
  const isWorking = isUnderWay(run);
  const bounds = useMemo(
    () => ({ fromMs: run.fromMs, toMs: Math.max(run.toMs, run.fromMs + halfHourMs) }),
    [run.fromMs, run.toMs],
  );
  const [remembered] = useState(() => rememberedView(run.id));
  const [view] = useState(() =>
    createTimeView(
      remembered
        ? keptInView(remembered.window, remembered.chosenMs, bounds)
        : { fromMs: Math.max(bounds.fromMs, bounds.toMs - 4 * dayMs), toMs: bounds.toMs },
    ),
  );
  const [cursor] = useState(() => createSeriesCursor(remembered?.chosenMs ?? null));
  const [isHelpOpen, setHelpOpen] = useState(false);
  const [isExportOpen, setExportOpen] = useState(false);
  const [isTruthShown, setTruthShown] = useState(false);

  const seriesQuery = useSeries(group, run.id, columnKeys, bounds);
  const data = seriesQuery.data ?? null;
  const starts = data?.startMs ?? noColumn;
  const ends = data?.endMs ?? noColumn;

  // where this page was left, it begins the next time
  useEffect(
    () => () => rememberView(run.id, { window: view.get(), chosenMs: cursor.chosenMs() }),
    [run.id, view, cursor],
  );
  useEffect(() => {
    if (data) cursor.propose(tellingPeriod(data, view.get().fromMs, view.get().toMs));
  }, [data, cursor, view]);
  const hrefOf = useCallback(
    (startMs: number) => `${periodPath(group, station, startMs)}?run=${run.id}`,
    [group, station, run.id],
  );
  const open = useCallback((startMs: number) => router.push(hrefOf(startMs) as Href), [hrefOf]);
  const step = useCallback(
    (by: number) => {
      if (starts.length === 0) return;
      const shown = cursor.shownMs();
      const index = shown === null ? -1 : periodIndexAt(starts, ends, shown);
      const window = view.get();
      const inView = Math.max(
        0,
        starts.findIndex((start) => start >= window.fromMs),
      );
      const next = Math.max(0, Math.min(starts.length - 1, index < 0 ? inView : index + by));
      const start = starts[next] ?? 0;
      cursor.choose(start);
      if (start < window.fromMs || (ends[next] ?? start) > window.toMs)
        view.set(centredOn(window, start, bounds));
    },
    [starts, ends, cursor, view, bounds],
  );
  const zoom = useCallback(
    (factor: number) =>
      view.change((before) => {
        const shown = cursor.shownMs();
        const isInside = shown !== null && shown >= before.fromMs && shown < before.toMs;
        const about = isInside ? shown : (before.fromMs + before.toMs) / 2;
        return zoomedWindow(before, factor, about, bounds, leastWindowMs);
      }),
    [cursor, view, bounds],
  );
  const zoomInto = useCallback(
    (fromMs: number, toMs: number) =>
      view.set(clampWindow({ fromMs, toMs: Math.max(toMs, fromMs + leastWindowMs) }, bounds)),
    [view, bounds],
  );
  const move = useCallback(
    (share: number) =>
      view.change((before) => {
        const shift = share * (before.toMs - before.fromMs);
        return clampWindow({ fromMs: before.fromMs + shift, toMs: before.toMs + shift }, bounds);
      }),
    [view, bounds],
  );
  const reset = useCallback(() => view.set({ ...bounds }), [view, bounds]);
  const openChosen = useCallback(() => {
    const shown = cursor.shownMs();
    if (shown !== null && periodIndexAt(starts, ends, shown) >= 0) open(shown);
  }, [cursor, starts, ends, open]);
  useWindowKeys(
    useMemo(
      () => ({ step, zoom, move, reset, open: openChosen, help: () => setHelpOpen(true) }),
      [step, zoom, move, reset, openChosen],
    ),
  );

  const spine = (
    <SpineStrip {...{ group, station, view }} runId={run.id} offsetMinutes={clock.offsetMinutes} />
  );

  const runChoice =
    runs.length > 1 ? (
      <View style={{ minWidth: 200 }}>
        <ChoiceInput
          label="Run"
          value={run.id}
          options={runs.map((one) => ({
            value: one.id,
            label: `run ${one.number} · ${one.recipeName}${one.stale.length > 0 ? ' · stale' : ''}`,
          }))}
          onChange={(id) => router.setParams({ run: id })}
        />
      </View>
    ) : null;

  return (
    <SeriesCursorContext.Provider value={cursor}>
      <AppShell
        {...shell}
        chip={
          <Text variant="small" soft nowrap>
            run {run.number} · recipe{' '}
            <Text variant="small" strong>
              {run.recipeName}
            </Text>{' '}
            <Text variant="figure" size={12} soft>
              {run.recipeHash.slice(0, 8)}
            </Text>
          </Text>
        }
        strip={
          wide ? (
            spine
          ) : (
            <View>
              {data ? <CursorVerdict group={group} runId={run.id} data={data} hrefOf={hrefOf} /> : null}
              {spine}
            </View>
          )
        }
        actions={[
          { key: 'wider', label: 'Wider', icon: 'minus', onPress: () => zoom(2) },
          { key: 'closer', label: 'Closer', icon: 'plus', onPress: () => zoom(0.5) },
          { key: 'reset', label: 'Everything', icon: 'reset', onPress: reset },
          { key: 'export', label: 'Export', icon: 'export', onPress: () => setExportOpen(true) },
        ]}
        side={
          wide ? (
            <View style={webStyle({ position: 'sticky', top: 16 })}>
              {data ? (
                <PeriodInspector {...{ group, data, clock, hrefOf }} runId={run.id} onStep={step} />
              ) : seriesQuery.error ? (
                <Text soft>The periods show here once the series can be read.</Text>
              ) : (
                <LoadingLine label="reading the periods" />
              )}
            </View>
          ) : undefined
        }
      >
        {data && !wide ? <CursorBar data={data} clock={clock} onStep={step} /> : null}
        {data ? <CursorSpoken data={data} clock={clock} /> : null}
        <View
          style={{
            paddingVertical: wide ? 10 : space.s,
            paddingHorizontal: wide ? 20 : space.l,
            gap: wide ? 10 : space.s,
          }}
        >
          {wide ? (
            <View
              style={{
                flexDirection: 'row',
                flexWrap: 'wrap',
                alignItems: 'center',
                columnGap: space.l,
                rowGap: space.s,
              }}
            >
              <WindowTitle view={view} offsetMinutes={clock.offsetMinutes} />
              <View style={{ flexDirection: 'row', gap: space.xs }}>
                <IconButton label="Earlier" icon={<Icon name="back" />} onPress={() => move(-0.5)} />
                <IconButton label="Later" icon={<Icon name="forward" />} onPress={() => move(0.5)} />
                <IconButton label="Wider" icon={<Icon name="minus" />} onPress={() => zoom(2)} />
                <IconButton label="Closer" icon={<Icon name="plus" />} onPress={() => zoom(0.5)} />
                <IconButton label="Everything" icon={<Icon name="reset" />} onPress={reset} />
              </View>
              <View style={{ flexGrow: 1 }} />
              {data ? <WindowCounts view={view} data={data} /> : null}
            </View>
          ) : (
            <WindowTitle view={view} offsetMinutes={clock.offsetMinutes} />
          )}
          <RunState run={run} runsHref={stationPath(group, station, 'runs')} />
          {seriesQuery.error ? (
            <ErrorNotice error={seriesQuery.error} onRetry={() => void seriesQuery.refetch()} />
          ) : (
            <Panels
              {...{ data, view, clock, summary, isTruthShown, zoomInto, open, cursor }}
              isPending={isWorking}
            />
          )}
          {seriesQuery.error ? null : (
            <>
              {!wide && data ? <WindowCounts view={view} data={data} /> : null}
              <Text variant="small" soft>
                Band: random uncertainty, ± 1 standard deviation. Grey: night. Usable values carry{' '}
                <GradeMark grade={1} size={12} show="none" />, rejected ones{' '}
                <GradeMark grade={2} size={12} show="none" /> and are never joined.
                {summary.station.invented
                  ? ' Station and records are invented, to show how Gustbook works.'
                  : ''}
              </Text>
              <View style={{ flexDirection: 'row', flexWrap: 'wrap', gap: space.m, alignItems: 'flex-end' }}>
                {runChoice}
                <ButtonRow>
                  {wide ? (
                    <Button
                      label="Export"
                      icon={<Icon name="export" size={18} />}
                      onPress={() => setExportOpen(true)}
                    />
                  ) : null}
                  {data?.truth ? (
                    <Button
                      label={isTruthShown ? 'Hide the known truth' : 'Show the known truth'}
                      onPress={() => setTruthShown((shown) => !shown)}
                    />
                  ) : null}
                  {wide ? <Button kind="quiet" label="Keys" onPress={() => setHelpOpen(true)} /> : null}
                </ButtonRow>
              </View>
              <WindowTable {...{ group, clock, hrefOf, view, data }} runId={run.id} />
            </>
          )}
        </View>
        <Sheet open={isHelpOpen} onClose={() => setHelpOpen(false)} title="Keys and gestures" width={560}>
          <View style={{ gap: space.m }}>
            {windowKeyWords.map(([key, meaning]) => (
              <View key={key} style={{ flexDirection: 'row', gap: space.m }}>
                <Text variant="figure" size={14} style={{ width: 118 }}>
                  {key}
                </Text>
                <Text style={{ flex: 1 }}>{meaning}</Text>
              </View>
            ))}
          </View>
        </Sheet>
        {isExportOpen ? (
          <WindowExport {...{ group, run, view, bounds, clock }} onClose={() => setExportOpen(false)} />
        ) : null}
      </AppShell>
    </SeriesCursorContext.Provider>
  );
}

/** The time spine of the page's station and run. */
function SpineStrip({
  group,
  station,
  runId,
  view,
  offsetMinutes,
}: {
  group: string;
  station: string;
  runId: string;
  view: TimeView;
  offsetMinutes: number;
}) {
  const wide = useWide();
  const window = useTimeWindow(view);
  const [width, onLayout] = useWidth();
  const query = useSpine(group, station, runId, Math.floor(width / 3));
  return (
    <View style={{ paddingHorizontal: wide ? space.xl : space.l, paddingVertical: wide ? 5 : 4 }}>
      <View onLayout={onLayout}>
        <Spine
          data={query.data ?? null}
          loading={query.isPending}
          width={width}
          height={wide ? 78 : 56}
          offsetMinutes={offsetMinutes}
          window={window}
          onWindow={view.set}
          named={wide}
        />
      </View>
    </View>
  );
}

/** The page's h1: which days are in view. A phone names the period under the cursor in its place and keeps this for the ear. */
function WindowTitle({ view, offsetMinutes }: { view: TimeView; offsetMinutes: number }) {
  const wide = useWide();
  const { fromMs, toMs } = useTimeWindow(view);
  const words = windowWords(fromMs, toMs, offsetMinutes);
  return wide ? (
    <Text variant="part" level={1}>
      {words}
    </Text>
  ) : (
    <h1 className="gb-unseen">Series, {words}</h1>
  );
}

function WindowCounts({ view, data }: { view: TimeView; data: SeriesData }) {
  const { fromMs, toMs } = useSettled(useTimeWindow(view), 120);
  const counts = useMemo(() => gradeCounts(data, gradedFlux, fromMs, toMs), [data, fromMs, toMs]);
  return <GradeCounts flux={gradedFlux} counts={counts} />;
}

function WindowExport({
  group,
  run,
  view,
  bounds,
  clock,
  onClose,
}: {
  group: string;
  run: Run;
  view: TimeView;
  bounds: TimeWindow;
  clock: ReturnType<typeof useClock>;
  onClose: () => void;
}) {
  const window = useTimeWindow(view);
  const words = ({ fromMs, toMs }: TimeWindow) => windowWords(fromMs, toMs, clock.offsetMinutes);
  return (
    <ExportSheet
      open
      onClose={onClose}
      group={group}
      runId={run.id}
      runNumber={run.number}
      spans={[
        { key: 'window', label: 'In view', words: words(window), ...window },
        { key: 'run', label: 'Whole run', words: words(bounds), ...bounds },
      ]}
    />
  );
}

function centredOn(window: TimeWindow, atMs: number, bounds: TimeWindow): TimeWindow {
  const half = (window.toMs - window.fromMs) / 2;
  return clampWindow({ fromMs: atMs - half, toMs: atMs + half }, bounds);
}

/** A remembered window, moved where another period was looked at since. */
function keptInView(window: TimeWindow, atMs: number | null, bounds: TimeWindow): TimeWindow {
  const isInView = atMs === null || (atMs >= window.fromMs && atMs < window.toMs);
  return isInView ? clampWindow(window, bounds) : centredOn(window, atMs, bounds);
}

function countIn(data: SeriesData | null, window: TimeWindow): number {
  if (!data) return 0;
  return data.startMs.reduce(
    (sum, start, at) => sum + Number((data.endMs[at] ?? start) > window.fromMs && start < window.toMs),
    0,
  );
}

/** What there is to know about the run itself: at work, stopped, stale. */
function RunState({ run, runsHref }: { run: Run; runsHref: string }) {
  const { colour } = useTheme();
  const stateWords: Partial<Record<Run['state'], string>> = {
    waiting: 'waiting for its turn',
    reading: 'reading raw files',
    computing: 'computing',
  };
  const working = stateWords[run.state];
  return (
    <>
      {working ? (
        <ProgressLine
          label={`Run ${run.number}: ${working}`}
          done={run.periodsDone}
          total={run.periodsTotal}
          unit="periods"
        />
      ) : null}
      {run.state === 'failed' || run.state === 'cancelled' ? (
        <Notice
          kind={run.state === 'failed' ? 'error' : 'info'}
          title={
            run.state === 'failed'
              ? `Run ${run.number} stopped.`
              : `Run ${run.number} was stopped by a person.`
          }
          safe="The raw files are safe, and so is every period that was computed."
          next={run.problem ?? 'Start it again from Runs.'}
          action={{ label: 'Go to runs', onPress: () => router.push(runsHref as Href) }}
        />
      ) : null}
      {run.stale.length > 0 ? (
        <View
          role="status"
          style={{
            flexDirection: 'row',
            flexWrap: 'wrap',
            alignItems: 'center',
            columnGap: space.l,
            paddingHorizontal: space.m,
            paddingVertical: 4,
            borderLeftWidth: 3,
            borderLeftColor: colour.ink,
            backgroundColor: colour.wash,
          }}
        >
          <Text size={14} style={{ flexShrink: 1 }}>
            <Text size={14} strong>
              Run {run.number} is stale.
            </Text>{' '}
            {run.stale.join(' ')} Its values stay as they are; computing again makes a new run.
          </Text>
          <TextLink standing label="Go to runs" href={runsHref} />
        </View>
      ) : null}
    </>
  );
}

interface PanelsProps {
  data: SeriesData | null;
  view: TimeView;
  clock: ReturnType<typeof useClock>;
  summary: StationSummary;
  isTruthShown: boolean;
  isPending: boolean;
  zoomInto: (fromMs: number, toMs: number) => void;
  open: (startMs: number) => void;
  cursor: ReturnType<typeof createSeriesCursor>;
}

/** Fluxes over one time axis, wind and air over a second one, all under the same cursor. */
function Panels(props: PanelsProps) {
  const { data, clock, summary, isTruthShown, isPending, zoomInto, open, cursor } = props;
  const view = useTimeWindow(props.view);
  const wide = useWide();
  const { colour } = useTheme();
  const [width, onLayout] = useWidth();
  const nameWidth = wide ? 96 : 0;
  const axisWidth = wide ? 46 : 44;
  const panelWidth = width - nameWidth;
  const all = useMemo(
    () => new Map([...fluxPanels, ...airPanels].map((key) => [key, data ? plotSeries(data, key) : null])),
    [data],
  );
  const column = all.get('co2Flux') ?? null;
  const setUp = summary.setUp?.setUp ?? null;
  // nights of whole days, so that they are not computed anew with each move
  const firstDay = Math.floor(view.fromMs / dayMs);
  const lastDay = Math.ceil(view.toMs / dayMs);
  const nights = useMemo(
    () =>
      setUp && lastDay - firstDay <= 62
        ? nightsOf((firstDay - 1) * dayMs, (lastDay + 1) * dayMs, setUp.latitudeDeg, setUp.longitudeDeg)
        : [],
    [setUp, firstDay, lastDay],
  );
  const ticksMs = useMemo(
    () =>
      panelWidth > axisWidth
        ? gridInstants({ ...view, width: panelWidth - axisWidth - 1 }, clock.offsetMinutes)
        : [],
    [view, panelWidth, axisWidth, clock.offsetMinutes],
  );
  const startAt = useCallback(
    (atMs: number): number | null => {
      const index = column ? periodIndexAt(column.startMs, column.endMs, atMs) : -1;
      return index < 0 ? null : (column?.startMs[index] ?? null);
    },
    [column],
  );
  const onHover = useCallback(
    (atMs: number | null) => cursor.hover(atMs === null ? null : startAt(atMs)),
    [cursor, startAt],
  );
  const onChoose = useCallback(
    (atMs: number) => {
      const start = startAt(atMs);
      if (start !== null) cursor.choose(start);
    },
    [cursor, startAt],
  );
  const onOpen = useCallback(
    (atMs: number) => {
      const index = data ? periodIndexAt(data.startMs, data.endMs, atMs) : -1;
      const start = data?.startMs[index];
      if (start === undefined) return;
      cursor.choose(start);
      open(start);
    },
    [data, cursor, open],
  );
  const periodAt = useCallback(
    (startMs: number) => {
      const index = column ? periodIndexAt(column.startMs, column.endMs, startMs) : -1;
      if (!column || index < 0) return null;
      const from = column.startMs[index] ?? 0;
      const to = column.endMs[index] ?? from;
      return { middleMs: (from + to) / 2, label: clock.periodClock(from, to) };
    },
    [column, clock],
  );

  const panel = (key: (typeof fluxPanels)[number] | (typeof airPanels)[number]) => {
    const series = all.get(key);
    const height = panelHeight(key, wide);
    return (
      <View key={key} style={{ flexDirection: wide ? 'row' : 'column' }}>
        {wide ? (
          <PanelName quantityKey={key} width={nameWidth} />
        ) : (
          <View
            style={{
              flexDirection: 'row',
              justifyContent: 'space-between',
              alignItems: 'center',
              minHeight: 21,
              paddingLeft: axisWidth,
            }}
          >
            <PanelHead quantityKey={key} />
            {series ? <PanelValue series={series} /> : null}
          </View>
        )}
        {series && panelWidth > axisWidth ? (
          <SeriesPanel
            series={series}
            window={view}
            nights={nights}
            width={panelWidth}
            height={height}
            ticksMs={ticksMs}
            onHover={onHover}
            onChoose={onChoose}
            onOpen={onOpen}
            onZoom={zoomInto}
            readout={wide}
            axisWidth={axisWidth}
            showTruth={isTruthShown}
            isPending={isPending}
          />
        ) : (
          <EmptyPanel
            width={panelWidth}
            height={height}
            axisWidth={axisWidth}
            words={key === 'co2Flux' ? 'reading the series' : ''}
          />
        )}
      </View>
    );
  };
  const axis =
    panelWidth > axisWidth ? (
      <View style={{ marginLeft: nameWidth }}>
        <TimeAxis
          window={view}
          width={panelWidth}
          axisWidth={axisWidth}
          offsetMinutes={clock.offsetMinutes}
          periodAt={periodAt}
        />
      </View>
    ) : null;
  return (
    <View onLayout={onLayout} style={{ gap: wide ? 6 : 2 }}>
      {fluxPanels.map(panel)}
      {axis}
      {isTruthShown ? (
        <View
          style={{
            flexDirection: 'row',
            alignItems: 'center',
            gap: space.s,
            paddingLeft: nameWidth + axisWidth,
          }}
        >
          <svg width={38} height={8} aria-hidden>
            <line x1={0} x2={38} y1={4} y2={4} stroke={colour.ink} strokeWidth={1} />
          </svg>
          <Text variant="small">known truth (invented)</Text>
        </View>
      ) : null}
      <View style={{ height: space.s }} />
      {airPanels.map(panel)}
      {axis}
    </View>
  );
}

function panelHeight(key: string, wide: boolean): number {
  if (key === 'co2Flux') return wide ? 158 : 116;
  if (key === 'latentHeat' || key === 'sensibleHeat') return wide ? 124 : 86;
  if (key === 'ustar') return wide ? 108 : 76;
  return wide ? 100 : 84;
}

interface WindowTableProps {
  group: string;
  runId: string;
  view: TimeView;
  data: SeriesData | null;
  clock: ReturnType<typeof useClock>;
  hrefOf: (startMs: number) => string;
}

/** The periods in view as a table, while they are few enough to read. */
function WindowTable({ group, runId, view, data, clock, hrefOf }: WindowTableProps) {
  const window = useSettled(useTimeWindow(view), 400);
  const count = useMemo(() => countIn(data, window), [data, window]);
  const isReadable = count > 0 && count <= mostTableRows;
  const query = usePeriods(group, isReadable ? runId : null, window);
  const [shown, setShown] = useState<'all' | 'flagged' | null>(null);
  const wide = useWide();
  const all = query.data ?? [];
  const flagged = all.filter(isFlagged);
  // a phone shows what needs a look first
  const chosen = shown ?? (wide || flagged.length === 0 ? 'all' : 'flagged');
  const rows = chosen === 'all' ? all : flagged;
  return (
    <Section
      title="Periods"
      subtitle={`${formatPlural(count, 'period')} in view, ${windowWords(window.fromMs, window.toMs, clock.offsetMinutes)}`}
    >
      {count === 0 ? (
        <Text soft>No period has been computed in this window.</Text>
      ) : !isReadable ? (
        <Text soft>More than {mostTableRows} periods are in view. Zoom closer to read them as a table.</Text>
      ) : query.error ? (
        <ErrorNotice error={query.error} onRetry={() => void query.refetch()} />
      ) : query.isPending ? (
        <LoadingLine label="reading the periods" />
      ) : (
        <>
          <SegmentChoice
            label="Rows"
            hideLabel
            value={chosen}
            options={[
              { value: 'all', label: `All ${all.length}` },
              { value: 'flagged', label: `Not all good ${flagged.length}` },
            ]}
            onChange={setShown}
          />
          <PeriodTable periods={rows} clock={clock} hrefOf={hrefOf} />
        </>
      )}
    </Section>
  );
}
