import {
  createContext,
  useCallback,
  useContext,
  useLayoutEffect,
  useMemo,
  useState,
  useSyncExternalStore,
} from 'react';
import type { ReactNode } from 'react';
import { ThemeContext, themes } from '../tokens';
import type { ThemeName } from '../tokens';
import { ClockContext } from '../format/useClock';
import type { ClockMode } from '../format/useClock';
import { readPreference, writePreference } from './preferences';

/** 'device' follows prefers-color-scheme. */
export type ThemeChoice = 'device' | ThemeName;

interface ThemeSwitch {
  choice: ThemeChoice;
  setChoice: (choice: ThemeChoice) => void;
}

const ThemeSwitchContext = createContext<ThemeSwitch>({ choice: 'device', setChoice: () => undefined });

export function useThemeSwitch(): ThemeSwitch {
  return useContext(ThemeSwitchContext);
}

const darkQuery = '(prefers-color-scheme: dark)';

function subscribeToDevice(listener: () => void): () => void {
  const query = window.matchMedia(darkQuery);
  query.addEventListener('change', listener);
  return () => query.removeEventListener('change', listener);
}

/** Light or dark, and station time or UTC: what a reader may choose for all screens. */
export function ThemeProvider({ children }: { children: ReactNode }) {
  const deviceIsDark = useSyncExternalStore(
    subscribeToDevice,
    () => window.matchMedia(darkQuery).matches,
    () => false,
  );
  const [choice, setChoiceState] = useState<ThemeChoice>(() =>
    readPreference<ThemeChoice>('theme', ['device', 'light', 'dark'], 'device'),
  );
  const [mode, setModeState] = useState<ClockMode>(() =>
    readPreference<ClockMode>('clock', ['station', 'utc'], 'station'),
  );

  const setChoice = useCallback((next: ThemeChoice) => {
    setChoiceState(next);
    writePreference('theme', next);
  }, []);
  const setMode = useCallback((next: ClockMode) => {
    setModeState(next);
    writePreference('clock', next);
  }, []);

  const name: ThemeName = choice === 'device' ? (deviceIsDark ? 'dark' : 'light') : choice;
  const theme = themes[name];

  // global.css draws the page ground and the focus ring from these
  useLayoutEffect(() => {
    const root = document.documentElement;
    root.style.colorScheme = theme.name;
    root.style.setProperty('--gb-bench', theme.colour.bench);
    root.style.setProperty('--gb-ink', theme.colour.ink);
    root.style.setProperty('--gb-panel', theme.colour.panel);
    root.style.setProperty('--gb-beam', theme.colour.beam);
    root.style.setProperty('--gb-veil', theme.colour.veil);
    root.style.setProperty('--gb-soft', theme.colour.inkSoft);
  }, [theme]);

  const themeSwitch = useMemo(() => ({ choice, setChoice }), [choice, setChoice]);
  const clock = useMemo(() => ({ mode, setMode }), [mode, setMode]);

  return (
    <ThemeSwitchContext.Provider value={themeSwitch}>
      <ClockContext.Provider value={clock}>
        <ThemeContext.Provider value={theme}>{children}</ThemeContext.Provider>
      </ClockContext.Provider>
    </ThemeSwitchContext.Provider>
  );
}
