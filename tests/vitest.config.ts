/// <reference types="vitest/config" />
import { fileURLToPath } from 'node:url';
import { getViteConfig } from 'astro/config';

const root = fileURLToPath(new URL('..', import.meta.url)).replace(/\/$/, '');

export default getViteConfig(
  {
    root,
    test: {
      root,
      include: ['tests/**/*.test.{ts,tsx}'],
      exclude: ['tests/e2e/**', 'node_modules/**'],
      environment: 'node',
      globalSetup: ['tests/setup/services.ts'],
      pool: 'forks',
      testTimeout: 60_000,
      hookTimeout: 120_000,
      env: { LOG_LEVEL: 'silent', AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true' },
    },
  },
  { root, configFile: 'astro.config.mjs' },
);
