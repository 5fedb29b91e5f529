/** Web Worker: reads a file once, in the stream's own pieces, and answers with its SHA-256 in hexadecimal. */
import { createSHA256 } from 'hash-wasm';

export type HashAnswer = { bytes: number } | { sha256: string } | { error: string };

const answer = (message: HashAnswer) => postMessage(message);

async function hash(file: Blob): Promise<void> {
  const sum = await createSHA256();
  const reader = file.stream().getReader();
  let bytes = 0;
  for (let piece = await reader.read(); !piece.done; piece = await reader.read()) {
    sum.update(piece.value);
    bytes += piece.value.byteLength;
    answer({ bytes });
  }
  answer({ sha256: sum.digest('hex') });
}

addEventListener('message', ({ data }: MessageEvent<unknown>) => {
  if (!(data instanceof Blob)) return;
  hash(data).catch((error: unknown) =>
    answer({ error: error instanceof Error ? error.message : String(error) }),
  );
});
