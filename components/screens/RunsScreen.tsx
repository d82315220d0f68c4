import { useState } from 'react';
import { View } from 'react-native';
import type { ReactNode } from 'react';
import type { Run, StationSummary } from '../../server/contract/api';
import { newId } from '../data/new-id';
import { useMay } from '../data/use-me';
import {
  againFrom,
  isUnderWay,
  useCancelRun,
  useDeleteRun,
  useRunDeletion,
  useRuns,
  useStartRun,
} from '../data/use-runs';
import { formatDuration } from '../format/times';
import { useClock } from '../format/useClock';
import {
  Button,
  ButtonRow,
  ConfirmSheet,
  EmptyState,
  ErrorNotice,
  HashText,
  LoadingLine,
  Notice,
  PageBody,
  PageHead,
  ProgressLine,
  Text,
} from '../primitives';
import { FindingMark } from '../raw-files/FindingMark';
import { DeletionSheet } from '../runs/DeletionSheet';
import { GradeTable } from '../runs/GradeTable';
import { runsFinding, runState } from '../runs/run-words';
import { StartRunSheet } from '../runs/StartRunSheet';
import { stationPath } from '../shell';
import { space, useTheme, useWide } from '../tokens';
import { StationPage } from './StationPage';

/** What was computed from a station's raw files, by which recipe, and whether it still holds. */
export function RunsScreen({ group, station }: { group: string; station: string }) {
  const [isStartOpen, setIsStartOpen] = useState(false);
  const mayStart = useMay(group, 'run.start');
  return (
    <StationPage
      group={group}
      station={station}
      place="runs"
      title="Runs"
      actions={
        mayStart
          ? [
              {
                key: 'compute',
                label: 'Compute',
                icon: 'forward',
                isPrimary: true,
                onPress: () => setIsStartOpen(true),
              },
            ]
          : []
      }
      offlineText="Runs under way go on at the server."
    >
      {(summary) => (
        <>
          <RunsPage
            group={group}
            summary={summary}
            mayStart={mayStart}
            onStart={() => setIsStartOpen(true)}
          />
          {isStartOpen ? (
            <StartRunSheet
              open
              group={group}
              summary={summary}
              onClose={() => setIsStartOpen(false)}
              onStarted={() => setIsStartOpen(false)}
            />
          ) : null}
        </>
      )}
    </StationPage>
  );
}

interface RunsPageProps {
  group: string;
  summary: StationSummary;
  mayStart: boolean;
  onStart: () => void;
}

function RunsPage({ group, summary, mayStart, onStart }: RunsPageProps) {
  const { slug } = summary.station;
  const wide = useWide();
  const runs = useRuns(group, slug);
  const list = runs.data ?? [];
  return (
    <View>
      <PageHead
        title={runs.data ? runsFinding(list) : 'Runs'}
        subtitle="A run is one recipe over one span. It is never changed: corrections mark it stale, and it can be computed again."
        actions={wide && mayStart ? <Button kind="primary" label="Compute" onPress={onStart} /> : undefined}
      />
      <PageBody maxWidth={1100}>
        {runs.isPending ? <LoadingLine label="reading the runs" /> : null}
        {runs.error ? (
          <ErrorNotice error={runs.error} safe="Results are safe." onRetry={() => void runs.refetch()} />
        ) : null}
        {runs.data && list.length === 0 ? (
          <EmptyState
            title={
              summary.rawFiles > 0
                ? 'Raw files are here, and no run has been made of them.'
                : 'There is nothing to compute from yet.'
            }
            action={
              summary.rawFiles === 0 ? (
                <Button
                  kind="primary"
                  label="Bring in raw files"
                  href={stationPath(group, slug, 'raw-files')}
                />
              ) : mayStart ? (
                <Button kind="primary" label="Compute" onPress={onStart} />
              ) : undefined
            }
          >
            {mayStart
              ? 'Choose a recipe and a span; half hours appear as soon as they are computed.'
              : 'Leads, analysts and technicians can start a run.'}
          </EmptyState>
        ) : null}
        {list.length > 0 ? (
          <View role="list" aria-label="Runs, newest first" style={{ gap: space.xl }}>
            {list.map((run) => (
              <RunItem key={run.id} group={group} summary={summary} run={run} mayStart={mayStart} />
            ))}
          </View>
        ) : null}
      </PageBody>
    </View>
  );
}

