export { AppShell } from './AppShell';
export type { AppShellProps, ShellAction } from './AppShell';
export { AppProviders } from './AppProviders';
export { ThemeProvider, useThemeSwitch } from './ThemeProvider';
export { groupPath, periodPath, placesOf, stationPath } from './places';
export type { Place } from './places';
export { Mark, Wordmark } from './Wordmark';
export { useOnline } from './useOnline';
export { useWide } from '../tokens';
