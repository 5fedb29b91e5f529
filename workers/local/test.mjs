// `npm test`: everything that must hold, on ports and data of its own: format, lint, types, vitest, then a browser on the
// started product. `npm test -- --only=vitest` runs one step.
import { spawn } from 'node:child_process';
import { mkdtempSync, rmSync, chmodSync, readFileSync, existsSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { buildKernel } from './build.mjs';
import { ensureNode, ensurePackages, ensurePrograms } from './machine.mjs';
import { root } from './places.mjs';

ensureNode();
ensurePackages();
ensurePrograms(['postgresql', 'redis-server', 'ffmpeg', 'chromium']);
buildKernel();

const only = process.argv.find((arg) => arg.startsWith('--only='))?.slice(7);
const folder = mkdtempSync(join(tmpdir(), 'plimsoll-run-'));
chmodSync(folder, 0o755);
const vitestReport = join(folder, 'vitest.json');
const browserReport = join(folder, 'browser.json');

let child = null;
for (const signal of ['SIGINT', 'SIGTERM'])
  process.on(signal, () => {
    child?.kill(signal);
    process.exitCode = 1;
  });

function run(name, args, env = {}) {
  console.log(`\n== ${name}`);
  return new Promise((resolve) => {
    child = spawn(process.execPath, args, {
      cwd: root,
      stdio: 'inherit',
      env: {
        ...process.env,
        ASTRO_TELEMETRY_DISABLED: '1',
        AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true',
        ...env,
      },
    });
    child.once('close', (code, signal) => resolve(code ?? signal));
  });
}
const bin = (path) => join(root, 'node_modules', path);

const counts = { passed: 0, failed: 0, skipped: 0 };
const failedSteps = [];

/** Adds a runner's own counts; a runner that left none has failed. */
function count(name, read) {
  try {
    const { passed, failed, skipped } = read();
    counts.passed += passed;
    counts.failed += failed;
    counts.skipped += skipped;
    console.log(`${name}: ${passed} passed, ${failed} failed, ${skipped} skipped`);
  } catch (error) {
    counts.failed++;
    console.log(`${name} left no counts (${error.message})`);
  }
}

const steps = {
  async format() {
    return run('format', [bin('prettier/bin/prettier.cjs'), '--check', '--log-level', 'warn', '.']);
  },
  async lint() {
    return run('lint', [
      bin('eslint/bin/eslint.js'),
      '--config',
      '.ci/eslint.config.mjs',
      '.',
      '--max-warnings=0',
    ]);
  },
  async types() {
    return run('types', [bin('astro/astro.js'), 'check', '--minimumSeverity', 'error']);
  },
  async vitest() {
    const code = await run('unit and integration tests', [
      bin('vitest/vitest.mjs'),
      'run',
      '--config',
      'tests/vitest.config.ts',
      '--reporter=default',
      '--reporter=json',
      `--outputFile.json=${vitestReport}`,
    ]);
    count('vitest', () => {
      const { numPassedTests, numFailedTests, numPendingTests } = JSON.parse(
        readFileSync(vitestReport, 'utf8'),
      );
      return { passed: numPassedTests, failed: numFailedTests, skipped: numPendingTests };
    });
    return code;
  },
  async browser() {
    if (!existsSync(join(root, 'tests/e2e/playwright.config.ts'))) return 0;
    const code = await run(
      'browser tests',
      [bin('@playwright/test/cli.js'), 'test', '--config', 'tests/e2e/playwright.config.ts'],
      {
        PLAYWRIGHT_JSON_OUTPUT_FILE: browserReport,
        PLIMSOLL_DATA: join(folder, 'data'),
      },
    );
    count('browser', () => {
      const { stats } = JSON.parse(readFileSync(browserReport, 'utf8'));
      return { passed: stats.expected, failed: stats.unexpected + stats.flaky, skipped: stats.skipped };
    });
    return code;
  },
};

for (const [name, step] of Object.entries(steps)) {
  if (only && only !== name) continue;
  const code = await step();
  if (code === 0) {
    if (['format', 'lint', 'types'].includes(name)) counts.passed++;
    continue;
  }
  failedSteps.push(name);
  if (['format', 'lint', 'types'].includes(name)) counts.failed++;
}
rmSync(folder, { recursive: true, force: true });
if (failedSteps.length > 0) console.log(`\nFailed: ${failedSteps.join(', ')}. The reasons stand above.`);
console.log(`\ntotal: ${counts.passed} passed, ${counts.failed} failed, ${counts.skipped} skipped`);
process.exit(failedSteps.length > 0 || counts.failed > 0 || process.exitCode ? 1 : 0);
