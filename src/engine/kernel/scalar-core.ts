/** The scalar twin: each figure by its definition, sample after sample, every point of the interpolator computed. */
import { sampleReader } from '../containers/samples.ts';
import {
  flatTopRun,
  fullScaleOf,
  fullScaleRun,
  isWide,
  loudestSample,
  seriesFloor,
  stepBoundary,
  zeroRunSeconds,
  type Core,
  type CoreOptions,
  type CoreSink,
  type CoreTotals,
  type LaneTotals,
} from './core.ts';
import { scaledWeighting } from '../k-weighting.ts';
import type { Run } from '../steps.ts';

/** One audio channel's filters, peaks and open runs. */
class Lane implements LaneTotals {
  samplePeak = 0;
  truePeak = 0;
  truePeakAt = 0;
  sum = 0;
  weighted = 0;
  energy = 0;
  stepPeak = 0;
  /** Filter memory: the input twice, the shelf's output twice and its last difference, the high-pass's output twice. */
  x1 = 0;
  x2 = 0;
  y1 = 0;
  y2 = 0;
  v1 = 0;
  z1 = 0;
  z2 = 0;
  zeros = 0;
  full = 0;
  equal = 0;
  last = NaN;
  /** The last samples as float32, newest last, and steps' sample peaks that wait for their true peak. */
  readonly recent: Float32Array;
  constructor(taps: number) {
    this.recent = new Float32Array(taps);
  }
}

const blockFrames = 4096;

