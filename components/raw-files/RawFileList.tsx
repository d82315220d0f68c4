import { useState } from 'react';
import { View } from 'react-native';
import type { LayoutRevision, RawFile, Run } from '../../server/contract/api';
import { rawFileContentUrl, useChangeRawFile } from '../data/use-raw-files';
import { formatBytes, formatCount, formatPlural } from '../format/numbers';
import type { StationClock } from '../format/useClock';
import {
  Button,
  ChoiceInput,
  ConfirmSheet,
  DataTable,
  EmptyState,
  ErrorNotice,
  HashText,
  Section,
  SegmentChoice,
  Sheet,
  Text,
} from '../primitives';
import type { GradeValue } from '../tokens';
import { face, space, useTheme, useWide, webStyle } from '../tokens';
import { runsTouching } from './coverage';
import { FindingMark } from './FindingMark';

export interface RawFileListProps {
  group: string;
  station: string;
  files: readonly RawFile[];
  runs: readonly Run[];
  layouts: readonly LayoutRevision[];
  clock: StationClock;
  readingShares: Readonly<Record<string, number>>;
  mayWithdraw: boolean;
  mayDownload: boolean;
}

const pageSize = 50;

export interface FileState {
  mark: GradeValue;
  words: string;
}

/** What a raw file is, in a mark and words. */
export function fileState(file: RawFile, share: number | undefined): FileState {
  if (file.state === 'withdrawn') return { mark: null, words: 'withdrawn, not used' };
  if (file.supersededBy !== null) return { mark: null, words: 'superseded by a longer file' };
  if (file.state === 'unreadable') return { mark: 2, words: 'kept, but could not be read' };
  if (file.state === 'stored') return { mark: null, words: 'kept, waits to be read' };
  if (file.state === 'reading')
    return {
      mark: null,
      words: share === undefined ? 'being read' : `being read, ${Math.round(share * 100)} %`,
    };
  const bad = file.badRows ?? 0;
  if (file.warnings.length > 0 || bad > 0) {
    return { mark: 1, words: `read, ${formatPlural(file.warnings.length + (bad > 0 ? 1 : 0), 'warning')}` };
  }
  return { mark: 0, words: 'read' };
}

/** Both ends, the day once where it is the same. */
function scanSpan(clock: StationClock, fromMs: number, toMs: number): string {
  const end = clock.date(fromMs) === clock.date(toMs) ? clock.clock(toMs, true) : clock.moment(toMs, true);
  return `${clock.moment(fromMs, true)} to ${end}`;
}

type Shown = 'all' | 'look' | 'unused';

