import type { Encoding } from '../../engine/containers/samples.ts';
import type { AudioFormat, Finding } from '../../engine/figures.ts';
import { layoutOfCount, type Layout } from '../../engine/layouts.ts';
import type { FrameWindow, SampleSource } from '../../engine/source.ts';

/** What a browser's decoder gave: one array of samples per audio channel. */
export interface DecodedAudio {
  container: string;
  codec: string;
  bitDepth: number | null;
  sampleRateHz: number;
  planar: Float32Array<ArrayBuffer>[];
}

const blockFrames = 65_536;

/** Samples that lie decoded in memory, as the engine takes them. Their order is the Web Audio API's: L R C LFE Ls Rs. */
export class DecodedSource implements SampleSource {
  readonly format: AudioFormat;
  readonly layout: Layout;
  readonly findings: Finding[] = [];
  readonly secondsTotal: number;
  readonly encoding: Encoding = { kind: 'float', bytes: 4, littleEndian: true };
  private readonly frames: number;

  constructor(private readonly decoded: DecodedAudio) {
    const { planar, sampleRateHz, container, codec, bitDepth } = decoded;
    this.frames = planar[0]?.length ?? 0;
    this.secondsTotal = this.frames / sampleRateHz;
    this.layout = layoutOfCount(planar.length);
    this.format = {
      container,
      codec,
      sampleRateHz,
      bitDepth,
      channels: planar.length,
      layout: this.layout.name,
      durationSeconds: this.secondsTotal,
    };
  }

  async *blocks(signal: AbortSignal, window: FrameWindow = { startFrame: 0, endFrame: null }) {
    const { planar } = this.decoded;
    const count = planar.length;
    // Written through a view, for the engine is told one byte order whatever this machine's is.
    const bytes = new Uint8Array(blockFrames * count * 4);
    const view = new DataView(bytes.buffer);
    const end = Math.min(this.frames, window.endFrame ?? this.frames);
    for (let frame = Math.max(0, window.startFrame); frame < end; frame += blockFrames) {
      signal.throwIfAborted();
      const frames = Math.min(blockFrames, end - frame);
      for (let channel = 0; channel < count; channel++) {
        const samples = planar[channel];
        for (let i = 0; i < frames; i++) view.setFloat32((i * count + channel) * 4, samples[frame + i], true);
      }
      yield { bytes: bytes.subarray(0, frames * count * 4), frames };
    }
  }
}
