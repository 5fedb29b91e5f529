import type { ByteSource } from '../../engine/source.ts';

/** From this length on a read is taken for the beginning of reading through. */
const throughBytes = 256 * 1024;

interface Through {
  /** Where in the file the next byte of the stream lies. */
  at: number;
  reader: ReadableStreamDefaultReader<Uint8Array>;
  /** What the stream gave and nobody has taken. */
  rest: Uint8Array;
}

/**
 * Bytes of a file of the browser. What is read through in order comes from one stream, which a browser fills ahead and
 * which costs a third of asking slice by slice; single places are sliced. Reads follow one another, whoever asks.
 * Rejects with the browser's own errors.
 */
export function fileBytes(file: Blob): ByteSource {
  let through: Through | null = null;
  let last: Promise<unknown> = Promise.resolve();

  const readThrough = async (stream: Through, into: Uint8Array): Promise<Uint8Array> => {
    let filled = 0;
    while (filled < into.length) {
      if (stream.rest.length === 0) {
        const { done, value } = await stream.reader.read();
        if (done) break;
        stream.rest = value;
        continue;
      }
      const taken = stream.rest.subarray(0, into.length - filled);
      into.set(taken, filled);
      filled += taken.length;
      stream.rest = stream.rest.subarray(taken.length);
    }
    stream.at += filled;
    return into.subarray(0, filled);
  };

  const read = async (offset: number, length: number, into?: Uint8Array): Promise<Uint8Array> => {
    if (through?.at !== offset) {
      if (length < throughBytes)
        return new Uint8Array(await file.slice(offset, offset + length).arrayBuffer());
      await through?.reader.cancel();
      through = { at: offset, reader: file.slice(offset).stream().getReader(), rest: new Uint8Array(0) };
    }
    const room = Math.max(0, Math.min(length, file.size - offset));
    return readThrough(through, into ? into.subarray(0, room) : new Uint8Array(room));
  };

  return {
    size: file.size,
    read(offset, length, into) {
      const turn = last.then(() => read(offset, length, into));
      last = turn.catch(() => {});
      return turn;
    },
  };
}
