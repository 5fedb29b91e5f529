/** The facts of a signal (MEASUREMENT, "What else a delivery spec asks"), gathered while it is measured. */
import type { SignalFacts, Stretch, SuspectOrder } from '../figures.ts';
import type { Speaker } from '../layouts.ts';
import type { Planar, Run, Step, StepObserver } from '../steps.ts';
import { Runs } from './clipping.ts';
import { DropOuts } from './drop-outs.ts';
import { ToneFinder } from './line-up-tone.ts';
import { Silence } from './silence.ts';
import { Spectrum } from './spectrum.ts';
import { Stereo } from './stereo.ts';
import { silentChannelDbfs, suspectLfe } from './thresholds.ts';

/** What only the end of a measurement tells. */
export interface Ending {
  /** All integer samples or-ed, left-justified in 32 bits; 0 for float. */
  usedBits: number;
  /** Mean of each audio channel, full scale 1.0. */
  means: readonly number[];
  samplePeaksDbfs: readonly (number | null)[];
}

export class SignalObserver implements StepObserver {
  readonly #speakers: readonly Speaker[];
  readonly #silence = new Silence();
  readonly #dropOuts: DropOuts;
  readonly #fullScale: Runs;
  readonly #flatTops: Runs;
  readonly #stereo: Stereo | null;
  readonly #spectrum: Spectrum;
  readonly #tone: ToneFinder;

  constructor({ sampleRateHz, speakers }: { sampleRateHz: number; speakers: readonly Speaker[] }) {
    this.#speakers = speakers;
    this.#dropOuts = new DropOuts(sampleRateHz, speakers.length);
    this.#fullScale = new Runs(sampleRateHz);
    this.#flatTops = new Runs(sampleRateHz);
    const [left, right] = [speakers.indexOf('L'), speakers.indexOf('R')];
    this.#stereo = left >= 0 && right >= 0 ? new Stereo(left, right) : null;
    this.#spectrum = new Spectrum(sampleRateHz, speakers);
    this.#tone = new ToneFinder(sampleRateHz);
  }

  step(step: Step): void {
    this.#silence.step(step.energy);
    this.#dropOuts.step(step.energy);
    this.#stereo?.step(step);
  }

  run(run: Run): void {
    if (run.kind === 'zeros') this.#dropOuts.run(run);
    else if (run.kind === 'full-scale') this.#fullScale.run(run);
    else this.#flatTops.run(run);
  }

  samples(planar: Planar, count: number, first: number): void {
    this.#spectrum.samples(planar, count, first);
    this.#tone.samples(planar, count, first);
  }

  result(ending: Ending): { facts: SignalFacts; silences: Stretch[] } {
    const { silence, stretches } = this.#silence.result();
    const lfeShareAbove = this.#spectrum.lfeShareAbove();
    const isSilent = (level: number | null) => level === null || level < silentChannelDbfs;
    const silent = ending.samplePeaksDbfs.flatMap((level, c) => (isSilent(level) ? [c] : []));
    const all = silent.length === ending.samplePeaksDbfs.length;
    return {
      silences: stretches,
      facts: {
        silence,
        dropOuts: this.#dropOuts.result(),
        clipping: this.#fullScale.result(),
        flatTops: this.#flatTops.result(),
        dcOffsetPercent: ending.means.map((mean) => 100 * mean),
        ...(this.#stereo && { stereo: this.#stereo.result() }),
        // While others play: a programme without any sound is silence, not a silent audio channel.
        silentAudioChannels: all ? [] : silent,
        suspectOrder: this.#suspectOrder(lfeShareAbove, silent),
        bandwidthHz: this.#spectrum.bandwidthHz(),
        lineUpTone: this.#tone.result(),
        effectiveBitDepth: ending.usedBits === 0 ? null : 32 - trailingZeros(ending.usedBits),
      },
    };
  }

  #suspectOrder(lfeShareAbove: number | null, silent: readonly number[]): SuspectOrder | null {
    if (lfeShareAbove === null || silent.includes(this.#speakers.indexOf('LFE'))) return null;
    if (lfeShareAbove <= suspectLfe.share) return null;
    return silent.includes(this.#speakers.indexOf('C')) ? 'centre-silent' : 'lfe-full-band';
  }
}

const trailingZeros = (bits: number): number => 31 - Math.clz32(bits & -bits);
