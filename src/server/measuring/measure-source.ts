/** Measures a file wherever its bytes lie: natively from byte ranges, or staged on scratch disk and decoded. */
import { mkdtemp, open, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { openNative } from '../../engine/containers/open.ts';
import { measure, type MeasureOptions } from '../../engine/measure.ts';
import type { ByteSource } from '../../engine/source.ts';
import { DecodedSource } from './decoded-source.ts';
import { probe } from './probe.ts';

export { UnreadableError } from '../../engine/source.ts';

const neverAborted = new AbortController().signal;

/** Chooses by the first bytes. `path` where the bytes are a local file already: then nothing is staged. */
async function measureFrom(
  bytes: ByteSource,
  path: string | null,
  scratchDir: string,
  options: MeasureOptions,
) {
  const native = await openNative(bytes);
  if (native) return measure(native, options);
  const signal = options.signal ?? neverAborted;
  if (path !== null) return measure(new DecodedSource(path, await probe(path, signal)), options);
  const folder = await mkdtemp(join(scratchDir, 'plimsoll-'));
  try {
    const staged = join(folder, 'input');
    await stage(bytes, staged, signal);
    return await measure(new DecodedSource(staged, await probe(staged, signal)), options);
  } finally {
    await rm(folder, { recursive: true, force: true });
  }
}

async function stage(bytes: ByteSource, path: string, signal: AbortSignal): Promise<void> {
  const file = await open(path, 'wx', 0o600);
  try {
    for (let at = 0; at < bytes.size;) {
      signal.throwIfAborted();
      const piece = await bytes.read(at, 4 * 1024 ** 2);
      if (piece.length === 0) throw new Error(`The source ended at ${at} of ${bytes.size} bytes`);
      await file.writeFile(piece);
      at += piece.length;
    }
  } finally {
    await file.close();
  }
}

/** Measures bytes from storage. `fileName` is for people only. Throws UnreadableError or the surroundings' errors. */
export const measureSource = (
  bytes: ByteSource,
  _fileName: string,
  options: MeasureOptions & { scratchDir?: string } = {},
) => measureFrom(bytes, null, options.scratchDir ?? tmpdir(), options);

/** Measures a local file. Throws UnreadableError or the file system's errors. */
export async function measureFile(path: string, options: MeasureOptions = {}) {
  const file = await open(path, 'r');
  try {
    const { size } = await file.stat();
    const bytes: ByteSource = {
      size,
      async read(offset, length, into) {
        const wanted = Math.max(0, Math.min(length, size - offset));
        const out = into && into.length >= wanted ? into : new Uint8Array(wanted);
        const { bytesRead } = await file.read(out, 0, wanted, offset);
        return out.subarray(0, bytesRead);
      },
    };
    return await measureFrom(bytes, path, tmpdir(), options);
  } finally {
    await file.close();
  }
}