/** All raw files of a station with what is known of each. */
export function RawFileList(props: RawFileListProps) {
  const { files, clock, readingShares } = props;
  const [shown, setShown] = useState<Shown>('all');
  const [pages, setPages] = useState(1);
  const [opened, setOpened] = useState<string | null>(null);
  const look = files.filter((file) => [1, 2].includes(fileState(file, undefined).mark ?? -1));
  const unused = files.filter((file) => file.state === 'withdrawn' || file.supersededBy !== null);
  const chosen = shown === 'look' ? look : shown === 'unused' ? unused : files;
  // newest record first; what has no time yet before it
  const sorted = [...chosen].sort(
    (a, b) => (b.firstScanMs ?? Number.MAX_SAFE_INTEGER) - (a.firstScanMs ?? Number.MAX_SAFE_INTEGER),
  );
  const page = sorted.slice(0, pages * pageSize);
  const rows = files.reduce(
    (sum, file) => sum + (file.state === 'read' && file.supersededBy === null ? (file.rows ?? 0) : 0),
    0,
  );
  const openedFile = files.find((file) => file.id === opened) ?? null;

  const spanWords = (file: RawFile): string =>
    file.firstScanMs === null || file.lastScanMs === null
      ? ''
      : scanSpan(clock, file.firstScanMs, file.lastScanMs);
  const open = (file: RawFile) => (
    <Button
      kind="quiet"
      label="Details"
      ariaLabel={`Details of ${file.fileName}`}
      onPress={() => setOpened(file.id)}
    />
  );

  if (files.length === 0) {
    return (
      <Section title="Raw files here">
        <EmptyState title="No raw files yet.">
          Choose files above. They are kept byte for byte; a copy of one already here is recognised and left
          alone.
        </EmptyState>
      </Section>
    );
  }
  return (
    <Section
      title="Raw files here"
      subtitle={`${formatPlural(files.length, 'file')}, ${formatCount(rows)} rows in use, ${formatBytes(files.reduce((sum, file) => sum + file.bytes, 0))}. Times: ${clock.label}.`}
    >
      {look.length > 0 || unused.length > 0 ? (
        <SegmentChoice
          label="Show"
          hideLabel
          value={shown}
          options={[
            { value: 'all', label: `all ${formatCount(files.length)}` },
            { value: 'look', label: `${formatCount(look.length)} to look at` },
            { value: 'unused', label: `${formatCount(unused.length)} not used` },
          ]}
          onChange={(value) => {
            setShown(value);
            setPages(1);
          }}
        />
      ) : null}
      <DataTable
        caption="Raw files"
        rows={page}
        rowKey={(file) => file.id}
        columns={[
          { key: 'name', head: 'File', cell: (file) => <FileName file={file} /> },
          {
            key: 'state',
            head: 'State',
            cell: (file) => <State file={file} share={readingShares[file.id]} />,
          },
          {
            key: 'span',
            head: 'First to last scan',
            cell: (file) => <Text variant="small">{spanWords(file)}</Text>,
          },
          { key: 'rows', head: 'Rows', align: 'right', cell: (file) => formatCount(file.rows) },
          {
            key: 'bytes',
            head: 'Size',
            align: 'right',
            cell: (file) => formatBytes(file.bytes),
            wideOnly: true,
          },
          { key: 'open', head: 'Open', cell: open },
        ]}
        phoneRow={(file) => (
          <View style={{ gap: 2 }}>
            <View
              style={{
                flexDirection: 'row',
                justifyContent: 'space-between',
                gap: space.m,
                alignItems: 'center',
              }}
            >
              <FileName file={file} />
              {open(file)}
            </View>
            <State file={file} share={readingShares[file.id]} />
            <Text variant="small" soft>
              {[
                spanWords(file),
                file.rows === null ? '' : `${formatCount(file.rows)} rows`,
                formatBytes(file.bytes),
              ]
                .filter(Boolean)
                .join(' · ')}
            </Text>
          </View>
        )}
      />
      {page.length < sorted.length ? (
        <Button
          label={`Show ${formatCount(Math.min(pageSize, sorted.length - page.length))} more of ${formatCount(sorted.length)}`}
          onPress={() => setPages(pages + 1)}
        />
      ) : null}
      {openedFile ? (
        <FileSheet key={openedFile.id} {...props} file={openedFile} onClose={() => setOpened(null)} />
      ) : null}
    </Section>
  );
}

function FileName({ file }: { file: RawFile }) {
  const isUnused = file.state === 'withdrawn' || file.supersededBy !== null;
  return (
    <View style={{ flexShrink: 1, minWidth: 0 }}>
      <Text
        variant="figure"
        size={14}
        soft={isUnused}
        struck={file.state === 'withdrawn'}
        style={webStyle({ whiteSpace: 'normal', overflowWrap: 'anywhere' })}
      >
        {file.fileName}
      </Text>
    </View>
  );
}

function State({ file, share }: { file: RawFile; share: number | undefined }) {
  const { mark, words } = fileState(file, share);
  return (
    <View style={{ flexDirection: 'row', alignItems: 'flex-start' }}>
      <FindingMark mark={mark} label="" size={12} />
      <Text variant="small">{words}</Text>
    </View>
  );
}

