/** Puts a file on scratch disk, where a decoder can seek in it, and opens it for decoding. */
import { open, statfs } from 'node:fs/promises';
import { dirname } from 'node:path';
import type { ByteSource } from '../../engine/source.ts';
import { readHints } from './container-hints.ts';
import { DecodedSource, type DecodeTerms } from './decoded-source.ts';
import { handOver } from './jail.ts';
import { probe } from './probe.ts';

/** A name of our own: nothing of the sender's reaches a command line. */
export const stagedName = 'input';

const pieceBytes = 4 * 1024 ** 2;
/** What is left free for everybody else. */
const spareBytes = 256 * 1024 ** 2;

/** The system's own error for a full disk, told before anything is written. */
class NoRoomError extends Error {
  override name = 'NoRoomError';
  readonly code = 'ENOSPC';
  readonly syscall = 'statfs';
}

/** Copies the whole source to `path`. Throws NoRoomError, the source's errors, the file system's, or the signal's reason. */
export async function stage(bytes: ByteSource, path: string, signal: AbortSignal): Promise<void> {
  const { bavail, bsize } = await statfs(dirname(path));
  const free = bavail * bsize;
  if (free < bytes.size + spareBytes)
    throw new NoRoomError(
      `Decoding needs ${megabytes(bytes.size + spareBytes)} MB of scratch space, ${megabytes(free)} MB are free. The file waits until there is room.`,
    );
  const file = await open(path, 'wx', 0o600);
  try {
    for (let at = 0; at < bytes.size;) {
      signal.throwIfAborted();
      const piece = await bytes.read(at, pieceBytes);
      if (piece.length === 0) throw new Error(`The source ended at ${at} of ${bytes.size} bytes`);
      await file.writeFile(piece);
      at += piece.length;
    }
  } finally {
    await file.close();
  }
  await Promise.all([handOver(dirname(path)), handOver(path)]);
}

const megabytes = (bytes: number) => Math.ceil(bytes / 1e6);

/** `path`: absolute, or within the private folder. Throws UnreadableError or the surroundings' errors. */
export async function openDecoded(
  path: string,
  bytes: ByteSource,
  terms: DecodeTerms & { signal: AbortSignal; wanted?: number },
): Promise<DecodedSource> {
  const [probed, hints] = await Promise.all([probe(path, terms), readHints(bytes)]);
  return new DecodedSource(path, probed, hints, terms);
}
