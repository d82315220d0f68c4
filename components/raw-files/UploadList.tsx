import { View } from 'react-native';
import { formatBytes, formatCount, formatPlural } from '../format/numbers';
import { Button, ProgressLine, Section, Text } from '../primitives';
import type { GradeValue } from '../tokens';
import { space, useTheme } from '../tokens';
import { FindingMark } from './FindingMark';
import { countUploads } from './upload-queue';
import type { UploadItem, UploadQueue, UploadState } from './upload-queue';

const stateMarks: Record<UploadState, { mark: GradeValue; words: string }> = {
  waiting: { mark: null, words: 'waiting' },
  sending: { mark: null, words: 'sending' },
  kept: { mark: 0, words: 'kept' },
  'already-here': { mark: 0, words: 'already here, nothing to do' },
  failed: { mark: 2, words: 'not kept' },
  cancelled: { mark: null, words: 'not sent' },
};

const shownAtOnce = 60;

export interface UploadListProps {
  queue: UploadQueue;
  items: readonly UploadItem[];
  /** Share read on the server by file id, 0–1. */
  readingShares: Readonly<Record<string, number>>;
}

/** Files on their way: waiting, sending, kept, here already, or why not. */
export function UploadList({ queue, items, readingShares }: UploadListProps) {
  const { colour } = useTheme();
  if (items.length === 0) return null;
  const counts = countUploads(items);
  const isBusy = counts.toGo > 0;
  // what needs eyes first: failures, then what moves, then what is done
  const order: Record<UploadState, number> = {
    failed: 0,
    sending: 1,
    waiting: 2,
    cancelled: 3,
    kept: 4,
    'already-here': 5,
  };
  const sorted = [...items].sort((a, b) => order[a.state] - order[b.state]);
  return (
    <Section
      title={isBusy ? 'Sending' : 'Sent'}
      subtitle={[
        `${formatCount(counts.kept)} of ${formatPlural(counts.total, 'file')} kept`,
        counts.alreadyHere > 0 ? `${formatCount(counts.alreadyHere)} already here` : '',
        counts.failed > 0 ? `${formatCount(counts.failed)} not kept` : '',
        counts.toGo > 0 ? `${formatCount(counts.toGo)} to go; keep this page open until then` : '',
      ]
        .filter(Boolean)
        .join(', ')}
      aside={
        isBusy ? (
          <Button label="Stop sending" onPress={() => queue.cancelAll()} />
        ) : (
          <Button kind="quiet" label="Clear the list" onPress={() => queue.clearFinished()} />
        )
      }
    >
      {isBusy ? (
        <ProgressLine
          label="All files"
          done={counts.sentBytes}
          total={counts.bytes}
          detail={`${formatBytes(counts.sentBytes)} of ${formatBytes(counts.bytes)}`}
        />
      ) : null}
      <View role="list" aria-label="Files being sent">
        {sorted.slice(0, shownAtOnce).map((item) => {
          const { mark, words } = stateMarks[item.state];
          const share = readingShares[item.id];
          const said =
            item.state === 'sending'
              ? item.sentBytes >= item.file.size
                ? 'sent; the server is keeping it'
                : `sending, ${formatBytes(item.file.size - item.sentBytes)} left`
              : share !== undefined
                ? `kept; ${Math.round(share * 100)} % read`
                : words;
          return (
            <View
              role="listitem"
              key={item.id}
              style={{ paddingVertical: 8, gap: 4, borderBottomWidth: 1, borderBottomColor: colour.hair }}
            >
              <View style={{ flexDirection: 'row', gap: space.m, justifyContent: 'space-between' }}>
                <View style={{ flexShrink: 1, minWidth: 0 }}>
                  <Text variant="figure" size={14} numberOfLines={1}>
                    {item.file.name}
                  </Text>
                </View>
                <Text variant="figure" size={14} soft>
                  {formatBytes(item.file.size)}
                </Text>
              </View>
              {item.state === 'sending' ? (
                <View style={{ height: 4, backgroundColor: colour.wash }} aria-hidden>
                  <View
                    style={{
                      height: 4,
                      width: `${(item.sentBytes / Math.max(1, item.file.size)) * 100}%`,
                      backgroundColor: colour.ink,
                    }}
                  />
                </View>
              ) : null}
              <View style={{ flexDirection: 'row', alignItems: 'center', gap: 4, flexWrap: 'wrap' }}>
                <FindingMark
                  mark={item.message !== null && item.state === 'kept' ? 1 : mark}
                  label={item.state}
                  size={12}
                />
                <View style={{ flexShrink: 1, flexGrow: 1, minWidth: 160 }}>
                  <Text variant="small">{item.message === null ? said : `${said}: ${item.message}`}</Text>
                </View>
                {item.state === 'sending' || item.state === 'waiting' ? (
                  <Button
                    kind="quiet"
                    label="Cancel"
                    ariaLabel={`Cancel ${item.file.name}`}
                    onPress={() => queue.cancel(item.id)}
                  />
                ) : null}
                {item.state === 'failed' || item.state === 'cancelled' ? (
                  <Button
                    kind="quiet"
                    label="Send again"
                    ariaLabel={`Send again: ${item.file.name}`}
                    onPress={() => queue.retry(item.id)}
                  />
                ) : null}
              </View>
            </View>
          );
        })}
      </View>
      {sorted.length > shownAtOnce ? (
        <Text variant="small" soft>
          {`And ${formatPlural(sorted.length - shownAtOnce, 'file')} more.`}
        </Text>
      ) : null}
    </Section>
  );
}
