import { useState } from 'react';
import { View } from 'react-native';
import { router } from 'expo-router';
import type { Href } from 'expo-router';
import { useForm, useWatch } from 'react-hook-form';
import type { Control } from 'react-hook-form';
import { zodResolver } from '@hookform/resolvers/zod';
import type { Run, SetUpRevision, StationSummary } from '../../server/contract/api';
import { newId } from '../data/new-id';
import { useMay } from '../data/use-me';
import { againFrom, useRuns, useStartRun } from '../data/use-runs';
import { useAddSetUp, useSetUps } from '../data/use-set-ups';
import { useDeleteStation, useStationDeletion } from '../data/use-stations';
import { useClock } from '../format/useClock';
import type { StationClock } from '../format/useClock';
import {
  Button,
  ButtonRow,
  EmptyState,
  ErrorNotice,
  FactRow,
  HashText,
  LoadingLine,
  Notice,
  PageBody,
  PageHead,
  Section,
  Text,
  TextField,
  UnitText,
} from '../primitives';
import { DeletionSheet } from '../runs/DeletionSheet';
import { CompassDrawing } from '../set-up/CompassDrawing';
import { SafetyNotice } from '../set-up/SafetyNotice';
import { SetUpForm } from '../set-up/SetUpForm';
import { emptySetUp, fieldWords, setUpDifferences, setUpGroups } from '../set-up/set-up-fields';
import { correctionFormSchema, formWords } from '../set-up/station-form';
import type { StationFormInput, StationFormOutput } from '../set-up/station-form';
import { groupPath, stationPath } from '../shell';
import { space, useTheme, useWide } from '../tokens';
import { StationPage } from './StationPage';

/** How a station stands, since when, who said so and why; corrected by adding, never by overwriting. */
export function SetUpScreen({ group, station }: { group: string; station: string }) {
  const mayAdd = useMay(group, 'setUp.add');
  const [mode, setMode] = useState<'read' | 'write'>('read');
  return (
    <StationPage
      group={group}
      station={station}
      place="set-up"
      title="Set-up"
      actions={
        mayAdd && mode === 'read'
          ? [
              {
                key: 'correct',
                label: 'Correct',
                icon: 'sign',
                isPrimary: true,
                onPress: () => setMode('write'),
              },
            ]
          : []
      }
    >
      {(summary) => (
        <SetUpPage group={group} summary={summary} mode={mode} setMode={setMode} mayAdd={mayAdd} />
      )}
    </StationPage>
  );
}

interface SetUpPageProps {
  group: string;
  summary: StationSummary;
  mode: 'read' | 'write';
  setMode: (mode: 'read' | 'write') => void;
  mayAdd: boolean;
}

