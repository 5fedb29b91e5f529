/** Left against right: correlation over sliding windows, balance by K-weighted loudness, and whether both are the same. */
import type { StereoFacts } from '../figures.ts';
import type { Step } from '../steps.ts';
import { correlation, defaultSilence, dualMonoDb, powerOfDb } from './thresholds.ts';

const hopSteps = 10;
const windowHops = correlation.windowSeconds * 10;

export class Stereo {
  readonly #left: number;
  readonly #right: number;
  /** Sums of the last hops: left, right, and left times right. */
  readonly #ring = new Float64Array(windowHops * 3);
  readonly #hop = new Float64Array(3);
  readonly #whole = new Float64Array(3);
  #steps = 0;
  #weightedLeft = 0;
  #weightedRight = 0;
  #windows = 0;
  #below = 0;
  #lowest: number | null = null;
  #lowestAt = 0;

  /** Audio channels of the pair. */
  constructor(left: number, right: number) {
    this.#left = left;
    this.#right = right;
  }

  step({ weighted, energy, leftRight }: Step): void {
    this.#weightedLeft += weighted[this.#left];
    this.#weightedRight += weighted[this.#right];
    this.#hop[0] += energy[this.#left];
    this.#hop[1] += energy[this.#right];
    this.#hop[2] += leftRight;
    if (++this.#steps % hopSteps !== 0) return;
    const hop = this.#steps / hopSteps - 1;
    this.#ring.set(this.#hop, (hop % windowHops) * 3);
    for (let k = 0; k < 3; k++) this.#whole[k] += this.#hop[k];
    this.#hop.fill(0);
    if (hop + 1 >= windowHops) this.#window(hop);
  }

  #window(hop: number): void {
    let ll = 0;
    let rr = 0;
    let lr = 0;
    for (let i = 0; i < this.#ring.length; i += 3) {
      ll += this.#ring[i];
      rr += this.#ring[i + 1];
      lr += this.#ring[i + 2];
    }
    // A window in which either is silent has no correlation to speak of.
    const silent = powerOfDb(defaultSilence.levelDbfs) * windowHops * hopSteps;
    if (ll < silent || rr < silent) return;
    const value = Math.max(-1, Math.min(1, lr / Math.sqrt(ll * rr)));
    this.#windows++;
    // As shown, to two decimals: what has nothing to do with each other wavers about 0.
    if (value <= -0.005) this.#below++;
    if (this.#lowest !== null && value >= this.#lowest) return;
    this.#lowest = value;
    this.#lowestAt = (hop + 1) / 10 - correlation.windowSeconds;
  }

  result(): StereoFacts {
    const [ll, rr, lr] = this.#whole;
    const sum = ll + rr + 2 * lr;
    const difference = Math.max(0, ll + rr - 2 * lr);
    const both = this.#weightedLeft > 0 && this.#weightedRight > 0;
    return {
      balanceLu: both ? 10 * Math.log10(this.#weightedLeft / this.#weightedRight) : null,
      correlationLowest: this.#lowest,
      correlationLowestAtSeconds: this.#lowest === null ? null : this.#lowestAt,
      belowZeroPercent: this.#windows === 0 ? null : (100 * this.#below) / this.#windows,
      dualMono: sum === 0 ? null : difference < sum * powerOfDb(dualMonoDb),
    };
  }
}
