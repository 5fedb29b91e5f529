import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { passageOf, roundedCurves } from '../../src/domain/passage.ts';

const series = (energy: number[], truePeak: number[] = energy.map(() => 0.5)) => ({
  energy: Float64Array.from(energy),
  truePeak: Float32Array.from(truePeak),
});
/** ITU-R BS.1770-5 Annex 1, of the mean of the last `steps` energies before `end`, added up one by one. */
function direct(energy: number[], end: number, steps: number): number | null {
  if (end < steps || end > energy.length) return null;
  let sum = 0;
  for (let i = end - steps; i < end; i++) sum += energy[i];
  return sum > 0 ? -0.691 + 10 * Math.log10(sum / steps) : null;
}
const steady = (seconds: number, energy: number) => new Array<number>(seconds * 100).fill(energy);

describe('the passage of a series', () => {
  it('agrees with a direct sum over every window, whatever the series', () => {
    fc.assert(
      fc.property(
        fc.array(fc.oneof(fc.constant(0), fc.double({ min: 1e-12, max: 4, noNaN: true })), {
          maxLength: 700,
        }),
        (energy) => {
          const passage = passageOf(series(energy));
          expect(passage.shortTermLufs).toHaveLength(Math.ceil(energy.length / 10));
          for (const [values, steps] of [
            [passage.shortTermLufs, 300],
            [passage.momentaryLufs, 40],
          ] as const)
            values.forEach((value, i) => {
              const expected = direct(energy, (i + 1) * 10, steps);
              if (expected === null) expect(value).toBeNull();
              else expect(value).toBeCloseTo(expected, 9);
            });
        },
      ),
      { numRuns: 60 },
    );
  });

  it('has no short-term value before 3 s and no momentary value before 400 ms', () => {
    const { shortTermLufs, momentaryLufs } = passageOf(series(steady(4, 0.01)));
    expect(shortTermLufs.findIndex((value) => value !== null)).toBe(29);
    expect(momentaryLufs.findIndex((value) => value !== null)).toBe(3);
    expect(shortTermLufs[29]).toBeCloseTo(-20.691, 9);
  });

  it('returns to silence without a residue of what was loud', () => {
    const { shortTermLufs, momentaryLufs } = passageOf(series([...steady(5, 3.7), ...steady(4, 0)]));
    expect(momentaryLufs.at(-1)).toBeNull();
    expect(shortTermLufs.at(-1)).toBeNull();
    expect(shortTermLufs[78]).not.toBeNull();
    expect(shortTermLufs[79]).toBeNull();
  });

  it('reads one audio channel as two 3.01 LU louder, and leaves its peaks', () => {
    const one = passageOf(series(steady(4, 0.01)));
    const two = passageOf(series(steady(4, 0.01)), { weight: 2 });
    expect((two.shortTermLufs[35] ?? 0) - (one.shortTermLufs[35] ?? 0)).toBeCloseTo(10 * Math.log10(2), 9);
    expect(two.truePeakDbtp).toEqual(one.truePeakDbtp);
  });

  it('takes the largest true peak of each 100 ms, also of a last part that is shorter', () => {
    const peaks = new Array<number>(25).fill(0.25);
    peaks[13] = 1;
    peaks[24] = 0.5;
    const { truePeakDbtp, momentaryLufs } = passageOf(series(new Array<number>(25).fill(0.01), peaks));
    expect(truePeakDbtp).toHaveLength(3);
    expect(truePeakDbtp[0]).toBeCloseTo(-12.041, 3);
    expect(truePeakDbtp[1]).toBe(0);
    expect(truePeakDbtp[2]).toBeCloseTo(-6.021, 3);
    expect(momentaryLufs).toEqual([null, null, null]);
  });

  it('has no peak value in digital silence, and nothing at all of an empty series', () => {
    expect(passageOf(series([0, 0], [0, 0])).truePeakDbtp).toEqual([null]);
    expect(passageOf(series([]))).toEqual({
      stepSeconds: 0.1,
      shortTermLufs: [],
      momentaryLufs: [],
      truePeakDbtp: [],
    });
  });

  it('goes over the wire in hundredths, with what is missing still missing', () => {
    const rounded = roundedCurves({
      stepSeconds: 0.1,
      shortTermLufs: [null, -23.0049],
      momentaryLufs: [-18.996, null],
      truePeakDbtp: [-1.005],
    });
    expect(rounded).toMatchObject({ shortTermLufs: [null, -23], momentaryLufs: [-19, null] });
  });
});
