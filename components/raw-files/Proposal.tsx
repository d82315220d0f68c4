import { useMemo, useState } from 'react';
import { View } from 'react-native';
import { channelWords } from '../../processing/records/guess-layout';
import { fitsFrom, layoutFit } from '../../processing/records/layout-fit';
import { previewLayout } from '../../processing/records/preview';
import type { StationSummary } from '../../server/contract/api';
import { newId } from '../data/new-id';
import { useLayouts, useSaveLayout } from '../data/use-layouts';
import { checkHashes } from '../data/use-raw-files';
import { useRecipes } from '../data/use-recipes';
import { formatBytes, formatPlural } from '../format/numbers';
import { useClock } from '../format/useClock';
import {
  Button,
  ButtonRow,
  CheckInput,
  ChoiceInput,
  ErrorNotice,
  Notice,
  Section,
  Text,
  TextInput,
  UnitText,
} from '../primitives';
import { space, useTheme, useWide } from '../tokens';
import { bestSaved, guessOf } from './chosen-file';
import type { ChosenFile } from './chosen-file';
import type { FileSpan } from './coverage';
import { CoverageStrip } from './CoverageStrip';
import { hashOfFile } from './file-beginning';
import { FindingMark } from './FindingMark';
import { FirstLines } from './FirstLines';
import { draftOfGuess, draftOfSaved, equalLayout, openProblems } from './layout-draft';
import type { LayoutDraft } from './layout-draft';
import { LayoutEditor } from './LayoutEditor';
import { useUploads } from './use-uploads';

const noComputing = 'none';

export interface ProposalProps {
  group: string;
  summary: StationSummary;
  chosen: readonly ChosenFile[];
  draft: LayoutDraft | null;
  onDraft: (draft: LayoutDraft) => void;
  onForget: () => void;
  onMore: (files: File[]) => void;
  onDrop: (id: string) => void;
  onSent: (sentIds: readonly string[]) => void;
  kept: readonly FileSpan[];
  mayStart: boolean;
}

