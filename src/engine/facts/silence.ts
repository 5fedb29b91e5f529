/** Silence: every audio channel's RMS of 10 ms under a level; at the head, at the tail, and the longest inside. */
import type { SilenceAt, Stretch } from '../figures.ts';
import { defaultSilence, mostListed, powerOfDb, silenceLevelsDbfs } from './thresholds.ts';

/** One level's stretches, in steps. */
class Level {
  readonly #power: number;
  #open = 0;
  #head = 0;
  #longest = 0;
  #longestAt: number | null = null;
  #sounded = false;
  /** Of the default's length and more, where this is the default's level. */
  readonly stretches: Stretch[] = [];

  constructor(readonly levelDbfs: number) {
    this.#power = powerOfDb(levelDbfs);
  }

  step(index: number, loudest: number): void {
    if (loudest < this.#power) {
      this.#open++;
      return;
    }
    if (!this.#sounded) this.#head = this.#open;
    else if (this.#open > this.#longest) {
      this.#longest = this.#open;
      this.#longestAt = index - this.#open;
    }
    this.#list(index);
    this.#sounded = true;
    this.#open = 0;
  }

  #list(end: number): void {
    const lengthSeconds = this.#open / 100;
    if (lengthSeconds < defaultSilence.seconds || this.stretches.length >= mostListed) return;
    this.stretches.push({ atSeconds: (end - this.#open) / 100, lengthSeconds });
  }

  result(steps: number): SilenceAt {
    this.#list(steps);
    return {
      levelDbfs: this.levelDbfs,
      headSeconds: (this.#sounded ? this.#head : this.#open) / 100,
      tailSeconds: this.#open / 100,
      longestInsideSeconds: this.#longest / 100,
      longestInsideAtSeconds: this.#longestAt === null ? null : this.#longestAt / 100,
    };
  }
}

export class Silence {
  readonly #levels = silenceLevelsDbfs.map((level) => new Level(level));
  readonly #highest = powerOfDb(Math.max(...silenceLevelsDbfs));
  #sounded = false;
  #steps = 0;

  /** Mean squares of a step by audio channel. */
  step(energy: Float64Array): void {
    let loudest = 0;
    for (let c = 0; c < energy.length; c++) if (energy[c] > loudest) loudest = energy[c];
    // Signal above every level, as in the step before: nothing begins and nothing ends.
    const sounds = loudest >= this.#highest;
    if (!(sounds && this.#sounded)) for (const level of this.#levels) level.step(this.#steps, loudest);
    this.#sounded = sounds;
    this.#steps++;
  }

  result(): { silence: SilenceAt[]; stretches: Stretch[] } {
    const silence = this.#levels.map((level) => level.result(this.#steps));
    const stretches =
      this.#levels.find((level) => level.levelDbfs === defaultSilence.levelDbfs)?.stretches ?? [];
    return { silence, stretches };
  }
}
