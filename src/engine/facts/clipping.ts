/** Clipping: runs of samples at full scale; flat tops: runs of equal samples at an audio channel's own peak. */
import type { Clipping, ChannelStretch } from '../figures.ts';
import type { Run } from '../steps.ts';
import { mostListed } from './thresholds.ts';

export class Runs {
  readonly #rate: number;
  #count = 0;
  #longest = 0;
  readonly #listed: ChannelStretch[] = [];

  constructor(sampleRateHz: number) {
    this.#rate = sampleRateHz;
  }

  run({ audioChannel, start, length }: Run): void {
    this.#count++;
    this.#longest = Math.max(this.#longest, length);
    if (this.#listed.length < mostListed)
      this.#listed.push({ audioChannel, atSeconds: start / this.#rate, lengthSeconds: length / this.#rate });
  }

  result(): Clipping {
    const byTime = this.#listed.sort((a, b) => a.atSeconds - b.atSeconds || a.audioChannel - b.audioChannel);
    return { count: this.#count, longestSamples: this.#longest, listed: byTime };
  }
}
