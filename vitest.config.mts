import { defineConfig } from 'vitest/config';

const shared = {
  resolve: {
    alias: [
      { find: /^react-native$/, replacement: 'react-native-web' },
      { find: /^react-native-svg$/, replacement: 'react-native-svg/lib/module/ReactNativeSVG.web.js' },
    ],
    extensions: ['.web.tsx', '.web.ts', '.web.js', '.tsx', '.ts', '.mts', '.mjs', '.js', '.json'],
  },
  define: { __DEV__: 'true', 'process.env.EXPO_OS': '"web"' },
};

export default defineConfig({
  test: {
    projects: [
      {
        ...shared,
        test: {
          name: 'node',
          environment: 'node',
          include: ['tests/unit/**/*.test.ts', 'tests/published/**/*.test.ts'],
          exclude: ['tests/unit/components/**'],
          testTimeout: 120_000,
        },
      },
      {
        ...shared,
        test: {
          name: 'jsdom',
          environment: 'jsdom',
          include: ['tests/unit/components/**/*.test.{ts,tsx}'],
          server: { deps: { inline: [/react-native/, /expo/, /lucide/] } },
          testTimeout: 60_000,
        },
      },
    ],
  },
});