function SetUpPage({ group, summary, mode, setMode, mayAdd }: SetUpPageProps) {
  const { slug, utcOffsetMinutes, name } = summary.station;
  const wide = useWide();
  const clock = useClock(utcOffsetMinutes);
  const revisions = useSetUps(group, slug);
  const [staleIds, setStaleIds] = useState<string[] | null>(null);
  const mayDelete = useMay(group, 'station.delete');
  const [asksDelete, setAsksDelete] = useState(false);
  const list = revisions.data ?? [];
  const newest = list[0] ?? null;

  if (mode === 'write') {
    return (
      <Correction
        group={group}
        summary={summary}
        newest={newest}
        onClose={() => setMode('read')}
        onSaved={(stale) => {
          setStaleIds(stale);
          setMode('read');
          window.scrollTo?.(0, 0);
        }}
      />
    );
  }
  return (
    <View>
      <PageHead
        title={
          newest ? `Set-up ${newest.revision}, from ${clock.date(newest.setUp.validFrom)}` : 'No set-up yet'
        }
        subtitle={
          newest
            ? `${name}. ${newest.why ? `${newest.why.replace(/[^.!?]$/, '$&.')} ` : ''}By ${newest.author.name}, ${clock.moment(newest.createdAtMs)} (${clock.zone}).`
            : name
        }
        actions={
          wide && mayAdd ? (
            <Button
              kind="primary"
              label={newest ? 'Correct or renew' : 'Write the set-up'}
              onPress={() => setMode('write')}
            />
          ) : undefined
        }
      />
      <PageBody maxWidth={1180}>
        {staleIds ? (
          <AfterCorrection
            group={group}
            station={slug}
            staleIds={staleIds}
            onClose={() => setStaleIds(null)}
          />
        ) : null}
        {revisions.isPending ? <LoadingLine label="reading the set-ups" /> : null}
        {revisions.error ? (
          <ErrorNotice error={revisions.error} onRetry={() => void revisions.refetch()} />
        ) : null}
        {revisions.data && !newest ? (
          <EmptyState
            title="Nobody has written how this station stands."
            action={
              mayAdd ? (
                <Button kind="primary" label="Write the set-up" onPress={() => setMode('write')} />
              ) : undefined
            }
          >
            Without heights and directions no flux can be computed.
          </EmptyState>
        ) : null}
        {newest ? <Facts revision={newest} /> : null}
        {mayAdd ? <SafetyNotice /> : null}
        {list.length > 0 ? <Revisions list={list} clock={clock} /> : null}
        {newest && !mayAdd ? (
          <Text variant="small" soft>
            Leads, analysts and technicians can correct a set-up.
          </Text>
        ) : null}
        {mayDelete ? (
          <Section
            title="Delete the station"

            subtitle="Shows first what would go and what would stay."
          >
            <Button label="Delete this station" onPress={() => setAsksDelete(true)} />
          </Section>
        ) : null}
      </PageBody>
      {asksDelete ? (
        <DeleteStation group={group} slug={slug} name={name} onClose={() => setAsksDelete(false)} />
      ) : null}
    </View>
  );
}

function Facts({ revision }: { revision: SetUpRevision }) {
  const wide = useWide();
  const { setUp } = revision;
  return (
    <View style={{ flexDirection: wide ? 'row' : 'column', gap: space.xxl, alignItems: 'flex-start' }}>
      <CompassDrawing geometry={setUp} />
      <View
        style={{
          flex: wide ? 1 : undefined,
          alignSelf: 'stretch',
          flexDirection: wide ? 'row' : 'column',
          flexWrap: 'wrap',
          columnGap: space.xxl,
          rowGap: space.xl,
        }}
      >
        {setUpGroups.map((group) => (
          <View key={group.key} style={{ width: wide ? 330 : '100%' }}>
            <Text variant="part" level={2}>
              {group.title}
            </Text>
            {group.fields.map((field) => (
              <FactRow key={field.path} label={field.label}>
                <Text variant={field.kind === 'choice' ? 'body' : 'figure'} align="right">
                  {field.kind === 'number' ? (
                    <UnitText>{fieldWords(setUp, field)}</UnitText>
                  ) : (
                    fieldWords(setUp, field)
                  )}
                </Text>
              </FactRow>
            ))}
          </View>
        ))}
        {setUp.disturbedSectors.length > 0 ? (
          <View style={{ width: wide ? 330 : '100%' }}>
            <Text variant="part" level={2}>
              Disturbed directions
            </Text>
            {setUp.disturbedSectors.map((sector) => (
              <FactRow
                key={`${sector.fromDeg}-${sector.toDeg}`}
                label={`${sector.fromDeg}° to ${sector.toDeg}°`}
              >
                {`${sector.reason}, ${sector.grade === 1 ? 'usable' : 'rejected'}`}
              </FactRow>
            ))}
          </View>
        ) : null}
      </View>
    </View>
  );
}

