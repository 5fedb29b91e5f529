/** The chunked files of the IFF family: an id of four letters, a 32-bit size, the body, padded to an even length. */
import type { ByteSource } from '../source.ts';

export interface Chunk {
  id: string;
  /** First byte of the body, and the size that the header (or ds64) tells. */
  offset: number;
  size: number;
}

/** Enough for any honest file; a header that goes on for ever ends here. */
const mostChunks = 10_000;

export const fourCc = (bytes: Uint8Array, offset: number): string =>
  String.fromCharCode(...bytes.subarray(offset, offset + 4));

export const isId = (id: string): boolean => /^[\x20-\x7e]{4}$/.test(id);

/** Walks the chunks from `start`. A missing pad byte after an odd chunk is forgiven where an id stands in its place. */
export async function* chunksOf(
  source: ByteSource,
  start: number,
  littleEndian: boolean,
  sizeOf: (id: string, size32: number) => number = (_, size) => size,
): AsyncGenerator<Chunk> {
  let at = start;
  for (let n = 0; n < mostChunks && at + 8 <= source.size; n++) {
    const head = await source.read(at, 9);
    if (head.length < 8) return;
    const id = fourCc(head, 0);
    const size = sizeOf(id, new DataView(head.buffer, head.byteOffset).getUint32(4, littleEndian));
    yield { id, offset: at + 8, size };
    const end = at + 8 + size;
    const unpadded = size % 2 === 1 && isId(fourCc(await source.read(end, 4), 0));
    const padded = size % 2 === 1 && isId(fourCc(await source.read(end + 1, 4), 0));
    at = end + (size % 2 === 1 && !(unpadded && !padded) ? 1 : 0);
  }
}
