/** A PostgreSQL of the test run's own: thrown-away data, a free port, loopback only. */
import { execFile, spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { chmod, chown, mkdtemp, readdir, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { promisify } from 'node:util';
import pg from 'pg';

const run = promisify(execFile);
const asRoot = process.getuid?.() === 0;

/** Debian keeps the server's programs outside PATH, in a folder per version. */
async function programs(): Promise<string> {
  const base = '/usr/lib/postgresql';
  const versions = (await readdir(base).catch(() => [])).sort((a, b) => Number(b) - Number(a));
  if (!versions[0]) throw new Error('PostgreSQL is not installed: apt-get install postgresql');
  return join(base, versions[0], 'bin');
}

/** PostgreSQL refuses to run as root: then the user that Debian made for it does. */
const asServer = (program: string, args: string[]): [string, string[]] =>
  asRoot ? ['runuser', ['-u', 'postgres', '--', program, ...args]] : [program, args];

export interface TestPostgres {
  /** As superuser, without a database's name at its end. */
  url: string;
  stop(): Promise<void>;
}

async function untilItAnswers(url: string, server: ChildProcess, said: () => string): Promise<void> {
  for (;;) {
    if (server.exitCode !== null) throw new Error(`PostgreSQL did not start:\n${said()}`);
    const client = new pg.Client({ connectionString: `${url}/postgres` });
    try {
      await client.connect();
      return;
    } catch {
      await new Promise((resolve) => setTimeout(resolve, 50));
    } finally {
      await client.end().catch(() => undefined);
    }
  }
}

export async function startPostgres(port: number): Promise<TestPostgres> {
  const bin = await programs();
  const folder = await mkdtemp(join(tmpdir(), 'plimsoll-pg-'));
  if (asRoot) {
    const [uid, gid] = await Promise.all(
      ['-u', '-g'].map(async (flag) => Number((await run('id', [flag, 'postgres'])).stdout)),
    );
    await chown(folder, uid, gid);
  }
  await chmod(folder, 0o700);
  const data = join(folder, 'data');
  await run(
    ...asServer(join(bin, 'initdb'), [
      '-D',
      data,
      '-U',
      'postgres',
      '--auth=trust',
      '-E',
      'UTF8',
      '--locale=C.UTF-8',
      '--no-sync',
    ]),
    { cwd: '/' },
  );
  const settings = [
    `port=${port}`,
    'listen_addresses=127.0.0.1',
    `unix_socket_directories=${folder}`,
    'fsync=off',
    'full_page_writes=off',
    'max_connections=200',
  ];
  const server = spawn(
    ...asServer(join(bin, 'postgres'), ['-D', data, ...settings.flatMap((setting) => ['-c', setting])]),
    {
      stdio: ['ignore', 'ignore', 'pipe'],
      cwd: '/',
    },
  );
  let said = '';
  server.stderr?.on('data', (chunk: Buffer) => (said = (said + chunk.toString()).slice(-4000)));
  const ended = once(server, 'exit');
  const url = `postgres://postgres@127.0.0.1:${port}`;
  await untilItAnswers(url, server, () => said);
  return {
    url,
    async stop() {
      await run(...asServer(join(bin, 'pg_ctl'), ['-D', data, '-m', 'immediate', 'stop']), { cwd: '/' });
      await ended;
      await rm(folder, { recursive: true, force: true });
    },
  };
}
