/** Measures a file wherever its bytes lie: natively from byte ranges, or staged on scratch disk and decoded. */
import { mkdtemp, open, rm } from 'node:fs/promises';
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
  const [{ DecodedSource }, { probe }, { stage }] = await Promise.all([
    import('./decoded-source.ts'),
    import('./probe.ts'),
    import('./staging.ts'),
  ]);
  const signal = options.signal ?? neverAborted;
  const folder = await mkdtemp(join(scratchDir, 'plimsoll-'));
  try {
    const local = path === null ? join(folder, 'input') : resolve(path);
    if (path === null) await stage(bytes, local, signal);
    const probed = await probe(local, signal, options.plan?.stream);
    return await measure(new DecodedSource(local, probed, folder), options);
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
