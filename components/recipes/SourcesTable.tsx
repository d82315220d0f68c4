import { View } from 'react-native';
import { defaults } from '../../processing/defaults';
import type { DefaultTag } from '../../processing/defaults';
import type { RecipeSettings } from '../../processing/schemas/recipe';
import { formatNumber } from '../format/numbers';
import { DataTable, Section, Text, UnitText } from '../primitives';
import { space } from '../tokens';
import { settingAt } from './recipe-paragraph';

const tagWords: Record<DefaultTag, string> = {
  verified: 'verified in a public document',
  derived: 'derived and checked',
  'from-memory': 'from the publication, not reread',
  'from-memory-doubtful': 'check before quoting',
  'project-choice': 'project choice',
};

const figure = (value: number): string => formatNumber(value, String(value).split('.')[1]?.length ?? 0);

/** Where each number of the default recipe comes from, beside what this recipe has. */
export function SourcesTable({ settings }: { settings: RecipeSettings }) {
  const rows = defaults
    .filter((entry) => entry.key.startsWith('recipe.'))
    .map((entry) => ({ entry, here: settingAt(settings, entry.key.slice('recipe.'.length)) }));
  const words = (here: unknown): string =>
    here === undefined
      ? 'does not apply'
      : here === null
        ? 'off'
        : typeof here === 'number'
          ? figure(here)
          : String(here);
  return (
    <Section
      title="Where the numbers come from"
      subtitle="Sources of the default values, and how sure we are of each."
    >
      <DataTable
        caption="Sources of the default values"
        rows={rows}
        rowKey={({ entry }) => entry.key}
        columns={[
          {
            key: 'meaning',
            head: 'Setting',
            cell: ({ entry }) => (
              <Text variant="small">
                <UnitText>{entry.meaning}</UnitText>
              </Text>
            ),
          },
          {
            key: 'here',
            head: 'Here',
            align: 'right',
            cell: ({ entry, here }) => (
              <Text variant="figure" size={13} strong={here !== entry.value}>
                {words(here)}
              </Text>
            ),
          },
          {
            key: 'usual',
            head: 'Default',
            align: 'right',
            cell: ({ entry }) => (
              <Text variant="figure" size={13} soft>
                {figure(entry.value)}
              </Text>
            ),
          },
          {
            key: 'unit',
            head: 'Unit',
            cell: ({ entry }) => (
              <Text variant="small" soft>
                <UnitText>{entry.unit === '1' ? '' : entry.unit}</UnitText>
              </Text>
            ),
          },
          { key: 'source', head: 'Source', cell: ({ entry }) => <Text variant="small">{entry.source}</Text> },
          {
            key: 'tag',
            head: 'How sure',
            cell: ({ entry }) => (
              <Text variant="small" soft>
                {tagWords[entry.tag]}
              </Text>
            ),
          },
        ]}
        phoneRow={({ entry, here }) => (
          <View style={{ gap: 2 }}>
            <View style={{ flexDirection: 'row', justifyContent: 'space-between', gap: space.m }}>
              <View style={{ flexShrink: 1 }}>
                <Text>
                  <UnitText>{entry.meaning}</UnitText>
                </Text>
              </View>
              <Text variant="figure" strong={here !== entry.value}>
                {words(here)} <UnitText>{entry.unit === '1' ? '' : entry.unit}</UnitText>
              </Text>
            </View>
            <Text
              variant="small"
              soft
            >{`Default ${figure(entry.value)}: ${entry.source}, ${tagWords[entry.tag]}`}</Text>
          </View>
        )}
      />
    </Section>
  );
}
