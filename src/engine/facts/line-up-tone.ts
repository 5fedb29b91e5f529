/**
 * A line-up tone near the head. A pure tone follows x[n+1] + x[n-1] = 2 cos(w) x[n]: the best w of a stretch of samples is
 * a quotient of two sums. What that leaves over tells at little cost that most stretches are no tone; of the others, which may
 * still be any low and smooth sound, the sine that fits best tells.
 */
import type { LineUpTone } from '../figures.ts';
import type { Planar } from '../steps.ts';
import { fitSine } from './sine-fit.ts';
import { lineUpTone, powerOfDb } from './thresholds.ts';

/** Stretches that are looked at: a fifth of a tenth of a second each, which costs a fifth. */
const stretchSeconds = 0.1;
const lookedAtSeconds = 0.02;
/** How far a tone's frequency may wander from stretch to stretch. */
const steadyHz = 0.005;
/** A tone that has begun in time is followed so long. */
const followedSeconds = 600;

interface Found {
  hz: number;
  power: number;
}

export class ToneFinder {
  readonly #rate: number;
  readonly #stretch: number;
  readonly #held: Float64Array;
  #filled = 0;
  #index = 0;
  #open: { first: Found; from: number; hzSum: number; powerSum: number; count: number } | null = null;
  #tone: LineUpTone | null = null;
  #done = false;

  constructor(sampleRateHz: number) {
    this.#rate = sampleRateHz;
    this.#stretch = Math.round(stretchSeconds * sampleRateHz);
    this.#held = new Float64Array(Math.max(16, Math.round(lookedAtSeconds * sampleRateHz)));
  }

  /** Looks at the begin of one stretch after another, in the audio channel that is the loudest there. */
  samples(all: Planar, count: number, first: number): void {
    if (this.#done) return;
    for (;;) {
      const start = this.#index * this.#stretch;
      const from = start + this.#filled - first;
      if (from >= count) return;
      const planar = all();
      const taken = Math.min(count - from, this.#held.length - this.#filled);
      const samples = planar[this.#channelOf(planar, from, taken)];
      for (let i = 0; i < taken; i++) this.#held[this.#filled + i] = samples[from + i];
      this.#filled += taken;
      if (this.#filled < this.#held.length) return;
      this.#filled = 0;
      this.#take(this.#look());
      if (this.#done) return;
    }
  }

  #channel = 0;
  #channelOf(planar: readonly Float32Array[], from: number, count: number): number {
    // A tone may lie in any one of them; within a stretch it stays the same.
    if (this.#filled > 0) return this.#channel;
    const peak = (samples: Float32Array) => {
      let most = 0;
      for (let i = from; i < from + count; i += 7) most = Math.max(most, Math.abs(samples[i]));
      return most;
    };
    const peaks = planar.map(peak);
    return (this.#channel = peaks.indexOf(Math.max(...peaks)));
  }

  /** The tone that the held samples are, if they are one. */
  #look(): Found | null {
    const x = this.#held;
    // A tone may stand on DC.
    const mean = x.reduce((sum, value) => sum + value, 0) / x.length;
    let [cross, own, neighbours] = [0, 0, 0];
    for (let n = 1; n < x.length - 1; n++) {
      const value = x[n] - mean;
      const sum = x[n - 1] + x[n + 1] - 2 * mean;
      cross += value * sum;
      own += value * value;
      neighbours += sum * sum;
    }
    const count = x.length - 2;
    if (own / count < powerOfDb(-70)) return null;
    const twiceCos = cross / own;
    if (!(Math.abs(twiceCos) < 2)) return null;
    // Noise of power s would leave (2 + 4 cos^2) s over.
    const left = Math.max(0, neighbours - twiceCos * cross) / (2 + twiceCos * twiceCos);
    if (left > own * powerOfDb(-lineUpTone.purityDb)) return null;
    const { w, power, rest } = fitSine(x, Math.acos(twiceCos / 2));
    // Also where the fit is no number.
    if (!(rest <= power * powerOfDb(-lineUpTone.purityDb))) return null;
    return { hz: (w * this.#rate) / (2 * Math.PI), power };
  }

  #take(found: Found | null): void {
    const open = this.#open;
    const steady =
      found !== null &&
      open !== null &&
      Math.abs(10 * Math.log10(found.power / open.first.power)) <= lineUpTone.levelDb &&
      Math.abs(found.hz - open.first.hz) <= steadyHz * open.first.hz;
    if (steady) {
      open.hzSum += found.hz;
      open.powerSum += found.power;
      open.count++;
    } else {
      this.#close();
      this.#open = found && {
        first: found,
        from: this.#index,
        hzSum: found.hz,
        powerSum: found.power,
        count: 1,
      };
    }
    this.#index++;
    const now = this.#index * stretchSeconds;
    if (now >= followedSeconds || (now >= lineUpTone.withinSeconds && !this.#open)) this.#done = true;
    if (
      now >= lineUpTone.withinSeconds &&
      this.#open &&
      this.#open.from * stretchSeconds >= lineUpTone.withinSeconds
    )
      this.#done = true;
  }

  #close(): void {
    const open = this.#open;
    this.#open = null;
    if (!open || open.count * stretchSeconds < lineUpTone.leastSeconds) return;
    this.#tone = {
      hz: open.hzSum / open.count,
      // A sine's level is that of its peak: at full scale 0 dBFS.
      levelDbfs: 10 * Math.log10((2 * open.powerSum) / open.count),
      startSeconds: open.from * stretchSeconds,
      endSeconds: (open.from + open.count) * stretchSeconds,
    };
    this.#done = true;
  }

  result(): LineUpTone | null {
    this.#close();
    return this.#tone;
  }
}
