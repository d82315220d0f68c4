import { useState } from 'react';
import { View } from 'react-native';
import { Button, Text } from '../primitives';
import { space, useTheme } from '../tokens';

const cautions: readonly { title: string; text: string }[] = [
  {
    title: 'Overhead lines',
    text: 'Treat every line as energised. Keep the mast, and the circle it would fall into, away from lines and roads by at least one and a half times its height. Before digging, ask the utilities; private lines are in no public record.',
  },
  {
    title: 'Climbing and guys',
    text: 'Trained people only, never alone: full harness, rated anchor, helmet, weather limits, a rescue plan. Flag the guy wires and check the stakes at every visit.',
  },
  {
    title: 'Lightning',
    text: 'Leave when thunder is heard and stay away for at least 30 minutes after the last of it. Air terminal, conductor, earth rod and bonding are designed by licensed professionals to the local code.',
  },
  {
    title: 'Batteries',
    text: 'Ventilate (hydrogen), cover the terminals, fuse close to the battery, wear protection against acid. Lithium only with its own management and charger; no charging below 0 °C.',
  },
  {
    title: 'Alone in the field',
    text: 'Tell somebody where you are and when you will be back. Heat, cold, insects, livestock, hunting season.',
  },
];

/** What can hurt at a mast, in short; it defers to local codes and licensed practice. */
export function SafetyNotice() {
  const { colour } = useTheme();
  const [isOpen, setIsOpen] = useState(false);
  return (
    <View
      role="note"
      aria-label="Safety at the mast"
      style={{
        borderLeftWidth: 3,
        borderLeftColor: colour.ink,
        backgroundColor: colour.wash,
        padding: space.m,
        gap: space.s,
      }}
    >
      <Text strong>Before work at the mast</Text>
      <Text>
        Masts, overhead lines, lightning and batteries kill. This page is no safety plan: your site’s plan,
        local codes and licensed practice decide.
      </Text>
      {isOpen
        ? cautions.map((caution) => (
            <View key={caution.title}>
              <Text variant="label">{caution.title}</Text>
              <Text>{caution.text}</Text>
            </View>
          ))
        : null}
      <Button
        kind="quiet"
        label={isOpen ? 'Show less' : 'Read the usual cautions'}
        ariaExpanded={isOpen}
        onPress={() => setIsOpen(!isOpen)}
      />
    </View>
  );
}
