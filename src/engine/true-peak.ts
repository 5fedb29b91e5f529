/**
 * True peak in the standard's own form: the 48-coefficient interpolator of ITU-R BS.1770-5 Annex 2, as four phases of 12
 * taps, each row convolving the newest sample first. What ships (interpolator.ts) reads closer; this stays as its oracle.
 */
const phases: readonly Float64Array[] = (
  [
    [
      0.001708984375, 0.010986328125, -0.0196533203125, 0.033203125, -0.0594482421875, 0.1373291015625,
      0.97216796875, -0.102294921875, 0.047607421875, -0.026611328125, 0.014892578125, -0.00830078125,
    ],
    [
      -0.0291748046875, 0.029296875, -0.0517578125, 0.089111328125, -0.16650390625, 0.465087890625,
      0.77978515625, -0.2003173828125, 0.1015625, -0.0582275390625, 0.0330810546875, -0.0189208984375,
    ],
    [
      -0.0189208984375, 0.0330810546875, -0.0582275390625, 0.1015625, -0.2003173828125, 0.77978515625,
      0.465087890625, -0.16650390625, 0.089111328125, -0.0517578125, 0.029296875, -0.0291748046875,
    ],
    [
      -0.00830078125, 0.014892578125, -0.026611328125, 0.047607421875, -0.102294921875, 0.97216796875,
      0.1373291015625, -0.0594482421875, 0.033203125, -0.0196533203125, 0.010986328125, 0.001708984375,
    ],
  ] as const
).map((row) => Float64Array.from(row));

const taps = 12;

/**
 * The phases that make a grid of at least 176.4 kHz: all four below 88.2 kHz, two from there on. Two also at 176.4 kHz and
 * above, where the samples alone would do for sound under 20 kHz but miss EBU Tech 3341's signals, which scale with the rate.
 */
const phasesFor = (sampleRateHz: number): readonly Float64Array[] =>
  sampleRateHz < 88_200 ? phases : [phases[0], phases[2]];

/** Largest of the samples and of the points between them, linear; silence stands around the samples. */
export function annex2Peak(samples: ArrayLike<number>, sampleRateHz: number): number {
  let peak = 0;
  for (let newest = 0; newest < samples.length + taps - 1; newest++) {
    peak = Math.max(peak, Math.abs(samples[newest] ?? 0));
    for (const phase of phasesFor(sampleRateHz)) {
      let sum = 0;
      for (let k = 0; k < taps; k++) sum += phase[k] * (samples[newest - k] ?? 0);
      peak = Math.max(peak, Math.abs(sum));
    }
  }
  return peak;
}
