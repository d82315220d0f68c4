import { View } from 'react-native';
import { Text } from '../primitives';
import { useTheme } from '../tokens';

/** A panel before its data: the axes stand, a dotted line where values will come. */
export function EmptyPanel({
  width,
  height,
  axisWidth,
  words,
}: {
  width: number;
  height: number;
  axisWidth: number;
  words: string;
}) {
  const { colour } = useTheme();
  return (
    <View style={{ width: Math.max(0, width), height, justifyContent: 'center' }}>
      {[0.1, 0.5, 0.9].map((share) => (
        <View
          key={share}
          aria-hidden
          style={{
            position: 'absolute',
            left: axisWidth,
            right: 0,
            top: share * height,
            borderTopWidth: share === 0.5 ? 2 : 1,
            borderTopColor: share === 0.5 ? colour.rule : colour.hair,
            borderStyle: share === 0.5 ? 'dotted' : 'solid',
          }}
        />
      ))}
      {words ? (
        <View
          role="status"
          style={{
            alignSelf: 'center',
            backgroundColor: colour.panel,
            paddingHorizontal: 8,
            marginLeft: axisWidth,
          }}
        >
          <Text variant="small" soft>
            {words}
          </Text>
        </View>
      ) : null}
    </View>
  );
}
