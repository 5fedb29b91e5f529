/**
 * What the tests run against: PostgreSQL, Redis, S3 and a mail inbox of their own, started once per run on free ports with
 * data that is thrown away. PLIMSOLL_TEST_SERVICES=1 says that the TEST_* addresses are set already.
 */
import { execFile, spawn } from 'node:child_process';
import { once } from 'node:events';
import { mkdtemp, rm } from 'node:fs/promises';
import { createServer, type AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { promisify } from 'node:util';
import { Redis } from 'ioredis';
import pg from 'pg';
import S3rver from 's3rver';
import { templateDatabase } from './database.ts';
import { startInbox } from './inbox.ts';
import { startPostgres } from './postgres.ts';

const run = promisify(execFile);

async function freePort(): Promise<number> {
  const server = createServer();
  server.listen(0, '127.0.0.1');
  await once(server, 'listening');
  const { port } = server.address() as AddressInfo;
  server.close();
  await once(server, 'close');
  return port;
}

async function startRedis(port: number, folder: string): Promise<() => Promise<void>> {
  const server = spawn(
    'redis-server',
    [
      '--port',
      String(port),
      '--bind',
      '127.0.0.1',
      '--dir',
      folder,
      '--save',
      '',
      '--appendonly',
      'no',
      '--maxmemory-policy',
      'noeviction',
    ],
    { stdio: 'ignore' },
  );
  const ended = once(server, 'exit');
  const failed = once(server, 'error').then(([error]: Error[]) => {
    throw new Error(`redis-server did not start (${error.message}): apt-get install redis-server`);
  });
  const client = new Redis(port, '127.0.0.1', { maxRetriesPerRequest: null, retryStrategy: () => 50 });
  client.on('error', () => undefined); // Not up yet: it tries again.
  await Promise.race([client.ping(), failed]);
  client.disconnect();
  failed.catch(() => undefined);
  return async () => {
    server.kill('SIGTERM');
    await ended;
  };
}

/** Roles as a deployment has them, and a migrated database that every test file gets a copy of. */
async function makeTemplate(url: string): Promise<void> {
  const client = new pg.Client({ connectionString: `${url}/postgres` });
  await client.connect();
  await client.query("CREATE ROLE plimsoll_owner LOGIN PASSWORD 'owner'");
  await client.query("CREATE ROLE plimsoll_app LOGIN PASSWORD 'app'");
  await client.query(`CREATE DATABASE ${templateDatabase} OWNER plimsoll_owner`);
  await client.end();
  const owner = new URL(`${url}/${templateDatabase}`);
  owner.username = 'plimsoll_owner';
  const knex = [
    '--import',
    'tsx',
    'node_modules/knex/bin/cli.js',
    '--knexfile',
    'knexfile.ts',
    'migrate:latest',
  ];
  await run(process.execPath, knex, { env: { ...process.env, MIGRATION_DATABASE_URL: owner.href } });
}

export default async function setup(): Promise<() => Promise<void>> {
  if (process.env.PLIMSOLL_TEST_SERVICES) return async () => undefined;
  const folder = await mkdtemp(join(tmpdir(), 'plimsoll-tests-'));
  const postgres = await startPostgres(await freePort());
  const redisPort = await freePort();
  const stopRedis = await startRedis(redisPort, folder);
  const s3 = new S3rver({ port: 0, address: '127.0.0.1', silent: true, directory: join(folder, 's3') });
  const s3Port = (await s3.run()).port;
  const inbox = await startInbox(join(folder, 'inbox'));
  await makeTemplate(postgres.url);
  Object.assign(process.env, {
    TEST_PG_URL: postgres.url,
    TEST_REDIS_URL: `redis://127.0.0.1:${redisPort}`,
    TEST_S3_ENDPOINT: `http://127.0.0.1:${s3Port}`,
    TEST_SMTP_URL: inbox.url,
    TEST_INBOX_DIR: inbox.folder,
  });
  return async () => {
    await inbox.close();
    await s3.close();
    await stopRedis();
    await postgres.stop();
    await rm(folder, { recursive: true, force: true });
  };
}
