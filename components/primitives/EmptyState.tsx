import { View } from 'react-native';
import type { ReactNode } from 'react';
import { space } from '../tokens';
import { Text } from './Text';

export interface EmptyStateProps {
  /** What is missing: "No raw files yet." */
  title: string;
  /** What to do about it. */
  children?: ReactNode;
  /** Usually one Button. */
  action?: ReactNode;
}

export function EmptyState({ title, children, action }: EmptyStateProps) {
  return (
    <View style={{ paddingVertical: space.xl, gap: space.m, alignItems: 'flex-start', maxWidth: 560 }}>
      <Text variant="part" level={0}>
        {title}
      </Text>
      {typeof children === 'string' ? <Text soft>{children}</Text> : children}
      {action}
    </View>
  );
}
