import { useState } from 'react';
import type { LayoutChangeEvent } from 'react-native';

/** Measured width of an element, 0 before the first layout. */
export function useWidth(): [number, (event: LayoutChangeEvent) => void] {
  const [width, setWidth] = useState(0);
  return [width, (event) => setWidth(Math.floor(event.nativeEvent.layout.width))];
}
