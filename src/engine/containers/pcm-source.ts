/** Samples that lie uncompressed in a file, read from byte ranges in constant memory. */
import type { AudioFormat, Finding } from '../figures.ts';
import type { Layout } from '../layouts.ts';
import type { ByteSource, FrameWindow, SampleSource } from '../source.ts';
import type { Encoding } from './samples.ts';

/** What a header tells, and where the samples truly are. */
export interface PcmLayout {
  format: AudioFormat;
  layout: Layout;
  findings: Finding[];
  encoding: Encoding;
  /** First byte of the samples, and how many whole frames of them the file holds. */
  dataOffset: number;
  frames: number;
}

const blockBytes = 512 * 1024;

export class PcmSource implements SampleSource {
  readonly format: AudioFormat;
  readonly layout: Layout;
  readonly findings: Finding[];
  readonly secondsTotal: number;

  constructor(
    private readonly bytes: ByteSource,
    private readonly pcm: PcmLayout,
  ) {
    this.format = pcm.format;
    this.layout = pcm.layout;
    this.findings = [...pcm.findings];
    this.secondsTotal = pcm.frames / pcm.format.sampleRateHz;
  }

  get encoding(): Encoding {
    return this.pcm.encoding;
  }

  async *blocks(
    signal: AbortSignal,
    window: FrameWindow = { startFrame: 0, endFrame: null },
    into: readonly Uint8Array[] = [0, 1].map(() => new Uint8Array(blockBytes)),
  ) {
    const { encoding, dataOffset, frames, format } = this.pcm;
    const frameBytes = encoding.bytes * format.channels;
    // By fours, as the kernel takes them; the widest frame there is leaves room for many.
    const blockFrames = Math.floor(into[0].length / frameBytes) & ~3;
    const end = Math.min(frames, window.endFrame ?? frames);
    let turn = 0;
    const readFrom = (frame: number) =>
      this.bytes.read(
        dataOffset + frame * frameBytes,
        Math.min(blockFrames, end - frame) * frameBytes,
        into[turn++ % 2],
      );
    let frame = Math.max(0, window.startFrame);
    let next = frame < end ? readFrom(frame) : null;
    while (next) {
      signal.throwIfAborted();
      const bytes: Uint8Array = await next;
      const count = Math.floor(bytes.length / frameBytes);
      if (count === 0) throw new Error('The file became shorter while it was read.');
      frame += count;
      // The next block is on its way while this one is measured.
      next = frame < end ? readFrom(frame) : null;
      next?.catch(() => {});
      yield { bytes, frames: count };
    }
  }
}
