import type { ByteSource } from '@/engine/source.ts';

/** Bytes of a file of the browser, read from it only where they are asked for. Rejects with the browser's own errors. */
export const fileBytes = (file: Blob): ByteSource => ({
  size: file.size,
  read: async (offset, length) => new Uint8Array(await file.slice(offset, offset + length).arrayBuffer()),
});
