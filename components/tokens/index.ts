export * from './colours';
export * from './theme';
export * from './grades';
export { useTheme, ThemeContext } from './useTheme';
export { useWide } from './useWide';
