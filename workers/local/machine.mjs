// What must be there before anything else: npm packages from the lock file, and a few programs of the system.
import { spawnSync } from 'node:child_process';
import { createHash } from 'node:crypto';
import { existsSync, readdirSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { isRoot, root } from './places.mjs';

const say = (text) => console.error(text);

function onPath(program) {
  return (process.env.PATH ?? '').split(':').some((folder) => folder && existsSync(join(folder, program)));
}

/** Folder of PostgreSQL's own programs (Debian keeps initdb off the path), newest first; `null` where there are none. */
export function postgresPrograms() {
  const base = '/usr/lib/postgresql';
  const versions = existsSync(base) ? readdirSync(base).sort((a, b) => Number(b) - Number(a)) : [];
  const folders = [
    ...versions.map((v) => join(base, v, 'bin')),
    ...(process.env.PATH ?? '').split(':').filter(Boolean),
  ];
  return (
    folders.find((folder) => existsSync(join(folder, 'initdb')) && existsSync(join(folder, 'postgres'))) ??
    null
  );
}

export const browserProgram = () =>
  ['/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome'].find((path) =>
    existsSync(path),
  ) ?? null;

const programs = {
  postgresql: () => postgresPrograms() !== null,
  'redis-server': () => onPath('redis-server'),
  ffmpeg: () => onPath('ffmpeg') && onPath('ffprobe'),
  chromium: () => browserProgram() !== null,
};

/** Sees to the named Debian packages: installs them as root, else says the one command to run and ends. */
export function ensurePrograms(names) {
  const missing = names.filter((name) => !programs[name]());
  if (missing.length === 0) return;
  const command = `apt-get update && apt-get install -y --no-install-recommends ${missing.join(' ')}`;
  if (!isRoot) {
    say(
      `Plimsoll needs ${missing.join(', ')}. Run this once, then start again:\n\n    sudo sh -c '${command}'\n`,
    );
    process.exit(1);
  }
  say(`Installing ${missing.join(', ')} …`);
  // Debian's packages would start servers of their own; those that run already are left alone.
  const policy = '/usr/sbin/policy-rc.d';
  const ours = !existsSync(policy);
  if (ours) writeFileSync(policy, '#!/bin/sh\nexit 101\n', { mode: 0o755 });
  const ran = spawnSync('sh', ['-c', command], {
    stdio: ['ignore', 'ignore', 'inherit'],
    env: { ...process.env, DEBIAN_FRONTEND: 'noninteractive' },
  });
  if (ours) spawnSync('rm', ['-f', policy]);
  const still = names.filter((name) => !programs[name]());
  if (ran.status !== 0 || still.length > 0) {
    say(
      `The system's packages could not be installed (${still.join(', ') || `apt-get ended with ${ran.status}`}). Run by hand: ${command}`,
    );
    process.exit(1);
  }
}

/** Installs npm packages from the lock file where they are missing or another lock's. */
export function ensurePackages() {
  const lock = createHash('sha256')
    .update(readFileSync(join(root, 'package-lock.json')))
    .digest('hex');
  const mark = join(root, 'node_modules', '.plimsoll-lock');
  if (existsSync(mark) && readFileSync(mark, 'utf8') === lock) return;
  // Only what this command installed is known to be whole; a tree that somebody else made is taken if npm finds it so.
  const whole =
    existsSync(join(root, 'node_modules', '.package-lock.json')) &&
    spawnSync('npm', ['ls', '--all', '--silent'], { cwd: root, stdio: 'ignore' }).status === 0;
  if (!whole) {
    say('Installing npm packages from the lock file …');
    const ran = spawnSync('npm', ['ci', '--no-audit', '--no-fund', '--loglevel=error'], {
      cwd: root,
      stdio: ['ignore', 'ignore', 'inherit'],
    });
    if (ran.status !== 0) {
      say('npm could not install the packages; its words stand above. Nothing was started.');
      process.exit(1);
    }
  }
  writeFileSync(mark, lock);
}

/** Refuses a Node.js that the packages do not run on. */
export function ensureNode() {
  const [major, minor] = process.versions.node.split('.').map(Number);
  if (major === 20 && minor >= 19) return;
  say(`Plimsoll runs on Node.js 20.19 or a later 20; this is ${process.versions.node}.`);
  process.exit(1);
}
