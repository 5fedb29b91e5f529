// What a verdict must be, by the project's own rules of judging; limits here are invented unless a source stands beside.
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { judge, type Judged } from '../../src/domain/judge.ts';
import { roundHalfAway } from '../../src/domain/figures-text.ts';
import { specBodySchema, type SpecBody } from '../../src/domain/spec.ts';
import type { RuleVerdict, VerdictBody } from '../../src/domain/verdict.ts';
import { figures, r128Body, stereoFormat } from '../factories/world.ts';

type RuleInput = Record<string, unknown>;
const spec = (rules: RuleInput[], settings: Record<string, unknown> = {}): SpecBody =>
  specBodySchema.parse({
    ...settings,
    rules: rules.map((rule, i) => ({ id: `rule-${i + 1}`, breach: 'reject', ...rule })),
  });
const integrated = (given: RuleInput = {}) => ({
  kind: 'integrated',
  targetLufs: -23,
  toleranceAboveLu: 0.5,
  toleranceBelowLu: 0.5,
  ...given,
});
const limits = (metric: string, atLeast: number | null, atMost: number | null, given: RuleInput = {}) => ({
  kind: 'limits',
  metric,
  atLeast,
  atMost,
  ...given,
});
const measured = (
  given: Parameters<typeof figures>[0] = {},
  besides: { seconds?: number; format?: Partial<Judged['format']>; findings?: Judged['findings'] } = {},
): Judged => ({
  format: { ...stereoFormat, ...besides.format },
  figures: { ...figures(given), measuredSeconds: besides.seconds ?? 90 },
  findings: besides.findings ?? [],
});
const first = (verdict: VerdictBody): RuleVerdict => verdict.rules[0];
const inShort = ({ outcome, judgedText, marginText }: RuleVerdict) => [outcome, judgedText, marginText];

describe('a rule of loudness or peaks', () => {
  it.each([
    [-23, ['pass', '\u221223.0', '0.5 LU inside']],
    [-22.54, ['pass', '\u221222.5', 'on the limit']],
    [-22.44, ['fail', '\u221222.4', '0.1 LU over']],
    [-23.55, ['fail', '\u221223.6', '0.1 LU under']],
    [-23.54, ['pass', '\u221223.5', 'on the limit']],
    [-20, ['fail', '\u221220.0', '2.5 LU over']],
  ])('judges %d LUFS as shown', (integratedLufs, expected) => {
    expect(inShort(first(judge(measured({ integratedLufs }), spec([integrated()]))))).toEqual(expected);
  });

  it('judges the full figure where the spec says unrounded, and says so', () => {
    const verdict = judge(
      measured({ integratedLufs: -22.46 }),
      spec([integrated()], { rounding: 'unrounded' }),
    );
    expect(verdict).toMatchObject({ outcome: 'fail', rounding: 'unrounded' });
    expect(first(verdict)).toMatchObject({ judged: -22.46, judgedText: '\u221222.46' });
    expect(judge(measured({ integratedLufs: -22.46 }), spec([integrated()])).outcome).toBe('pass');
  });

  it('only advises where a breach only advises', () => {
    const advised = spec([integrated({ breach: 'advise' })]);
    const verdict = judge(measured({ integratedLufs: -20 }), advised);
    expect([verdict.outcome, first(verdict).outcome]).toEqual(['advisory', 'advisory']);
    expect(verdict.nearestText).toBe('integrated 2.5 LU over, advised');
  });

  it('has no lower limit where none is given', () => {
    const open = spec([integrated({ toleranceBelowLu: null })]);
    expect(inShort(first(judge(measured({ integratedLufs: -40 }), open)))).toEqual([
      'pass',
      '\u221240.0',
      '17.5 LU inside',
    ]);
  });

  it('passes by the tolerance of measurement, says that it was needed, and leaves the margin without it', () => {
    // EBU R 128 V5, clauses i and m: 0.2 LU and 0.3 dB.
    const tolerant = spec([
      integrated({ toleranceAboveLu: 0, toleranceBelowLu: 0, measurementTolerance: 0.2 }),
      limits('truePeakDbtp', null, -1, { measurementTolerance: 0.3 }),
    ]);
    const [loudness, peak] = judge(measured({ integratedLufs: -22.8, maxDbtp: -0.7 }), tolerant).rules;
    expect(loudness).toMatchObject({ outcome: 'pass', neededTolerance: true, margin: -0.2 });
    expect(loudness.marginText).toBe('0.2 LU over, within the tolerance of measurement');
    expect(peak).toMatchObject({ outcome: 'pass', neededTolerance: true, margin: -0.3 });
    const beyond = judge(measured({ integratedLufs: -22.7, maxDbtp: -0.6 }), tolerant).rules;
    expect(beyond.slice(0, 2).map(({ outcome }) => outcome)).toEqual(['fail', 'fail']);
    const inside = judge(measured({ integratedLufs: -23, maxDbtp: -1 }), tolerant).rules;
    expect(inside.slice(0, 2).map(({ neededTolerance }) => neededTolerance)).toEqual([false, false]);
  });

  it.each([
    ['samplePeakDbfs', -1, 'pass', '\u22123.2'],
    ['shortTermMaxLufs', -18, 'pass', '\u221218.0'],
    ['momentaryMaxLufs', -18, 'fail', '\u221216.0'],
    ['peakToLoudnessLu', 18, 'fail', '20.0'],
    ['durationSeconds', 60, 'fail', '1:30'],
  ])('reads %s', (metric, atMost, outcome, judgedText) => {
    expect(first(judge(measured(), spec([limits(metric, null, atMost)])))).toMatchObject({
      outcome,
      judgedText,
    });
  });

  it('writes loudness in LKFS where the spec does', () => {
    const rule = first(judge(measured(), spec([integrated()], { unit: 'LKFS' })));
    expect([rule.unit, rule.permittedText]).toEqual(['LKFS', '\u221223.0 \u00b1 0.5 LKFS']);
  });
});

