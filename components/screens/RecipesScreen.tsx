import { lazy, Suspense, useState } from 'react';
import { View } from 'react-native';
import { recipeHash, recipeSchema } from '../../processing/schemas/recipe';
import type { RecipeSettings } from '../../processing/schemas/recipe';
import type { RecipeRecord } from '../../server/contract/api';
import { useGroupEvents } from '../data/use-group-events';
import { useMay } from '../data/use-me';
import { useRecipes, useSaveRecipe } from '../data/use-recipes';
import { formatPlural } from '../format/numbers';
import { formatDate } from '../format/times';
import {
  Button,
  ButtonRow,
  ChoiceInput,
  EmptyState,
  ErrorNotice,
  HashText,
  LoadingLine,
  Notice,
  PageBody,
  PageHead,
  Section,
  Text,
  TextInput,
  UnitText,
} from '../primitives';
import { MethodsParagraph } from '../recipes/MethodsParagraph';
import { methodsText, recipeDifferences } from '../recipes/recipe-paragraph';
import { AppShell } from '../shell';
import { space, useTheme, useWide } from '../tokens';

const SourcesTable = lazy(async () => ({ default: (await import('../recipes/SourcesTable')).SourcesTable }));

/** Recipes as methods paragraphs; a changed one becomes a child with a name of its own. */
export function RecipesScreen({ group, hash: wantedHash }: { group: string; hash?: string }) {
  useGroupEvents(group);
  const wide = useWide();
  const query = useRecipes(group);
  const maySave = useMay(group, 'recipe.save');
  const [chosenHash, setChosenHash] = useState<string | null>(wantedHash ?? null);
  const [draft, setDraft] = useState<RecipeSettings | null>(null);
  const recipes = query.data ?? [];
  const record =
    recipes.find((recipe) => recipe.hash === chosenHash) ??
    recipes.find((recipe) => recipe.isDefault) ??
    recipes[0] ??
    null;
  const parent = record?.recipe.parentHash
    ? (recipes.find((recipe) => recipe.hash === record.recipe.parentHash) ?? null)
    : null;
  const isEditing = draft !== null && record !== null;

  const frame = {
    title: 'Recipes',
    groupSlug: group,
    place: 'recipes' as const,
  };
  if (!record) {
    return (
      <AppShell {...frame}>
        <PageHead title="Recipes" />
        <PageBody>
          {query.isPending ? <LoadingLine label="reading the recipes" /> : null}
          {query.error ? <ErrorNotice error={query.error} onRetry={() => void query.refetch()} /> : null}
          {query.data ? (
            <EmptyState title="There is no recipe yet.">
              The default one is made with the group; ask the lead.
            </EmptyState>
          ) : null}
        </PageBody>
      </AppShell>
    );
  }
  const settings = draft ?? record.recipe.settings;
  const compared = isEditing ? record : parent;
  return (
    <AppShell
      {...frame}
      actions={
        maySave && !isEditing
          ? [
              {
                key: 'change',
                label: 'Change',
                icon: 'sign',
                onPress: () => setDraft(record.recipe.settings),
              },
            ]
          : []
      }
      side={
        <Side
          group={group}
          record={record}
          settings={settings}
          compared={compared}
          isEditing={isEditing}
          recipes={recipes}
          onSaved={(saved) => {
            setDraft(null);
            setChosenHash(saved.hash);
            window.scrollTo?.(0, 0);
          }}
          onLeave={() => setDraft(null)}
        />
      }
      sideWidth={360}
    >
      <PageHead
        title={isEditing ? `A child of ${record.recipe.name}` : record.recipe.name}
        subtitle={
          isEditing
            ? 'The recipe itself stays as it is; what you change becomes a new one.'
            : `${record.author ? `By ${record.author.name}, ` : ''}${formatDate(record.createdAtMs, 0)}. ${record.isDefault ? 'The default. ' : ''}Saved recipes never change.`
        }
        actions={
          wide && maySave && !isEditing ? (
            <Button label="Change it" onPress={() => setDraft(record.recipe.settings)} />
          ) : undefined
        }
      />
      <PageBody>
        {recipes.length > 1 && !isEditing ? (
          <View style={{ maxWidth: 480 }}>
            <ChoiceInput
              label="Recipe"
              value={record.hash}
              options={recipes.map((recipe) => ({
                value: recipe.hash,
                label: `${recipe.recipe.name}${recipe.isDefault ? ' (default)' : ''}, ${recipe.hash.slice(0, 8)}`,
              }))}
              onChange={setChosenHash}
            />
          </View>
        ) : null}
        <MethodsParagraph
          key={isEditing ? 'draft' : record.hash}
          settings={settings}
          former={compared?.recipe.settings ?? null}
          onChange={isEditing ? setDraft : undefined}
        />
        {maySave ? null : (
          <Text variant="small" soft>
            Leads and analysts can make recipes.
          </Text>
        )}
        {isEditing ? null : <Sources settings={settings} />}
      </PageBody>
    </AppShell>
  );
}

