import { useState } from 'react';
import { Pressable, View } from 'react-native';
import { seriesLabels } from '../../processing/catalogue';
import type { SeriesKey } from '../../processing/state';
import type { PeriodDetail } from '../../server/contract/api';
import { formatCount, formatNumber } from '../format/numbers';
import { FactRow, Icon, Text, UnitText } from '../primitives';
import { space, useTheme, useWide } from '../tokens';
import { stepTitles } from './period-view';

type Entry = PeriodDetail['ledger'][number];

/** What each step did to this period, in order; a row opens to its settings, counts and changes. */
export function StepLedger({ entries }: { entries: readonly Entry[] }) {
  return (
    <View>
      {entries.map((entry, index) => (
        <StepRow key={`${entry.step}-${index}`} entry={entry} number={index + 1} />
      ))}
    </View>
  );
}

function StepRow({ entry, number }: { entry: Entry; number: number }) {
  const { colour } = useTheme();
  const wide = useWide();
  const [isOpen, setOpen] = useState(false);
  const counts = Object.entries(entry.counts ?? {});
  return (
    <View style={{ borderBottomWidth: 1, borderBottomColor: colour.hair }}>
      <Pressable
        role="button"
        aria-expanded={isOpen}
        onPress={() => setOpen((open) => !open)}
        style={{
          flexDirection: 'row',
          gap: space.m,
          paddingVertical: 10,
          minHeight: 48,
          alignItems: 'flex-start',
        }}
      >
        <Text variant="figure" soft size={13} style={{ width: 22, paddingTop: 2 }} align="right">
          {number}
        </Text>
        <View style={{ flex: 1, flexDirection: wide ? 'row' : 'column', columnGap: space.l, rowGap: 2 }}>
          <Text variant="label" size={14} style={{ width: wide ? 220 : undefined, paddingTop: 1 }}>
            {stepTitles[entry.step] ?? entry.step}
          </Text>
          <Text variant="small" style={{ flex: wide ? 1 : undefined }}>
            {entry.summary}
          </Text>
        </View>
        <Icon name={isOpen ? 'up' : 'down'} size={16} />
      </Pressable>
      {isOpen ? (
        <View style={{ paddingLeft: 34, paddingBottom: space.m, gap: space.m, maxWidth: 720 }}>
          {counts.length > 0 ? (
            <Facts
              title="Valid samples, before and after"
              rows={counts.map(([series, count]) => [
                seriesLabels[series as SeriesKey]?.label ?? series,
                `${formatCount(count.before)} to ${formatCount(count.after)}`,
              ])}
            />
          ) : null}
          <Facts
            title="Settings"
            rows={Object.entries(entry.parameters).map(([key, value]) => [key, written(value)])}
          />
          <Facts
            title="What it found"
            rows={Object.entries(entry.changes).map(([key, value]) => [key, written(value)])}
          />
          <Text variant="small" soft>
            Version {entry.version} of this step.
          </Text>
        </View>
      ) : null}
    </View>
  );
}

function Facts({ title, rows }: { title: string; rows: (readonly [string, string])[] }) {
  if (rows.length === 0) return null;
  return (
    <View>
      <Text variant="label" soft>
        {title}
      </Text>
      {rows.map(([label, value]) => (
        <FactRow key={label} label={spaced(label)}>
          <Text variant="figure" size={13} align="right" style={{ flexShrink: 1 }}>
            <UnitText>{value}</UnitText>
          </Text>
        </FactRow>
      ))}
    </View>
  );
}

/** "softMissingPercent" → "soft missing percent"; keys with blanks stay. */
export function spaced(key: string): string {
  return key.includes(' ')
    ? key
    : key
        .replace(/([a-z0-9])([A-Z])/g, '$1 $2')
        .replace(/[._]/g, ' ')
        .toLowerCase();
}

function written(value: string | number | boolean | null): string {
  if (value === null) return 'none';
  if (typeof value === 'boolean') return value ? 'yes' : 'no';
  if (typeof value === 'string') return value;
  if (Number.isInteger(value)) return formatNumber(value, 0);
  const size = Math.abs(value);
  if (size !== 0 && (size < 1e-4 || size >= 1e7)) return value.toExponential(3).replace('-', '\u2212');
  return formatNumber(value, size >= 100 ? 1 : size >= 1 ? 3 : 5);
}
