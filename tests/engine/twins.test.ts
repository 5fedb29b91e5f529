import { describe, expect, it } from 'vitest';
import type { Encoding } from '../../src/engine/containers/samples.ts';
import { openNative } from '../../src/engine/containers/open.ts';
import { layoutOfCount, type Speaker } from '../../src/engine/layouts.ts';
import { measure } from '../../src/engine/measure.ts';
import type { Planar, Run, Step, StepObserver } from '../../src/engine/steps.ts';
import { measurePlanar } from '../signals/meter-planar.ts';
import { wavOf } from '../signals/wav.ts';

/** Everything that an observer sees, copied; runs sorted, since the twins may tell those of one step in another order. */
class Witness implements StepObserver {
  readonly steps: unknown[] = [];
  readonly runs: Run[] = [];
  readonly heard: number[] = [];
  step({ index, weighted, energy, peak, leftRight }: Step): void {
    this.steps.push([index, ...weighted, ...energy, ...peak, leftRight]);
  }
  run(run: Run): void {
    this.runs.push(run);
  }
  samples(planar: Planar, count: number, first: number): void {
    const lanes = planar();
    for (let i = 0; i < count; i++) for (const lane of lanes) this.heard.push(first + i, lane[i]);
  }
  get all() {
    const order = (run: Run) => `${run.kind} ${run.audioChannel} ${String(run.start).padStart(9, '0')}`;
    return {
      steps: this.steps,
      runs: this.runs.sort((a, b) => (order(a) < order(b) ? -1 : 1)),
      heard: this.heard,
    };
  }
}

let state = 1;
const random = () => (state = (Math.imul(state, 1_664_525) + 1_013_904_223) >>> 0) / 2 ** 31 - 1;

const programmes: Record<string, (i: number, c: number, rate: number) => number> = {
  'white noise': () => 0.5 * random(),
  'clipped noise': () => Math.max(-1, Math.min(1, 2.5 * random())),
  'a loud low tone': (i, c, rate) => Math.sin((i * 2 * Math.PI * 90 * (c + 1)) / rate) * Math.sin(i / rate),
  'a high tone at an odd phase': (i, c, rate) => 0.9 * Math.sin((2 * Math.PI * i) / 4.3 + c + rate),
  'very quiet noise': () => 1e-4 * random(),
  'noise with gaps of zeros': (i) => ((i >> 8) % 3 === 0 ? 0 : 0.7 * random()),
  'impulses in silence': (i) => (i % 1777 === 0 ? 0.8 : 0),
  silence: () => 0,
};
const forms: Record<string, Encoding> = {
  '8 bit unsigned': { kind: 'unsigned', bytes: 1, littleEndian: true },
  '16 bit big-endian': { kind: 'integer', bytes: 2, littleEndian: false },
  '24 bit': { kind: 'integer', bytes: 3, littleEndian: true },
  '24 bit big-endian': { kind: 'integer', bytes: 3, littleEndian: false },
  '32 bit': { kind: 'integer', bytes: 4, littleEndian: true },
  'float 32': { kind: 'float', bytes: 4, littleEndian: true },
  'float 64 big-endian': { kind: 'float', bytes: 8, littleEndian: false },
};
const layouts: Speaker[][] = [
  ['M'],
  ['L', 'R'],
  ['L', 'C', 'R'],
  ['L', 'C', 'R', 'Ls', 'Rs', 'LFE'],
  ['L', 'R', 'C', 'LFE', 'Lrs', 'Rrs', 'Lss', 'Rss', 'Ltf', 'Rtf', 'Ltr', 'Rtr'],
];

describe.each(Object.keys(programmes))('the kernel and its scalar twin on %s', (name) => {
  it.each(Object.keys(forms))('agree to the last bit in %s', (form) => {
    state = 1;
    // Every rate and every layout, in another pairing for each form.
    const turn = Object.keys(forms).indexOf(form);
    [8000, 22_050, 44_100, 48_000, 96_000].forEach((rate, r) => {
      const speakers = layouts[(r + turn) % layouts.length];
      const frames = Math.round(rate * 0.13) + speakers.length;
      const planar = speakers.map((_, c) =>
        Float64Array.from({ length: frames }, (_, i) => programmes[name](i, c, rate)),
      );
      if (forms[form].kind === 'float') planar[0][frames >> 1] = c(rate);
      const [plain, fast] = [new Witness(), new Witness()];
      const encoding = forms[form];
      const scalar = measurePlanar(planar, rate, {
        encoding,
        speakers,
        twin: 'scalar',
        observers: [plain],
      });
      const split = [1, 7, 480, 1000, 3];
      const kernel = measurePlanar(planar, rate, { encoding, speakers, split, observers: [fast] });
      expect(kernel).toEqual(scalar);
      expect(fast.all).toEqual(plain.all);
    });
  });
});

/** A float's own troubles, by rate: one sample that is not a number, infinite, beyond full scale, or beyond any level. */
const c = (rate: number) => ({ 8000: NaN, 22_050: -Infinity, 44_100: 1.5, 96_000: -1e30 })[rate] ?? 0.25;

describe('frames that a source reads straight into the kernel’s memory', () => {
  it.each([16, 24, 32, 'float'] as const)('measure as those that are copied, in %s', async (bits) => {
    state = 7;
    const planar = [0, 1].map(() => Float64Array.from({ length: 300_001 }, () => 0.4 * random()));
    const bytes = wavOf(planar, 48_000, bits);
    const open = async () => {
      const source = await openNative({
        size: bytes.length,
        read: (offset, length, into) => {
          const wanted = bytes.subarray(offset, offset + length);
          if (!into) return Promise.resolve(wanted);
          into.set(wanted);
          return Promise.resolve(into.subarray(0, wanted.length));
        },
      });
      if (!source) throw new Error('Not read natively');
      return source;
    };
    const { speakers } = layoutOfCount(2);
    const encoding: Encoding =
      bits === 'float'
        ? { kind: 'float', bytes: 8, littleEndian: true }
        : { kind: 'integer', bytes: (bits / 8) as 2 | 3 | 4, littleEndian: true };
    const copied = measurePlanar(planar, 48_000, { encoding, speakers });
    const [{ measurement, series }] = await measure(await open());
    expect(measurement.figures).toMatchObject(copied.figures);
    expect(series).toEqual(copied.series);
  });
});
