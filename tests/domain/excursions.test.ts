import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { Passage } from '../../src/domain/api/deliverables.ts';
import { findExcursions } from '../../src/domain/excursions.ts';
import { specBodySchema } from '../../src/domain/spec.ts';

const peakRule = {
  id: 'true-peak',
  kind: 'limits',
  metric: 'truePeakDbtp',
  atLeast: null,
  atMost: -1,
  breach: 'reject',
};
const shortTermRule = {
  ...peakRule,
  id: 'short-term',
  metric: 'shortTermMaxLufs',
  atMost: -18,
  breach: 'advise',
};
const momentaryRule = { ...peakRule, id: 'momentary', metric: 'momentaryMaxLufs', atMost: -15 };
const spec = (rules: Record<string, unknown>[], settings = {}) =>
  specBodySchema.parse({ ...settings, rules });

type Curve = (number | null)[];
function passage(curves: { peak?: Curve; shortTerm?: Curve; momentary?: Curve }): Passage {
  const length = Math.max(...Object.values(curves).map((curve) => curve.length));
  const none = (): Curve => Array<null>(length).fill(null);
  return {
    stepSeconds: 0.1,
    truePeakDbtp: curves.peak ?? none(),
    shortTermLufs: curves.shortTerm ?? none(),
    momentaryLufs: curves.momentary ?? none(),
  } as Passage;
}
const repeat = (value: number | null, times: number): Curve => Array<number | null>(times).fill(value);

describe('excursions', () => {
  it('are stretches beyond an upper limit, with start, length, worst value and distance', () => {
    const peak = [...repeat(-3, 10), -0.5, 0.3, -0.2, ...repeat(-3, 10), 0, -3];
    const found = findExcursions(passage({ peak }), spec([peakRule]));
    expect(found).toHaveLength(2);
    expect(found[0]).toMatchObject({
      number: 1,
      ruleId: 'true-peak',
      breach: 'reject',
      worst: 0.3,
      unit: 'dBTP',
    });
    expect(found[0].startSeconds).toBeCloseTo(1, 9);
    expect(found[0].lengthSeconds).toBeCloseTo(0.3, 9);
    expect(found[0].beyond).toBeCloseTo(1.3, 9);
    expect(found[1].startSeconds).toBeCloseTo(2.3, 9);
  });

  it('begin where the first window beyond the limit begins: 3 s and 400 ms back', () => {
    const shortTerm = [...repeat(null, 29), ...repeat(-20, 21), ...repeat(-17, 5), ...repeat(-20, 5)];
    const [slow] = findExcursions(passage({ shortTerm }), spec([shortTermRule]));
    expect(slow.startSeconds).toBeCloseTo(2.1, 9);
    expect(slow.startSeconds + slow.lengthSeconds).toBeCloseTo(5.5, 9);
    const momentary = [...repeat(-20, 20), -14, ...repeat(-20, 5)];
    const [quick] = findExcursions(passage({ momentary }), spec([momentaryRule]));
    expect(quick.startSeconds).toBeCloseTo(1.7, 9);
    expect(quick.lengthSeconds).toBeCloseTo(0.4, 9);
  });

  it('are judged as the judge does: the value as shown unless unrounded, the tolerance of measurement excused', () => {
    const peak = [-3, -0.96, -3];
    expect(findExcursions(passage({ peak }), spec([peakRule]))).toHaveLength(0);
    expect(findExcursions(passage({ peak }), spec([peakRule], { rounding: 'unrounded' }))).toHaveLength(1);
    const tolerant = spec([{ ...peakRule, measurementTolerance: 0.3 }]);
    expect(findExcursions(passage({ peak: [-0.7] }), tolerant)).toHaveLength(0);
    expect(findExcursions(passage({ peak: [-0.6] }), tolerant)).toHaveLength(1);
  });

  it('of several rules are numbered together by time', () => {
    const found = findExcursions(
      passage({
        peak: [...repeat(-3, 40), 0],
        momentary: [...repeat(-20, 10), -10, ...repeat(-20, 30)],
        shortTerm: repeat(-20, 41),
      }),
      spec([peakRule, momentaryRule, shortTermRule]),
    );
    expect(found.map(({ number, ruleId }) => [number, ruleId])).toEqual([
      [1, 'momentary'],
      [2, 'true-peak'],
    ]);
  });

  it('are none where no rule limits a curve from above', () => {
    const quiet = spec([{ ...shortTermRule, atLeast: -40, atMost: null }]);
    expect(findExcursions(passage({ peak: [3], shortTerm: [-60], momentary: [0] }), quiet)).toEqual([]);
  });

  it('hold every step beyond the limit and no other, and never touch', () => {
    const step = fc.option(fc.integer({ min: -80, max: 30 }).map((tenths) => tenths / 10));
    fc.assert(
      fc.property(fc.array(step, { minLength: 1, maxLength: 60 }), (peak) => {
        const found = findExcursions(passage({ peak }), spec([peakRule]));
        const inside = peak.map((_, i) =>
          found.some(
            ({ startSeconds, lengthSeconds }) =>
              i * 0.1 >= startSeconds - 1e-6 && (i + 1) * 0.1 <= startSeconds + lengthSeconds + 1e-6,
          ),
        );
        expect(inside).toEqual(peak.map((value) => value !== null && value > -1));
        found.forEach((one, i) => {
          expect(one.number).toBe(i + 1);
          expect(one.beyond).toBeGreaterThan(0);
          const next = found[i + 1];
          if (next) expect(next.startSeconds).toBeGreaterThan(one.startSeconds + one.lengthSeconds + 0.05);
        });
      }),
    );
  });
});
