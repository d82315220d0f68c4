import { useState } from 'react';
import { View } from 'react-native';
import type { ReactNode } from 'react';
import { channelUnits, statusChannels } from '../../processing/schemas/layout';
import type { ChannelKey, Layout, TimeSource } from '../../processing/schemas/layout';
import type { LayoutProblem } from '../../processing/records/guess-layout';
import type { Preview } from '../../processing/records/preview';
import { formatOffset } from '../format/times';
import { formatNumber } from '../format/numbers';
import {
  Button,
  ChoiceInput,
  NumberInput,
  Section,
  SegmentChoice,
  Text,
  TextInput,
  UnitText,
} from '../primitives';
import { space, useTheme, useWide } from '../tokens';
import { FindingMark } from './FindingMark';
import { changeColumn, changeColumnDetail, changeField } from './layout-draft';
import type { LayoutDraft } from './layout-draft';
import {
  clockWords,
  delimiterWords,
  dialectSentence,
  quantityRows,
  timeKindWords,
  timeSentence,
} from './layout-words';
import type { QuantityRow } from './layout-words';

export interface LayoutEditorProps {
  draft: LayoutDraft;
  onChange: (draft: LayoutDraft) => void;
  preview: Preview;
  problems: readonly LayoutProblem[];
  /** Station standard time minus UTC [min], offered as clock. */
  stationOffsetMinutes: number;
}

/** How the file is read: a list by quantity, then clock, dates and the writing of the rows; everything can be changed in place. */
export function LayoutEditor(props: LayoutEditorProps) {
  const { draft, onChange, preview, problems } = props;
  const { layout, guess } = draft;
  const [openChannel, setOpenChannel] = useState<ChannelKey | null>(null);
  const [showsUnused, setShowsUnused] = useState(false);
  const [isTimeOpen, setIsTimeOpen] = useState(false);
  const [isWritingOpen, setIsWritingOpen] = useState(false);
  const rows = quantityRows(layout, guess, problems);
  const shown = rows.filter(
    (row) => row.column !== null || row.isRequired || showsUnused || row.channel === openChannel,
  );
  const doubtful = (fields: readonly LayoutProblem['field'][]): boolean =>
    problems.some((problem) => fields.includes(problem.field));

  return (
    <View style={{ gap: space.xl }}>
      <Section
        title="Quantities"
        level={3}
        subtitle="Which column holds what, in which unit, and how that is known."
      >
        <View role="list" aria-label="Quantities and their columns">
          {shown.map((row) => (
            <QuantityLine
              key={row.channel}
              row={row}
              isOpen={openChannel === row.channel}
              onToggle={() => setOpenChannel(openChannel === row.channel ? null : row.channel)}
              {...props}
            />
          ))}
        </View>
        {shown.length < rows.length ? (
          <Button
            kind="quiet"
            label={
              rows.length - shown.length === 1
                ? 'Show the quantity that is not recorded'
                : `Show ${rows.length - shown.length} quantities that are not recorded`
            }
            onPress={() => setShowsUnused(true)}
          />
        ) : null}
      </Section>

      <Section title="Time" level={3}>
        <Statement
          isDoubtful={doubtful(['time', 'clock', 'stampMarks', 'sampleRateHz'])}
          isOpen={isTimeOpen}
          onToggle={() => setIsTimeOpen(!isTimeOpen)}
          what="time"
        >
          {`${timeSentence(layout, preview.names)}. The clock is ${clockWords(layout.clock)}; a stamp marks the ${layout.stampMarks} of its scan.`}
          {guess ? ` Clock: ${guess.knowledge.clock.how}. Rate: ${guess.knowledge.sampleRateHz.how}.` : ''}
        </Statement>
        {isTimeOpen ? <TimeFields {...props} /> : null}
      </Section>

      <Section title="Writing" level={3}>
        <Statement
          isDoubtful={doubtful(['delimiter', 'decimal', 'headerRows', 'missingTokens'])}
          isOpen={isWritingOpen}
          onToggle={() => setIsWritingOpen(!isWritingOpen)}
          what="writing"
        >
          {`${dialectSentence(layout)} No value: empty${layout.missingTokens.length > 0 ? `, ${layout.missingTokens.join(', ')}` : ''}.`}
        </Statement>
        {isWritingOpen ? <WritingFields draft={draft} onChange={onChange} /> : null}
      </Section>
    </View>
  );
}

