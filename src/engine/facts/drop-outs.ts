/** Drop-outs: a run of exact zeros in one audio channel with signal around it on both sides. */
import type { ChannelStretch, Places } from '../figures.ts';
import type { Run } from '../steps.ts';
import { dropOut, mostListed, powerOfDb } from './thresholds.ts';

/** Steps that are remembered: the longest drop-out and what stands around it, with room. */
const remembered = 256;
const aroundSteps = dropOut.aroundSeconds * 100;

export class DropOuts {
  readonly #rate: number;
  readonly #energies: Float64Array[];
  #waiting: Run[] = [];
  #steps = 0;
  #count = 0;
  readonly #listed: ChannelStretch[] = [];

  constructor(sampleRateHz: number, audioChannels: number) {
    this.#rate = sampleRateHz;
    this.#energies = Array.from({ length: audioChannels }, () => new Float64Array(remembered));
  }

  run(run: Run): void {
    const seconds = run.length / this.#rate;
    if (seconds >= dropOut.leastSeconds && seconds <= dropOut.mostSeconds) this.#waiting.push(run);
  }

  step(energy: Float64Array): void {
    const place = this.#steps % remembered;
    for (let c = 0; c < this.#energies.length; c++) this.#energies[c][place] = energy[c];
    this.#steps++;
    if (this.#waiting.length === 0) return;
    const known = (run: Run) => this.#stepOf(run.start + run.length) + aroundSteps < this.#steps;
    for (const run of this.#waiting.filter(known)) this.#decide(run);
    this.#waiting = this.#waiting.filter((run) => !known(run));
  }

  #stepOf(sample: number): number {
    return Math.floor((sample * 100) / this.#rate);
  }

  /** The loudest of the steps from `first` to `last` that are there. */
  #loudest(audioChannel: number, first: number, last: number): number {
    const from = Math.max(first, 0, this.#steps - remembered);
    let loudest = 0;
    for (let step = from; step <= Math.min(last, this.#steps - 1); step++)
      loudest = Math.max(loudest, this.#energies[audioChannel][step % remembered]);
    return loudest;
  }

  #decide({ audioChannel, start, length }: Run): void {
    const [first, last] = [this.#stepOf(start), this.#stepOf(start + length)];
    const signal = powerOfDb(dropOut.aroundDbfs);
    // Whole steps beside those of its ends: a step that holds both ends does not tell on which side its signal lies.
    if (this.#loudest(audioChannel, first - aroundSteps, first - 1) <= signal) return;
    if (this.#loudest(audioChannel, last + 1, last + aroundSteps) <= signal) return;
    this.#count++;
    if (this.#listed.length < mostListed)
      this.#listed.push({ audioChannel, atSeconds: start / this.#rate, lengthSeconds: length / this.#rate });
  }

  result(): Places {
    for (const run of this.#waiting) this.#decide(run);
    this.#waiting = [];
    const byTime = this.#listed.sort((a, b) => a.atSeconds - b.atSeconds || a.audioChannel - b.audioChannel);
    return { count: this.#count, listed: byTime };
  }
}
