/** Once per run: the four servers on free ports with data that is thrown away, and a migrated database to clone. */
import { execFileSync } from 'node:child_process';
import { mkdtempSync, rmSync, chmodSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import knex from 'knex';
import { anyPort } from '../../workers/local/ports.mjs';
import { startServices } from '../../workers/local/services.mjs';

export const templateName = 'plimsoll_template';

export default async function setUp(): Promise<() => Promise<void>> {
  const folder = mkdtempSync(join(tmpdir(), 'plimsoll-test-'));
  chmodSync(folder, 0o755); // PostgreSQL's user passes through
  const [web, postgres, redis, storage, smtp, inbox] = await Promise.all(Array.from({ length: 6 }, anyPort));
  const secrets = { auth: 'x'.repeat(48), postgres: 'postgres', owner: 'owner', app: 'app' };
  const ports = { web, postgres, redis, storage, smtp, inbox };
  const services = await startServices({ folder, ports, secrets, fast: true });
  Object.assign(process.env, {
    TEST_PG_URL: services.adminUrl,
    TEST_REDIS_URL: `redis://127.0.0.1:${redis}`,
    TEST_S3_ENDPOINT: `http://127.0.0.1:${storage}`,
    TEST_SMTP_URL: `smtp://127.0.0.1:${smtp}`,
    TEST_INBOX_DIR: join(folder, 'inbox'),
  });
  const admin = knex({ client: 'pg', connection: services.adminUrl });
  await admin.raw("CREATE ROLE plimsoll_app LOGIN PASSWORD 'app'");
  await admin.raw("CREATE ROLE plimsoll_owner LOGIN CREATEROLE PASSWORD 'owner'");
  await admin.raw(`CREATE DATABASE ${templateName} OWNER plimsoll_owner`);
  await admin.destroy();
  const url = new URL(services.adminUrl);
  Object.assign(url, { username: 'plimsoll_owner', password: 'owner', pathname: `/${templateName}` });
  // As the product migrates: the migrations are TypeScript, which this process cannot load by itself.
  execFileSync(
    process.execPath,
    [
      '--import',
      'tsx',
      'node_modules/knex/bin/cli.js',
      'migrate:latest',
      '--knexfile',
      'tests/setup/knexfile.ts',
    ],
    { env: { ...process.env, MIGRATION_DATABASE_URL: url.href }, stdio: ['ignore', 'ignore', 'inherit'] },
  );
  return async () => {
    await services.stop();
    rmSync(folder, { recursive: true, force: true });
  };
}