function Statement(props: {
  children: ReactNode;
  isDoubtful: boolean;
  isOpen: boolean;
  onToggle: () => void;
  what: string;
}) {
  return (
    <View style={{ flexDirection: 'row', gap: space.s, alignItems: 'flex-start' }}>
      <FindingMark mark={props.isDoubtful ? 1 : 0} label={props.isDoubtful ? 'please look' : 'known'} />
      <View style={{ flex: 1, minWidth: 0 }}>
        <Text>{props.children}</Text>
      </View>
      <Button
        kind="quiet"
        label={props.isOpen ? 'Done' : 'Change'}
        ariaLabel={props.isOpen ? `Done with ${props.what}` : `Change ${props.what}`}
        ariaExpanded={props.isOpen}
        onPress={props.onToggle}
      />
    </View>
  );
}

/** The faces have no arrow: drawn, and spoken as "from column". */
function FromArrow() {
  const { colour } = useTheme();
  return (
    <svg
      width={28}
      height={10}
      viewBox="0 0 28 10"
      role="img"
      aria-label=" from column "
      style={{ margin: '0 4px' }}
    >
      <path d="M25 5H5M9 1.5 4.5 5 9 8.5" fill="none" stroke={colour.inkSoft} strokeWidth={1.6} />
    </svg>
  );
}

const markWords = ['known', 'please look', 'missing'] as const;

function QuantityLine(
  props: LayoutEditorProps & { row: QuantityRow; isOpen: boolean; onToggle: () => void },
) {
  const { row, preview, draft, onChange, isOpen } = props;
  const { colour } = useTheme();
  const wide = useWide();
  const { column, channel } = row;
  const summary = preview.columns.find((candidate) => candidate.channel === channel);
  const name =
    column === null ? null : (preview.names?.[column.index] ?? column.name ?? `column ${column.index + 1}`);
  const range =
    summary && summary.count > 0 && !row.how.includes('range ')
      ? `${formatNumber(summary.min, 2)} to ${formatNumber(summary.max, 2)} in the first rows`
      : null;
  return (
    <View
      role="listitem"
      style={{
        borderBottomWidth: 1,
        borderBottomColor: colour.hair,
        paddingVertical: wide ? 6 : 8,
        gap: space.s,
      }}
    >
      <View style={{ flexDirection: 'row', gap: space.s, alignItems: 'flex-start' }}>
        <FindingMark mark={row.mark} label={row.mark === null ? 'not recorded' : markWords[row.mark]} />
        <View style={{ flex: 1, minWidth: 0, gap: 2 }}>
          <Text>
            <Text strong>
              <UnitText>{row.label}</UnitText>
            </Text>
            {column === null ? (
              <Text soft>{row.isRequired ? ' has no column yet' : ' is not recorded'}</Text>
            ) : (
              <>
                <FromArrow />
                <Text variant="figure" size={14}>
                  {name}
                </Text>
                {column.unit === 'code' ? ', codes' : ', '}
                {column.unit === 'code' ? null : <UnitText>{column.unit}</UnitText>}
              </>
            )}
          </Text>
          <Text variant="small" soft>
            <UnitText>
              {[row.how, column?.unit === 'code' ? goodWords(column.good) : range]
                .filter(Boolean)
                .join(' · ')}
            </UnitText>
          </Text>
        </View>
        <Button
          kind="quiet"
          label={isOpen ? 'Done' : 'Change'}
          ariaLabel={isOpen ? `Done with ${row.label}` : `Change ${row.label}`}
          ariaExpanded={isOpen}
          onPress={props.onToggle}
        />
      </View>
      {isOpen ? (
        <View
          role="group"
          aria-label={row.label}
          style={{
            paddingLeft: wide ? 26 : 0,
            flexDirection: wide ? 'row' : 'column',
            gap: space.l,
            flexWrap: 'wrap',
            alignItems: 'flex-start',
          }}
        >
          <View style={{ width: wide ? 240 : '100%' }}>
            <ChoiceInput
              label="Column"
              value={column === null ? 'none' : String(column.index)}
              options={[{ value: 'none', label: 'not recorded' }, ...columnChoices(preview)]}
              onChange={(value) =>
                onChange(
                  changeColumn(
                    draft,
                    channel,
                    value === 'none' ? null : Number(value),
                    value === 'none' ? null : (preview.names?.[Number(value)] ?? null),
                  ),
                )
              }
            />
          </View>
          {column !== null && column.unit !== 'code' ? (
            <View style={{ width: wide ? 190 : '100%' }}>
              <ChoiceInput
                label="Unit"
                value={column.unit}
                options={channelUnits[channel].map((unit) => ({ value: unit, label: unit }))}
                onChange={(unit) => onChange(changeColumnDetail(draft, channel, { unit }))}
              />
            </View>
          ) : null}
          {column !== null && statusChannels.includes(channel) ? (
            <GoodCodes
              good={column.good ?? { codes: [], mask: null, equals: null }}
              onChange={(good) => onChange(changeColumnDetail(draft, channel, { good }))}
            />
          ) : null}
          {column !== null && channel === 'signalStrength' ? (
            <SegmentChoice
              label="A higher number means"
              value={column.higherIsBetter === false ? 'dirtier' : 'cleaner'}
              options={[
                { value: 'cleaner', label: 'cleaner windows' },
                { value: 'dirtier', label: 'dirtier windows' },
              ]}
              onChange={(value) =>
                onChange(changeColumnDetail(draft, channel, { higherIsBetter: value === 'cleaner' }))
              }
            />
          ) : null}
        </View>
      ) : null}
    </View>
  );
}

