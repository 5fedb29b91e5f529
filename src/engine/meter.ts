/**
 * The streaming meter of one presentation: frames in, figures out. The per-sample work is a core's; here its steps are
 * gathered and turned into figures. Any split of the input gives the same figures to the last bit.
 */
import type { Encoding } from './containers/samples.ts';
import type { Figures, Finding, MeasurementSeries } from './figures.ts';
import {
  integrated,
  loudnessRange,
  momentarySeconds,
  shortTermSeconds,
  slidingMaximum,
  stepsPerSecond,
} from './gating.ts';
import { doubles, floats, GrowingFloats } from './growing-floats.ts';
import { interpolatorFor } from './interpolator.ts';
import type { Core, CoreOptions, CoreSink, CoreStep, CoreTotals } from './kernel/core.ts';
import { KernelCore } from './kernel/kernel-core.ts';
import { ScalarCore } from './kernel/scalar-core.ts';
import { weightOf, type Speaker } from './layouts.ts';
import type { Planar, Run, StepObserver } from './steps.ts';

export interface MeterOptions {
  sampleRateHz: number;
  /** Of the interleaved frames that come in, and how many audio channels one has. */
  encoding: Encoding;
  frameChannels: number;
  /** Audio channels of a frame that are measured, and the loudspeaker of each. */
  audioChannels: readonly number[];
  speakers: readonly Speaker[];
  /** Seconds that are expected, so that the series need not grow. */
  secondsTotal?: number | null;
  /** Sees every step, run and sample. */
  observers?: readonly StepObserver[];
}

export interface MeterResult {
  figures: Figures;
  series: MeasurementSeries;
  findings: Finding[];
  /** All integer samples or-ed, left-justified in 32 bits; 0 for float. */
  usedBits: number;
  /** Mean of each audio channel, full scale 1.0. */
  means: number[];
}

/** The kernel, or its plain twin, which gives the same and serves as oracle. */
export type Twin = 'kernel' | 'scalar';

const decibels = (linear: number): number | null => (linear > 0 ? 20 * Math.log10(linear) : null);

/** Loudspeakers that go to the left of a stereo downmix, to the right, or to both (ITU-R BS.775-4, Annex 4, Table 2). */
const half = Math.SQRT1_2;
const downmixFactors: Partial<Record<Speaker, readonly [left: number, right: number]>> = {
  L: [1, 0],
  R: [0, 1],
  C: [half, half],
  Ls: [half, 0],
  Rs: [0, half],
  LFE: [0, 0],
};
const downmixed = (speakers: readonly Speaker[]) =>
  speakers.includes('Ls') && speakers.includes('Rs') && speakers.every((s) => downmixFactors[s]);

/** Measures one presentation. `process` frames in blocks of any length, then `result` once. */
export class Meter {
  readonly #options: MeterOptions;
  readonly #core: Core;
  /** Lane of the core for each audio channel of the presentation: left and right come first. */
  readonly #lanes: readonly number[];
  readonly #weights: readonly number[];
  readonly #energies: GrowingFloats<Float64Array>;
  readonly #downmix: GrowingFloats<Float64Array> | null;
  readonly #peaks: GrowingFloats<Float32Array>;
  readonly #channelEnergies: GrowingFloats<Float32Array>;
  readonly #hundredth: Float64Array;
  readonly #step;
  /** Runs at the largest value of each audio channel so far. */
  readonly #flatTops = new Map<number, { value: number; runs: Run[] }>();
  #samples = 0;

