// Rules on facts of the signal; the limits here are invented.
import { describe, expect, it } from 'vitest';
import { judge, type Judged } from '../../src/domain/judge.ts';
import { permittedText } from '../../src/domain/rule-words.ts';
import { rangeMetrics, ruleSchema, specBodySchema } from '../../src/domain/spec.ts';
import { signalCodes, type SignalFacts } from '../../src/engine/figures.ts';
import { figures, stereoFormat } from '../factories/world.ts';

const places = { count: 0, listed: [] };
const quiet: SignalFacts = {
  silence: [-40, -50, -60, -70].map((levelDbfs, i) => ({
    levelDbfs,
    headSeconds: 3 - i * 0.5,
    tailSeconds: 0,
    longestInsideSeconds: 0.754,
    longestInsideAtSeconds: 4,
  })),
  dropOuts: { ...places, count: 2 },
  clipping: {
    ...places,
    count: 9,
    longestSamples: 12,
    atLeast: [
      { samples: 3, count: 9 },
      { samples: 10, count: 1 },
    ],
  },
  flatTops: { ...places, longestSamples: 0 },
  dcOffsetPercent: [0.1, -0.62],
  stereo: {
    balanceLu: -3.456,
    correlationLowest: -0.304,
    correlationLowestAtSeconds: 12,
    belowZeroPercent: 4.96,
    dualMono: false,
  },
  silentAudioChannels: [],
  suspectOrder: null,
  bandwidthHz: 15_876,
  lineUpTone: null,
  effectiveBitDepth: 16,
};
const measured = (signal?: SignalFacts, findings: Judged['findings'] = []): Judged => ({
  format: { ...stereoFormat, frameRate: '25', bitRateKbps: 128 },
  figures: { ...figures({}), measuredSeconds: 90, ...(signal && { signal }) },
  findings,
});
const verdictOf = (rule: Record<string, unknown>, judged = measured(quiet)) =>
  judge(judged, specBodySchema.parse({ rules: [{ id: 'it', breach: 'reject', ...rule }] })).rules[0];
const limits = (metric: string, atLeast: number | null, atMost: number | null, more = {}) => ({
  kind: 'limits',
  metric,
  atLeast,
  atMost,
  ...more,
});

describe('rules on facts of the signal', () => {
  it.each([
    [limits('silenceHeadSeconds', null, 2), 'pass', '2.00', 'on the limit'],
    [limits('silenceHeadSeconds', null, 2, { silenceLevelDbfs: -40 }), 'fail', '3.00', '1.00 s over'],
    [limits('silenceInsideSeconds', null, 0.75), 'pass', '0.75', 'on the limit'],
    [limits('dropOutCount', null, 0), 'fail', '2', '2 over'],
    [limits('clippedRunCount', null, 0), 'fail', '9', '9 over'],
    [limits('clippedRunCount', null, 1, { clippedSamples: 10 }), 'pass', '1', 'on the limit'],
    [limits('lineUpToneDbfs', -18.5, -17.5), 'not_judged', 'no value', 'no value: no line-up tone found'],
    [
      limits('clippedRunCount', null, 0, { clippedSamples: 20 }),
      'not_judged',
      'no value',
      'not known for runs of this length',
    ],
    [limits('dcOffsetPercent', null, 0.5), 'fail', '0.62', '0.12 % over'],
    [limits('balanceLu', -3, 3), 'fail', '−3.46', '0.46 LU under'],
    [limits('correlationLowest', -0.3, null), 'pass', '−0.30', 'on the limit'],
    [limits('outOfPhasePercent', null, 5), 'pass', '5.0', 'on the limit'],
    [limits('bandwidthHz', 17_000, null), 'fail', '15876', '1124 Hz under'],
    [limits('bitRateKbps', 192, null), 'fail', '128', '64 kbit/s under'],
    [{ kind: 'oneOf', fact: 'effectiveBitDepth', allowed: ['24'] }, 'fail', '16 bit', 'not as asked'],
    [{ kind: 'oneOf', fact: 'frameRate', allowed: ['25'] }, 'pass', '25', 'as asked'],
  ])('judges %o', (rule, outcome, judgedText, marginText) => {
    expect(verdictOf(rule)).toMatchObject({ outcome, judgedText, marginText });
  });

  it('says what is not known of a measurement of an older engine, and lets nothing of it pass', () => {
    const reason = 'not known: measured by an engine before 2.0.0';
    const old = measured();
    expect(verdictOf(limits('dropOutCount', null, 0), old)).toMatchObject({ outcome: 'not_judged', reason });
    for (const code of signalCodes)
      expect(verdictOf({ kind: 'finding', code }, old)).toMatchObject({ outcome: 'not_judged', reason });
  });

  it('takes a finding of the signal for a breach only where the spec has a rule for it', () => {
    const tone = { code: 'line-up-tone', message: 'A line-up tone stands until 12.0 s.' };
    const judged = measured(quiet, [tone]);
    expect(verdictOf({ kind: 'finding', code: 'line-up-tone' }, judged)).toMatchObject({ outcome: 'fail' });
    const other = judge(
      judged,
      specBodySchema.parse({ rules: [{ id: 'x', breach: 'reject', ...limits('dropOutCount', null, 9) }] }),
    );
    expect(other).toMatchObject({ outcome: 'pass', rules: [{ ruleId: 'x' }] });
  });

  it('can be written for every metric, each with its unit', () => {
    const text = (metric: string) =>
      permittedText(ruleSchema.parse({ id: 'it', breach: 'reject', ...limits(metric, null, 5) }));
    for (const metric of rangeMetrics)
      if (metric !== 'integratedLufs') expect(text(metric)).toMatch(/^at most \d/);
    expect(text('dropOutCount')).toBe('at most 5');
    expect(text('outOfPhasePercent')).toBe('at most 5.0 %');
    expect(
      permittedText(
        ruleSchema.parse({
          id: 'it',
          breach: 'reject',
          ...limits('silenceTailSeconds', null, 2, { silenceLevelDbfs: -70 }),
        }),
      ),
    ).toBe('at most 2.0 s, under −70 dBFS');
    expect(
      permittedText(
        ruleSchema.parse({
          id: 'it',
          breach: 'reject',
          ...limits('clippedRunCount', null, 4, { clippedSamples: 10 }),
        }),
      ),
    ).toBe('at most 4, of 10 samples or more');
  });
});
