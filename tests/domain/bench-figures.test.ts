import { describe, expect, it } from 'vitest';
import {
  benchFiguresOf,
  benchFiguresSchema,
  compareWithBench,
  measuredDifferently,
} from '../../src/domain/bench-figures.ts';
import type { Figures } from '../../src/engine/figures.ts';

const figures: Figures = {
  loudness: {
    integratedLufs: -22.98,
    relativeThresholdLufs: -33,
    rangeLu: 7.2,
    rangeLowLufs: -28,
    rangeHighLufs: -20.8,
    momentaryMaxLufs: -17,
    shortTermMaxLufs: -19,
  },
  truePeak: { maxDbtp: -3.1, perChannelDbtp: [-3.1, -4] },
  samplePeak: { maxDbfs: -3.2, perChannelDbfs: [-3.2, -4.1] },
  times: { momentaryMaxAtSeconds: 1, shortTermMaxAtSeconds: 3, truePeakMaxAtSeconds: 2 },
  measuredSeconds: 12,
};
const bench = benchFiguresOf({ figures }, '2.0.0', 'engine');
const louder = (integratedLufs: number | null): Figures => ({
  ...figures,
  loudness: { ...figures.loudness, integratedLufs },
});

describe('figures of the bench against those of the service', () => {
  it('travel whole and come back as they were', () => {
    expect(benchFiguresSchema.parse(JSON.parse(JSON.stringify(bench)))).toEqual(bench);
    expect(bench.loudness.integratedLufs).toBe(-22.98);
  });

  it('are the same up to a thousandth, and differ beyond it', () => {
    expect(compareWithBench(bench, figures, '2.0.0').kind).toBe('same');
    expect(compareWithBench(bench, louder(-22.9795), '2.0.0').kind).toBe('same');
    expect(compareWithBench(bench, louder(-22.978), '2.0.0').kind).toBe('differs');
    expect(measuredDifferently(bench, figures, '2.0.0')).toBeNull();
  });

  it('name both where they differ', () => {
    expect(measuredDifferently(bench, louder(-20.5), '2.0.0')).toEqual({
      code: 'measured-differently',
      message:
        "Measured differently on the bench and by the service: integrated loudness −22.980 LUFS on the bench, −20.500 LUFS by the service. The service's figures stand; was it the same file?",
    });
  });

  it('count the figures that differ besides the first, each audio channel among them', () => {
    const other: Figures = {
      ...louder(-20.5),
      truePeak: { maxDbtp: -3.1, perChannelDbtp: [-3.1, -3.9] },
      samplePeak: { maxDbfs: -3.2, perChannelDbfs: [-3.2] },
    };
    expect(compareWithBench(bench, other, '2.0.0').message).toContain('2 more of its figures differ.');
  });

  it('differ where only one of the two has a value', () => {
    expect(compareWithBench(bench, louder(null), '2.0.0')).toMatchObject({
      kind: 'differs',
      message: expect.stringContaining('no value by the service'),
    });
  });

  it('are not compared between engines, nor with what a browser decoded, and that is said', () => {
    expect(compareWithBench(bench, louder(-20), '2.1.0')).toEqual({
      kind: 'not-compared',
      message:
        'The bench measured with engine 2.0.0 and the service with 2.1.0, so the two are not compared.',
    });
    const decoded = benchFiguresOf({ figures }, '2.0.0', 'browser');
    expect(compareWithBench(decoded, louder(-20), '2.0.0').kind).toBe('not-compared');
    expect(measuredDifferently(decoded, louder(-20), '2.0.0')).toBeNull();
  });

  it('are refused where they are no figures', () => {
    expect(benchFiguresSchema.safeParse({ ...bench, measuredSeconds: -1 }).success).toBe(false);
    expect(
      benchFiguresSchema.safeParse({
        ...bench,
        truePeak: { maxDbtp: 0, perChannelDbtp: new Array(1000).fill(0) },
      }).success,
    ).toBe(false);
  });
});
