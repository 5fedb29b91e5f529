/** Starts the product as `npm start` does, with the demo's world but without its sound, and ends it after the tests. */
import { spawn } from 'node:child_process';
import { mkdtempSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { anyPort } from '../../workers/local/ports.mjs';

const root = fileURLToPath(new URL('../..', import.meta.url));

export default async function startProduct(): Promise<() => Promise<void>> {
  const ports: Record<string, string> = {};
  for (const name of ['WEB', 'POSTGRES', 'REDIS', 'STORAGE', 'SMTP', 'INBOX'])
    ports[`PLIMSOLL_${name}_PORT`] = String(await anyPort());
  const child = spawn(process.execPath, ['workers/local/start.mjs'], {
    cwd: root,
    env: {
      ...process.env,
      ...ports,
      PLIMSOLL_DATA: process.env.PLIMSOLL_DATA ?? mkdtempSync(join(tmpdir(), 'plimsoll-e2e-')),
      PLIMSOLL_DEMO: 'world',
      UNDO_SECONDS: '2',
    },
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  let said = '';
  const ended = new Promise<void>((resolve) => child.once('close', () => resolve()));
  await new Promise<void>((resolve, reject) => {
    const listen = (text: Buffer) => {
      said += text.toString();
      if (said.includes('The demo’s world stands.')) resolve();
    };
    child.stdout.on('data', listen);
    child.stderr.on('data', listen);
    void ended.then(() => reject(new Error(`The product ended before it was open:\n${said}`)));
  });
  process.env.E2E_ORIGIN = /open at (http:\/\/\S+)/.exec(said)?.[1];
  process.env.E2E_INBOX = /Local mail:\s+(http:\/\/\S+)/.exec(said)?.[1];
  return async () => {
    child.kill('SIGTERM');
    await ended;
  };
}