/** All revisions, newest first, each with what it changed. */
function Revisions({ list, clock }: { list: readonly SetUpRevision[]; clock: StationClock }) {
  const { colour } = useTheme();
  return (
    <Section title="Revisions" subtitle="Kept for good, newest first. A run remembers which of them it used.">
      <View role="list" aria-label="Revisions of the set-up">
        {list.map((revision, index) => {
          const before = list[index + 1] ?? null;
          const differences = before ? setUpDifferences(before.setUp, revision.setUp) : [];
          const fromMoved = before !== null && before.setUp.validFrom !== revision.setUp.validFrom;
          return (
            <View
              key={revision.id}
              role="listitem"
              style={{ borderTopWidth: 1, borderTopColor: colour.hair, paddingVertical: space.m, gap: 4 }}
            >
              <Text>
                <Text strong>{`Set-up ${revision.revision}`}</Text>
                {`, from ${clock.moment(revision.setUp.validFrom)}. ${revision.author.name}, ${clock.moment(revision.createdAtMs)}.`}
              </Text>
              {revision.why ? <Text>{revision.why}</Text> : null}
              {fromMoved ? (
                <Difference
                  label="Holds from"
                  before={clock.moment(before.setUp.validFrom)}
                  after={clock.moment(revision.setUp.validFrom)}
                />
              ) : null}
              {differences.map((difference) => (
                <Difference key={difference.label} {...difference} />
              ))}
              {before === null ? (
                <Text variant="small" soft>
                  The first.
                </Text>
              ) : differences.length === 0 && !fromMoved ? (
                <Text variant="small" soft>
                  Nothing differs from the one before.
                </Text>
              ) : null}
              <HashText hash={revision.hash} of="set-up" />
            </View>
          );
        })}
      </View>
    </Section>
  );
}

function Difference({ label, before, after }: { label: string; before: string; after: string }) {
  return (
    <Text>
      {`${label}: `}
      <Text soft struck>
        <UnitText>{before}</UnitText>
      </Text>
      {' now '}
      <Text strong>
        <UnitText>{after}</UnitText>
      </Text>
    </Text>
  );
}

interface CorrectionProps {
  group: string;
  summary: StationSummary;
  newest: SetUpRevision | null;
  onClose: () => void;
  onSaved: (staleRunIds: string[]) => void;
}

function Correction({ group, summary, newest, onClose, onSaved }: CorrectionProps) {
  const { station } = summary;
  const clock = useClock(station.utcOffsetMinutes);
  const add = useAddSetUp(group, station.slug);
  const [id] = useState(newId);
  const form = useForm<StationFormInput, unknown, StationFormOutput>({
    resolver: zodResolver(correctionFormSchema, formWords),
    mode: 'onTouched',
    defaultValues: {
      station,
      setUp: newest?.setUp ?? emptySetUp(`${new Date().toISOString().slice(0, 10)}T00:00:00Z`),
      why: '',
    },
  });
  const { control, handleSubmit, setValue, formState } = form;
  const draft = useWatch({ control, name: 'setUp' });
  const differences = newest ? setUpDifferences(newest.setUp, draft as SetUpRevision['setUp']) : [];
  const isNewFrom = newest !== null && draft.validFrom !== newest.setUp.validFrom;
  const submit = handleSubmit(({ setUp, why }) =>
    add.mutate({ id, setUp, why }, { onSuccess: ({ staleRuns }) => onSaved(staleRuns) }),
  );
  const isUnchanged = newest !== null && differences.length === 0 && !isNewFrom;
  return (
    <View>
      <PageHead
        title={newest ? `Correct set-up ${newest.revision}` : 'Write the set-up'}
        subtitle={
          newest
            ? `Same date: a correction of what was written. Another date: the station was changed then. The old revision stays.`
            : station.name
        }
      />
      <PageBody maxWidth={1180}>
        <SafetyNotice />
        <SetUpForm control={control} setValue={setValue} />
        <Section title="What changes, and why">
          {newest ? (
            isUnchanged ? (
              <Text soft>Nothing differs yet.</Text>
            ) : (
              <View style={{ gap: 4 }}>
                {isNewFrom ? (
                  <Difference
                    label="Holds from"
                    before={clock.moment(newest.setUp.validFrom)}
                    after={clock.moment(draft.validFrom)}
                  />
                ) : null}
                {differences.map((difference) => (
                  <Difference key={difference.label} {...difference} />
                ))}
              </View>
            )
          ) : null}
          <View style={{ maxWidth: 560 }}>
            <TextField
              control={control as unknown as Control<StationFormInput>}
              name="why"
              label="Why"
              lines={2}
              help="How it was found out: “read again with the compass, away from the mast”. It stands wherever this set-up matters."
            />
          </View>
        </Section>
        {formState.isSubmitted && !formState.isValid ? (
          <Notice
            kind="error"
            title="Some fields are missing or out of range."
            next="They are marked above; the first of them has the cursor."
          />
        ) : null}
        {add.error ? <ErrorNotice error={add.error} safe="What you wrote is still here." /> : null}
        <ButtonRow>
          <Button
            kind="primary"
            label="Add this revision"
            busy={add.isPending}
            busyLabel="Saving"
            disabledReason={isUnchanged ? 'Nothing differs from the set-up that holds.' : undefined}
            onPress={() => void submit()}
          />
          <Button label="Leave it" onPress={onClose} />
        </ButtonRow>
      </PageBody>
    </View>
  );
}