type Good = NonNullable<Layout['columns'][number]['good']>;

function goodWords(good: Good | undefined): string {
  if (!good || (good.codes.length === 0 && good.mask === null)) return 'no code means good yet';
  const parts = [];
  if (good.codes.length > 0) parts.push(`good is ${good.codes.join(', ')}`);
  if (good.mask !== null) parts.push(`good when code and ${good.mask} give ${good.equals ?? 0}`);
  return parts.join(', or ');
}

function GoodCodes({ good, onChange }: { good: Good; onChange: (good: Good) => void }) {
  const wide = useWide();
  const [text, setText] = useState(good.codes.join(', '));
  const parsed = text.split(/[,;\s]+/).filter((piece) => piece !== '');
  const isRight = parsed.every((piece) => /^-?\d+$/.test(piece));
  return (
    <View
      style={{
        flexDirection: wide ? 'row' : 'column',
        gap: space.l,
        flexWrap: 'wrap',
        width: wide ? undefined : '100%',
      }}
    >
      <View style={{ width: wide ? 200 : '100%' }}>
        <TextInput
          label="Codes that mean good"
          value={text}
          figure
          error={isRight ? undefined : 'Whole numbers, parted by commas.'}
          onChange={(next) => {
            setText(next);
            const pieces = next.split(/[,;\s]+/).filter((piece) => piece !== '');
            if (pieces.every((piece) => /^-?\d+$/.test(piece)))
              onChange({ ...good, codes: pieces.map(Number) });
          }}
          help="Any other code makes the sample missing."
        />
      </View>
      <View style={{ width: wide ? 190 : '100%' }}>
        <NumberInput
          label="Or: bits looked at"
          optional
          value={good.mask}
          onChange={(mask) => onChange({ ...good, mask, equals: mask === null ? null : (good.equals ?? 0) })}
        />
      </View>
      {good.mask !== null ? (
        <View style={{ width: wide ? 190 : '100%' }}>
          <NumberInput
            label="must give"
            value={good.equals}
            onChange={(equals) => onChange({ ...good, equals })}
          />
        </View>
      ) : null}
    </View>
  );
}

