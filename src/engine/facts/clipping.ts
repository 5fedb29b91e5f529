/** Clipping: runs of samples at full scale; flat tops: runs of equal samples at an audio channel's own peak. */
import type { Clipping, ChannelStretch } from '../figures.ts';
import type { Run } from '../steps.ts';
import { clippedLengths, mostListed } from './thresholds.ts';

export class Runs {
  readonly #rate: number;
  #count = 0;
  #longest = 0;
  readonly #byLength = clippedLengths.map((samples) => ({ samples, count: 0 }));
  readonly #listed: ChannelStretch[] = [];

  constructor(sampleRateHz: number) {
    this.#rate = sampleRateHz;
  }

  run({ audioChannel, start, length }: Run): void {
    this.#count++;
    this.#longest = Math.max(this.#longest, length);
    for (const rung of this.#byLength) if (length >= rung.samples) rung.count++;
    if (this.#listed.length < mostListed)
      this.#listed.push({ audioChannel, atSeconds: start / this.#rate, lengthSeconds: length / this.#rate });
  }

  result(): Clipping {
    const byTime = this.#listed.sort((a, b) => a.atSeconds - b.atSeconds || a.audioChannel - b.audioChannel);
    return {
      count: this.#count,
      longestSamples: this.#longest,
      atLeast: this.#byLength.map((rung) => ({ ...rung })),
      listed: byTime,
    };
  }
}
