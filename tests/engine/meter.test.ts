import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { kWeighting, responseDb } from '../../src/engine/k-weighting.ts';
import { layoutOfMask, weightsOf } from '../../src/engine/layouts.ts';
import { measurePlanar } from '../signals/meter-planar.ts';

function noise(seed: number, length: number, gain: number): Float64Array {
  let state = seed;
  return Float64Array.from({ length }, () => {
    state = (Math.imul(state, 1_664_525) + 1_013_904_223) >>> 0;
    return gain * (state / 2 ** 31 - 1);
  });
}
const measure = (planar: Float64Array[], rate = 48_000, split: number[] = []) =>
  measurePlanar(planar, rate, { split });
const sine = (hz: number, dbfs: number, seconds: number, rate = 48_000) =>
  Float64Array.from(
    { length: seconds * rate },
    (_, n) => 10 ** (dbfs / 20) * Math.sin((2 * Math.PI * hz * n) / rate),
  );

describe('K-weighting', () => {
  it('equals the tables of ITU-R BS.1770-5 Annex 1 at 48 kHz', () => {
    const [shelf, highPass] = kWeighting(48_000);
    const table1 = {
      b0: 1.53512485958697,
      b1: -2.69169618940638,
      b2: 1.19839281085285,
      a1: -1.69065929318241,
      a2: 0.73248077421585,
    };
    for (const [name, value] of Object.entries(table1)) expect(shelf[name as 'b0']).toBeCloseTo(value, 12);
    // Table 2's own digits fix the prototype to about 1e-9.
    const table2 = { b0: 1, b1: -2, b2: 1, a1: -1.99004745483398, a2: 0.99007225036621 };
    for (const [name, value] of Object.entries(table2)) expect(highPass[name as 'b0']).toBeCloseTo(value, 9);
  });

  it.each([32_000, 44_100, 88_200, 96_000, 192_000])('answers at %i Hz as at 48 kHz, up to 5 kHz', (rate) => {
    for (const hz of [50, 100, 500, 997, 2000])
      expect(responseDb(kWeighting(rate), hz, rate)).toBeCloseTo(
        responseDb(kWeighting(48_000), hz, 48_000),
        1,
      );
  });
});

describe('anchors of ITU-R BS.1770-5', () => {
  it('reads −3.01 LUFS for 997 Hz at full scale in one front channel', () => {
    const { figures } = measure([sine(997, 0, 5), new Float64Array(5 * 48_000)]);
    expect(figures.loudness.integratedLufs).toBeCloseTo(-3.01, 2);
  });

  it('weighs surrounds 1.41, leaves LFE out, and weighs the rears of 7.1 as front channels (Annex 3)', () => {
    expect(weightsOf(layoutOfMask(0x3f, 6))).toEqual([1, 1, 1, 0, 1.41, 1.41]);
    expect(weightsOf(layoutOfMask(0x60f, 6))).toEqual([1, 1, 1, 0, 1.41, 1.41]);
    expect(weightsOf(layoutOfMask(0x63f, 8))).toEqual([1, 1, 1, 0, 1, 1, 1.41, 1.41]);
  });

  it('has no value, and not zero, for silence and for what is shorter than a window', () => {
    const silent = measure([new Float64Array(48_000 * 4)]).figures;
    expect(silent.loudness).toMatchObject({
      integratedLufs: null,
      rangeLu: null,
      momentaryMaxLufs: null,
      shortTermMaxLufs: null,
    });
    expect(silent.truePeak.maxDbtp).toBeNull();
    const short = measure([sine(997, -20, 0.3)]).figures;
    expect(short.loudness).toMatchObject({
      integratedLufs: null,
      momentaryMaxLufs: null,
      shortTermMaxLufs: null,
    });
    expect(short.truePeak.maxDbtp).toBeCloseTo(-20, 0);
  });

  it('gates dual mono anew: 3.01 LU above one channel where the gate does not bite', () => {
    const { loudness } = measure([sine(997, -20, 5)]).figures;
    expect((loudness.dualMonoIntegratedLufs ?? 0) - (loudness.integratedLufs ?? 0)).toBeCloseTo(
      10 * Math.log10(2),
      6,
    );
    // At -71 LUFS as one channel nothing is above the gate; as two there is.
    const quiet = measure([sine(997, -71 + 3.01, 5)]).figures.loudness;
    expect(quiet.integratedLufs).toBeNull();
    expect(quiet.dualMonoIntegratedLufs).toBeCloseTo(-67.99, 1);
  });

  it('never reads a true peak under the sample peak: a single full sample', () => {
    const impulse = new Float64Array(4800);
    impulse[2000] = 1;
    expect(measure([impulse]).figures.truePeak.maxDbtp).toBe(0);
  });

  it('tells the peaks of the last samples and of the first', () => {
    const edges = new Float64Array(4800);
    edges[0] = 0.5;
    edges[4799] = 0.9;
    const { truePeak, times } = measure([edges]).figures;
    expect(truePeak.maxDbtp).toBeGreaterThanOrEqual(20 * Math.log10(0.9));
    expect(times.truePeakMaxAtSeconds).toBeCloseTo(4799 / 48_000, 3);
  });
});

describe('properties', () => {
  const rates = fc.constantFrom(22_050, 32_000, 44_100, 48_000, 96_000);

  it('gives the same figures and series to the last bit however the input is split', () => {
    fc.assert(
      fc.property(
        rates,
        fc.integer({ min: 1, max: 2 ** 31 }),
        fc.array(fc.integer({ min: 0, max: 9000 }), { maxLength: 12 }),
        (rate, seed, split) => {
          const planar = [noise(seed, 40_000, 0.4), noise(seed + 1, 40_000, 0.2)];
          expect(measure(planar, rate, split)).toEqual(measure(planar, rate));
        },
      ),
      { numRuns: 25, seed: 1770 },
    );
  });

  it('reads 6.02 LU and dB more for twice the signal', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 2 ** 31 }), (seed) => {
        const planar = [noise(seed, 60_000, 0.1), noise(seed + 7, 60_000, 0.1)];
        const [once, twice] = [planar, planar.map((samples) => samples.map((x) => 2 * x))].map(
          (p) => measure(p).figures,
        );
        const step = 20 * Math.log10(2);
        expect((twice.loudness.integratedLufs ?? 0) - (once.loudness.integratedLufs ?? 0)).toBeCloseTo(
          step,
          9,
        );
        expect((twice.truePeak.maxDbtp ?? 0) - (once.truePeak.maxDbtp ?? 0)).toBeCloseTo(step, 9);
      }),
      { numRuns: 10, seed: 1770 },
    );
  });

  it('keeps audio channels apart', () => {
    const [a, b] = [noise(3, 50_000, 0.3), noise(4, 50_000, 0.1)];
    expect(measure([a, b]).figures.truePeak.perChannelDbtp).toEqual([
      measure([a]).figures.truePeak.maxDbtp,
      measure([b]).figures.truePeak.maxDbtp,
    ]);
  });
});