function columnChoices(preview: Preview): { value: string; label: string }[] {
  const width = Math.max(0, ...preview.rows.slice(0, 50).map((row) => row.fields.length));
  return Array.from({ length: width }, (_, index) => ({
    value: String(index),
    label: `${index + 1}: ${preview.names?.[index] || 'no name'} (${preview.rows[0]?.fields[index] ?? ''})`,
  }));
}

const offsets = Array.from({ length: 53 }, (_, index) => -720 + index * 30);

function Cell({ children, width = 240 }: { children: ReactNode; width?: number }) {
  const wide = useWide();
  return <View style={{ width: wide ? width : '100%' }}>{children}</View>;
}

function FieldGrid({ children }: { children: ReactNode }) {
  const wide = useWide();
  return (
    <View
      style={{
        flexDirection: wide ? 'row' : 'column',
        flexWrap: 'wrap',
        gap: space.l,
        alignItems: 'flex-start',
      }}
    >
      {children}
    </View>
  );
}

/** A fresh source of another kind, keeping columns and patterns where they mean the same. */
function timeOfKind(kind: TimeSource['kind'], before: TimeSource): TimeSource {
  const column = 'column' in before ? before.column : 'timeColumn' in before ? (before.timeColumn ?? 0) : 0;
  const source =
    before.kind === 'time-of-day'
      ? before.date
      : before.kind === 'start-and-rate'
        ? before.start
        : { from: 'file-name' as const, pattern: 'YYYYMMDD_hhmm' };
  switch (kind) {
    case 'stamp':
      return { kind, column, format: 'iso' };
    case 'date-and-time':
      return { kind, dateColumn: column, dateFormat: 'iso', timeColumn: column + 1 };
    case 'day-of-year':
      return {
        kind,
        year: { column },
        dayColumn: column + 1,
        timeColumn: column + 2,
        timeFormat: 'clock',
        secondsColumn: null,
      };
    case 'epoch':
      return { kind, column, unit: 's' };
    case 'time-of-day':
      return { kind, column, date: source };
    case 'start-and-rate':
      return { kind, start: source };
  }
}

