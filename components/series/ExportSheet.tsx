import { useState } from 'react';
import { View } from 'react-native';
import { Icon, SegmentChoice, Sheet, Text, UnitText } from '../primitives';
import { frame, radius, space, useTheme, useWide } from '../tokens';

export interface ExportSpan {
  key: string;
  label: string;
  /** "14–17 June 2027". */
  words: string;
  fromMs: number;
  toMs: number;
}

export interface ExportSheetProps {
  open: boolean;
  onClose: () => void;
  group: string;
  runId: string;
  runNumber: number;
  /** Spans to choose from; the first is chosen at first. */
  spans: readonly ExportSpan[];
}

export function exportAddress(group: string, runId: string, format: string, span: ExportSpan): string {
  return (
    `/api/groups/${encodeURIComponent(group)}/runs/${runId}/export` +
    `?format=${format}&fromMs=${Math.round(span.fromMs)}&toMs=${Math.round(span.toMs)}`
  );
}

/** The two files a run can leave as, with what each is for. */
export function ExportSheet({ open, onClose, group, runId, runNumber, spans }: ExportSheetProps) {
  const [chosen, setChosen] = useState(spans[0]?.key ?? '');
  const span = spans.find((one) => one.key === chosen) ?? spans[0];
  if (!span) return null;
  return (
    <Sheet open={open} onClose={onClose} title="Export" subtitle={`Run ${runNumber}, ${span.words}`}>
      <View style={{ gap: space.xl }}>
        <SegmentChoice
          label="Span"
          value={span.key}
          options={spans.map(({ key, label }) => ({ value: key, label }))}
          onChange={setChosen}
        />
        <View style={{ gap: space.s, alignItems: 'flex-start' }}>
          <Text variant="part" level={3}>
            For a flux network
          </Text>
          <Text>
            <UnitText>
              Exchange names and units, local standard time, −9999 where a value is missing, downward momentum
              negative. Not filtered by u*, not gap-filled.
            </UnitText>
          </Text>
          <Download label="Save exchange CSV" href={exportAddress(group, runId, 'exchange', span)} />
        </View>
        <View style={{ gap: space.s, alignItems: 'flex-start' }}>
          <Text variant="part" level={3}>
            For your own work
          </Text>
          <Text>
            Every quantity with a row of units and the grade of each flux, times in UTC, full precision, empty
            where a value is missing.
          </Text>
          <Download label="Save plain CSV" href={exportAddress(group, runId, 'plain', span)} />
        </View>
      </View>
    </Sheet>
  );
}

/** A link that the browser saves instead of opening. */
function Download({ label, href }: { label: string; href: string }) {
  const { colour } = useTheme();
  const wide = useWide();
  return (
    <a
      href={href}
      download
      style={{
        display: 'inline-flex',
        alignItems: 'center',
        gap: 8,
        minHeight: wide ? frame.pointerTarget : frame.phoneTarget,
        padding: '0 16px',
        boxSizing: 'border-box',
        border: `1px solid ${colour.ink}`,
        borderRadius: radius,
        color: colour.ink,
        textDecoration: 'none',
      }}
    >
      <Icon name="export" size={18} />
      <Text variant="label" size={14}>
        {label}
      </Text>
    </a>
  );
}
