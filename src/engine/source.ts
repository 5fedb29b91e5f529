/** What the engine measures from: bytes in ranges, or samples in blocks. */
import type { AudioFormat, Finding } from './figures.ts';
import type { Layout } from './layouts.ts';

/** Bytes of a file, wherever they lie; `read` gives fewer only at the end. */
export interface ByteSource {
  readonly size: number;
  read(offset: number, length: number): Promise<Uint8Array>;
}

/** Samples of one programme, planar, full scale 1.0, every sample finite. */
export interface SampleSource {
  readonly format: AudioFormat;
  readonly layout: Layout;
  /** Findings of the header; those of the samples are added while the blocks are read. */
  readonly findings: Finding[];
  /** Seconds of programme expected; `null` where nothing tells. */
  readonly secondsTotal: number | null;
  /** Blocks in order; the arrays are reused, so take what you need before asking for the next. */
  blocks(signal: AbortSignal): AsyncIterable<{ planar: Float64Array[]; count: number }>;
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
  | 'decoder-failed'
  | 'decoder-too-slow';
