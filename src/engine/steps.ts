/** What the per-sample work hands on: steps of 10 ms, runs of samples, and the samples themselves. */

/** One full step of 10 ms. The arrays are reused; index: audio channel of the presentation. */
export interface Step {
  index: number;
  /** K-weighted mean square. */
  weighted: Float64Array;
  /** Plain mean square. */
  energy: Float64Array;
  /** Sample peak, linear. */
  peak: Float64Array;
  /** Mean of left times right; 0 where the presentation has no such pair. */
  leftRight: number;
}

/** A run of samples in one audio channel that has ended; start and length in samples of the programme. */
export interface Run {
  kind: 'zeros' | 'full-scale' | 'flat-top';
  audioChannel: number;
  start: number;
  length: number;
}

/** Asked only by whoever wants the samples: most go by unseen. */
export type Planar = () => readonly Float32Array[];

export interface StepObserver {
  step(step: Step): void;
  run(run: Run): void;
  /** Samples in order: `count` from the place `first` of the programme. `planar` gives them by audio channel, in arrays that are reused. */
  samples(planar: Planar, count: number, first: number): void;
}
