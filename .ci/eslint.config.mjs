import js from '@eslint/js';
import astro from 'eslint-plugin-astro';
import importX from 'eslint-plugin-import-x';
import jsxA11y from 'eslint-plugin-jsx-a11y';
import { defineConfig } from 'eslint/config';
import globals from 'globals';
import tseslint from 'typescript-eslint';

/** Which folder may not import which: pages -> services -> db, storage, queue, mail -> domain -> engine. */
const zones = [
  {
    target: './src/engine',
    from: ['./src/domain', './src/server', './src/components', './src/pages', './workers'],
  },
  { target: './src/domain', from: ['./src/server', './src/components', './src/pages', './workers'] },
  {
    target: ['./src/server/db', './src/server/storage', './src/server/mail', './src/server/measuring'],
    from: ['./src/server/services', './src/components', './src/pages', './workers'],
  },
  { target: './src/server', from: ['./src/components', './src/pages', './src/layouts', './workers'] },
  { target: './src/components/**/*.tsx', from: ['./src/server', './src/pages'] },
];

export default defineConfig(
  {
    ignores: [
      'dist/**',
      '.astro/**',
      'node_modules/**',
      '.data/**',
      'src/engine/kernel/assembly/**',
      'src/engine/kernel/binary.ts',
      'test-results/**',
      'public/**',
    ],
  },
  js.configs.recommended,
  ...tseslint.configs.recommended,
  ...astro.configs.recommended,
  ...astro.configs['jsx-a11y-recommended'],
  // Rules only: the config above has registered the plugin.
  {
    files: ['**/*.{jsx,tsx}'],
    languageOptions: { parserOptions: { ecmaFeatures: { jsx: true } } },
    rules: jsxA11y.flatConfigs.recommended.rules,
  },
  { languageOptions: { globals: { ...globals.node, ...globals.browser } } },
  {
    files: ['src/**/*.{ts,tsx}', 'workers/**/*.ts'],
    plugins: { 'import-x': importX },
    settings: { 'import-x/resolver': { node: { extensions: ['.ts', '.tsx', '.mjs'] } } },
    rules: {
      'import-x/no-restricted-paths': ['error', { zones }],
      'max-lines': ['error', { max: 400 }],
      '@typescript-eslint/no-explicit-any': 'error',
    },
  },
  {
    files: ['src/components/**/*.{ts,tsx}'],
    rules: { 'no-restricted-imports': ['error', { patterns: ['@/server/*', '@/pages/*', '@/layouts/*'] }] },
  },
  {
    files: ['src/server/**/*.ts', 'src/domain/**/*.ts', 'src/engine/**/*.ts', 'workers/**/*.ts'],
    rules: {
      'no-restricted-imports': ['error', { patterns: ['@/*', 'astro', 'astro:*', 'react', 'react-dom'] }],
    },
  },
  {
    rules: {
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
      'no-console': 'off',
      // Names are checked for control characters on purpose.
      'no-control-regex': 'off',
      // On the signed-out pages the form is the whole page.
      'astro/jsx-a11y/no-autofocus': 'off',
    },
  },
  { files: ['**/*.d.ts'], rules: { '@typescript-eslint/triple-slash-reference': 'off' } },
);
