import { useId, useState } from 'react';
import { Pressable, View } from 'react-native';
import { seriesLabels } from '../../processing/catalogue';
import type { SeriesKey } from '../../processing/state';
import { alreadyStopped } from '../../processing/steps/ledger';
import type { PeriodDetail } from '../../server/contract/api';
import { formatCount, formatPlural } from '../format/numbers';
import { FactRow, Icon, Text, UnitText } from '../primitives';
import { space, useTheme, useWide } from '../tokens';
import { ledgerFact } from './ledger-words';
import { stepTitles } from './period-view';

type Entry = PeriodDetail['ledger'][number];

/** What each step did to this period, in order; a row opens to its settings, counts and changes. */
export function StepLedger({ period }: { period: Pick<PeriodDetail, 'ledger' | 'reasons'> }) {
  const isSkipped = (entry: Entry) => entry.summary === alreadyStopped;
  const skipped = period.ledger.filter(isSkipped).length;
  return (
    <View>
      <View role="list" aria-label="Steps">
        {period.ledger.map((entry, index) =>
          isSkipped(entry) ? null : (
            <StepRow
              key={`${entry.step}-${index}`}
              entry={entry}
              reasons={period.reasons}
              number={index + 1}
            />
          ),
        )}
      </View>
      {skipped > 0 ? (
        <Text soft style={{ paddingTop: space.m }}>
          {formatPlural(skipped, 'other step')} had nothing to do: the period was stopped before.
        </Text>
      ) : null}
    </View>
  );
}

function StepRow({
  entry,
  reasons,
  number,
}: {
  entry: Entry;
  reasons: PeriodDetail['reasons'];
  number: number;
}) {
  const { colour } = useTheme();
  const wide = useWide();
  const [isOpen, setOpen] = useState(false);
  const panelId = `step-${useId()}`;
  const settings = Object.entries(entry.parameters).map(([key, value]) => ledgerFact(key, value, reasons));
  const found = Object.entries(entry.changes).map(([key, value]) => ledgerFact(key, value, reasons));
  const isEmpty = settings.length === 0 && found.length === 0 && Object.keys(entry.counts ?? {}).length === 0;
  const words = (
    <>
      <Text variant="figure" soft size={13} style={{ width: 22, paddingTop: 1 }} align="right">
        {number}
      </Text>
      <View style={{ flex: 1, flexDirection: wide ? 'row' : 'column', columnGap: space.l, rowGap: 2 }}>
        <Text variant="label" size={14} style={{ width: wide ? 230 : undefined, paddingTop: 1 }}>
          {stepTitles[entry.step] ?? entry.step}
        </Text>
        <Text size={14} soft={isEmpty} style={{ flex: wide ? 1 : undefined }}>
          <UnitText>{entry.summary}</UnitText>
        </Text>
      </View>
    </>
  );
  const rowStyle = {
    flexDirection: 'row' as const,
    gap: space.m,
    paddingVertical: 10,
    minHeight: wide ? 42 : 48,
    alignItems: 'flex-start' as const,
  };
  return (
    <View role="listitem" style={{ borderBottomWidth: 1, borderBottomColor: colour.hair }}>
      {isEmpty ? (
        <View style={[rowStyle, { paddingRight: 28 }]}>{words}</View>
      ) : (
        <Pressable
          role="button"
          aria-expanded={isOpen}
          aria-controls={panelId}
          onPress={() => setOpen((open) => !open)}
          style={rowStyle}
        >
          {words}
          <Icon name={isOpen ? 'up' : 'down'} size={16} />
        </Pressable>
      )}
      {isOpen ? (
        <View
          nativeID={panelId}
          style={{
            paddingLeft: 34,
            paddingBottom: space.l,
            columnGap: space.xxl,
            rowGap: space.l,
            flexDirection: wide ? 'row' : 'column',
            flexWrap: wide ? 'wrap' : 'nowrap',
          }}
        >
          <View style={{ gap: space.l }}>
            <Counts counts={entry.counts ?? {}} />
            <Facts title="Settings" rows={settings} />
          </View>
          <Facts title="What it found" rows={found} />
          <Text variant="small" soft style={{ width: '100%' }}>
            Version {entry.version} of this step.
          </Text>
        </View>
      ) : null}
    </View>
  );
}

/** Valid samples in and out; one line where nothing was taken. */
function Counts({ counts }: { counts: NonNullable<Entry['counts']> }) {
  const rows = Object.entries(counts);
  if (rows.length === 0) return null;
  const [first] = rows;
  const isUntouched = rows.every(
    ([, count]) => count.before === count.after && count.after === first?.[1].after,
  );
  return (
    <Facts
      title="Valid samples"
      rows={
        isUntouched
          ? [{ label: 'Each series', value: `${formatCount(first?.[1].after)}, none taken` }]
          : rows.map(([series, { before, after }]) => ({
              label: capitalised(seriesLabels[series as SeriesKey]?.label ?? series),
              value:
                before === after ? formatCount(after) : `${formatCount(after)} of ${formatCount(before)}`,
            }))
      }
    />
  );
}

function Facts({ title, rows }: { title: string; rows: { label: string; value: string }[] }) {
  const wide = useWide();
  if (rows.length === 0) return null;
  return (
    <View style={{ width: wide ? 400 : undefined }}>
      <Text variant="label" soft>
        {title}
      </Text>
      {rows.map(({ label, value }) => (
        <FactRow key={label} label={label}>
          <Text
            variant={/\d/.test(value) && value.length < 28 ? 'figure' : 'body'}
            size={13}
            align="right"
            style={{ flexShrink: 1 }}
          >
            <UnitText>{value}</UnitText>
          </Text>
        </FactRow>
      ))}
    </View>
  );
}

const capitalised = (text: string) => text.charAt(0).toUpperCase() + text.slice(1);