function TimeFields({ draft, onChange, preview, stationOffsetMinutes }: LayoutEditorProps) {
  const { layout } = draft;
  const { time } = layout;
  const choices = columnChoices(preview);
  const setTime = (next: TimeSource): void => onChange(changeField(draft, 'time', next));
  const columnField = (label: string, value: number, set: (column: number) => void): ReactNode => (
    <Cell>
      <ChoiceInput
        label={label}
        value={String(value)}
        options={choices}
        onChange={(next) => set(Number(next))}
      />
    </Cell>
  );
  const formatField = (label: string, value: string, set: (format: string) => void): ReactNode => (
    <Cell>
      <TextInput
        label={label}
        value={value}
        figure
        onChange={set}
        help="iso, or parts: YYYY YY MM DD DDD hh mm ss"
      />
    </Cell>
  );
  const sourceFields = (
    label: string,
    source: { from: 'file-name' | 'header'; pattern: string },
    set: (source: { from: 'file-name' | 'header'; pattern: string }) => void,
  ): ReactNode => (
    <>
      <Cell>
        <SegmentChoice
          label={`${label} stands in`}
          value={source.from}
          options={[
            { value: 'file-name', label: 'file name' },
            { value: 'header', label: 'header' },
          ]}
          onChange={(from) => set({ ...source, from })}
        />
      </Cell>
      <Cell>
        <TextInput
          label={`${label} is written as`}
          value={source.pattern}
          figure
          onChange={(pattern) => set({ ...source, pattern })}
          help="For example YYYYMMDD_hhmm; * stands for anything."
        />
      </Cell>
    </>
  );
  return (
    <FieldGrid>
      <Cell width={300}>
        <ChoiceInput
          label="Where the time comes from"
          value={time.kind}
          options={(Object.keys(timeKindWords) as TimeSource['kind'][]).map((kind) => ({
            value: kind,
            label: timeKindWords[kind],
          }))}
          onChange={(kind) => setTime(timeOfKind(kind, time))}
        />
      </Cell>
      {time.kind === 'stamp' ? (
        <>
          {columnField('Column', time.column, (column) => setTime({ ...time, column }))}
          {formatField('Written as', time.format, (format) => setTime({ ...time, format }))}
        </>
      ) : null}
      {time.kind === 'date-and-time' ? (
        <>
          {columnField('Date column', time.dateColumn, (dateColumn) => setTime({ ...time, dateColumn }))}
          {formatField('Date is written as', time.dateFormat, (dateFormat) =>
            setTime({ ...time, dateFormat }),
          )}
          {columnField('Time column', time.timeColumn, (timeColumn) => setTime({ ...time, timeColumn }))}
        </>
      ) : null}
      {time.kind === 'epoch' ? (
        <>
          {columnField('Column', time.column, (column) => setTime({ ...time, column }))}
          <Cell>
            <SegmentChoice
              label="Counted in"
              value={time.unit}
              options={[
                { value: 's', label: 's' },
                { value: 'ms', label: 'ms' },
                { value: 'us', label: 'µs' },
              ]}
              onChange={(unit) => setTime({ ...time, unit })}
            />
          </Cell>
        </>
      ) : null}
      {time.kind === 'time-of-day' ? (
        <>
          {columnField('Time column', time.column, (column) => setTime({ ...time, column }))}
          {sourceFields('The date', time.date, (date) => setTime({ ...time, date }))}
        </>
      ) : null}
      {time.kind === 'start-and-rate'
        ? sourceFields('The start', time.start, (start) => setTime({ ...time, start }))
        : null}
      {time.kind === 'day-of-year' ? (
        <>
          <Cell>
            <ChoiceInput
              label="Year"
              value={'column' in time.year ? String(time.year.column) : time.year.from}
              options={[
                { value: 'file-name', label: 'from the file’s name' },
                { value: 'header', label: 'from the header' },
                ...choices,
              ]}
              onChange={(value) =>
                setTime({
                  ...time,
                  year:
                    value === 'file-name' || value === 'header'
                      ? { from: value, pattern: 'YYYY' }
                      : { column: Number(value) },
                })
              }
            />
          </Cell>
          {columnField('Day of the year', time.dayColumn, (dayColumn) => setTime({ ...time, dayColumn }))}
          <Cell>
            <ChoiceInput
              label="Time is written as"
              value={time.timeFormat}
              options={[
                { value: 'clock', label: 'hh:mm:ss' },
                { value: 'hhmm', label: 'hhmm, seconds beside it' },
                { value: 'fraction-of-day', label: 'fraction of the day' },
                { value: 'seconds-of-day', label: 'seconds of the day' },
              ]}
              onChange={(timeFormat) => setTime({ ...time, timeFormat })}
            />
          </Cell>
          <Cell>
            <ChoiceInput
              label="Time column"
              value={time.timeColumn === null ? 'none' : String(time.timeColumn)}
              options={[{ value: 'none', label: 'in the day itself' }, ...choices]}
              onChange={(value) => setTime({ ...time, timeColumn: value === 'none' ? null : Number(value) })}
            />
          </Cell>
          <Cell>
            <ChoiceInput
              label="Seconds column"
              value={time.secondsColumn === null ? 'none' : String(time.secondsColumn)}
              options={[{ value: 'none', label: 'none' }, ...choices]}
              onChange={(value) =>
                setTime({ ...time, secondsColumn: value === 'none' ? null : Number(value) })
              }
            />
          </Cell>
        </>
      ) : null}
      <Cell>
        <ChoiceInput
          label="Clock"
          value={layout.clock.kind === 'utc' ? 'utc' : String(layout.clock.offsetMinutes)}
          options={[
            { value: 'utc', label: 'UTC' },
            ...(stationOffsetMinutes === 0
              ? []
              : [
                  {
                    value: String(stationOffsetMinutes),
                    label: `${formatOffset(stationOffsetMinutes)}, station standard time`,
                  },
                ]),
            ...offsets
              .filter((offset) => offset !== 0 && offset !== stationOffsetMinutes)
              .map((offset) => ({ value: String(offset), label: formatOffset(offset) })),
          ]}
          onChange={(value) =>
            onChange(
              changeField(
                draft,
                'clock',
                value === 'utc' ? { kind: 'utc' } : { kind: 'fixed', offsetMinutes: Number(value) },
              ),
            )
          }
          help="The clock that wrote the stamps, without daylight saving. An hour’s error moves every flux by an hour."
        />
      </Cell>
      <Cell>
        <SegmentChoice
          label="A stamp marks"
          value={layout.stampMarks}
          options={[
            { value: 'start', label: 'start of its scan' },
            { value: 'end', label: 'end' },
          ]}
          onChange={(value) => onChange(changeField(draft, 'stampMarks', value))}
          help="At 20 Hz it moves everything by 0.05 s."
        />
      </Cell>
      <Cell width={160}>
        <NumberInput
          label="Sampling rate"
          unit="Hz"
          value={layout.sampleRateHz}
          onChange={(rate) => onChange(changeField(draft, 'sampleRateHz', rate ?? Number.NaN))}
        />
      </Cell>
    </FieldGrid>
  );
}

