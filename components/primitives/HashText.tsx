import { useState } from 'react';
import { Pressable, View } from 'react-native';
import { useTheme, webStyle } from '../tokens';
import { Icon } from './Icon';
import { Text } from './Text';

export interface HashTextProps {
  hash: string;
  /** What it is the hash of: "recipe", "raw file". */
  of?: string;
  /** Characters shown. */
  length?: number;
  /** Show all of it, broken over lines. */
  full?: boolean;
}

/** A short hash; pressing it copies the whole one. */
export function HashText({ hash, of = 'hash', length = 8, full = false }: HashTextProps) {
  const { colour } = useTheme();
  const [isCopied, setIsCopied] = useState(false);
  const copy = (): void => {
    const clipboard = typeof navigator === 'undefined' ? undefined : navigator.clipboard;
    clipboard?.writeText(hash).then(
      () => setIsCopied(true),
      () => setIsCopied(false),
    );
  };
  return (
    <View style={{ flexDirection: 'row', alignItems: 'center', gap: 6, flexShrink: 1 }}>
      <Pressable
        role="button"
        aria-label={`Copy the whole hash of this ${of}, ${full ? hash : hash.slice(0, length)}`}
        onPress={copy}
        {...({ title: hash } as object)}
        style={[
          { flexDirection: 'row', alignItems: 'center', gap: 4, minHeight: 24, flexShrink: 1 },
          webStyle({ cursor: 'copy' }),
        ]}
      >
        <Text
          variant="figure"
          size={13}
          soft
          style={full ? webStyle({ whiteSpace: 'normal', overflowWrap: 'anywhere' }) : undefined}
        >
          {full ? hash : hash.slice(0, length)}
        </Text>
        <Icon name="copy" size={14} colour={colour.inkSoft} />
      </Pressable>
      <Text variant="small" soft live="polite">
        {isCopied ? 'copied' : ''}
      </Text>
    </View>
  );
}
