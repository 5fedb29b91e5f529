import { defineConfig } from '@playwright/test';

// The product starts once for all browser tests, by its own one command, on ports and data of its own (workers/local/test.mjs
// names the data folder). tests/e2e/product.ts starts it and says where it is.
export default defineConfig({
  testDir: '.',
  outputDir: '../../test-results',
  workers: 1,
  fullyParallel: false,
  timeout: 90_000,
  reporter: [['list'], ['json']],
  globalSetup: './product.ts',
  use: {
    trace: 'retain-on-failure',
    launchOptions: {
      executablePath: '/usr/bin/chromium',
      args: [
        '--no-sandbox',
        '--disable-gpu',
        '--disable-dev-shm-usage',
        '--disable-quic',
        '--no-first-run',
        '--disable-background-networking',
        '--disable-component-update',
        '--disable-sync',
      ],
    },
  },
});