/** A long table, asked for by those who check it. */
function Sources({ settings }: { settings: RecipeSettings }) {
  const [isOpen, setIsOpen] = useState(false);
  return (
    <View style={{ gap: space.l }}>
      <Button
        label={isOpen ? 'Hide the sources' : 'Where the numbers come from'}
        ariaExpanded={isOpen}
        onPress={() => setIsOpen(!isOpen)}
      />
      {isOpen ? (
        <Suspense fallback={<LoadingLine label="reading the sources" />}>
          <SourcesTable settings={settings} />
        </Suspense>
      ) : null}
    </View>
  );
}

interface SideProps {
  group: string;
  record: RecipeRecord;
  settings: RecipeSettings;
  compared: RecipeRecord | null;
  isEditing: boolean;
  recipes: readonly RecipeRecord[];
  onSaved: (saved: RecipeRecord) => void;
  onLeave: () => void;
}

function Side(props: SideProps) {
  const { record, settings, compared, isEditing } = props;
  const differences = compared ? recipeDifferences(compared.recipe.settings, settings) : [];
  const { colour } = useTheme();
  const [isCopied, setIsCopied] = useState(false);
  return (
    <View style={{ gap: space.xl }}>
      <Section
        title={isEditing ? 'Different from where it began' : 'Different from its parent'}
        level={3}
        subtitle={compared ? compared.recipe.name : 'It has no parent here.'}
      >
        {compared && differences.length === 0 ? (
          <Text soft>Nothing differs{isEditing ? ' yet' : ''}.</Text>
        ) : null}
        {differences.map((difference) => (
          <View
            key={difference.path}
            style={{ borderBottomWidth: 1, borderBottomColor: colour.hair, paddingBottom: space.s }}
          >
            <Text variant="label">
              <UnitText>{difference.label}</UnitText>
            </Text>
            <Text>
              <Text soft struck>
                <UnitText>{difference.before}</UnitText>
              </Text>
              {' now '}
              <Text strong>
                <UnitText>{difference.after}</UnitText>
              </Text>
            </Text>
          </View>
        ))}
      </Section>
      {isEditing ? (
        <SaveChild {...props} isUnchanged={differences.length === 0} />
      ) : (
        <>
          <Section
            title="Hash of its settings"
            level={3}
            subtitle="Every choice is in it; equal settings have equal hashes, whatever the name."
          >
            <HashText hash={record.hash} of="recipe" full />
          </Section>
          <Section title="For a paper" level={3} subtitle="The paragraph beside as plain text.">
            <ButtonRow>
              <Button
                label={isCopied ? 'Copied' : 'Copy methods text'}
                onPress={() => {
                  const text = `${methodsText(settings)} (recipe ${record.recipe.name}, ${record.hash.slice(0, 12)})`;
                  navigator.clipboard?.writeText(text).then(
                    () => setIsCopied(true),
                    () => setIsCopied(false),
                  );
                }}
              />
            </ButtonRow>
          </Section>
        </>
      )}
    </View>
  );
}

function SaveChild({
  group,
  record,
  settings,
  recipes,
  isUnchanged,
  onSaved,
  onLeave,
}: SideProps & { isUnchanged: boolean }) {
  const save = useSaveRecipe(group);
  const [name, setName] = useState('');
  const child = { name, parentHash: record.hash, settings };
  const parsed = recipeSchema.safeParse(child);
  const settingIssues = parsed.success
    ? []
    : parsed.error.issues.filter((issue) => issue.path[0] === 'settings');
  const equal =
    settingIssues.length === 0
      ? (recipes.find((recipe) => recipe.hash === recipeHash({ settings })) ?? null)
      : null;
  const isNameTaken = recipes.some(
    (recipe) => recipe.recipe.name.trim().toLowerCase() === name.trim().toLowerCase(),
  );
  const why = isUnchanged
    ? 'Nothing differs yet.'
    : settingIssues.length > 0
      ? `${formatPlural(settingIssues.length, 'value')} cannot stand like this.`
      : equal
        ? `Equal to ${equal.recipe.name}, which is saved already.`
        : name.trim() === ''
          ? 'Give it a name first.'
          : isNameTaken
            ? 'Another recipe has this name.'
            : undefined;
  return (
    <Section title="Save as a new recipe" level={3}>
      <TextInput
        label="Name"
        value={name}
        onChange={setName}
        help="Say what it is for: “Fen strict”, “10 min for the gust study”."
      />
      {settingIssues.slice(0, 3).map((issue) => (
        <Notice
          key={issue.path.join('.')}
          kind="error"
          title={`${issue.path.slice(1).join(', ')}: ${issue.message}`}
        />
      ))}
      {save.error ? <ErrorNotice error={save.error} safe="What you changed is still here." /> : null}
      <ButtonRow>
        <Button
          kind="primary"
          label="Save as new recipe"
          busy={save.isPending}
          disabledReason={why}
          onPress={() => parsed.success && save.mutate(parsed.data, { onSuccess: onSaved })}
        />
        <Button label="Leave it" onPress={onLeave} />
      </ButtonRow>
    </Section>
  );
}
