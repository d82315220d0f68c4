import { useWindowDimensions } from 'react-native';
import { wideFromPx } from './theme';

/** True where there is room for index, work and side columns. */
export function useWide(): boolean {
  return useWindowDimensions().width >= wideFromPx;
}
