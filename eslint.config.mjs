import expo from 'eslint-config-expo/flat.js';

/** What each folder may not import; the words stand in DEVELOPERS.md, "Layers". */
const layer = (files, forbidden, why) => ({
  files,
  rules: {
    'no-restricted-imports': [
      'error',
      {
        patterns: [
          ...forbidden.map((regex) => ({ regex, message: why })),
          {
            regex: '^lucide-react-native$',
            message:
              'Import one icon: lucide-react-native/icons/<name>; the barrel brings all of them along.',
          },
        ],
      },
    ],
  },
});

const nodeBuiltins =
  '^(node:|fs$|fs/|path$|os$|crypto$|stream$|stream/|zlib$|worker_threads$|child_process$|http$|https$|net$|url$|util$|perf_hooks$)';
const client = '(^|/)(components|app)/';
const react = '^(react|react-dom|react-native|expo|expo-.*|@tanstack/.*|uplot)(/|$)';

export default [
  {
    ignores: [
      'node_modules/**',
      'dist/**',
      '.expo/**',
      '.gustbook/**',
      'drizzle/**',
      'public/**',
      'coverage/**',
      '**/*.generated.ts',
      '**/*.as.ts',
      'expo-env.d.ts',
    ],
  },
  ...expo,
  {
    settings: { 'import/ignore': ['node_modules'] },
    rules: {
      'import/no-cycle': ['error', { maxDepth: 12, ignoreExternal: true }],
      // The compiler checks names; these rules would parse every package again.
      'import/no-unresolved': 'off',
      'import/namespace': 'off',
      'import/named': 'off',
      'import/default': 'off',
      'import/export': 'off',
      'import/no-named-as-default': 'off',
      'import/no-named-as-default-member': 'off',
      'no-console': 'error',
      eqeqeq: ['error', 'always', { null: 'ignore' }],
    },
  },
  {
    files: ['**/*.{ts,tsx}'],
    rules: {
      '@typescript-eslint/consistent-type-imports': ['error', { prefer: 'type-imports' }],
      '@typescript-eslint/no-explicit-any': 'error',
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
    },
  },
  layer(
    ['processing/**/*.ts'],
    [nodeBuiltins, react, client, '(^|/)(server|db|workers|tests)/', '^(express|drizzle-orm|piscina|pino)'],
    'processing/ is pure: no Node, DOM, React, server or database.',
  ),
  {
    files: ['processing/**/*.ts'],
    rules: {
      'no-restricted-globals': [
        'error',
        'process',
        'Buffer',
        'window',
        'document',
        'performance',
        'setTimeout',
        'fetch',
        'localStorage',
      ],
      'no-restricted-properties': [
        'error',
        { object: 'Math', property: 'random', message: 'processing/ is deterministic: use numerics/random.' },
        { object: 'Date', property: 'now', message: 'processing/ knows no clock.' },
      ],
    },
  },
  layer(
    ['workers/**/*.ts'],
    [client, '(^|/)(server|db)/', react, '^(express|drizzle-orm)'],
    'workers/ bind processing/ to threads and local files; no database, no HTTP, no client.',
  ),
  layer(
    ['server/**/*.ts'],
    [client, '(^|/)workers/browser', react],
    'server/ may import db, workers/node and processing.',
  ),
  layer(
    ['server/contract/**/*.ts'],
    [
      nodeBuiltins,
      client,
      react,
      '(^|/)(db|workers)/',
      '^\\.\\./(?!\\.\\./processing/)',
      '^(express|drizzle-orm)',
    ],
    'server/contract/ is shared with the client: zod and processing/ only.',
  ),
  layer(
    ['db/**/*.ts'],
    [client, react, '(^|/)(server|workers|processing)/'],
    'db/ imports nothing of the other layers.',
  ),
  layer(
    ['components/**/*.{ts,tsx}'],
    [
      nodeBuiltins,
      '(^|/)(db|app)/',
      '(^|/)server/(?!contract/)',
      '(^|/)workers/(?!browser/)',
      '^(express|drizzle-orm|piscina|pino)',
    ],
    'components/ may import server/contract, processing and workers/browser.',
  ),
  layer(
    ['app/**/*.{ts,tsx}'],
    [nodeBuiltins, '(^|/)(server|db|workers|processing)/'],
    'app/ holds thin routes: components only.',
  ),
  {
    files: ['scripts/**', 'workers/node/**', 'server/main.ts', 'tests/**', '*.config.*', 'metro.config.js'],
    rules: { 'no-console': 'off' },
  },
  {
    files: ['**/*.{js,cjs}'],
    languageOptions: { globals: { __dirname: 'readonly', module: 'writable', require: 'readonly' } },
  },
];