describe('one channel', () => {
  const mono = measured({ integratedLufs: -19 }, { format: { channels: 1, layout: 'mono' } });
  mono.figures.loudness.dualMonoIntegratedLufs = -16;
  mono.figures.truePeak.perChannelDbtp = [-3];
  const podcast = [
    integrated({ targetLufs: -16 }),
    limits('shortTermMaxLufs', null, -12),
    limits('momentaryMaxLufs', null, -12),
  ];

  it('is judged as it is, or as two loudspeakers play it', () => {
    const asOne = judge(mono, spec(podcast)).rules;
    expect(asOne.slice(0, 3).map(({ judged }) => judged)).toEqual([-19, -18, -16]);
    // Twice the power: 10 log10 2 = 3.01 LU; the integrated figure is the one that was gated anew.
    const asDual = judge(mono, spec(podcast, { mono: 'asDual' })).rules;
    expect(asDual.slice(0, 3).map(({ judged }) => judged)).toEqual([-16, -15, -13]);
  });

  it('leaves stereo as it is', () => {
    expect(first(judge(measured(), spec(podcast, { mono: 'asDual' }))).judged).toBe(-23);
  });
});

describe('what cannot be judged', () => {
  it('is told with its reason, and a rejecting rule without a value never passes in silence', () => {
    const verdict = judge(measured({ integratedLufs: null }), spec([integrated()]));
    expect(verdict.outcome).toBe('advisory');
    expect(first(verdict)).toMatchObject({
      outcome: 'not_judged',
      judged: null,
      margin: null,
      reason: 'no value: below the gate',
    });
    expect(verdict.nearestText).toBe('integrated not judged');
  });

  it('does not keep a verdict from passing where the rule only advises', () => {
    const verdict = judge(measured({ integratedLufs: null }), spec([integrated({ breach: 'advise' })]));
    expect([verdict.outcome, first(verdict).outcome]).toEqual(['pass', 'not_judged']);
  });

  it('includes the range of under 60 s (EBU R 128 n), unless the spec insists', () => {
    const range = (given = {}) => spec([limits('rangeLu', null, 5, given)]);
    const short = measured({ rangeLu: 9 }, { seconds: 59.9 });
    expect(first(judge(short, range()))).toMatchObject({ outcome: 'not_judged', measured: 9 });
    expect(first(judge(short, range({ judgeShortProgrammes: true }))).outcome).toBe('fail');
    expect(first(judge(measured({ rangeLu: 9 }, { seconds: 60 }), range())).outcome).toBe('fail');
  });

  it('includes a bit depth that a coded file does not have', () => {
    const depth = spec([{ kind: 'oneOf', fact: 'bitDepth', allowed: ['24'] }]);
    const coded = judge(measured({}, { format: { bitDepth: null, codec: 'MP3' } }), depth);
    expect(first(coded)).toMatchObject({ outcome: 'not_judged', reason: 'the bit depth is not known' });
    expect(coded.outcome).toBe('advisory');
  });
});

