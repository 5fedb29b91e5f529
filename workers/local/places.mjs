// Where the local product keeps what outlives a restart, and which ports it would like.
import { createHash } from 'node:crypto';
import { mkdirSync, statSync } from 'node:fs';
import { dirname, join } from 'node:path';
import { fileURLToPath } from 'node:url';

/** The project's folder, whatever folder the command was given in. */
export const root = fileURLToPath(new URL('../..', import.meta.url)).replace(/\/$/, '');

export const isRoot = process.getuid?.() === 0;

/** PostgreSQL refuses root, and the user it then runs as must be able to enter every folder above its data. */
function othersCanEnter(folder) {
  for (let at = folder; ; at = dirname(at)) {
    if ((statSync(at).mode & 0o001) === 0) return false;
    if (at === dirname(at)) return true;
  }
}

/** The data folder: `.data` in the project, or one under /var/lib where the project lies behind a closed door. */
export function dataFolder() {
  if (process.env.PLIMSOLL_DATA) return process.env.PLIMSOLL_DATA;
  if (!isRoot || othersCanEnter(root)) return join(root, '.data');
  return join('/var/lib', `plimsoll-${createHash('sha256').update(root).digest('hex').slice(0, 10)}`);
}

/** Makes a folder; for everybody to pass through where root shares it with PostgreSQL's user. */
export function makeFolder(folder, mode = isRoot ? 0o755 : 0o700) {
  mkdirSync(folder, { recursive: true, mode });
  return folder;
}

export const wishedPorts = {
  web: 4321,
  postgres: 55432,
  redis: 56379,
  storage: 54566,
  smtp: 52525,
  inbox: 58025,
};
