/** What the engine measures from: bytes in ranges, or samples in blocks. */
import type { Encoding } from './containers/samples.ts';
import type { AudioFormat, Finding } from './figures.ts';
import type { Layout } from './layouts.ts';

/** Bytes of a file, wherever they lie; `read` gives fewer only at the end, and may use `into` instead of memory of its own. */
export interface ByteSource {
  readonly size: number;
  read(offset: number, length: number, into?: Uint8Array): Promise<Uint8Array>;
}

/** Frames of a file that are wanted; `null`: to its end. */
export interface FrameWindow {
  startFrame: number;
  endFrame: number | null;
}

/** Frames of one programme, as they lie in the file or come from a decoder. */
export interface SampleSource {
  readonly format: AudioFormat;
  readonly layout: Layout;
  /** Findings of the header; those of decoding are added while the blocks are read. */
  readonly findings: Finding[];
  /** Seconds of programme expected; `null` where nothing tells. */
  readonly secondsTotal: number | null;
  /** Of the frames: all audio channels of the format, interleaved. */
  readonly encoding: Encoding;
  /**
   * Whole frames in order, those of the window only; the bytes are reused, so take what you need before asking for more.
   * `into`: two pieces of memory that it may use in turn.
   */
  blocks(
    signal: AbortSignal,
    window?: FrameWindow,
    into?: readonly Uint8Array[],
  ): AsyncIterable<{ bytes: Uint8Array; frames: number }>;
}

/** The file cannot be measured: a stable code, and a sentence that says what was found. */
export class UnreadableError extends Error {
  constructor(
    readonly code: UnreadableCode,
    message: string,
  ) {
    super(message);
    this.name = 'UnreadableError';
  }
}

export type UnreadableCode =
  | 'empty'
  | 'not-audio'
  | 'header-broken'
  | 'codec-unknown'
  | 'no-samples'
  | 'no-such-stream'
  | 'decoder-failed'
  | 'decoder-too-slow';
