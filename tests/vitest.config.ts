/// <reference types="vitest/config" />
import { fileURLToPath } from 'node:url';
import { getViteConfig } from 'astro/config';

const root = fileURLToPath(new URL('..', import.meta.url));

export default getViteConfig(
  {
    root,
    test: {
      root,
      include: ['tests/**/*.test.{ts,tsx}'],
      exclude: ['tests/e2e/**', 'node_modules/**'],
      globalSetup: ['tests/setup/services.ts'],
      env: { LOG_LEVEL: process.env.LOG_LEVEL ?? 'silent' },
      testTimeout: 30_000,
      hookTimeout: 60_000,
    },
  },
  { root, configFile: 'astro.config.mjs' },
);
