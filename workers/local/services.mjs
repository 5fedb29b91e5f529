// The four servers that the product needs, on loopback: PostgreSQL, Redis, the storage fake, the mail inbox.
import { randomBytes } from 'node:crypto';
import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { createConnection } from 'node:net';
import { join } from 'node:path';
import { makeFolder, root } from './places.mjs';
import { startPostgres } from './postgres.mjs';
import { startProcess, untilReady } from './processes.mjs';

/** Passwords and keys of this data folder, made once. */
export function secretsOf(folder) {
  const file = join(folder, 'secrets.json');
  if (existsSync(file)) return JSON.parse(readFileSync(file, 'utf8'));
  const secret = () => randomBytes(24).toString('hex');
  const made = { auth: secret(), postgres: secret(), owner: secret(), app: secret() };
  writeFileSync(file, JSON.stringify(made), { mode: 0o600 });
  return made;
}

const answers = (port) =>
  new Promise((resolve) => {
    const socket = createConnection({ port, host: '127.0.0.1' });
    socket.once('connect', () => (socket.destroy(), resolve(true)));
    socket.once('error', () => resolve(false));
  });

/** Starts all four at once; `ports` are chosen by the caller. `fast` is for tests: no safety against power cuts. */
export async function startServices({ folder, ports, secrets, fast = false }) {
  const logFolder = makeFolder(join(folder, 'logs'));
  const started = [];
  const node = (name, script, args, port) => {
    const child = startProcess({
      name,
      command: process.execPath,
      args: [join(root, 'workers/local', script), ...args],
      env: { ...process.env, AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true' },
      cwd: root,
      logFolder,
    });
    started.push(child);
    return untilReady(child, () => answers(port));
  };
  const startRedis = () => {
    const redisFolder = makeFolder(join(folder, 'redis'));
    const safety = fast
      ? ['--appendonly', 'no', '--save', '']
      : ['--appendonly', 'yes', '--appendfsync', 'everysec'];
    const child = startProcess({
      name: 'redis',
      command: 'redis-server',
      args: [
        '--port',
        String(ports.redis),
        '--bind',
        '127.0.0.1',
        '--dir',
        redisFolder,
        '--maxmemory-policy',
        'noeviction',
        '--databases',
        '32',
        ...safety,
      ],
      env: process.env,
      cwd: redisFolder,
      logFolder,
    });
    started.push(child);
    return untilReady(child, () => answers(ports.redis));
  };
  const stop = async () => {
    for (const child of started.reverse()) await child.stop();
  };
  try {
    const results = await Promise.allSettled([
      startPostgres({
        folder: join(folder, 'postgres'),
        port: ports.postgres,
        password: secrets.postgres,
        logFolder,
        fast,
      }).then((up) => {
        started.push(up.server);
        return up;
      }),
      startRedis(),
      node(
        'storage',
        'storage.mjs',
        [makeFolder(join(folder, 'storage')), String(ports.storage)],
        ports.storage,
      ),
      node(
        'inbox',
        'inbox.mjs',
        [makeFolder(join(folder, 'inbox')), String(ports.smtp), String(ports.inbox)],
        ports.smtp,
      ),
    ]);
    const failed = results.find((result) => result.status === 'rejected');
    if (failed) throw failed.reason;
    return { adminUrl: results[0].value.adminUrl, logFolder, stop };
  } catch (error) {
    await stop();
    throw error;
  }
}

/** The environment of the product's processes on these services. */
export const environmentOf = ({ ports, secrets, ownerUrl, appUrl, folder }) => ({
  NODE_ENV: 'production',
  APP_ORIGIN: `http://127.0.0.1:${ports.web}`,
  ALLOWED_HOSTS: `localhost:${ports.web}`,
  HOST: '127.0.0.1',
  PORT: String(ports.web),
  AUTH_SECRET: secrets.auth,
  DATABASE_URL: appUrl,
  MIGRATION_DATABASE_URL: ownerUrl,
  REDIS_URL: `redis://127.0.0.1:${ports.redis}`,
  S3_ENDPOINT: `http://127.0.0.1:${ports.storage}`,
  S3_BUCKET: 'plimsoll',
  S3_ACCESS_KEY_ID: 'S3RVER',
  S3_SECRET_ACCESS_KEY: 'S3RVER',
  S3_FORCE_PATH_STYLE: '1',
  SMTP_URL: `smtp://127.0.0.1:${ports.smtp}`,
  MAIL_FROM: 'Plimsoll <no-reply@plimsoll.example>',
  SCRATCH_DIR: makeFolder(join(folder, 'scratch'), 0o700),
  DEMO_SIGN_INS: '1',
  AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true',
});
