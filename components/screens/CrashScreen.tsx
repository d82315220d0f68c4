import { View } from 'react-native';
import type { ErrorBoundaryProps } from 'expo-router';
import { Button, ButtonRow } from '../primitives/Button';
import { Text } from '../primitives/Text';
import { space, useTheme } from '../tokens';

/** What is left when a page itself breaks. It stands outside the providers and uses none of them. */
export function CrashScreen({ error, retry }: ErrorBoundaryProps) {
  const { colour } = useTheme();
  return (
    <View
      role="main"
      style={{ flex: 1, padding: space.xl, gap: space.l, maxWidth: 640, backgroundColor: colour.bench }}
    >
      <Text variant="title">This page could not be drawn</Text>
      <Text>Your records and results are safe: only the drawing of this page stopped.</Text>
      <Text>Draw it again; if it stays so, send the line below with a word on what you did before.</Text>
      <Text variant="figure" size={13} soft style={{ flexShrink: 1 }}>
        {error.message}
      </Text>
      <ButtonRow>
        <Button kind="primary" label="Draw it again" onPress={() => void retry()} />
        <Button label="Go to the stations" href="/" />
      </ButtonRow>
    </View>
  );
}
