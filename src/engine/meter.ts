/**
 * The streaming core: planar samples in, figures out. No allocation per block, and any split of the input gives the same
 * figures to the last bit, since every sum runs over samples one by one.
 */
import type { Figures, MeasurementSeries } from './figures.ts';
import {
  integrated,
  loudnessRange,
  momentarySeconds,
  shortTermSeconds,
  slidingMaximum,
  stepsPerSecond,
} from './gating.ts';
import { kWeighting } from './k-weighting.ts';
import { delaySamples, phasesFor, taps } from './true-peak.ts';

export interface MeterOptions {
  sampleRateHz: number;
  /** One weight of BS.1770-5 per audio channel; 0 for LFE. */
  weights: readonly number[];
  /** False leaves the interpolator out: true peaks are then the sample peaks, and only loudness is to be used. */
  interpolate?: boolean;
}

/** One audio channel's state; the arrays are its growing series of steps. */
interface Lane {
  /** Filter memory: shelf x1 x2 y1 y2, then high-pass y1 y2 (its input is the shelf's output). */
  state: Float64Array;
  /** The last samples, newest last, so that the interpolator sees across blocks. */
  history: Float64Array;
  energies: GrowingFloats;
  energySum: number;
  samplePeak: number;
  truePeak: number;
  truePeakAt: number;
}

/** Samples that the interpolator takes at a time, behind the history of the ones before. */
const chunkSamples = 4096;

class GrowingFloats {
  values = new Float64Array(1 << 12);
  length = 0;
  /** Opens steps up to and including `index`. */
  reach(index: number): void {
    if (index < this.length) return;
    if (index >= this.values.length) {
      const bigger = new Float64Array(Math.max(index + 1, this.values.length * 2));
      bigger.set(this.values.subarray(0, this.length));
      this.values = bigger;
    }
    this.length = index + 1;
  }
  view(): Float64Array {
    return this.values.subarray(0, this.length);
  }
}

const decibels = (linear: number): number | null => (linear > 0 ? 20 * Math.log10(linear) : null);

/** Measures one presentation. `process` blocks of any length, then `result`; `reset` begins anew. */
export class Meter {
  readonly #options: MeterOptions;
  readonly #stepSamples: number;
  readonly #phases: readonly Float64Array[];
  readonly #shelf;
  readonly #highPass;
  readonly #work = new Float64Array(taps - 1 + chunkSamples);
  #lanes: Lane[] = [];
  #peaks = new GrowingFloats();
  #samples = 0;

