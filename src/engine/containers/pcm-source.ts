/** Samples that lie uncompressed in a file, read from byte ranges in constant memory. */
import type { AudioFormat, Finding } from '../figures.ts';
import type { Layout } from '../layouts.ts';
import type { ByteSource, SampleSource } from '../source.ts';
import { deinterleave, type Encoding } from './samples.ts';

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

const blockBytes = 256 * 1024;

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

  async *blocks(signal: AbortSignal) {
    const { encoding, dataOffset, frames, format } = this.pcm;
    const frameBytes = encoding.bytes * format.channels;
    const blockFrames = Math.max(1, Math.floor(blockBytes / frameBytes));
    const planar = Array.from({ length: format.channels }, () => new Float64Array(blockFrames));
    const wild = new WildSamples(format.sampleRateHz);
    for (let frame = 0; frame < frames;) {
      signal.throwIfAborted();
      const wanted = Math.min(blockFrames, frames - frame);
      const bytes = await this.bytes.read(dataOffset + frame * frameBytes, wanted * frameBytes);
      const count = Math.floor(bytes.length / frameBytes);
      if (count === 0) throw new Error('The file became shorter while it was read.');
      deinterleave(bytes, count, encoding, planar, wild.from(frame));
      yield { planar, count };
      frame += count;
    }
    wild.tell(this.findings);
  }
}

/** Counts samples that are not numbers, and tells them once. */
export class WildSamples {
  #count = 0;
  #firstFrame = Infinity;
  constructor(private readonly sampleRateHz: number) {}

  /** Takes the wild samples of a block that begins at this frame. */
  from(blockFrame: number): (frame: number) => void {
    return (frame) => {
      this.#count++;
      this.#firstFrame = Math.min(this.#firstFrame, blockFrame + frame);
    };
  }

  tell(findings: Finding[]): void {
    if (this.#count === 0) return;
    findings.push({
      code: 'not-a-number',
      message: `${this.#count} ${this.#count === 1 ? 'sample is' : 'samples are'} not a number or infinite; measured as silence.`,
      atSeconds: this.#firstFrame / this.sampleRateHz,
    });
  }
}
