import { describe, expect, it } from 'vitest';
import { annex2Peak } from '../../src/engine/true-peak.ts';
import { measurePlanar } from '../signals/meter-planar.ts';
import { noise } from '../signals/wav.ts';

/** Noise with nothing above a sixth of the rate to speak of: three running means of 4 samples. */
function soft(seed: number, length: number): Float64Array {
  let samples = noise(seed, length, 1);
  for (let round = 0; round < 3; round++)
    samples = samples.map(
      (_, i) => (samples[i] + (samples[i - 1] ?? 0) + (samples[i - 2] ?? 0) + (samples[i - 3] ?? 0)) / 4,
    );
  return samples;
}

describe('the true peak that ships, against the filter of ITU-R BS.1770-5 Annex 2', () => {
  it('gives that filter’s anchors: an impulse 0.972 by its phases, 1 by its sample', () => {
    const impulse = new Float64Array(50);
    impulse[20] = 1;
    expect(annex2Peak(impulse, 48_000)).toBe(1);
    // The standard's largest coefficient.
    expect(
      annex2Peak(
        impulse.map((x) => -x),
        48_000,
      ),
    ).toBe(1);
  });

  // That filter's own error: -0.295 to +0.218 dB up to 12 kHz at 48 kHz, computed from its coefficients; ours adds 0.1 dB.
  it.each([44_100, 48_000, 96_000])('reads within the sum of both errors at %i Hz', (rate) => {
    for (let seed = 1; seed <= 20; seed++) {
      const samples = soft(seed, 6000);
      const ours = measurePlanar([samples], rate).figures.truePeak.maxDbtp ?? NaN;
      const difference = ours - 20 * Math.log10(annex2Peak(samples, rate));
      expect(difference).toBeGreaterThan(-0.318);
      expect(difference).toBeLessThan(0.395);
    }
  });
});
