/** Loudness over time, derived from the series that a measurement keeps. Pure; nothing is measured again. */
import { loudnessOf, windowPowers } from '../engine/gating.ts';
import type { MeasurementSeries } from '../engine/figures.ts';
import type { Passage } from './api/deliverables.ts';

/** The curves of a passage; excursions are found in them by excursions.ts. */
export type PassageCurves = Omit<Passage, 'excursions'>;

/** Steps of 10 ms in one value of the passage, and in a window (EBU Tech 3341: 400 ms and 3 s). */
const stepsPerValue = 10;
const momentarySteps = 40;
const shortTermSteps = 300;

/** Loudness of the window that ends with each value; `null` until the first is full, and where there is no energy. */
function sliding(
  energy: ArrayLike<number>,
  steps: number,
  weight: number,
  length: number,
): (number | null)[] {
  const values = new Array<number | null>(length).fill(null);
  const first = steps / stepsPerValue - 1;
  windowPowers(energy, steps, stepsPerValue).forEach((power, i) => {
    if (power > 0) values[first + i] = loudnessOf(weight * power);
  });
  return values;
}

/**
 * One value per 100 ms: short-term (3 s) and momentary (400 ms) loudness ending there, ungated and of full windows only
 * (EBU Tech 3341), and the largest true peak within, in dBTP. A last part under 100 ms has its true peak but no loudness.
 * `weight` 2 reads one audio channel as it is heard on two loudspeakers.
 */
export function passageOf(
  series: Pick<MeasurementSeries, 'energy' | 'truePeak'>,
  { weight = 1 }: { weight?: number } = {},
): PassageCurves {
  const length = Math.ceil(Math.max(series.energy.length, series.truePeak.length) / stepsPerValue);
  const truePeakDbtp = new Array<number | null>(length).fill(null);
  for (let i = 0; i < length; i++) {
    let peak = 0;
    const end = Math.min((i + 1) * stepsPerValue, series.truePeak.length);
    for (let j = i * stepsPerValue; j < end; j++) peak = Math.max(peak, series.truePeak[j]);
    truePeakDbtp[i] = peak > 0 ? 20 * Math.log10(peak) : null;
  }
  return {
    stepSeconds: 0.1,
    shortTermLufs: sliding(series.energy, shortTermSteps, weight, length),
    momentaryLufs: sliding(series.energy, momentarySteps, weight, length),
    truePeakDbtp,
  };
}

const hundredths = (values: readonly (number | null)[]) =>
  values.map((value) => (value === null ? null : Math.round(value * 100) / 100));

/** The curves in hundredths, for the wire: finer than a chart can show, and a third of the bytes. */
export const roundedCurves = (curves: PassageCurves): PassageCurves => ({
  stepSeconds: curves.stepSeconds,
  shortTermLufs: hundredths(curves.shortTermLufs),
  momentaryLufs: hundredths(curves.momentaryLufs),
  truePeakDbtp: hundredths(curves.truePeakDbtp),
});