export class ScalarCore implements Core {
  readonly #options: CoreOptions;
  readonly #sink: CoreSink;
  readonly #lanes: Lane[];
  readonly #measured: number;
  readonly #stepSamples: number;
  readonly #half: number;
  readonly #weighting;
  readonly #planar: Float32Array[];
  readonly #read;
  readonly #step;
  /** Steps whose energies are known and whose true peak is not yet. */
  readonly #waiting: {
    weighted: Float64Array;
    energy: Float64Array;
    peak: Float64Array;
    leftRight: number;
  }[] = [];
  #samples = 0;
  #leftRight = 0;
  #stepIndex = 0;
  #peakStep = 0;
  #stepTruePeak = 0;
  #wildCount = 0;
  #wildFirst = 0;
  #usedBits = 0;

  constructor(options: CoreOptions, sink: CoreSink) {
    this.#options = options;
    this.#sink = sink;
    this.#measured = options.audioChannels.length;
    const lanes = this.#measured + (options.downmix ? 2 : 0);
    const { taps } = options.interpolator;
    this.#half = taps / 2;
    this.#lanes = Array.from({ length: lanes }, () => new Lane(taps));
    this.#stepSamples = options.sampleRateHz / 100;
    this.#weighting = scaledWeighting(options.sampleRateHz);
    this.#planar = this.#lanes.map(() => new Float32Array(blockFrames));
    this.#read = sampleReader(options.encoding);
    this.#step = {
      index: 0,
      weighted: new Float64Array(lanes),
      energy: new Float64Array(lanes),
      peak: new Float64Array(lanes),
      leftRight: 0,
      truePeak: 0,
    };
  }

  process(bytes: Uint8Array, frames: number): void {
    const { encoding, frameChannels, audioChannels, downmix } = this.#options;
    const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
    const values = new Float64Array(this.#lanes.length);
    const frameBytes = encoding.bytes * frameChannels;
    for (let done = 0; done < frames; done += blockFrames) {
      const count = Math.min(blockFrames, frames - done);
      const first = this.#samples;
      for (let i = 0; i < count; i++) {
        audioChannels.forEach((channel, lane) => {
          values[lane] = this.#sample(view, (done + i) * frameBytes + channel * encoding.bytes);
        });
        if (downmix) downmix.forEach((factors, side) => this.#mix(values, factors, this.#measured + side));
        for (let lane = 0; lane < values.length; lane++) this.#planar[lane][i] = values[lane];
        this.#take(values);
      }
      this.#sink.samples(() => this.#planar, count, first);
    }
  }

  #sample(view: DataView, offset: number): number {
    const { kind, bytes } = this.#options.encoding;
    const x = this.#read(view, offset);
    // Written so that NaN is refused too.
    if (!(Math.abs(x) <= loudestSample)) {
      if (this.#wildCount++ === 0) this.#wildFirst = this.#samples;
      return 0;
    }
    if (kind !== 'float') this.#usedBits |= (x * 2 ** (8 * bytes - 1)) << (32 - 8 * bytes);
    return x;
  }

  #mix(values: Float64Array, factors: readonly number[], lane: number): void {
    // As narrow as the samples that it is mixed of are kept.
    const round = isWide(this.#options.encoding) ? (x: number) => x : Math.fround;
    let sum = 0;
    for (let i = 0; i < this.#measured; i++)
      if (factors[i] !== 0) sum = round(sum + round(round(factors[i]) * values[i]));
    values[lane] = sum;
  }

  /** One frame, by lane. */
  #take(values: Float64Array): void {
    const { pair } = this.#options;
    const at = this.#samples++;
    this.#lanes.forEach((lane, i) => {
      this.#weigh(lane, values[i]);
      this.#follow(lane, i, values[i], at);
    });
    if (pair) this.#leftRight += values[0] * values[1];
    this.#lanes.forEach((lane, i) => this.#interpolate(lane, i, Math.fround(values[i]), at - this.#half));
    if (this.#samples === stepBoundary(this.#stepIndex + 1, this.#stepSamples)) this.#endStep();
    // The interval that ends half the taps ago is known now; with it perhaps its step.
    if (at - this.#half + 1 === stepBoundary(this.#peakStep + 1, this.#stepSamples)) this.#endPeakStep();
  }

  #weigh(lane: Lane, x: number): void {
    const { p1, p2, a1, a2, c1, c2 } = this.#weighting;
    const y = x + p1 * lane.x1 + p2 * lane.x2 - a2 * lane.y2 - a1 * lane.y1;
    const v = y - lane.y1;
    const u = v - lane.v1;
    const z = u - c2 * lane.z2 - c1 * lane.z1;
    lane.weighted += z * z;
    lane.energy += x * x;
    lane.sum += x;
    lane.x2 = lane.x1;
    lane.x1 = x;
    lane.y2 = lane.y1;
    lane.y1 = y;
    lane.v1 = v;
    lane.z2 = lane.z1;
    lane.z1 = z;
  }

  /** Peaks and runs. */
  #follow(lane: Lane, i: number, x: number, at: number): void {
    const magnitude = Math.abs(x);
    if (x !== lane.last) this.#endEqual(lane, i, at);
    lane.last = x;
    lane.equal++;
    if (magnitude > lane.stepPeak) lane.stepPeak = magnitude;
    if (magnitude > lane.samplePeak) lane.samplePeak = magnitude;
    if (magnitude >= fullScaleOf(this.#options.encoding)) lane.full++;
    else this.#endFull(lane, i, at);
    if (x === 0) lane.zeros++;
    else this.#endZeros(lane, i, at);
  }

  #tell(kind: Run['kind'], i: number, at: number, length: number, value: number): void {
    if (i < this.#measured) this.#sink.run({ kind, audioChannel: i, start: at - length, length }, value);
  }
  #endEqual(lane: Lane, i: number, at: number): void {
    const level = Math.abs(lane.last);
    if (lane.equal >= flatTopRun && level > 0 && level >= lane.samplePeak)
      this.#tell('flat-top', i, at, lane.equal, level);
    lane.equal = 0;
  }
  #endFull(lane: Lane, i: number, at: number): void {
    if (lane.full >= fullScaleRun) this.#tell('full-scale', i, at, lane.full, 1);
    lane.full = 0;
  }
  #endZeros(lane: Lane, i: number, at: number): void {
    if (lane.zeros >= Math.ceil(zeroRunSeconds * this.#options.sampleRateHz))
      this.#tell('zeros', i, at, lane.zeros, 0);
    lane.zeros = 0;
  }

  /** Every point of the interval that begins at sample `place`, whose last sample `x` has just come. */
  #interpolate(lane: Lane, i: number, x: number, place: number): void {
    const { interpolator } = this.#options;
    const { recent } = lane;
    recent.copyWithin(0, 1);
    recent[recent.length - 1] = x;
    const { taps, points, weights } = interpolator;
    for (let p = 0; p < points; p++) {
      let sum = 0;
      for (let k = 0; k < taps; k++)
        sum = Math.fround(sum + Math.fround(weights[k * points + p] * recent[k]));
      const magnitude = Math.abs(sum);
      if (i < this.#measured && magnitude > this.#stepTruePeak) this.#stepTruePeak = magnitude;
      if (magnitude > lane.truePeak) {
        lane.truePeak = magnitude;
        lane.truePeakAt = place + p / points;
      }
    }
  }

  #endStep(): void {
    const scale = this.#weighting.energyScale / this.#stepSamples;
    this.#waiting.push({
      weighted: Float64Array.from(this.#lanes, (lane) => lane.weighted * scale),
      energy: Float64Array.from(this.#lanes, (lane) => lane.energy / this.#stepSamples),
      peak: Float64Array.from(this.#lanes, (lane) => lane.stepPeak),
      leftRight: this.#leftRight / this.#stepSamples,
    });
    for (const lane of this.#lanes) lane.weighted = lane.energy = lane.stepPeak = 0;
    this.#leftRight = 0;
    this.#stepIndex++;
  }

  #endPeakStep(): void {
    const known = this.#waiting.shift();
    if (!known) throw new Error('A true peak without its step.');
    Object.assign(this.#step, known, { index: this.#peakStep, truePeak: this.#seriesPeak(known.peak) });
    this.#sink.step(this.#step);
    this.#stepTruePeak = 0;
    this.#peakStep++;
  }

  #seriesPeak(peaks: Float64Array): number {
    if (this.#stepTruePeak > seriesFloor) return this.#stepTruePeak;
    return Math.fround(Math.max(0, ...peaks.subarray(0, this.#measured)));
  }

  finish(): CoreTotals {
    const total = this.#samples;
    const tailPeaks = Float64Array.from(this.#lanes, (lane) => lane.stepPeak);
    this.#lanes.forEach((lane, i) => {
      this.#endEqual(lane, i, total);
      this.#endFull(lane, i, total);
      this.#endZeros(lane, i, total);
    });
    // Silence behind the end: what rings into it counts for the last step.
    const lastFull = this.#stepIndex;
    for (let at = total; at < total + 2 * this.#half; at++) {
      this.#lanes.forEach((lane, i) => this.#interpolate(lane, i, 0, at - this.#half));
      const place = at - this.#half + 1;
      const isLast = this.#peakStep + 1 === lastFull && total === stepBoundary(lastFull, this.#stepSamples);
      if (
        this.#peakStep < lastFull &&
        !isLast &&
        place === stepBoundary(this.#peakStep + 1, this.#stepSamples)
      )
        this.#endPeakStep();
    }
    if (this.#peakStep < lastFull) this.#endPeakStep();
    const tail = total > stepBoundary(lastFull, this.#stepSamples);
    return {
      samples: total,
      lanes: this.#lanes.map(({ samplePeak, truePeak, truePeakAt, sum }) => ({
        samplePeak,
        truePeak,
        truePeakAt: Math.min(Math.max(0, truePeakAt), Math.max(0, total - 1)),
        sum,
      })),
      wildCount: this.#wildCount,
      wildFirst: this.#wildFirst,
      usedBits: this.#usedBits,
      tailTruePeak: tail ? this.#seriesPeak(tailPeaks) : null,
    };
  }
}
