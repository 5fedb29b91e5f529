/** Measures a file wherever its bytes lie: natively from byte ranges, or staged on scratch disk and decoded. */
import { mkdtemp, open, rm, type FileHandle } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { openNative } from '../../engine/containers/open.ts';
import { measure, type MeasureOptions } from '../../engine/measure.ts';
import type { ByteSource } from '../../engine/source.ts';

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
  // Only here: what is read natively need not wait for the decoder's modules.
  const { openDecoded, stagedName, stage } = await import('./staging.ts');
  const signal = options.signal ?? neverAborted;
  const folder = await mkdtemp(join(scratchDir, 'plimsoll-'));
  try {
    const terms = { folder, staged: path === null, signal, wanted: options.plan?.stream };
    if (path !== null) return await measure(await openDecoded(resolve(path), bytes, terms), options);
    const staged = join(folder, stagedName);
    await stage(bytes, staged, signal);
    return await withFile(staged, async (local) =>
      measure(await openDecoded(stagedName, local, terms), options),
    );
  } finally {
    await rm(folder, { recursive: true, force: true });
  }
}

/** Measures bytes from storage. `fileName` is for people only. Throws UnreadableError or the surroundings' errors. */
export const measureSource = (
  bytes: ByteSource,
  _fileName: string,
  options: MeasureOptions & { scratchDir?: string } = {},
) => measureFrom(bytes, null, options.scratchDir ?? tmpdir(), options);

/** Measures a local file. Throws UnreadableError or the file system's errors. */
export const measureFile = (path: string, options: MeasureOptions = {}) =>
  withFile(path, (bytes) => measureFrom(bytes, path, tmpdir(), options));

async function withFile<T>(path: string, use: (bytes: ByteSource) => Promise<T>): Promise<T> {
  const file = await open(path, 'r');
  try {
    return await use(await rangesOf(file));
  } finally {
    await file.close();
  }
}

async function rangesOf(file: FileHandle): Promise<ByteSource> {
  const { size } = await file.stat();
  return {
    size,
    async read(offset, length, into) {
      const wanted = Math.max(0, Math.min(length, size - offset));
      const out = into && into.length >= wanted ? into : new Uint8Array(wanted);
      const { bytesRead } = await file.read(out, 0, wanted, offset);
      return out.subarray(0, bytesRead);
    },
  };
}