describe('facts and findings', () => {
  it.each([
    ['sampleRateHz', ['48000', '96000'], 'pass', '48 kHz'],
    ['sampleRateHz', ['96000'], 'fail', '48 kHz'],
    ['bitDepth', ['16'], 'fail', '24 bit'],
    ['layout', ['stereo', '5.1'], 'pass', 'stereo'],
    ['container', ['BW64'], 'fail', 'WAV'],
    ['codec', ['PCM'], 'pass', 'PCM'],
    ['audioChannels', ['6'], 'fail', '2'],
  ])('%s one of %j: %s', (fact, allowed, outcome, judgedText) => {
    const verdict = judge(measured(), spec([{ kind: 'oneOf', fact, allowed }]));
    expect(first(verdict)).toMatchObject({
      outcome,
      judgedText,
      margin: null,
      marginText: outcome === 'pass' ? 'as asked' : 'not as asked',
    });
  });

  it('refuse a file that is cut short and advise of the rest, though no rule names them', () => {
    const found = (code: string) => [{ code, message: `The file is ${code}.` }];
    const cut = judge(measured({}, { findings: found('truncated') }), r128Body);
    expect(cut.outcome).toBe('fail');
    expect(cut.rules.at(-1)).toMatchObject({
      name: 'Cut short',
      outcome: 'fail',
      marginText: 'The file is truncated.',
    });
    expect(judge(measured({}, { findings: found('size-lies') }), r128Body).outcome).toBe('advisory');
    // What is not found is not listed.
    expect(judge(measured(), r128Body).rules).toHaveLength(3);
  });

  it('are held as the spec says where it names them', () => {
    const lenient = spec([{ kind: 'finding', code: 'truncated', breach: 'advise' }]);
    const verdict = judge(measured({}, { findings: [{ code: 'truncated', message: 'Cut.' }] }), lenient);
    expect([verdict.outcome, verdict.rules.length]).toEqual(['advisory', 1]);
  });
});

describe('the nearest limit', () => {
  it.each<[string, Judged, string]>([
    ['of passes, by distance', measured({ maxDbtp: -1.2 }), 'true peak 0.2 dB inside'],
    [
      'a rejecting breach before an advisory',
      measured({ maxDbtp: -0.7, rangeLu: 30 }),
      'true peak 0.3 dB over',
    ],
    ['an advisory before passes', measured({ rangeLu: 18.4 }), 'range 0.4 LU over, advised'],
    ['the worse of two breaches', measured({ integratedLufs: -20, maxDbtp: 0 }), 'integrated 2.5 LU over'],
    [
      'integrity before levels',
      measured({ maxDbtp: 2 }, { findings: [{ code: 'truncated', message: 'Cut.' }] }),
      'cut short',
    ],
  ])('is %s', (_name, judged, text) => {
    expect(judge(judged, r128Body).nearestText).toBe(text);
  });
});

describe('properties', () => {
  const level = fc.double({ min: -60, max: 5, noNaN: true });
  const severity = { pass: 0, advisory: 1, fail: 2 };

  it('the further above an upper limit, the smaller the margin and the no milder the verdict', () => {
    fc.assert(
      fc.property(level, level, (a, b) => {
        const [low, high] = [Math.min(a, b), Math.max(a, b)].map((maxDbtp) =>
          judge(measured({ maxDbtp }), spec([limits('truePeakDbtp', null, -1)])),
        );
        expect(severity[high.outcome]).toBeGreaterThanOrEqual(severity[low.outcome]);
        expect(first(high).margin).toBeLessThanOrEqual(first(low).margin ?? Number.NaN);
      }),
    );
  });

  it('a margin is positive or nil inside and negative beyond, and is the distance to the nearer limit', () => {
    fc.assert(
      fc.property(level, fc.boolean(), (integratedLufs, unrounded) => {
        const rounding = unrounded ? 'unrounded' : 'shown';
        const rule = first(judge(measured({ integratedLufs }), spec([integrated()], { rounding })));
        const figure = unrounded ? integratedLufs : roundHalfAway(integratedLufs, 1);
        expect(rule.margin).toBeCloseTo(Math.min(-22.5 - figure, figure + 23.5), 5);
        expect(rule.outcome).toBe((rule.margin ?? -1) >= 0 ? 'pass' : 'fail');
      }),
    );
  });

  it('every rule is answered, in all cases with words, and only what passes everywhere passes', () => {
    const maybe = fc.option(level);
    const findings = fc.subarray([
      'truncated',
      'size-lies',
      'not-a-number',
      'unreadable-part',
      'layout-assumed',
    ]);
    fc.assert(
      fc.property(
        maybe,
        maybe,
        maybe,
        fc.integer({ min: 0, max: 200 }),
        findings,
        (i, p, r, seconds, codes) => {
          const judged = measured(
            { integratedLufs: i, maxDbtp: p, rangeLu: r === null ? null : Math.abs(r) },
            { seconds, findings: codes.map((code) => ({ code, message: 'Found.' })) },
          );
          const verdict = judge(judged, r128Body);
          expect(r128Body.rules.every(({ id }) => verdict.rules.some(({ ruleId }) => ruleId === id))).toBe(
            true,
          );
          expect(verdict.rules.filter(({ metric }) => metric === 'finding')).toHaveLength(codes.length);
          for (const rule of verdict.rules) {
            expect(rule.marginText).not.toBe('');
            expect(rule.outcome === 'not_judged').toBe(rule.reason !== null);
          }
          const worst = verdict.rules.map(({ outcome, breach }) =>
            outcome === 'not_judged' ? (breach === 'reject' ? 1 : 0) : severity[outcome],
          );
          expect(severity[verdict.outcome]).toBe(Math.max(...worst));
          expect(verdict.rules.some(({ ruleId }) => ruleId === verdict.nearestRuleId)).toBe(true);
        },
      ),
    );
  });
});
