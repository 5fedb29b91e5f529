/** What the bench's queue asks of whoever measures. */
import type { Measured } from '@/engine/measure.ts';

export interface BenchResult {
  measured: Measured;
  /** Of work, for the rate. */
  seconds: number;
  /** Where the browser decoded the file: what that means for the figures. `null`: read by the engine itself. */
  preview: string | null;
}

export interface CrewOptions {
  /** Called before the first progress where the file must be decoded as a whole. */
  onDecoding: () => void;
  onProgress: (secondsDone: number, secondsTotal: number | null) => void;
  signal: AbortSignal;
}

/** `size`: files at once. `measure` rejects with a BenchProblem, or with the signal's reason. */
export interface Crew {
  readonly size: number;
  measure(file: File, options: CrewOptions): Promise<BenchResult>;
}

/** Why a file has no figures, in a sentence for the person. 'file': nothing but another file helps. */
export class BenchProblem extends Error {
  override name = 'BenchProblem';
  constructor(
    message: string,
    readonly fault: 'file' | 'surroundings',
  ) {
    super(message);
  }
}
