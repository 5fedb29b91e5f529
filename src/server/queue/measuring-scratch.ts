/** Scratch folders of measuring processes, named by process, so that what a killed one left behind can be taken away. */
import { readFileSync } from 'node:fs';
import { mkdir, readdir, rm } from 'node:fs/promises';
import { join } from 'node:path';
import { config } from '../config.ts';

const folderOf = (pid: number) => join(config().SCRATCH_DIR, `measuring-${pid}`);

/** Makes the folder of this process and gives its path. Throws the file system's error. */
export async function makeScratch(): Promise<string> {
  const folder = folderOf(process.pid);
  await mkdir(folder, { recursive: true, mode: 0o700 });
  return folder;
}

/** Removes the folder of a process that has ended; nothing happens where there is none. */
export const removeScratch = (pid: number): Promise<void> =>
  rm(folderOf(pid), { recursive: true, force: true });

function isAlive(pid: number): boolean {
  try {
    process.kill(pid, 0);
  } catch (error) {
    return error instanceof Error && 'code' in error && error.code === 'EPERM';
  }
  return !isZombie(pid);
}

/** Ended, but nobody has looked after it: where a container's first process does not, it stays so. */
function isZombie(pid: number): boolean {
  try {
    // proc(5): the state stands behind the name, which ends with the last bracket.
    return /\) Z [^)]*$/.test(readFileSync(`/proc/${pid}/stat`, 'utf8'));
  } catch {
    // No such table on this system, or it has gone by now: what kill() said stands.
    return false;
  }
}

/** At a worker's start: removes what processes that were killed with their worker left. Returns how many folders. */
export async function removeScratchOfTheDead(): Promise<number> {
  await mkdir(config().SCRATCH_DIR, { recursive: true, mode: 0o700 });
  const names = await readdir(config().SCRATCH_DIR);
  const dead = names
    .map((name) => Number(/^measuring-(\d+)$/.exec(name)?.[1] ?? NaN))
    .filter((pid) => Number.isInteger(pid) && !isAlive(pid));
  await Promise.all(dead.map(removeScratch));
  return dead.length;
}
