import { createContext, useContext } from 'react';
import { themes } from './theme';
import type { Theme } from './theme';

export const ThemeContext = createContext<Theme>(themes.light);

/** Colours of the current theme; ThemeProvider (components/shell) sets it. */
export function useTheme(): Theme {
  return useContext(ThemeContext);
}
