import { View } from 'react-native';
import { space, useTheme } from '../tokens';
import { Text } from './Text';

/** What is being read, and a dotted line where it will stand. No spinner. */
export function LoadingLine({ label }: { label: string }) {
  const { colour } = useTheme();
  return (
    <View
      role="status"
      style={{
        flexDirection: 'row',
        alignItems: 'center',
        gap: space.m,
        paddingVertical: space.m,
        alignSelf: 'stretch',
      }}
    >
      <Text variant="small" soft>
        {label}
      </Text>
      <View
        aria-hidden
        style={{ flex: 1, height: 0, borderTopWidth: 2, borderStyle: 'dotted', borderTopColor: colour.rule }}
      />
    </View>
  );
}