  constructor(options: MeterOptions, twin: Twin = 'kernel') {
    this.#options = options;
    const { speakers, sampleRateHz } = options;
    const channels = options.audioChannels.length;
    const [left, right] = [speakers.indexOf('L'), speakers.indexOf('R')];
    const pair = left >= 0 && right >= 0;
    const rest = speakers.map((_, i) => i).filter((i) => !pair || (i !== left && i !== right));
    const order = pair ? [left, right, ...rest] : rest;
    this.#lanes = speakers.map((_, i) => order.indexOf(i));
    this.#weights = speakers.map(weightOf);
    const factors = order.map((i) => downmixFactors[speakers[i]] ?? ([0, 0] as const));
    const coreOptions: CoreOptions = {
      sampleRateHz,
      encoding: options.encoding,
      frameChannels: options.frameChannels,
      audioChannels: order.map((i) => options.audioChannels[i]),
      pair,
      downmix: downmixed(speakers) ? [factors.map(([l]) => l), factors.map(([, r]) => r)] : null,
      interpolator: interpolatorFor(sampleRateHz),
    };
    const sink: CoreSink = {
      step: (step) => this.#takeStep(step),
      run: (run, value) => this.#takeRun(run, value),
      samples: (planar, count, first) => this.#takeSamples(planar, count, first),
    };
    this.#core = twin === 'kernel' ? new KernelCore(coreOptions, sink) : new ScalarCore(coreOptions, sink);
    const steps = Math.ceil((options.secondsTotal ?? 0) * stepsPerSecond) + 1;
    this.#energies = new GrowingFloats(doubles, steps);
    this.#downmix = coreOptions.downmix && new GrowingFloats(doubles, steps);
    this.#peaks = new GrowingFloats(floats, steps);
    this.#channelEnergies = new GrowingFloats(floats, Math.ceil(steps / 10) * channels);
    this.#hundredth = new Float64Array(channels);
    this.#step = {
      index: 0,
      weighted: new Float64Array(channels),
      energy: new Float64Array(channels),
      peak: new Float64Array(channels),
      leftRight: 0,
    };
  }

  /** Samples of programme taken in so far, per audio channel. */
  get samples(): number {
    return this.#samples;
  }

  /** Memory that a source may read into: what lies there is measured without copying. */
  get blocks(): readonly Uint8Array[] | undefined {
    return this.#core.blocks;
  }

  /** Takes whole interleaved frames. */
  process(bytes: Uint8Array, frames: number): void {
    this.#core.process(bytes, frames);
    this.#samples += frames;
  }

  #takeStep(step: CoreStep): void {
    const mine = this.#step;
    let weighted = 0;
    for (let i = 0; i < this.#lanes.length; i++) {
      const lane = this.#lanes[i];
      mine.weighted[i] = step.weighted[lane];
      mine.energy[i] = step.energy[lane];
      mine.peak[i] = step.peak[lane];
      if (this.#weights[i] !== 0) weighted += this.#weights[i] * step.weighted[lane];
      this.#hundredth[i] += step.weighted[lane];
    }
    mine.index = step.index;
    mine.leftRight = step.leftRight;
    this.#energies.push(weighted);
    this.#peaks.push(step.truePeak);
    const lanes = this.#lanes.length;
    this.#downmix?.push(step.weighted[lanes] + step.weighted[lanes + 1]);
    if (step.index % 10 === 9) {
      for (let i = 0; i < lanes; i++) this.#channelEnergies.push(this.#hundredth[i] / 10);
      this.#hundredth.fill(0);
    }
    for (const observer of this.#options.observers ?? []) observer.step(mine);
  }

  #takeRun(run: Run, value: number): void {
    const mine = { ...run, audioChannel: this.#lanes.indexOf(run.audioChannel) };
    if (run.kind !== 'flat-top') return this.#tell(mine);
    const known = this.#flatTops.get(mine.audioChannel);
    if (!known || value > known.value) this.#flatTops.set(mine.audioChannel, { value, runs: [mine] });
    else if (value === known.value && known.runs.length < mostFlatTops) known.runs.push(mine);
  }

  #tell(run: Run): void {
    for (const observer of this.#options.observers ?? []) observer.run(run);
  }

  #takeSamples(planar: Planar, count: number, first: number): void {
    const mine = () => {
      const lanes = planar();
      return this.#lanes.map((lane) => lanes[lane]);
    };
    for (const observer of this.#options.observers ?? []) observer.samples(mine, count, first);
  }

  /** Figures and series of all that was processed; ends the measurement. */
  result(): MeterResult {
    const totals = this.#core.finish();
    // A sample that float32 rounds down, where the interpolator works, is still the peak that it is.
    const perChannel = this.#lanes.map((lane) => {
      const own = totals.lanes[lane];
      return { ...own, truePeak: Math.max(own.truePeak, own.samplePeak) };
    });
    for (const [audioChannel, { value, runs }] of this.#flatTops)
      if (value === perChannel[audioChannel].samplePeak) runs.forEach((run) => this.#tell(run));
    if (totals.tailTruePeak !== null) this.#peaks.push(totals.tailTruePeak);
    return {
      figures: this.#figures(totals, perChannel),
      series: {
        stepSeconds: 0.01,
        energy: this.#energies.view(),
        truePeak: this.#peaks.view(),
        channelCount: this.#lanes.length,
        channelEnergy: this.#channelEnergies.view(),
      },
      findings: this.#wild(totals),
      usedBits: totals.usedBits,
      means: perChannel.map(({ sum }) => (totals.samples === 0 ? 0 : sum / totals.samples)),
    };
  }

  #figures({ samples, lanes }: CoreTotals, perChannel: CoreTotals['lanes']): Figures {
    const rate = this.#options.sampleRateHz;
    const energies = this.#energies.view();
    const momentary = slidingMaximum(energies, momentarySeconds);
    const shortTerm = slidingMaximum(energies, shortTermSeconds);
    const loudest = perChannel.reduce((best, lane) => (best.truePeak >= lane.truePeak ? best : lane));
    return {
      loudness: {
        ...integrated(energies),
        ...loudnessRange(energies),
        momentaryMaxLufs: momentary.maxLufs,
        shortTermMaxLufs: shortTerm.maxLufs,
        // One loudspeaker's feed heard on two: weight 2.0, gated anew since the absolute gate does not move with it.
        ...(perChannel.length === 1 && {
          dualMonoIntegratedLufs: integrated(energies.map((e) => 2 * e)).integratedLufs,
        }),
      },
      truePeak: {
        maxDbtp: decibels(loudest.truePeak),
        perChannelDbtp: perChannel.map((lane) => decibels(lane.truePeak)),
        perChannelAtSeconds: perChannel.map((lane) => (lane.truePeak > 0 ? lane.truePeakAt / rate : null)),
      },
      samplePeak: {
        maxDbfs: decibels(Math.max(...perChannel.map((lane) => lane.samplePeak))),
        perChannelDbfs: perChannel.map((lane) => decibels(lane.samplePeak)),
      },
      times: {
        momentaryMaxAtSeconds: momentary.atSeconds,
        shortTermMaxAtSeconds: shortTerm.atSeconds,
        truePeakMaxAtSeconds: loudest.truePeak > 0 ? loudest.truePeakAt / rate : null,
      },
      measuredSeconds: samples / rate,
      ...(this.#downmix && {
        downmix: {
          integratedLufs: integrated(this.#downmix.view()).integratedLufs,
          truePeakDbtp: decibels(Math.max(...lanes.slice(-2).map((lane) => lane.truePeak))),
        },
      }),
    };
  }

  #wild({ wildCount, wildFirst }: CoreTotals): Finding[] {
    if (wildCount === 0) return [];
    return [
      {
        code: 'not-a-number',
        message: `${wildCount} ${wildCount === 1 ? 'sample is' : 'samples are'} not a number, infinite or beyond any level; measured as silence.`,
        atSeconds: wildFirst / this.#options.sampleRateHz,
      },
    ];
  }
}

/** Of one audio channel; more are not listed one by one. */
const mostFlatTops = 1000;
