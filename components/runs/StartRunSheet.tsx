import { useState } from 'react';
import { View } from 'react-native';
import type { Run, StationSummary } from '../../server/contract/api';
import { useRecipes } from '../data/use-recipes';
import { useStartRun } from '../data/use-runs';
import { formatIsoDate, parseDay } from '../format/times';
import { useClock } from '../format/useClock';
import {
  Button,
  ChoiceInput,
  ErrorNotice,
  LoadingLine,
  SegmentChoice,
  Sheet,
  Text,
  TextInput,
} from '../primitives';
import { space, useWide } from '../tokens';
import { newId } from '../data/new-id';

export interface StartRunSheetProps {
  open: boolean;
  onClose: () => void;
  group: string;
  summary: StationSummary;
  onStarted: (run: Run) => void;
}

const dayMs = 86_400_000;

/** Asks which recipe over which span, then computes. */
export function StartRunSheet({ open, onClose, group, summary, onStarted }: StartRunSheetProps) {
  const { station, firstScanMs, lastScanMs } = summary;
  const wide = useWide();
  const clock = useClock(station.utcOffsetMinutes);
  const recipes = useRecipes(group);
  const start = useStartRun(group, station.slug);
  const [recipeHash, setRecipeHash] = useState<string | null>(null);
  const [reach, setReach] = useState<'all' | 'span'>('all');
  const [id, setId] = useState(newId);
  const offset = clock.offsetMinutes;
  const [fromDay, setFromDay] = useState(() =>
    firstScanMs === null ? '' : formatIsoDate(firstScanMs, offset),
  );
  const [toDay, setToDay] = useState(() => (lastScanMs === null ? '' : formatIsoDate(lastScanMs, offset)));
  const chosen =
    recipeHash ?? recipes.data?.find((recipe) => recipe.isDefault)?.hash ?? recipes.data?.[0]?.hash ?? null;
  const fromMs = parseDay(fromDay, offset);
  const toMs = parseDay(toDay, offset) + dayMs;
  const isSpanRight = reach === 'all' || (Number.isFinite(fromMs) && Number.isFinite(toMs) && toMs > fromMs);
  const why =
    firstScanMs === null || lastScanMs === null
      ? 'Nothing is recorded yet: bring in raw files first.'
      : summary.setUp === null
        ? 'The station has no set-up yet.'
        : chosen === null
          ? 'There is no recipe yet.'
          : !isSpanRight
            ? 'The last day must not be before the first.'
            : undefined;

  const submit = (): void => {
    if (chosen === null) return;
    start.mutate(
      {
        id,
        recipeHash: chosen,
        fromMs: reach === 'all' ? null : fromMs,
        toMs: reach === 'all' ? null : toMs,
      },
      {
        onSuccess: (run) => {
          setId(newId());
          onClose();
          onStarted(run);
        },
      },
    );
  };

  return (
    <Sheet
      open={open}
      onClose={onClose}
      title="Compute fluxes"
      subtitle={
        firstScanMs === null || lastScanMs === null
          ? 'Nothing recorded yet.'
          : `Recorded: ${clock.moment(firstScanMs)} to ${clock.moment(lastScanMs)} (${clock.zone})`
      }
      actions={
        <>
          <Button
            kind="primary"
            label="Compute"
            busy={start.isPending}
            busyLabel="Starting"
            disabledReason={why}
            onPress={submit}
          />
          <Button label="Not now" onPress={onClose} />
        </>
      }
    >
      {recipes.isPending ? <LoadingLine label="reading recipes" /> : null}
      {recipes.error ? <ErrorNotice error={recipes.error} onRetry={() => void recipes.refetch()} /> : null}
      {recipes.data ? (
        <ChoiceInput
          label="Recipe"
          value={chosen ?? ''}
          options={recipes.data.map((recipe) => ({
            value: recipe.hash,
            label: `${recipe.recipe.name}${recipe.isDefault ? ' (default)' : ''}, ${recipe.hash.slice(0, 8)}`,
          }))}
          onChange={setRecipeHash}
          help="All settings of the computation. Recipes are read and changed on the page Recipes."
        />
      ) : null}
      <SegmentChoice
        label="Over"
        value={reach}
        options={[
          { value: 'all', label: 'everything recorded' },
          { value: 'span', label: 'some days' },
        ]}
        onChange={setReach}
      />
      {reach === 'span' ? (
        <View style={{ flexDirection: wide ? 'row' : 'column', gap: space.l }}>
          <View style={{ flex: 1 }}>
            <TextInput
              type="date"
              label="First day"
              value={fromDay}
              onChange={setFromDay}
              help={clock.label}
            />
          </View>
          <View style={{ flex: 1 }}>
            <TextInput type="date" label="Last day, all of it" value={toDay} onChange={setToDay} />
          </View>
        </View>
      ) : null}
      {start.error ? <ErrorNotice error={start.error} safe="Runs that exist are not touched." /> : null}
      <Text variant="small" soft>
        A run keeps its recipe, the set-up and the files it was made from, by their hashes. Earlier runs stay
        as they are.
      </Text>
    </Sheet>
  );
}
