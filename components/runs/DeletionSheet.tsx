import { useState } from 'react';
import { View } from 'react-native';
import type { DeletionAccount } from '../../server/contract/api';
import { formatBytes, formatCount } from '../format/numbers';
import { ConfirmSheet, ErrorNotice, FactRow, LoadingLine, Text, TextInput } from '../primitives';
import { space } from '../tokens';

export interface DeletionSheetProps {
  title: string;
  account: DeletionAccount | undefined;
  accountError: unknown;
  onRetry: () => void;
  error: unknown;
  busy: boolean;
  onClose: () => void;
  onDelete: (confirmWord: string) => void;
}

/** What goes and what stays, and a word to type before it happens. */
export function DeletionSheet(props: DeletionSheetProps) {
  const { account } = props;
  const [word, setWord] = useState('');
  return (
    <ConfirmSheet
      open
      title={props.title}
      confirmLabel="Delete"
      busy={props.busy}
      onClose={props.onClose}
      disabledReason={
        account === undefined
          ? 'Reading what would go.'
          : word.trim() !== account.confirmWord
            ? `Type ${account.confirmWord} first.`
            : undefined
      }
      onConfirm={() => account && props.onDelete(account.confirmWord)}
    >
      {props.accountError ? <ErrorNotice error={props.accountError} onRetry={props.onRetry} /> : null}
      {!account && !props.accountError ? <LoadingLine label="counting what would go" /> : null}
      {account ? (
        <View style={{ gap: space.l }}>
          <View>
            <Text variant="label">{`What goes, for good: ${account.what}`}</Text>
            {account.goes.map((line) => (
              <FactRow key={line.label} label={line.label}>
                {`${formatCount(line.count)}${line.bytes === null ? '' : `, ${formatBytes(line.bytes)}`}`}
              </FactRow>
            ))}
          </View>
          <View style={{ gap: 4 }}>
            <Text variant="label">Stays</Text>
            {account.stays.map((line) => (
              <Text key={line}>{line}</Text>
            ))}
          </View>
          <TextInput
            label={`Type ${account.confirmWord} to delete`}
            value={word}
            onChange={setWord}
            figure
            autoComplete="off"
          />
          {props.error ? <ErrorNotice error={props.error} safe="Nothing was deleted." /> : null}
        </View>
      ) : null}
    </ConfirmSheet>
  );
}
