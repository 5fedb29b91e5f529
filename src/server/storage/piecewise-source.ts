/** An object as the engine reads it: byte ranges, in constant memory, the next piece fetched ahead. */
import type { ByteSource } from '../../engine/source.ts';

const pieceBytes = 4 * 1024 ** 2;
/** The piece in use, the one before it (reads straddle), the one fetched ahead, and one for a look at the end. */
const piecesKept = 4;

/** Reads through `fetchRange` in pieces of 4 MiB; at most five are in memory. Throws what `fetchRange` throws. */
export class PiecewiseSource implements ByteSource {
  readonly #pieces = new Map<number, Promise<Uint8Array>>();

  constructor(
    readonly size: number,
    private readonly fetchRange: (start: number, end: number) => Promise<Uint8Array>,
  ) {}

  async read(offset: number, length: number): Promise<Uint8Array> {
    const end = Math.min(this.size, offset + length);
    if (offset >= end) return new Uint8Array(0);
    const out = new Uint8Array(end - offset);
    for (let at = offset; at < end;) {
      const index = Math.floor(at / pieceBytes);
      const from = at - index * pieceBytes;
      const piece = await this.#piece(index);
      const part = piece.subarray(from, Math.min(piece.length, from + end - at));
      out.set(part, at - offset);
      at += part.length;
    }
    return out;
  }

  async #piece(index: number): Promise<Uint8Array> {
    const sequential = this.#pieces.has(index) || this.#pieces.has(index - 1) || index === 0;
    const piece = this.#ask(index);
    if (sequential && (index + 1) * pieceBytes < this.size) this.#ask(index + 1);
    return piece;
  }

  async #fetch(index: number): Promise<Uint8Array> {
    const start = index * pieceBytes;
    const end = Math.min(this.size, start + pieceBytes);
    const piece = await this.fetchRange(start, end);
    if (piece.length !== end - start)
      throw new Error(`${piece.length} bytes came where ${end - start} were asked for`);
    return piece;
  }

  #ask(index: number): Promise<Uint8Array> {
    let piece = this.#pieces.get(index);
    if (piece) this.#pieces.delete(index);
    piece ??= this.#fetch(index);
    // A failed piece is asked for anew by whoever needs it; fetched ahead, its failure is nobody's yet.
    piece.catch(() => this.#pieces.delete(index));
    this.#pieces.set(index, piece);
    for (const oldest of this.#pieces.keys()) {
      if (this.#pieces.size <= piecesKept) break;
      this.#pieces.delete(oldest);
    }
    return piece;
  }
}