function FileSheet(props: RawFileListProps & { file: RawFile; onClose: () => void }) {
  const { file, files, runs, layouts, clock, group, station, mayWithdraw, mayDownload } = props;
  const { colour } = useTheme();
  const wide = useWide();
  const change = useChangeRawFile(group, station);
  const [asks, setAsks] = useState(false);
  const [layoutId, setLayoutId] = useState(file.layoutId);
  const isWithdrawn = file.state === 'withdrawn';
  const touched = runsTouching(runs, file);
  const successor = files.find((candidate) => candidate.id === file.supersededBy);
  const consequence =
    touched.length === 0
      ? 'No finished run used its time.'
      : `${touched.length === 1 ? 'Run' : 'Runs'} ${touched.map((run) => run.number).join(', ')} ${touched.length === 1 ? 'uses' : 'use'} its time and will be marked stale. ${touched.length === 1 ? 'It stays' : 'They stay'} readable; recompute to leave the file out.`;
  const isBusy = change.isPending;

  if (asks) {
    return (
      <ConfirmSheet
        open
        title={`Withdraw ${file.fileName}?`}
        confirmLabel="Withdraw it"
        busy={isBusy}
        onClose={() => setAsks(false)}
        onConfirm={() => change.mutate({ id: file.id, change: 'withdraw' }, { onSuccess: props.onClose })}
      >
        <Text>
          The bytes stay here and the file can be brought back. From now on nothing new is computed from it.
        </Text>
        <Text strong>{consequence}</Text>
        {change.error ? <ErrorNotice error={change.error} safe="The file is as it was." /> : null}
      </ConfirmSheet>
    );
  }
  return (
    <Sheet
      open
      title={file.fileName}
      subtitle={`Brought in by ${file.author.name}, ${clock.moment(file.createdAtMs)} (${clock.zone})`}
      onClose={props.onClose}
      width={560}
      actions={
        <>
          {mayDownload ? (
            <a
              href={rawFileContentUrl(group, file.id)}
              download={file.fileName}
              style={{
                display: 'inline-flex',
                alignItems: 'center',
                minHeight: wide ? 40 : 48,
                padding: '0 16px',
                boxSizing: 'border-box',
                border: `1px solid ${colour.ink}`,
                borderRadius: 2,
                color: colour.ink,
                textDecoration: 'none',
                font: `600 14px/1 ${face.label}`,
              }}
            >
              Download
            </a>
          ) : null}
          {mayWithdraw && !isWithdrawn ? <Button label="Withdraw" onPress={() => setAsks(true)} /> : null}
          {mayWithdraw && isWithdrawn ? (
            <Button
              kind="primary"
              label="Bring back"
              busy={isBusy}
              onPress={() => change.mutate({ id: file.id, change: 'restore' }, { onSuccess: props.onClose })}
            />
          ) : null}
          {mayWithdraw && !isWithdrawn && file.state !== 'reading' ? (
            <Button
              label={layoutId === file.layoutId ? 'Read again' : 'Read again with this layout'}
              busy={isBusy}
              onPress={() =>
                change.mutate({ id: file.id, change: 'reread', layoutId }, { onSuccess: props.onClose })
              }
            />
          ) : null}
        </>
      }
    >
      <State file={file} share={props.readingShares[file.id]} />
      {file.problem ? <Text strong>{file.problem}</Text> : null}
      {file.warnings.map((warning) => (
        <View key={warning.code} style={{ flexDirection: 'row' }}>
          <FindingMark mark={1} label="warning" size={12} />
          <View style={{ flex: 1 }}>
            <Text>{warning.message}</Text>
          </View>
        </View>
      ))}
      {file.badRows ? (
        <Text>{`${formatPlural(file.badRows, 'row')} could not be read and ${file.badRows === 1 ? 'is' : 'are'} missing.`}</Text>
      ) : null}
      {successor ? (
        <Text>{`${successor.fileName} begins with all of this file and goes on, so that one counts.`}</Text>
      ) : null}
      <View style={{ gap: 4 }}>
        <Text variant="small" soft>
          {[
            file.rows === null ? '' : `${formatCount(file.rows)} rows`,
            formatBytes(file.bytes),
            file.firstScanMs === null || file.lastScanMs === null
              ? ''
              : `${scanSpan(clock, file.firstScanMs, file.lastScanMs)} (${clock.zone})`,
          ]
            .filter(Boolean)
            .join(' · ')}
        </Text>
        <HashText hash={file.sha256} of="raw file" length={16} />
      </View>
      {isWithdrawn ? (
        <Text>Brought back, it counts again; runs that were made without it will be marked stale.</Text>
      ) : null}
      {mayWithdraw && !isWithdrawn && layouts.length > 0 ? (
        <ChoiceInput
          label="Layout"
          value={layoutId}
          options={[
            ...(layouts.some((layout) => layout.id === file.layoutId)
              ? []
              : [{ value: file.layoutId, label: file.layoutName }]),
            ...layouts.map((layout) => ({
              value: layout.id,
              label: `${layout.layout.name}, ${layout.revision}`,
            })),
          ]}
          onChange={setLayoutId}
          help="How its rows are understood. Reading it again with another layout marks runs that used it stale."
        />
      ) : (
        <Text variant="small" soft>{`Read with layout ${file.layoutName}.`}</Text>
      )}
      {mayWithdraw ? null : (
        <Text variant="small" soft>
          Withdrawing and reading again is for leads and analysts.
        </Text>
      )}
      {change.error ? <ErrorNotice error={change.error} safe="The file is as it was." /> : null}
    </Sheet>
  );
}
