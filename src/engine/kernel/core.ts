/**
 * The per-sample work of one presentation, done by two twins that agree to the last bit: the WebAssembly kernel, and a
 * plain scalar one that says the same without any haste and serves as its oracle.
 */
import type { Encoding } from '../containers/samples.ts';
import type { Interpolator } from '../interpolator.ts';
import type { Planar, Run, Step } from '../steps.ts';

export interface CoreOptions {
  sampleRateHz: number;
  /** Of the interleaved frames that come in, and how many audio channels one has. */
  encoding: Encoding;
  frameChannels: number;
  /** Audio channels of a frame that are measured, one lane each; the pair comes first where there is one. */
  audioChannels: readonly number[];
  /** Whether lanes 0 and 1 are left and right, whose product is wanted. */
  pair: boolean;
  /** Two more lanes, mixed of the measured ones: for each side one factor per audio channel. Their peaks stay out of the steps'. */
  downmix: readonly [left: readonly number[], right: readonly number[]] | null;
  interpolator: Interpolator;
}

/** A step as a core gives it, by lane. */
export interface CoreStep extends Step {
  /** Largest true peak of the measured lanes, linear; up to the floor the sample peak stands in. */
  truePeak: number;
}

/** Takes what a core finds, in order. A flat top comes with its value, since the peak of the whole is known at the end only. */
export interface CoreSink {
  step(step: CoreStep): void;
  run(run: Run, value: number): void;
  samples(planar: Planar, count: number, first: number): void;
}

export interface LaneTotals {
  /** Linear. */
  samplePeak: number;
  truePeak: number;
  /** Place of the true peak in samples from the start, fractions included. */
  truePeakAt: number;
  /** Sum of all samples. */
  sum: number;
}

export interface CoreTotals {
  samples: number;
  lanes: LaneTotals[];
  /** Samples that were not finite, or beyond any level, and counted as silence; place of the first. */
  wildCount: number;
  wildFirst: number;
  /** All integer samples or-ed, left-justified in 32 bits: its lowest set bit tells the depth in use. 0 for float. */
  usedBits: number;
  /** True peak of the last step where it is not full; `null` where all are. */
  tailTruePeak: number | null;
}

export interface Core {
  /** Memory that a source may read into: frames that lie there need no copying. */
  readonly blocks?: readonly Uint8Array[];
  /** Takes whole frames. Any split of a programme gives the same to the last bit. */
  process(bytes: Uint8Array, frames: number): void;
  /** Ends the programme. */
  finish(): CoreTotals;
}

/** +180 dBFS: a float beyond it is no sound, and counts as silence with those that are not numbers; no sum of the rest overflows. */
export const loudestSample = 1e9;

/** -12 dBTP: up to it the series holds sample peaks, since no limit of the trade lies there. */
export const seriesFloor = Math.fround(10 ** (-12 / 20));
/** A run of equal samples at full scale, and one at the audio channel's own peak (common practice, no source). */
export const fullScaleRun = 3;
export const flatTopRun = 5;
/** Shortest run of zeros that is told. */
export const zeroRunSeconds = 0.002;

/** Level from which a sample counts as full scale: an integer's largest code, 1.0 of a float. */
export const fullScaleOf = ({ kind, bytes }: Encoding): number =>
  kind === 'float' ? 1 : 1 - 2 ** (1 - 8 * bytes);

/** First sample of a step: rounded multiples, so that a rate of 22.05 kHz gathers no error. */
export const stepBoundary = (step: number, stepSamples: number): number =>
  Math.floor(step * stepSamples + 0.5);

/** Samples that float32 does not hold exactly. */
export const isWide = ({ kind, bytes }: Encoding): boolean => (kind === 'float' ? bytes === 8 : bytes === 4);
