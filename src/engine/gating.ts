/**
 * Gating and windows over energies, written once: the engine uses it when it measures, the planner when it gates anew.
 * Energies are weighted mean squares (linear, all audio channels summed) per step of 10 ms.
 */

export const stepsPerSecond = 100;
const blockSteps = 40; // 400 ms gating block
const hopSteps = 10; // 75 % overlap
const shortTermSteps = 300; // 3 s

/** L = -0.691 + 10 log10(power): loudness in LUFS of a weighted mean square (BS.1770-5 Annex 1, eq. 2). */
export const loudnessOf = (power: number): number => -0.691 + 10 * Math.log10(power);
const powerOf = (lufs: number): number => 10 ** ((lufs + 0.691) / 10);

/** Running sums of the energies in double precision: `sums[j] - sums[i]` is the sum of steps i to j - 1. */
export function runningSums(energies: ArrayLike<number>): Float64Array {
  const sums = new Float64Array(energies.length + 1);
  for (let i = 0; i < energies.length; i++) sums[i + 1] = sums[i] + energies[i];
  return sums;
}

/**
 * Mean power of the window that ends after step `end`; never negative. Summed from the steps themselves: a difference of
 * running sums would leave the rounding of a loud past in a silent present.
 */
function windowPower(energies: ArrayLike<number>, end: number, steps: number): number {
  let sum = 0;
  for (let i = end - steps; i < end; i++) sum += energies[i];
  return sum / steps;
}

/** Mean power of every full window of `steps`, one each `hop` steps. */
export function windowPowers(energies: ArrayLike<number>, steps: number, hop: number): Float64Array {
  const count = energies.length < steps ? 0 : Math.floor((energies.length - steps) / hop) + 1;
  const powers = new Float64Array(count);
  for (let i = 0; i < count; i++) powers[i] = windowPower(energies, i * hop + steps, steps);
  return powers;
}

export interface Integrated {
  /** LUFS; `null` when no block stands above the absolute gate. */
  integratedLufs: number | null;
  /** LUFS of the relative gate; `null` likewise. */
  relativeThresholdLufs: number | null;
}

/** Gated loudness of 400 ms blocks at a 100 ms hop (BS.1770-5 Annex 1): strictly above -70 LUFS, then strictly above their mean - 10 LU. */
export function integrated(energies: ArrayLike<number>): Integrated {
  const powers = windowPowers(energies, blockSteps, hopSteps);
  const absolute = powerOf(-70);
  const meanAbove = (gate: number) => {
    let sum = 0;
    let count = 0;
    for (const power of powers)
      if (power > absolute && power > gate) {
        sum += power;
        count++;
      }
    return count === 0 ? null : sum / count;
  };
  const first = meanAbove(0);
  if (first === null) return { integratedLufs: null, relativeThresholdLufs: null };
  const relative = first / 10;
  const second = meanAbove(relative);
  return {
    integratedLufs: second === null ? null : loudnessOf(second),
    relativeThresholdLufs: loudnessOf(relative),
  };
}

export interface Range {
  rangeLu: number | null;
  /** LUFS of percentile 10 and of percentile 95. */
  rangeLowLufs: number | null;
  rangeHighLufs: number | null;
}

/** Loudness range (EBU Tech 3342): 3 s windows every 100 ms, >= -70 LUFS, then >= mean power - 20 LU; its own index rule. */
export function loudnessRange(energies: ArrayLike<number>): Range {
  const powers = windowPowers(energies, shortTermSteps, hopSteps);
  const absolute = powerOf(-70);
  const audible = powers.filter((power) => power >= absolute);
  if (audible.length === 0) return { rangeLu: null, rangeLowLufs: null, rangeHighLufs: null };
  let sum = 0;
  for (const power of audible) sum += power;
  const relative = sum / audible.length / 100;
  const kept = audible.filter((power) => power >= relative).sort();
  // round((n - 1) p / 100 + 1), counted from 1, halves away from zero.
  const at = (percent: number) => kept[Math.floor(((kept.length - 1) * percent) / 100 + 0.5)];
  const rangeLowLufs = loudnessOf(at(10));
  const rangeHighLufs = loudnessOf(at(95));
  return { rangeLu: rangeHighLufs - rangeLowLufs, rangeLowLufs, rangeHighLufs };
}

export interface WindowMaximum {
  /** LUFS; `null` where no window is full or none holds any energy. */
  maxLufs: number | null;
  /** End of the window that holds it, seconds from the start. */
  atSeconds: number | null;
}

/** Largest ungated loudness of a full window sliding by 10 ms (Tech 3341: a 100 ms hop misses its signal 13). */
export function slidingMaximum(energies: ArrayLike<number>, windowSeconds: 0.4 | 3): WindowMaximum {
  const steps = Math.round(windowSeconds * stepsPerSecond);
  const sums = runningSums(energies);
  let best = 0;
  let at = -1;
  for (let end = steps; end <= energies.length; end++) {
    const sum = sums[end] - sums[end - steps];
    if (sum > best) {
      best = sum;
      at = end;
    }
  }
  if (at < 0) return { maxLufs: null, atSeconds: null };
  const power = windowPower(energies, at, steps);
  return power > 0
    ? { maxLufs: loudnessOf(power), atSeconds: at / stepsPerSecond }
    : { maxLufs: null, atSeconds: null };
}

export const momentarySeconds = 0.4;
export const shortTermSeconds = 3;
