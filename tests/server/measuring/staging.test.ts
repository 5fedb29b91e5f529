import { execFileSync } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import type { ByteSource } from '../../../src/engine/source.ts';
import { findJail } from '../../../src/server/measuring/jail.ts';
import { measureFile, measureSource } from '../../../src/server/measuring/measure-source.ts';
import { stage } from '../../../src/server/measuring/staging.ts';

const folder = mkdtempSync(join(tmpdir(), 'plimsoll-staging-'));
const scratchDir = join(folder, 'scratch');
const signal = new AbortController().signal;
let mov: Buffer;
beforeAll(() => {
  execFileSync('mkdir', ['-m', '700', scratchDir]);
  execFileSync(
    'ffmpeg',
    ['-v', 'error', '-f', 'lavfi', '-i', 'sine=frequency=997:duration=3:sample_rate=48000', 'a.mov'],
    { cwd: folder },
  );
  mov = readFileSync(join(folder, 'a.mov'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const stored = (bytes: Buffer, read = (_offset: number) => {}): ByteSource => ({
  size: bytes.length,
  read: (offset, length) => {
    read(offset);
    return Promise.resolve(bytes.subarray(offset, offset + length));
  },
});

describe('staging', () => {
  it('gives what is measured from storage the figures of the local file, and leaves nothing behind', async () => {
    const [local] = await measureFile(join(folder, 'a.mov'));
    const [own] = await measureSource(stored(mov), 'anything; rm -rf .mov', { scratchDir });
    expect(own.measurement).toEqual(local.measurement);
    expect(readdirSync(scratchDir)).toEqual([]);
  });

  it('leaves nothing behind where decoding or storage fails', async () => {
    await expect(
      measureSource(stored(mov.subarray(0, mov.length >> 1)), 'cut', { scratchDir }),
    ).rejects.toMatchObject({ name: 'UnreadableError' });
    const broken = stored(mov, (offset) => {
      if (offset > 0) throw new Error('storage went away');
    });
    const huge: ByteSource = { ...broken, size: 5 * 1024 ** 2 };
    await expect(measureSource(huge, 'away', { scratchDir })).rejects.toThrow(/storage went away|ended at/);
    expect(readdirSync(scratchDir)).toEqual([]);
  });

  it('makes the file private, to the decoder if that is somebody else', async () => {
    const room = mkdtempSync(join(scratchDir, 'room-'));
    const path = join(room, 'input');
    await stage(stored(mov), path, signal);
    const owner = (await findJail()).asNobody ? 65_534 : process.getuid?.();
    for (const one of [room, path]) {
      expect(statSync(one).uid).toBe(owner);
      expect(statSync(one).mode & 0o077).toBe(0);
    }
    expect(readFileSync(path).equals(mov)).toBe(true);
    rmSync(room, { recursive: true });
  });

  it('looks for room before it writes, and says what is missing', async () => {
    const huge: ByteSource = {
      size: 2 ** 50,
      read: () => Promise.reject(new Error('Nothing is read where there is no room.')),
    };
    const path = join(scratchDir, 'input');
    await expect(stage(huge, path, signal)).rejects.toMatchObject({
      // What the worker takes for trouble of the surroundings, to be tried again.
      syscall: 'statfs',
      code: 'ENOSPC',
      message: expect.stringMatching(
        /^Decoding needs \d+ MB of scratch space, \d+ MB are free\. The file waits until there is room\.$/,
      ) as string,
    });
    expect(existsSync(path)).toBe(false);
  });
});
