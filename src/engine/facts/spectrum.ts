/**
 * The long-term mean spectrum, of Hann windows of 1024 samples: ten a second in the first 20 s, one in three seconds from then
 * on, each weighing the time that it stands for. That is enough for a mean and costs next to nothing. Two audio channels share
 * one transform.
 */
import type { Speaker } from '../layouts.ts';
import type { Planar } from '../steps.ts';
import { Fourier } from './fourier.ts';
import { bandwidth, powerOfDb, suspectLfe } from './thresholds.ts';

const length = 1024;
const denseSeconds = 20;
/** Bins that a level is the mean of. */
const smoothed = 5;

export class Spectrum {
  readonly #rate: number;
  readonly #lfe: number;
  readonly #window: Float64Array;
  readonly #fourier = new Fourier(length);
  readonly #held: Float64Array[];
  readonly #silence = new Float64Array(length);
  readonly #mean = new Float64Array(length / 2);
  readonly #lfeMean = new Float64Array(length / 2);
  #next = 0;
  #filled = 0;
  /** Samples that all windows stand for: the weights in the sums. */
  #weights = 0;

  constructor(sampleRateHz: number, speakers: readonly Speaker[]) {
    this.#rate = sampleRateHz;
    this.#lfe = speakers.indexOf('LFE');
    this.#window = Float64Array.from({ length }, (_, i) => 0.5 - 0.5 * Math.cos((2 * Math.PI * i) / length));
    this.#held = speakers.map(() => new Float64Array(length));
  }

  /** Samples of every audio channel, `first` being the place of the first. */
  samples(planar: Planar, count: number, first: number): void {
    while (this.#next + length > first && this.#next + this.#filled < first + count) {
      const from = this.#next + this.#filled - first;
      const taken = Math.min(count - from, length - this.#filled);
      const lanes = planar();
      this.#held.forEach((held, c) => {
        const samples = lanes[c];
        for (let i = 0; i < taken; i++)
          held[this.#filled + i] = samples[from + i] * this.#window[this.#filled + i];
      });
      this.#filled += taken;
      if (this.#filled < length) return;
      const asked = this.#next < denseSeconds * this.#rate ? this.#rate / 10 : 3 * this.#rate;
      const hop = Math.max(length, Math.round(asked));
      this.#take(hop);
      this.#filled = 0;
      this.#next += hop;
    }
  }

  #take(weight: number): void {
    this.#weights += weight;
    const main = this.#held.filter((_, c) => c !== this.#lfe);
    for (let c = 0; c < main.length; c += 2) this.#add(weight, this.#mean, main[c], main[c + 1]);
    if (this.#lfe >= 0) this.#add(weight, this.#lfeMean, this.#held[this.#lfe], undefined);
  }

  /** Adds the power of one or two real signals: |Z(k)|^2 + |Z(-k)|^2 of the one as real and the other as imaginary part. */
  #add(weight: number, into: Float64Array, one: Float64Array, other: Float64Array | undefined): void {
    const [re, im] = [one, other ?? this.#silence];
    this.#fourier.transform(re, im);
    for (let k = 1; k < length / 2; k++) {
      const mirror = length - k;
      into[k] += weight * (re[k] ** 2 + im[k] ** 2 + re[mirror] ** 2 + im[mirror] ** 2);
    }
    if (!other) this.#silence.fill(0);
  }

  #hz(bin: number): number {
    return (bin * this.#rate) / length;
  }

  #level(spectrum: Float64Array, fromHz: number, toHz: number): number {
    let sum = 0;
    let bins = 0;
    for (let k = 1; k < length / 2; k++)
      if (this.#hz(k) >= fromHz && this.#hz(k) < toHz) {
        sum += spectrum[k];
        bins++;
      }
    return bins === 0 ? 0 : sum / bins;
  }

  /** Highest frequency within 60 dB of the octave about 1 kHz; `null` where that is silent or there was no window. */
  bandwidthHz(): number | null {
    const octave = this.#level(this.#mean, 1000 / Math.SQRT2, 1000 * Math.SQRT2);
    if (this.#weights === 0 || octave / this.#weights < 1e-14) return null;
    const least = octave * powerOfDb(-bandwidth.dropDb);
    for (let k = length / 2 - 1; k >= smoothed; k--) {
      let sum = 0;
      for (let i = 0; i < smoothed; i++) sum += this.#mean[k - i];
      if (sum / smoothed >= least) return Math.round(this.#hz(k - (smoothed - 1) / 2));
    }
    return null;
  }

  /** Share of the LFE's energy above 250 Hz; `null` without an LFE or where it is silent. */
  lfeShareAbove(): number | null {
    if (this.#lfe < 0) return null;
    let [low, high] = [0, 0];
    this.#lfeMean.forEach((power, k) => {
      if (this.#hz(k) > suspectLfe.aboveHz) high += power;
      else low += power;
    });
    return low + high < 1e-9 * Math.max(1, this.#weights) ? null : high / (low + high);
  }
}
