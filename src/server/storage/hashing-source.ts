/** Takes the SHA-256 of a source while somebody else reads it, so that what was measured is what was hashed. */
import { createHash } from 'node:crypto';
import type { ByteSource } from '../../engine/source.ts';

const catchUpBytes = 1024 ** 2;

/**
 * Passes reads through and hashes each byte the first time it comes in order; `sha256()` reads whatever was passed over.
 * A front-to-back reader costs no second pass; any other order ends in the same digest.
 */
export class HashingSource implements ByteSource {
  readonly size: number;
  readonly #hash = createHash('sha256');
  #hashedUpTo = 0;

  constructor(private readonly source: ByteSource) {
    this.size = source.size;
  }

  async read(offset: number, length: number, into?: Uint8Array): Promise<Uint8Array> {
    const bytes = await this.source.read(offset, length, into);
    this.#take(offset, bytes);
    return bytes;
  }

  #take(offset: number, bytes: Uint8Array): void {
    const end = offset + bytes.length;
    if (offset > this.#hashedUpTo || end <= this.#hashedUpTo) return;
    this.#hash.update(bytes.subarray(this.#hashedUpTo - offset));
    this.#hashedUpTo = end;
  }

  /** The digest of all bytes, in lower-case hexadecimals. May be asked once. */
  async sha256(): Promise<string> {
    while (this.#hashedUpTo < this.size) {
      const before = this.#hashedUpTo;
      this.#take(before, await this.source.read(before, catchUpBytes));
      if (this.#hashedUpTo === before) throw new Error(`The source ended at ${before} of ${this.size} bytes`);
    }
    return this.#hash.digest('hex');
  }
}

/** One hash for a set of files: of their own hashes in order, a line each. `null` where one of them is not known. */
export function hashOfParts(hashes: readonly (string | null)[]): string | null {
  if (hashes.includes(null)) return null;
  return createHash('sha256').update(hashes.join('\n')).digest('hex');
}