function RunItem({
  group,
  summary,
  run,
  mayStart,
}: {
  group: string;
  summary: StationSummary;
  run: Run;
  mayStart: boolean;
}) {
  const { slug, utcOffsetMinutes } = summary.station;
  const { colour } = useTheme();
  const wide = useWide();
  const clock = useClock(utcOffsetMinutes);
  const mayCancel = useMay(group, 'run.cancel');
  const mayDelete = useMay(group, 'run.delete');
  const cancel = useCancelRun(group, slug);
  const start = useStartRun(group, slug);
  const [asksCancel, setAsksCancel] = useState(false);
  const [asksDelete, setAsksDelete] = useState(false);
  const [againId, setAgainId] = useState(newId);
  const underWay = isUnderWay(run);
  const { mark, words } = runState(run);
  const isStale = run.stale.length > 0 && !underWay;
  const recompute = (): void =>
    start.mutate(againFrom(run, againId), { onSuccess: () => setAgainId(newId()) });
  const took =
    run.finishedAtMs === null ? '' : `, took ${formatDuration(run.finishedAtMs - run.createdAtMs)}`;

  return (
    <View
      role="listitem"
      style={{ borderTopWidth: 1, borderTopColor: colour.rule, paddingTop: space.m, gap: space.m }}
    >
      <View style={{ flexDirection: wide ? 'row' : 'column', gap: wide ? space.xl : space.m }}>
        <View style={{ flex: wide ? 1 : undefined, minWidth: 0, gap: space.s }}>
          <Text variant="section">{`Run ${run.number}: ${run.recipeName}`}</Text>
          <View style={{ flexDirection: 'row', alignItems: 'flex-start' }}>
            <FindingMark mark={mark} label="" />
            <Text strong>{words}</Text>
          </View>
          {run.fromMs < run.toMs ? (
            <Text>{`${clock.moment(run.fromMs)} to ${clock.moment(run.toMs)} (${clock.zone})`}</Text>
          ) : null}
          <Text variant="small" soft>
            {`Started by ${run.author.name}, ${clock.moment(run.createdAtMs)}${took}. Software ${run.softwareVersion}.`}
          </Text>
          <View style={{ flexDirection: 'row', flexWrap: 'wrap', columnGap: space.l, rowGap: 2 }}>
            <Labelled label="recipe">
              <HashText hash={run.recipeHash} of="recipe" />
            </Labelled>
            {run.resultHash ? (
              <Labelled label="result">
                <HashText hash={run.resultHash} of="result" />
              </Labelled>
            ) : null}
          </View>
        </View>
        <View style={{ flex: wide ? 1 : undefined, minWidth: 0, gap: space.m }}>
          {underWay ? (
            <ProgressLine
              label={
                run.state === 'reading'
                  ? 'Reading raw files'
                  : run.state === 'waiting'
                    ? 'Waiting'
                    : 'Computing'
              }
              done={run.periodsDone}
              total={run.periodsTotal}
              unit="periods"
              detail={
                run.state === 'computing'
                  ? undefined
                  : run.periodsTotal === 0
                    ? 'nothing computed yet'
                    : undefined
              }
            />
          ) : null}
          {run.periodsDone > 0 ? (
            <GradeTable grades={run.grades} label={`${run.periodsDone} periods, % of grades`} />
          ) : null}
        </View>
      </View>
      {run.problem ? (
        <Notice
          kind="error"
          title={run.problem}
          safe="Raw files and earlier runs are not touched."
          next={mayStart ? 'Compute again, or choose another span or recipe.' : undefined}
        />
      ) : null}
      {isStale ? (
        <Notice kind="info" title="What it was made from has been corrected since">
          {run.stale.map((line) => (
            <Text key={line}>{line}</Text>
          ))}
          <Text variant="small" soft>
            Its numbers stay readable as they were computed.
          </Text>
        </Notice>
      ) : null}
      {start.error ? <ErrorNotice error={start.error} safe="This run is not touched." /> : null}
      {cancel.error ? <ErrorNotice error={cancel.error} safe="What is computed stays." /> : null}
      <ButtonRow>
        {run.periodsDone > 0 ? (
          <Button
            label="Open series"
            ariaLabel={`Open series of run ${run.number}`}
            href={`${stationPath(group, slug, 'series')}?run=${run.id}`}
          />
        ) : null}
        {mayStart && (isStale || run.state === 'failed' || run.state === 'cancelled') ? (
          <Button
            kind={isStale ? 'primary' : 'secondary'}
            label={run.state === 'done' ? 'Recompute' : 'Compute again'}
            ariaLabel={`${run.state === 'done' ? 'Recompute' : 'Compute again'}: run ${run.number}`}
            busy={start.isPending}
            onPress={recompute}
          />
        ) : null}
        {underWay && mayCancel ? (
          <Button
            label="Cancel"
            ariaLabel={`Cancel run ${run.number}`}
            busy={cancel.isPending}
            onPress={() => setAsksCancel(true)}
          />
        ) : null}
        {!underWay && mayDelete ? (
          <Button
            kind="quiet"
            label="Delete"
            ariaLabel={`Delete run ${run.number}`}
            onPress={() => setAsksDelete(true)}
          />
        ) : null}
        {run.periodsDone === 0 && run.state === 'done' ? (
          <Text variant="small" soft>
            No period came out of this span.
          </Text>
        ) : null}
      </ButtonRow>
      {asksCancel ? (
        <ConfirmSheet
          open
          title={`Cancel run ${run.number}?`}
          confirmLabel="Cancel the run"
          cancelLabel="Let it go on"
          busy={cancel.isPending}
          onClose={() => setAsksCancel(false)}
          onConfirm={() => cancel.mutate(run.id, { onSuccess: () => setAsksCancel(false) })}
        >
          {`It stops after the period it is at. ${run.periodsDone} computed periods stay readable; the run can be started again from the beginning.`}
        </ConfirmSheet>
      ) : null}
      {asksDelete ? (
        <DeleteRun group={group} station={slug} run={run} onClose={() => setAsksDelete(false)} />
      ) : null}
    </View>
  );
}

function Labelled({ label, children }: { label: string; children: ReactNode }) {
  return (
    <View style={{ flexDirection: 'row', alignItems: 'center', gap: 6 }}>
      <Text variant="small" soft>
        {label}
      </Text>
      {children}
    </View>
  );
}

function DeleteRun({
  group,
  station,
  run,
  onClose,
}: {
  group: string;
  station: string;
  run: Run;
  onClose: () => void;
}) {
  const account = useRunDeletion(group, run.id);
  const remove = useDeleteRun(group, station);
  return (
    <DeletionSheet
      title={`Delete run ${run.number}?`}
      account={account.data}
      accountError={account.error}
      onRetry={() => void account.refetch()}
      error={remove.error}
      busy={remove.isPending}
      onClose={onClose}
      onDelete={(confirm) => remove.mutate({ id: run.id, confirm }, { onSuccess: onClose })}
    />
  );
}