/** The first lines with the layout that is proposed for them; sending comes after. */
export function Proposal(props: ProposalProps) {
  const { group, summary, chosen, draft, onDraft, kept } = props;
  const { slug, utcOffsetMinutes } = summary.station;
  const { colour } = useTheme();
  const wide = useWide();
  const clock = useClock(utcOffsetMinutes);
  const layouts = useLayouts(group, slug);
  const recipes = useRecipes(group);
  const saveLayout = useSaveLayout(group, slug);
  const { queue } = useUploads(group, slug);
  const [lookedAt, setLookedAt] = useState('');
  const [computeWith, setComputeWith] = useState<string | null>(null);
  const [layoutId] = useState(newId);
  const [isChecking, setIsChecking] = useState(false);

  const readable = chosen.filter((one) => one.beginning.problem === null);
  const first = readable[0] ?? null;
  const layout = draft?.layout ?? null;
  const preview = useMemo(
    () =>
      first && layout
        ? previewLayout(first.beginning.text, first.beginning.isCutOff, first.file.name, layout)
        : null,
    [first, layout],
  );
  const fits = useMemo(
    () =>
      layout === null
        ? []
        : chosen.map((one) => ({
            one,
            fit:
              one.beginning.problem === null
                ? layoutFit(layout, one.beginning.text, one.beginning.isCutOff, one.file.name)
                : { score: 0, misfits: [one.beginning.problem] },
          })),
    [chosen, layout],
  );
  if (!first || draft === null || layout === null || preview === null) {
    return (
      <Section title="These files cannot be looked at here">
        {chosen.map((one) => (
          <Text key={one.id}>{`${one.file.name}: ${one.beginning.problem ?? 'no rows found'}`}</Text>
        ))}
        <Button label="Choose others" onPress={props.onForget} />
      </Section>
    );
  }

  const problems = openProblems(draft, preview);
  const blocking = problems.filter((problem) => problem.severity === 'blocks');
  const confirming = problems.filter((problem) => problem.severity === 'confirm');
  // a new doubt asks for a new look
  const doubtsNow = confirming.map((problem) => problem.message).join('\n');
  const hasLooked = lookedAt === doubtsNow;
  const going = fits
    .filter(({ fit, one }) => fit.score >= fitsFrom || one.id === first.id)
    .map(({ one }) => one);
  const misfits = fits.filter(({ fit, one }) => !(fit.score >= fitsFrom || one.id === first.id));
  const best = bestSaved(layouts.data ?? [], first);
  const savedDraft =
    draft.savedId === null ? null : (layouts.data?.find((saved) => saved.id === draft.savedId) ?? null);
  const isSaved = equalLayout(layouts.data ?? [], layout);
  const recipeHash =
    computeWith ??
    (props.mayStart ? (recipes.data?.find((recipe) => recipe.isDefault)?.hash ?? noComputing) : noComputing);

  const chosenSpans = going.flatMap((one) => {
    const read =
      one.id === first.id
        ? preview
        : previewLayout(one.beginning.text, one.beginning.isCutOff, one.file.name, layout);
    if (read.firstMs === null || read.rows.length === 0) return [];
    const bytesPerRow = one.beginning.text.length / Math.max(1, read.rows.length + layout.headerRows);
    const rows = one.beginning.isCutOff ? one.beginning.unpackedBytes / bytesPerRow : read.rows.length;
    return [{ fromMs: read.firstMs, toMs: read.firstMs + (rows * 1000) / layout.sampleRateHz }];
  });

  const save = async (): Promise<string> =>
    isSaved?.id ?? (await saveLayout.mutateAsync({ id: layoutId, layout })).id;
  const send = async (): Promise<void> => {
    setIsChecking(true);
    try {
      const id = await save();
      const hashes = await Promise.all(going.slice(0, 200).map((one) => hashOfFile(one.file)));
      const known = hashes.filter((hash): hash is string => hash !== null);
      const present =
        known.length > 0
          ? await checkHashes(group, slug, known).catch(() => new Map<string, string>())
          : new Map<string, string>();
      const here = going.filter((_, index) => present.has(hashes[index] ?? ''));
      queue.addPresent(here, id);
      queue.add(
        going.filter((one) => !here.includes(one)),
        id,
        recipeHash === noComputing ? null : recipeHash,
      );
      props.onSent(going.map((one) => one.id));
    } catch {
      // saving the layout failed: its notice stands below
    } finally {
      setIsChecking(false);
    }
  };

  const uses = Array.from(
    { length: Math.max(0, ...preview.rows.slice(0, 20).map((row) => row.fields.length)) },
    (_, index) => {
      const column = layout.columns.find((candidate) => candidate.index === index);
      if (column) return channelWords[column.channel];
      const time = layout.time;
      const timeColumns = [
        'column' in time ? time.column : -1,
        'dateColumn' in time ? time.dateColumn : -1,
        'timeColumn' in time ? (time.timeColumn ?? -1) : -1,
        'dayColumn' in time ? time.dayColumn : -1,
        'secondsColumn' in time ? (time.secondsColumn ?? -1) : -1,
        time.kind === 'day-of-year' && 'column' in time.year ? time.year.column : -1,
      ];
      return timeColumns.includes(index) ? 'time' : '';
    },
  );
  const spacing = preview.spacing;
  const totalBytes = going.reduce((sum, one) => sum + one.file.size, 0);

  const editor = (
    <View style={{ flex: wide ? 5 : undefined, alignSelf: 'stretch', minWidth: 0, gap: space.l }}>
      <LayoutEditor
        draft={draft}
        onChange={onDraft}
        preview={preview}
        problems={problems}
        stationOffsetMinutes={utcOffsetMinutes}
      />
    </View>
  );

  return (
    <View style={{ gap: space.xl }}>
      <Section
        title={savedDraft ? `Layout “${savedDraft.layout.name}” fits` : 'Layout proposal'}
        subtitle={
          savedDraft
            ? `Saved by ${savedDraft.author.name}, ${clock.date(savedDraft.createdAtMs)}. Checked on the first lines of ${first.file.name}.`
            : `From the first lines of ${first.file.name}. ${problems.length === 0 ? 'Nothing is in doubt.' : `${formatPlural(problems.length, 'point')} to look at.`}`
        }
        aside={
          savedDraft ? (
            <Button label="Propose anew" onPress={() => onDraft(draftOfGuess(guessOf(first, summary)))} />
          ) : best ? (
            <Button
              label={`Use “${best.saved.layout.name}”`}
              onPress={() => onDraft(draftOfSaved(best.saved))}
            />
          ) : undefined
        }
      >
        <View style={{ flexDirection: wide ? 'row' : 'column', gap: space.xl, alignItems: 'flex-start' }}>
          {wide ? editor : null}
          <View style={{ flex: wide ? 6 : undefined, alignSelf: 'stretch', minWidth: 0, gap: space.l }}>
            {problems.length > 0 ? (
              <View role="list" aria-label="To look at" style={{ gap: space.s }}>
                {problems.map((problem, index) => (
                  <View
                    key={`${problem.code}-${problem.channel ?? index}`}
                    role="listitem"
                    style={{ flexDirection: 'row' }}
                  >
                    <FindingMark
                      mark={problem.severity === 'blocks' ? 2 : 1}
                      label={problem.severity === 'blocks' ? 'cannot be sent like this' : 'please look'}
                    />
                    <View style={{ flex: 1, minWidth: 0 }}>
                      <Text>
                        <UnitText>{problem.message}</UnitText>
                      </Text>
                    </View>
                  </View>
                ))}
              </View>
            ) : null}
            <FirstLines
              names={preview.names}
              units={preview.units}
              uses={uses}
              rows={preview.rows.slice(0, 6).map((row) => row.fields)}
            />
            <View style={{ gap: 4 }}>
              <Text variant="small" soft>
                {preview.firstMs === null
                  ? 'No time could be read from the first row.'
                  : `The first scan is of ${clock.moment(preview.firstMs, true)} (${clock.zone}).`}
                {spacing
                  ? spacing.isEven
                    ? ` The first ${spacing.rows} rows are evenly spaced, ${Number(spacing.rateHz.toFixed(2))} a second.`
                    : ` ${spacing.irregular} of the first ${spacing.rows} steps are uneven.`
                  : ''}
              </Text>
            </View>
          </View>
          {wide ? null : editor}
        </View>
      </Section>

      {chosenSpans.length > 0 ? (
        <Section title="Where they fall">
          <CoverageStrip kept={kept} chosen={chosenSpans} clock={clock} />
        </Section>
      ) : null}

      <Section
        title={`${formatPlural(going.length, 'file')}, ${formatBytes(totalBytes)}`}
        level={3}
        subtitle={
          misfits.length > 0
            ? 'Files that do not fit this layout stay here; send them afterwards with one of their own.'
            : undefined
        }
      >
        <View role="list" aria-label="Chosen files">
          {fits.slice(0, 40).map(({ one, fit }) => {
            const isGoing = fit.score >= fitsFrom || one.id === first.id;
            return (
              <View
                key={one.id}
                role="listitem"
                style={{
                  flexDirection: 'row',
                  alignItems: 'center',
                  gap: space.s,
                  borderBottomWidth: 1,
                  borderBottomColor: colour.hair,
                  minHeight: 40,
                }}
              >
                <FindingMark mark={isGoing ? 0 : 2} label={isGoing ? 'fits' : 'does not fit'} size={12} />
                <View style={{ flex: 1, minWidth: 0 }}>
                  <Text variant="figure" size={14} numberOfLines={1}>
                    {one.file.name}
                  </Text>
                  {isGoing ? null : (
                    <Text variant="small">{fit.misfits[0] ?? 'does not fit this layout'}</Text>
                  )}
                </View>
                <Text variant="figure" size={13} soft>
                  {formatBytes(one.file.size)}
                </Text>
                <Button
                  kind="quiet"
                  label="Leave out"
                  ariaLabel={`Leave out ${one.file.name}`}
                  onPress={() => props.onDrop(one.id)}
                />
              </View>
            );
          })}
        </View>
        {fits.length > 40 ? (
          <Text variant="small" soft>{`And ${formatPlural(fits.length - 40, 'file')} more.`}</Text>
        ) : null}
      </Section>

      <View style={{ gap: space.l, maxWidth: 560 }}>
        {isSaved ? null : (
          <TextInput
            label="Name of the layout"
            value={layout.name}
            onChange={(name) => onDraft({ ...draft, layout: { ...layout, name } })}
            help="It is kept with the files and proposed next time."
          />
        )}
        {props.mayStart && recipes.data ? (
          <ChoiceInput
            label="When all is read, compute with"
            value={recipeHash}
            options={[
              { value: noComputing, label: 'nothing yet' },
              ...recipes.data.map((recipe) => ({ value: recipe.hash, label: recipe.recipe.name })),
            ]}
            onChange={setComputeWith}
          />
        ) : null}
        {confirming.length > 0 && blocking.length === 0 ? (
          <CheckInput
            label={`I have looked at the ${formatPlural(confirming.length, 'point')} above`}
            value={hasLooked}
            onChange={(looked) => setLookedAt(looked ? doubtsNow : '')}
          />
        ) : null}
        {saveLayout.error ? <ErrorNotice error={saveLayout.error} safe="No file was sent." /> : null}
        {saveLayout.isSuccess && isSaved ? (
          <Notice kind="done" title={`Layout “${isSaved.layout.name}” is saved.`} />
        ) : null}
        <ButtonRow>
          <Button
            kind="primary"
            label={`Send ${formatPlural(going.length, 'file')}`}
            busy={isChecking}
            busyLabel="Saving the layout"
            disabledReason={
              blocking.length > 0
                ? 'First settle what is marked with a cross.'
                : confirming.length > 0 && !hasLooked
                  ? 'First look at what is marked.'
                  : undefined
            }
            onPress={() => void send()}
          />
          {isSaved ? null : (
            <Button
              label="Save layout only"
              disabled={blocking.length > 0}
              busy={saveLayout.isPending}
              onPress={() => void save().catch(() => undefined)}
            />
          )}
          <Button kind="quiet" label="Forget these files" onPress={props.onForget} />
        </ButtonRow>
      </View>
    </View>
  );
}
