import { describe, expect, it } from 'vitest';
import {
  inWords,
  isDecided,
  isOpen,
  stateAfter,
  submissionActs,
  takeBackDeadline,
  versionFamily,
  whyNotDecide,
} from '../../src/domain/submission-states.ts';
import { submissionStates, type Outcome } from '../../src/domain/vocabulary.ts';
import type { RuleVerdict, VerdictBody } from '../../src/domain/verdict.ts';

const rule = (ruleId: string, name: string, outcome: Outcome): RuleVerdict => ({
  ruleId,
  name,
  metric: null,
  unit: '',
  breach: 'reject',
  outcome,
  judged: null,
  measured: null,
  judgedText: '',
  atLeast: null,
  atMost: null,
  permittedText: '',
  margin: null,
  marginText: '',
  neededTolerance: false,
  reason: null,
});
const verdict = (outcome: VerdictBody['outcome'], rules: RuleVerdict[]): VerdictBody => ({
  outcome,
  rounding: 'shown',
  rules,
  nearestRuleId: null,
  nearestText: '',
});
const passing = verdict('pass', [rule('integrated', 'Integrated loudness', 'pass')]);
const advised = verdict('advisory', [rule('range', 'Loudness range', 'advisory')]);
const failing = verdict('fail', [
  rule('integrated', 'Integrated loudness', 'fail'),
  rule('true-peak', 'Maximum true peak', 'fail'),
  rule('range', 'Loudness range', 'advisory'),
]);

describe('the life of a submission', () => {
  it('allows these steps and no others', () => {
    const possible = submissionStates.flatMap((state) =>
      submissionActs.flatMap((act) => {
        const to = stateAfter(state, act);
        return to ? [`${state} --${act}--> ${to}`] : [];
      }),
    );
    expect(possible).toEqual([
      'awaiting_review --approve--> approved',
      'awaiting_review --approve_with_waiver--> approved_with_waiver',
      'awaiting_review --reject--> rejected',
      'awaiting_review --withdraw--> withdrawn',
      'awaiting_review --replace--> replaced',
      'approved --take_back--> awaiting_review',
      'approved_with_waiver --take_back--> awaiting_review',
      'rejected --take_back--> awaiting_review',
    ]);
  });

  it('knows which states are open and which are decided', () => {
    expect(submissionStates.filter(isOpen)).toEqual(['awaiting_review', 'approved', 'approved_with_waiver']);
    expect(submissionStates.filter(isDecided)).toEqual(['approved', 'approved_with_waiver', 'rejected']);
  });

  it('lets a decision be taken back for the undo time after it', () => {
    expect(takeBackDeadline(new Date('2026-12-01T10:00:00Z'), 60)).toEqual(new Date('2026-12-01T10:01:00Z'));
  });
});

describe('a decision against a verdict', () => {
  it('approves what passes, and what only advises', () => {
    expect(whyNotDecide(passing, { decision: 'approve' })).toBeNull();
    expect(whyNotDecide(advised, { decision: 'approve' })).toBeNull();
  });

  it('does not approve what fails, and says to waive or reject', () => {
    expect(whyNotDecide(failing, { decision: 'approve' })).toEqual({
      code: 'conflict',
      message:
        'It fails Integrated loudness and Maximum true peak, so it is not approved as it is. Waive what fails with a reason, or reject it.',
    });
  });

  it('does not approve what fails even where the verdict names no failing rule', () => {
    expect(whyNotDecide(verdict('fail', []), { decision: 'approve' })?.code).toBe('conflict');
  });

  it('approves with a waiver when every failing rule is waived', () => {
    const waivers = [{ ruleId: 'true-peak' }, { ruleId: 'integrated' }];
    expect(whyNotDecide(failing, { decision: 'approve_with_waiver', waivers })).toBeNull();
  });

  it.each([
    [
      'a failing rule left out',
      failing,
      ['integrated'],
      'conflict',
      /Maximum true peak fails too and is not waived/,
    ],
    [
      'a rule that does not fail',
      failing,
      ['integrated', 'true-peak', 'range'],
      'bad_input',
      /Loudness range does not fail/,
    ],
    ['a rule that is not there', failing, ['colour'], 'bad_input', /no rule 'colour'/],
    [
      'a rule waived twice',
      failing,
      ['integrated', 'integrated', 'true-peak'],
      'bad_input',
      /Integrated loudness is waived twice/,
    ],
    ['nothing that fails', passing, ['integrated'], 'conflict', /nothing to waive/],
  ] as const)('refuses a waiver with %s', (_what, body, ids, code, message) => {
    const fault = whyNotDecide(body, {
      decision: 'approve_with_waiver',
      waivers: ids.map((ruleId) => ({ ruleId })),
    });
    expect(fault).toMatchObject({ code });
    expect(fault?.message).toMatch(message);
  });

  it('rejects for any rule of the verdict, for none, and not for a rule that is not there', () => {
    expect(whyNotDecide(passing, { decision: 'reject', failingRuleIds: [] })).toBeNull();
    expect(whyNotDecide(failing, { decision: 'reject', failingRuleIds: ['range'] })).toBeNull();
    expect(whyNotDecide(failing, { decision: 'reject', failingRuleIds: ['colour'] })?.code).toBe('bad_input');
  });
});

describe('words', () => {
  it('joins names as a sentence does', () => {
    expect([[], ['A'], ['A', 'B'], ['A', 'B', 'C']].map(inWords)).toEqual(['', 'A', 'A and B', 'A, B and C']);
  });

  it.each([
    ['Full mix 5.1 v2', 'full mix 5.1'],
    ['Full mix 5.1', 'full mix 5.1'],
    ['v1', ''],
    ['stereo_v12', 'stereo'],
    ['M&E rev 3', 'm&e'],
    ['Version 2', ''],
    ['7.1.4', '7.1.4'],
    ['Full mix stereo, v2', 'full mix stereo'],
  ])('reads %j as the family %j', (label, family) => expect(versionFamily(label)).toBe(family));
});
