/** The WebAssembly twin: hands frames to the kernel in chunks and reads its records. One instance measures one presentation. */
import { scaledWeighting } from '../k-weighting.ts';
import type { Run } from '../steps.ts';
import { kernelBinary } from './binary.ts';
import {
  flatTopRun,
  fullScaleOf,
  fullScaleRun,
  isWide,
  seriesFloor,
  zeroRunSeconds,
  type Core,
  type CoreOptions,
  type CoreSink,
  type CoreTotals,
} from './core.ts';

/** What assembly/index.ts exports. Pointers are byte addresses in `memory`. */
interface Kernel {
  memory: WebAssembly.Memory;
  allocate(
    rate: number,
    lanes: number,
    measured: number,
    frameBytes: number,
    wide: boolean,
    chunk: number,
  ): void;
  inputPointer(): number;
  takeInputFrom(at: number): void;
  allocateBlock(bytes: number): number;
  newestPointer(lane: number, frames: number): number;
  offsetsPointer(): number;
  configureSamples(form: number, bytes: number, littleEndian: boolean, unsigned: boolean): void;
  factorsPointer(): number;
  configureRecords(capacity: number): void;
  recordDoubles(): number;
  recordsPointer(): number;
  configureRuns(fullScale: number, zeros: number, full: number, flat: number, capacity: number): void;
  eventsPointer(): number;
  lanePeak(lane: number): number;
  configurePeaks(
    taps: number,
    points: number,
    gain: number,
    curve: number,
    quarterGain: number,
    quarterCurve: number,
    floor: number,
    longestStep: number,
  ): void;
  prepareQuarters(): void;
  weightsPointer(): number;
  laneTruePeak(lane: number): number;
  laneTruePeakAt(lane: number): number;
  configureWeighting(
    p1: number,
    p2: number,
    a1: number,
    a2: number,
    c1: number,
    c2: number,
    scale: number,
    stepSamples: number,
    pair: boolean,
  ): void;
  laneSum(lane: number): number;
  begin(taps: number): void;
  advance(frames: number): void;
  finish(): void;
  whole: WebAssembly.Global;
  eventCount: WebAssembly.Global;
  usedBits: WebAssembly.Global;
  wildCount: WebAssembly.Global;
  wildFirst: WebAssembly.Global;
  tailPeak: WebAssembly.Global;
}

let compiled: WebAssembly.Module | null = null;
function instantiate(): Kernel {
  compiled ??= new WebAssembly.Module(Uint8Array.from(atob(kernelBinary), (c) => c.charCodeAt(0)));
  const abort = () => {
    throw new Error('The measuring kernel stopped.');
  };
  // The exports' types are the assembly's, and nothing checks them at run time but the tests.
  return new WebAssembly.Instance(compiled, { env: { abort } }).exports as unknown as Kernel;
}

const mostChunkFrames = 4096;
const mostChunkBytes = 1 << 20;
const blockBytes = 1 << 19;
const runKinds: readonly Run['kind'][] = ['zeros', 'full-scale', 'flat-top'];
const eventDoubles = 5;

export class KernelCore implements Core {
  readonly #options: CoreOptions;
  readonly #sink: CoreSink;
  readonly #kernel: Kernel;
  readonly #lanes: number;
  readonly #chunkFrames: number;
  readonly #frameBytes: number;
  /** Views of the kernel's memory, which does not grow once it is configured. */
  readonly #input: Uint8Array;
  /** What a source may read into: frames that lie there are taken without copying. */
  readonly blocks: readonly Uint8Array[];
  readonly #doubles: Float64Array;
  readonly #records: number;
  readonly #events: number;
  readonly #step;
  #samples = 0;
  #steps = 0;

