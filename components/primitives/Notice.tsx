import { View } from 'react-native';
import type { ReactNode } from 'react';
import { space, useTheme } from '../tokens';
import { ApiError } from '../data/api-client';
import { Button } from './Button';
import { Icon } from './Icon';
import { Text } from './Text';

export type NoticeKind = 'error' | 'info' | 'offline' | 'done';

export interface NoticeProps {
  kind: NoticeKind;
  /** What happened, in one sentence. */
  title: string;
  /** What is safe. */
  safe?: string;
  /** What to do next. */
  next?: string;
  /** Code to quote when asking for help. */
  code?: string;
  action?: { label: string; onPress: () => void; busy?: boolean };
  children?: ReactNode;
}

/** Says what happened, what is safe and what to do next. */
export function Notice(props: NoticeProps) {
  const { colour } = useTheme();
  const isError = props.kind === 'error';
  return (
    <View
      role={isError ? 'alert' : 'status'}
      style={{
        flexDirection: 'row',
        gap: space.m,
        paddingVertical: space.m,
        paddingHorizontal: space.l,
        backgroundColor: props.kind === 'offline' ? colour.wash : colour.panel,
        borderLeftWidth: 3,
        borderLeftColor: colour.ink,
        borderTopWidth: 1,
        borderBottomWidth: 1,
        borderRightWidth: 1,
        borderTopColor: colour.hair,
        borderBottomColor: colour.hair,
        borderRightColor: colour.hair,
        alignSelf: 'stretch',
      }}
    >
      {props.kind === 'offline' ? <Icon name="offline" /> : null}
      {props.kind === 'done' ? <Icon name="check" /> : null}
      <View style={{ flex: 1, gap: 4, minWidth: 0 }}>
        <Text strong>{props.title}</Text>
        {props.safe ? <Text>{props.safe}</Text> : null}
        {props.next ? <Text>{props.next}</Text> : null}
        {props.children}
        {props.code ? (
          <Text variant="small" soft>
            If it stays, send code{' '}
            <Text variant="figure" size={13} soft>
              {props.code}
            </Text>
            .
          </Text>
        ) : null}
        {props.action ? (
          <View style={{ paddingTop: 4 }}>
            <Button label={props.action.label} onPress={props.action.onPress} busy={props.action.busy} />
          </View>
        ) : null}
      </View>
    </View>
  );
}

export interface ErrorNoticeProps {
  error: unknown;
  /** What is not touched by this: "The raw files are safe." */
  safe?: string;
  onRetry?: () => void;
  /** What could not be done, when the error itself brings no words for people. */
  fallback?: string;
}

/** The notice of a failed request. */
export function ErrorNotice({
  error,
  safe,
  onRetry,
  fallback = 'This could not be done.',
}: ErrorNoticeProps) {
  const isApiError = error instanceof ApiError;
  return (
    <Notice
      kind={isApiError && error.code === 'offline' ? 'offline' : 'error'}
      title={isApiError ? error.userMessage : fallback}
      safe={safe}
      code={isApiError ? error.requestId : undefined}
      action={onRetry ? { label: 'Try again', onPress: onRetry } : undefined}
    />
  );
}

/** A strip across the page while there is no network. */
export function OfflineBanner({ children }: { children: ReactNode }) {
  const { colour } = useTheme();
  return (
    <View
      role="status"
      style={{
        flexDirection: 'row',
        alignItems: 'center',
        gap: space.m,
        padding: space.m,
        paddingHorizontal: space.l,
        backgroundColor: colour.wash,
        borderBottomWidth: 1,
        borderBottomColor: colour.rule,
      }}
    >
      <Icon name="offline" />
      <View style={{ flex: 1 }}>
        <Text variant="body">
          <Text strong>No network. </Text>
          {children}
        </Text>
      </View>
    </View>
  );
}
