/**
 * A process that reads a file and converts its samples as the meter does, by the same reader and the kernel's own conversion,
 * and measures nothing: the floor below which no measurement of that file comes.
 */
import { open } from 'node:fs/promises';
import { openNative } from '../../src/engine/containers/open.ts';
import { kernelBinary } from '../../src/engine/kernel/binary.ts';
import type { SampleSource } from '../../src/engine/source.ts';

/** What is used of the kernel's exports; pointers are byte addresses in `memory`. */
interface Conversion {
  memory: WebAssembly.Memory;
  allocate(
    rate: number,
    lanes: number,
    measured: number,
    frameBytes: number,
    wide: boolean,
    chunk: number,
  ): void;
  configureSamples(form: number, bytes: number, littleEndian: boolean, unsigned: boolean): void;
  inputPointer(): number;
  offsetsPointer(): number;
  /** Writes the first frames of the input to the rows, always to the same place. */
  convert(frames: number): void;
}

const chunkFrames = 4096;

function converterOf({ format, encoding }: SampleSource) {
  if (encoding.kind !== 'integer' || encoding.bytes > 3)
    throw new Error('The bench converts files of 16 and 24 bit.');
  const module = new WebAssembly.Module(Buffer.from(kernelBinary, 'base64'));
  const abort = () => {
    throw new Error('The kernel stopped.');
  };
  // The exports' types are the assembly's.
  const k = new WebAssembly.Instance(module, { env: { abort } }).exports as unknown as Conversion;
  const { channels } = format;
  const frameBytes = encoding.bytes * channels;
  k.allocate(format.sampleRateHz, channels, channels, frameBytes, false, chunkFrames);
  k.configureSamples(0, encoding.bytes, encoding.littleEndian, false);
  const { buffer } = k.memory;
  const offsets = Array.from({ length: channels }, (_, c) => c * encoding.bytes);
  new Int32Array(buffer, k.offsetsPointer(), channels).set(offsets);
  const input = new Uint8Array(buffer, k.inputPointer(), (chunkFrames + 4) * frameBytes);
  return (bytes: Uint8Array, frames: number) => {
    for (let done = 0; done < frames; done += chunkFrames) {
      const count = Math.min(chunkFrames, frames - done);
      input.set(bytes.subarray(done * frameBytes, (done + count) * frameBytes));
      k.convert(count);
    }
  };
}

const file = await open(process.argv[2], 'r');
const { size } = await file.stat();
const source = await openNative({
  size,
  async read(offset, length, into) {
    const out = into ?? new Uint8Array(length);
    const { bytesRead } = await file.read(out, 0, Math.min(length, size - offset), offset);
    return out.subarray(0, bytesRead);
  },
});
if (!source) throw new Error('The bench converts WAV only.');
const convert = converterOf(source);
let seconds = 0;
for await (const { bytes, frames } of source.blocks(new AbortController().signal)) {
  convert(bytes, frames);
  seconds += frames / source.format.sampleRateHz;
}
await file.close();
console.log(JSON.stringify({ seconds }));
