/** One verdict over all presentations of a delivery: each is judged by itself, and the delivery is as good as its worst. */
import type { RuleVerdict, VerdictBody } from './verdict.ts';
import type { Outcome, OverallOutcome } from './vocabulary.ts';

const rank: Record<Outcome, number> = { fail: 0, advisory: 1, not_judged: 2, pass: 3 };

/** The first of the worst; `null` where there is none. */
export function worstOf<T extends { outcome: OverallOutcome }>(all: readonly T[]): T | null {
  return all.reduce<T | null>(
    (worst, one) => (worst === null || rank[one.outcome] < rank[worst.outcome] ? one : worst),
    null,
  );
}

const isWorse = (a: RuleVerdict, b: RuleVerdict): boolean =>
  rank[a.outcome] - rank[b.outcome] < 0 ||
  (a.outcome === b.outcome && (a.margin ?? Infinity) < (b.margin ?? Infinity));

export interface PresentationVerdict {
  name: string;
  verdict: VerdictBody;
}

/**
 * The verdict of the whole: every rule as it ends in the presentation where it ends worst, which is named. Whoever waives
 * a rule waives it in all of them. With one presentation it is that one's verdict, as it stands.
 */
export function overPresentations(all: readonly PresentationVerdict[]): VerdictBody {
  const worst = worstOf(all.map(({ name, verdict }) => ({ name, verdict, outcome: verdict.outcome })));
  if (!worst) throw new Error('A verdict needs a presentation');
  if (all.length === 1) return worst.verdict;
  const rules = new Map<string, RuleVerdict>();
  for (const { name, verdict } of all)
    for (const rule of verdict.rules) {
      const marginText = rule.outcome === 'pass' ? rule.marginText : `${rule.marginText} in ${name}`;
      const named = { ...rule, presentation: name, marginText };
      const before = rules.get(rule.ruleId);
      if (!before || isWorse(named, before)) rules.set(rule.ruleId, named);
    }
  return {
    ...worst.verdict,
    rules: [...rules.values()],
    nearestText: `${worst.verdict.nearestText} in ${worst.name}`,
  };
}

/** The figure to show beside a rule: that of the presentation which the rule is told of, else the first one's. */
export function figureBeside(
  verdict: VerdictBody | null,
  metric: string,
  first: number | null,
): number | null {
  const rule = verdict?.rules.find((one) => one.metric === metric);
  return rule?.presentation === undefined ? first : rule.measured;
}
