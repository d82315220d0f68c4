import { router } from 'expo-router';
import type { Href } from 'expo-router';
import type { GestureResponderEvent } from 'react-native';

interface ClickLike {
  metaKey?: boolean;
  ctrlKey?: boolean;
  shiftKey?: boolean;
  altKey?: boolean;
  button?: number;
  preventDefault?: () => void;
}

/**
 * Props that make a Pressable or Text a real link: an anchor that the router follows on a plain click,
 * and that the browser handles for new tabs, downloads (/api/…) and other sites.
 */
export function linkProps(href: string): { onPress: (event: GestureResponderEvent) => void } {
  const props = {
    href,
    onPress: (event: GestureResponderEvent): void => {
      const click = event as unknown as ClickLike;
      const isPlain = !click.metaKey && !click.ctrlKey && !click.shiftKey && !click.altKey && !click.button;
      if (!isPlain || !href.startsWith('/') || href.startsWith('/api/')) return;
      click.preventDefault?.();
      router.push(href as Href);
    },
  };
  return props;
}