/** Which runs no longer hold after a correction, and a way to compute them again. */
function AfterCorrection({
  group,
  station,
  staleIds,
  onClose,
}: {
  group: string;
  station: string;
  staleIds: string[];
  onClose: () => void;
}) {
  const runs = useRuns(group, station);
  const start = useStartRun(group, station);
  const mayStart = useMay(group, 'run.start');
  const stale = (runs.data ?? []).filter((run) => staleIds.includes(run.id));
  // the newest of each recipe and span: the older ones are history
  const worth = stale.filter(
    (run, index) =>
      stale.findIndex(
        (other) =>
          other.recipeHash === run.recipeHash && other.fromMs === run.fromMs && other.toMs === run.toMs,
      ) === index,
  );
  const recompute = async (list: readonly Run[]): Promise<void> => {
    for (const run of list) await start.mutateAsync(againFrom(run, newId()));
    router.push(stationPath(group, station, 'runs') as Href);
  };
  return (
    <Notice
      kind="done"
      title={
        staleIds.length === 0
          ? 'Saved. No run used what was corrected.'
          : staleIds.length === 1
            ? 'Saved. One run used what was corrected and is stale now.'
            : `Saved. ${staleIds.length} runs used what was corrected and are stale now.`
      }
      safe={
        stale.length > 0
          ? `${stale.map((run) => `Run ${run.number}, ${run.recipeName}`).join('; ')}. Their numbers stay readable.`
          : undefined
      }
    >
      {start.error ? <ErrorNotice error={start.error} safe="The set-up is saved." /> : null}
      <ButtonRow>
        {worth.length > 0 && mayStart ? (
          <Button
            kind="primary"
            label={
              worth.length === 1
                ? `Recompute run ${worth[0]?.number ?? ''}`
                : `Recompute ${worth.length} runs`
            }
            busy={start.isPending}
            onPress={() => void recompute(worth).catch(() => undefined)}
          />
        ) : null}
        <Button kind="quiet" label="Close" onPress={onClose} />
      </ButtonRow>
    </Notice>
  );
}

function DeleteStation({
  group,
  slug,
  name,
  onClose,
}: {
  group: string;
  slug: string;
  name: string;
  onClose: () => void;
}) {
  const account = useStationDeletion(group, slug, true);
  const remove = useDeleteStation(group);
  return (
    <DeletionSheet
      title={`Delete ${name}?`}
      account={account.data}
      accountError={account.error}
      onRetry={() => void account.refetch()}
      error={remove.error}
      busy={remove.isPending}
      onClose={onClose}
      onDelete={(confirm) =>
        remove.mutate({ slug, confirm }, { onSuccess: () => router.replace(groupPath(group) as Href) })
      }
    />
  );
}