  constructor(options: MeterOptions) {
    this.#options = options;
    this.#stepSamples = options.sampleRateHz / stepsPerSecond;
    this.#phases = options.interpolate === false ? [] : phasesFor(options.sampleRateHz);
    [this.#shelf, this.#highPass] = kWeighting(options.sampleRateHz);
    this.reset();
  }

  reset(): void {
    this.#samples = 0;
    this.#peaks = new GrowingFloats();
    this.#lanes = this.#options.weights.map(() => ({
      state: new Float64Array(6),
      history: new Float64Array(taps - 1),
      energies: new GrowingFloats(),
      energySum: 0,
      samplePeak: 0,
      truePeak: 0,
      truePeakAt: 0,
    }));
  }

  /** Samples of programme taken in so far, per audio channel. */
  get samples(): number {
    return this.#samples;
  }

  /** Takes the first `count` samples of each audio channel; full scale is 1.0 and every sample finite. */
  process(planar: readonly Float64Array[], count: number): void {
    for (let c = 0; c < this.#lanes.length; c++) {
      this.#weigh(this.#lanes[c], planar[c], count);
      this.#interpolate(this.#lanes[c], planar[c], count, this.#samples);
    }
    this.#samples += count;
  }

  /** First sample of a step: rounded multiples, so that a rate of 22.05 kHz gathers no error. */
  #boundary(step: number): number {
    return Math.round(step * this.#stepSamples);
  }

  #stepOf(sample: number): number {
    let step = Math.floor(sample / this.#stepSamples);
    if (this.#boundary(step + 1) <= sample) step++;
    else if (this.#boundary(step) > sample) step--;
    return step;
  }

  /** K-weighting and the energy of each full step of 10 ms. */
  #weigh(lane: Lane, samples: Float64Array, count: number): void {
    const { b0, b1, b2, a1, a2 } = this.#shelf;
    const { b0: g, a1: c1, a2: c2 } = this.#highPass;
    const { state } = lane;
    let [x1, x2, y1, y2, z1, z2] = state;
    let sum = lane.energySum;
    let step = lane.energies.length;
    let end = this.#boundary(step + 1) - this.#samples;
    let peak = lane.samplePeak;
    for (let i = 0; i < count; i++) {
      const x = samples[i];
      const y = b0 * x + b1 * x1 + b2 * x2 - a1 * y1 - a2 * y2;
      const z = g * (y - 2 * y1 + y2) - c1 * z1 - c2 * z2;
      x2 = x1;
      x1 = x;
      y2 = y1;
      y1 = y;
      z2 = z1;
      z1 = z;
      sum += z * z;
      const magnitude = x < 0 ? -x : x;
      if (magnitude > peak) peak = magnitude;
      if (i + 1 === end) {
        lane.energies.reach(step);
        lane.energies.values[step] = sum / this.#stepSamples;
        sum = 0;
        step++;
        end = this.#boundary(step + 1) - this.#samples;
      }
    }
    state[0] = x1;
    state[1] = x2;
    state[2] = y1;
    state[3] = y2;
    state[4] = z1;
    state[5] = z2;
    lane.energySum = sum;
    lane.samplePeak = peak;
  }

  /**
   * The largest of each sample and the points interpolated behind it, into the series and the lane's maximum. `at` is the
   * place of the first sample; what belongs before the programme's start counts for its first sample.
   */
  #interpolate(lane: Lane, samples: Float64Array, count: number, at: number, flushing = false): void {
    const last = flushing ? this.#samples - 1 : Infinity;
    const work = this.#work;
    const keep = taps - 1;
    for (let done = 0; done < count; done += chunkSamples) {
      const length = Math.min(chunkSamples, count - done);
      work.set(lane.history);
      work.set(samples.subarray(done, done + length), keep);
      this.#interpolateChunk(lane, length, at + done, last);
      lane.history.set(work.subarray(length, length + keep));
    }
  }

  #interpolateChunk(lane: Lane, length: number, at: number, last: number): void {
    const work = this.#work;
    let step = this.#stepOf(Math.max(0, at - delaySamples));
    let stepEnd = this.#boundary(step + 1);
    this.#peaks.reach(step);
    let stepPeak = this.#peaks.values[step];
    for (let i = 0; i < length; i++) {
      const place = Math.min(Math.max(0, at + i - delaySamples), last);
      if (place >= stepEnd) {
        this.#peaks.values[step] = stepPeak;
        step++;
        stepEnd = this.#boundary(step + 1);
        this.#peaks.reach(step);
        stepPeak = this.#peaks.values[step];
      }
      const newest = i + taps - 1;
      // The sample that the points stand behind: the interpolator itself passes no sample through.
      let largest = Math.abs(work[newest - delaySamples]);
      for (const phase of this.#phases) {
        let sum = 0;
        for (let k = 0; k < taps; k++) sum += phase[k] * work[newest - k];
        const magnitude = sum < 0 ? -sum : sum;
        if (magnitude > largest) largest = magnitude;
      }
      if (largest > stepPeak) stepPeak = largest;
      if (largest > lane.truePeak) {
        lane.truePeak = largest;
        lane.truePeakAt = place;
      }
    }
    this.#peaks.values[step] = stepPeak;
  }

  /** Figures and series of all that was processed. Ends the measurement: `reset` before the next. */
  result(): { figures: Figures; series: MeasurementSeries } {
    const silence = new Float64Array(taps - 1);
    if (this.#samples > 0)
      for (const lane of this.#lanes) this.#interpolate(lane, silence, silence.length, this.#samples, true);
    const energies = this.#weightedEnergies();
    const { weights } = this.#options;
    const momentary = slidingMaximum(energies, momentarySeconds);
    const shortTerm = slidingMaximum(energies, shortTermSeconds);
    const loudest = this.#lanes.reduce<Lane | null>(
      (best, lane) => (best && best.truePeak >= lane.truePeak ? best : lane),
      null,
    );
    const truePeak = loudest?.truePeak ?? 0;
    const rate = this.#options.sampleRateHz;
    const figures: Figures = {
      loudness: {
        ...integrated(energies),
        ...loudnessRange(energies),
        momentaryMaxLufs: momentary.maxLufs,
        shortTermMaxLufs: shortTerm.maxLufs,
        // One loudspeaker's feed heard on two: weight 2.0, gated anew since the absolute gate does not move with it.
        ...(weights.length === 1 && {
          dualMonoIntegratedLufs: integrated(energies.map((e) => 2 * e)).integratedLufs,
        }),
      },
      truePeak: {
        maxDbtp: decibels(truePeak),
        perChannelDbtp: this.#lanes.map((lane) => decibels(lane.truePeak)),
      },
      samplePeak: {
        maxDbfs: decibels(Math.max(0, ...this.#lanes.map((lane) => lane.samplePeak))),
        perChannelDbfs: this.#lanes.map((lane) => decibels(lane.samplePeak)),
      },
      times: {
        momentaryMaxAtSeconds: momentary.atSeconds,
        shortTermMaxAtSeconds: shortTerm.atSeconds,
        truePeakMaxAtSeconds: loudest && truePeak > 0 ? loudest.truePeakAt / rate : null,
      },
      measuredSeconds: this.#samples / rate,
    };
    return {
      figures,
      series: {
        stepSeconds: 0.01,
        energy: energies,
        truePeak: Float32Array.from(this.#peaks.view()),
        channelCount: weights.length,
        channelEnergy: this.#channelEnergies(),
      },
    };
  }

  #weightedEnergies(): Float64Array {
    const out = new Float64Array(this.#lanes[0]?.energies.length ?? 0);
    this.#lanes.forEach((lane, c) => {
      const weight = this.#options.weights[c];
      if (weight === 0) return;
      const { values } = lane.energies;
      for (let i = 0; i < out.length; i++) out[i] += weight * values[i];
    });
    return out;
  }

  /** Per 100 ms the mean square of each audio channel, interleaved. */
  #channelEnergies(): Float32Array {
    const count = Math.floor((this.#lanes[0]?.energies.length ?? 0) / 10);
    const out = new Float32Array(count * this.#lanes.length);
    this.#lanes.forEach(({ energies }, c) => {
      for (let i = 0; i < count; i++) {
        let sum = 0;
        for (let k = 0; k < 10; k++) sum += energies.values[i * 10 + k];
        out[i * this.#lanes.length + c] = sum / 10;
      }
    });
    return out;
  }
}
