import { mkdir, mkdtemp, readdir, rm, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { spawnSync } from 'node:child_process';
import { afterAll, beforeAll, expect, it, vi } from 'vitest';
import {
  makeScratch,
  removeScratch,
  removeScratchOfTheDead,
} from '../../../src/server/queue/measuring-scratch.ts';

let folder: string;
vi.mock('../../../src/server/config.ts', () => ({ config: () => ({ SCRATCH_DIR: folder }) }));
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), 'plimsoll-test-'));
});
afterAll(() => rm(folder, { recursive: true }));

it('takes away what killed measuring processes left, and nothing else', async () => {
  const dead = spawnSync(process.execPath, ['-e', '']).pid;
  await mkdir(join(folder, `measuring-${dead}`));
  await writeFile(join(folder, `measuring-${dead}`, 'input'), 'half a file');
  await mkdir(join(folder, 'somebody-elses'));
  const own = await makeScratch();
  expect(await removeScratchOfTheDead()).toBe(1);
  expect((await readdir(folder)).sort()).toEqual([`measuring-${process.pid}`, 'somebody-elses']);
  expect(own).toBe(join(folder, `measuring-${process.pid}`));
  await removeScratch(process.pid);
  await removeScratch(process.pid);
  expect(await readdir(folder)).toEqual(['somebody-elses']);
});