function WritingFields({ draft, onChange }: Pick<LayoutEditorProps, 'draft' | 'onChange'>) {
  const { layout } = draft;
  const [tokens, setTokens] = useState(layout.missingTokens.join(' '));
  const line = (value: number | null): number | null => (value === null ? null : value + 1);
  return (
    <FieldGrid>
      <Cell width={180}>
        <ChoiceInput
          label="Values are parted by"
          value={layout.delimiter}
          options={(Object.keys(delimiterWords) as Layout['delimiter'][]).map((key) => ({
            value: key,
            label: delimiterWords[key],
          }))}
          onChange={(value) => onChange(changeField(draft, 'delimiter', value))}
        />
      </Cell>
      <Cell width={180}>
        <SegmentChoice
          label="Decimal mark"
          value={layout.decimal}
          options={[
            { value: '.', label: 'point' },
            { value: ',', label: 'comma' },
          ]}
          onChange={(value) => onChange(changeField(draft, 'decimal', value))}
        />
      </Cell>
      <Cell width={180}>
        <NumberInput
          label="Lines before the rows"
          value={layout.headerRows}
          onChange={(value) => onChange(changeField(draft, 'headerRows', Math.round(value ?? 0)))}
        />
      </Cell>
      <Cell width={180}>
        <NumberInput
          label="Line with the names"
          optional
          value={line(layout.nameRow)}
          onChange={(value) =>
            onChange(changeField(draft, 'nameRow', value === null ? null : Math.round(value) - 1))
          }
        />
      </Cell>
      <Cell width={180}>
        <NumberInput
          label="Line with the units"
          optional
          value={line(layout.unitRow)}
          onChange={(value) =>
            onChange(changeField(draft, 'unitRow', value === null ? null : Math.round(value) - 1))
          }
        />
      </Cell>
      <Cell width={260}>
        <TextInput
          label="Written where there is no value"
          value={tokens}
          figure
          onChange={(next) => {
            setTokens(next);
            onChange(
              changeField(
                draft,
                'missingTokens',
                next
                  .split(/\s+/)
                  .filter((token) => token !== '')
                  .slice(0, 24),
              ),
            );
          }}
          help="Parted by blanks. An empty place always means no value."
        />
      </Cell>
    </FieldGrid>
  );
}
