/** The life of a submission: which act is possible in which state, and when a decision is refused. Pure. */
import type { SubmissionState } from './vocabulary.ts';
import type { RuleVerdict, VerdictBody } from './verdict.ts';

export const submissionActs = [
  'approve',
  'approve_with_waiver',
  'reject',
  'withdraw',
  'replace',
  'take_back',
] as const;
export type SubmissionAct = (typeof submissionActs)[number];

/** Everything that can happen to a submission; what is not here cannot. */
const transitions: Record<SubmissionAct, { from: readonly SubmissionState[]; to: SubmissionState }> = {
  approve: { from: ['awaiting_review'], to: 'approved' },
  approve_with_waiver: { from: ['awaiting_review'], to: 'approved_with_waiver' },
  reject: { from: ['awaiting_review'], to: 'rejected' },
  withdraw: { from: ['awaiting_review'], to: 'withdrawn' },
  replace: { from: ['awaiting_review'], to: 'replaced' },
  take_back: { from: ['approved', 'approved_with_waiver', 'rejected'], to: 'awaiting_review' },
};

/** The state after the act; `null` where the act is not possible. */
export function stateAfter(state: SubmissionState, act: SubmissionAct): SubmissionState | null {
  const { from, to } = transitions[act];
  return from.includes(state) ? to : null;
}

/** Awaiting or approved: the same deliverable is not put to the same channel again while it stands so. */
export const isOpen = (state: SubmissionState): boolean =>
  state === 'awaiting_review' || state === 'approved' || state === 'approved_with_waiver';

export const isDecided = (state: SubmissionState): boolean => stateAfter(state, 'take_back') !== null;

/** The moment up to which a decision can be taken back: `undoSeconds` after it. */
export const takeBackDeadline = (decidedAt: Date, undoSeconds: number): Date =>
  new Date(decidedAt.getTime() + undoSeconds * 1000);

export type DecisionAsked =
  | { decision: 'approve' }
  | { decision: 'reject'; failingRuleIds: readonly string[] }
  | { decision: 'approve_with_waiver'; waivers: readonly { ruleId: string }[] };

export interface DecisionFault {
  /** The decision names what is not there, or it does not fit the verdict. */
  code: 'bad_input' | 'conflict';
  message: string;
}

/** 'A', 'A and B', 'A, B and C'. */
export const inWords = (names: readonly string[]): string =>
  names.length < 2 ? (names[0] ?? '') : `${names.slice(0, -1).join(', ')} and ${names[names.length - 1]}`;

const namesOf = (rules: readonly RuleVerdict[]) => inWords(rules.map((rule) => rule.name));

/**
 * Why this decision does not fit this verdict, or `null`. What fails is approved only with every failing rule waived;
 * only failing rules are waived; a reject may name any rule of the verdict.
 */
export function whyNotDecide(verdict: VerdictBody, asked: DecisionAsked): DecisionFault | null {
  const failing = verdict.rules.filter((rule) => rule.outcome === 'fail');
  if (asked.decision === 'approve') {
    if (verdict.outcome !== 'fail') return null;
    const what = failing.length > 0 ? namesOf(failing) : 'a rule of its spec';
    return {
      code: 'conflict',
      message: `It fails ${what}, so it is not approved as it is. Waive what fails with a reason, or reject it.`,
    };
  }
  const known = new Map(verdict.rules.map((rule) => [rule.ruleId, rule]));
  const ids =
    asked.decision === 'reject' ? asked.failingRuleIds : asked.waivers.map((waiver) => waiver.ruleId);
  const unknown = ids.find((id) => !known.has(id));
  if (unknown !== undefined)
    return {
      code: 'bad_input',
      message: `The verdict has no rule '${unknown}'. Read it again and choose among its rules.`,
    };
  if (asked.decision === 'reject') return null;

  const twice = ids.find((id, at) => ids.indexOf(id) !== at);
  if (twice !== undefined)
    return {
      code: 'bad_input',
      message: `${known.get(twice)?.name} is waived twice. Give one reason for it.`,
    };
  if (failing.length === 0)
    return {
      code: 'conflict',
      message: 'No rule fails here, so there is nothing to waive. Approve it as it is.',
    };
  const standing = ids.flatMap((id) => known.get(id) ?? []).filter((rule) => rule.outcome !== 'fail');
  if (standing.length > 0)
    return {
      code: 'bad_input',
      message: `${namesOf(standing)} ${standing.length > 1 ? 'do' : 'does'} not fail; only a failing rule is waived.`,
    };
  const left = failing.filter((rule) => !ids.includes(rule.ruleId));
  if (left.length > 0)
    return {
      code: 'conflict',
      message: `${namesOf(left)} ${left.length > 1 ? 'fail' : 'fails'} too and ${left.length > 1 ? 'are' : 'is'} not waived. Waive every failing rule, or reject it.`,
    };
  return null;
}

/** Words that count revisions: 'v2', 'rev 3', 'version 4', 'take 2'. */
const revisionWords = /(?<![a-z0-9])(?:v|ver|version|rev|revision|take|tk)[\s._-]*\d{1,4}(?![a-z0-9])/g;

/**
 * What a version label says apart from its revision: 'Full mix 5.1 v2' and 'full mix 5.1 v3' are the same, 'M&E v1' is
 * another. Deliverables of one episode, kind, layout and family are revisions of one another (common practice, no source).
 */
export const versionFamily = (label: string): string =>
  label
    .toLowerCase()
    .replace(revisionWords, ' ')
    .replace(/[\s_,;]+/g, ' ')
    .trim();
