/**
 * True peak in its first form: the 48-coefficient interpolator of ITU-R BS.1770-5 Annex 2, as four phases of 12 taps.
 * Order: each row convolves the newest sample first. It stays as the oracle of every faster form.
 */
export const phases: readonly Float64Array[] = (
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

export const taps = 12;
/** The interpolated points of a convolution lie between the samples 6 and 5 before its newest: they count for the earlier. */
export const delaySamples = 6;

/**
 * The phases that make a grid of at least 176.4 kHz: all four below 88.2 kHz, two from there on. Two also at 176.4 kHz and
 * above, where the samples alone would do for sound under 20 kHz but miss EBU Tech 3341's signals, which scale with the rate.
 */
export const phasesFor = (sampleRateHz: number): readonly Float64Array[] =>
  sampleRateHz < 88_200 ? phases : [phases[0], phases[2]];