  constructor(options: CoreOptions, sink: CoreSink) {
    this.#options = options;
    this.#sink = sink;
    const { sampleRateHz, encoding, frameChannels, audioChannels, downmix, interpolator } = options;
    const { taps, points, weights } = interpolator;
    const k = (this.#kernel = instantiate());
    const measured = audioChannels.length;
    const lanes = (this.#lanes = measured + (downmix ? 2 : 0));
    const frameBytes = (this.#frameBytes = encoding.bytes * frameChannels);
    const chunk = Math.max(256, Math.min(mostChunkFrames, Math.floor(mostChunkBytes / frameBytes)));
    this.#chunkFrames = chunk & ~3;
    const stepSamples = sampleRateHz / 100;
    const capacity = Math.ceil(stepSamples) + chunk + 512;

    k.allocate(sampleRateHz, lanes, measured, frameBytes, isWide(encoding), chunk);
    const form = encoding.kind !== 'float' ? 0 : encoding.bytes === 8 ? 2 : 1;
    k.configureSamples(form, encoding.bytes, encoding.littleEndian, encoding.kind === 'unsigned');
    k.configureRecords(capacity);
    const zeros = Math.ceil(zeroRunSeconds * sampleRateHz);
    k.configureRuns(fullScaleOf(encoding), zeros, fullScaleRun, flatTopRun, capacity);
    const { gain, curve, quarterGain, quarterCurve } = interpolator;
    k.configurePeaks(
      taps,
      points,
      gain,
      curve,
      quarterGain,
      quarterCurve,
      seriesFloor,
      Math.ceil(stepSamples),
    );
    const w = scaledWeighting(sampleRateHz);
    const scale = w.energyScale / stepSamples;
    k.configureWeighting(w.p1, w.p2, w.a1, w.a2, w.c1, w.c2, scale, stepSamples, options.pair);
    k.begin(taps);
    const factors = downmix ? k.factorsPointer() : 0;
    const blocks = [0, 1].map(() => k.allocateBlock(blockBytes));
    const { buffer } = k.memory;
    new Float32Array(buffer, k.weightsPointer(), weights.length).set(weights);
    k.prepareQuarters();
    new Int32Array(buffer, k.offsetsPointer(), measured).set(audioChannels.map((c) => c * encoding.bytes));
    if (downmix) new Float64Array(buffer, factors, 2 * measured).set(downmix.flat());
    this.#input = new Uint8Array(buffer, k.inputPointer(), (chunk + 4) * frameBytes);
    this.blocks = blocks.map((at) => new Uint8Array(buffer, at, blockBytes));
    this.#doubles = new Float64Array(buffer);
    this.#records = k.recordsPointer() / 8;
    this.#events = k.eventsPointer() / 8;
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
    const isHere = bytes.buffer === this.#input.buffer;
    for (let done = 0; done < frames; done += this.#chunkFrames) {
      const count = Math.min(this.#chunkFrames, frames - done);
      // Samples are converted four at a time: what follows the last ones is taken along where it is whole fours.
      if (isHere && count % 4 === 0) this.#kernel.takeInputFrom(bytes.byteOffset + done * this.#frameBytes);
      else this.#copy(bytes, done, count);
      this.#kernel.advance(count);
      this.#drain();
      this.#tellSamples(count);
      this.#samples += count;
    }
  }

  #copy(bytes: Uint8Array, from: number, count: number): void {
    const length = count * this.#frameBytes;
    const silence = this.#options.encoding.kind === 'unsigned' ? 0x80 : 0;
    this.#input.set(bytes.subarray(from * this.#frameBytes, from * this.#frameBytes + length));
    this.#input.fill(silence, length, length + 3 * this.#frameBytes);
    this.#kernel.takeInputFrom(this.#input.byteOffset);
  }

  #drain(): void {
    const doubles = this.#doubles;
    const events = this.#kernel.eventCount.value as number;
    for (let i = 0, at = this.#events; i < events; i++, at += eventDoubles)
      this.#sink.run(
        {
          kind: runKinds[doubles[at]],
          audioChannel: doubles[at + 1],
          start: doubles[at + 2],
          length: doubles[at + 3],
        },
        doubles[at + 4],
      );
    const lanes = this.#lanes;
    const whole = this.#kernel.whole.value as number;
    const step = this.#step;
    for (let i = 0, at = this.#records; i < whole; i++, at += 3 * lanes + 2) {
      step.index = this.#steps++;
      for (let lane = 0; lane < lanes; lane++) {
        step.weighted[lane] = doubles[at + lane];
        step.energy[lane] = doubles[at + lanes + lane];
        step.peak[lane] = doubles[at + 2 * lanes + lane];
      }
      step.leftRight = doubles[at + 3 * lanes];
      step.truePeak = doubles[at + 3 * lanes + 1];
      this.#sink.step(step);
    }
  }

  #tellSamples(count: number): void {
    const planar = () =>
      Array.from(
        { length: this.#lanes },
        (_, lane) => new Float32Array(this.#doubles.buffer, this.#kernel.newestPointer(lane, count), count),
      );
    this.#sink.samples(planar, count, this.#samples);
  }

  finish(): CoreTotals {
    const k = this.#kernel;
    k.finish();
    this.#drain();
    const total = this.#samples;
    const tail = k.tailPeak.value as number;
    return {
      samples: total,
      lanes: Array.from({ length: this.#lanes }, (_, lane) => ({
        samplePeak: k.lanePeak(lane),
        truePeak: k.laneTruePeak(lane),
        truePeakAt: Math.min(Math.max(0, k.laneTruePeakAt(lane)), Math.max(0, total - 1)),
        sum: k.laneSum(lane),
      })),
      wildCount: k.wildCount.value as number,
      wildFirst: k.wildFirst.value as number,
      usedBits: k.usedBits.value as number,
      tailTruePeak: tail < 0 ? null : tail,
    };
  }
}
