/** Where a figure is beyond a limit, by time. */
import type { Passage } from './api/deliverables.ts';
import { roundHalfAway } from './figures-text.ts';
import { limitsOf, metricWords, ruleName } from './rule-words.ts';
import type { SpecBody } from './spec.ts';
import type { Excursion } from './verdict.ts';

/** The curve that each metric is read from; the others are figures of the whole, which no moment passes. */
const curves = {
  shortTermMaxLufs: (p: Passage) => ({ values: p.shortTermLufs, windowSeconds: 3 }),
  momentaryMaxLufs: (p: Passage) => ({ values: p.momentaryLufs, windowSeconds: 0.4 }),
  truePeakDbtp: (p: Passage) => ({ values: p.truePeakDbtp, windowSeconds: 0 }),
} as const;

/** Every stretch beyond an upper limit of the spec's rules, in order of time and numbered from 1. A window's stretch begins where its first window does. */
export function findExcursions(passage: Passage, body: SpecBody): Excursion[] {
  // Beyond is what the judge calls beyond: the value as shown, unless the spec judges it unrounded.
  const asJudged = (value: number) => (body.rounding === 'shown' ? roundHalfAway(value, 1) : value);
  const found = body.rules.flatMap((rule) => {
    if (rule.kind !== 'limits' || !(rule.metric in curves)) return [];
    const { atMost } = limitsOf(rule);
    if (atMost === null) return [];
    const { values, windowSeconds } = curves[rule.metric as keyof typeof curves](passage);
    const { unit } = metricWords(rule.metric, body.unit);
    return stretches(values, atMost + rule.measurementTolerance, asJudged).map(({ first, last, worst }) => {
      const startSeconds = Math.max(
        0,
        (first + 1) * passage.stepSeconds - Math.max(windowSeconds, passage.stepSeconds),
      );
      return {
        ruleId: rule.id,
        name: ruleName(rule),
        breach: rule.breach,
        startSeconds,
        lengthSeconds: (last + 1) * passage.stepSeconds - startSeconds,
        worst,
        beyond: worst - atMost,
        unit,
      };
    });
  });
  return found
    .sort((a, b) => a.startSeconds - b.startSeconds)
    .map((excursion, i) => ({ number: i + 1, ...excursion }));
}

function stretches(
  values: readonly (number | null)[],
  limit: number,
  asJudged: (value: number) => number,
): { first: number; last: number; worst: number }[] {
  const out: { first: number; last: number; worst: number }[] = [];
  let open: { first: number; last: number; worst: number } | null = null;
  values.forEach((value, i) => {
    if (value === null || asJudged(value) <= limit + 1e-9) {
      open = null;
      return;
    }
    if (open) {
      open.last = i;
      open.worst = Math.max(open.worst, value);
    } else out.push((open = { first: i, last: i, worst: value }));
  });
  return out;
}
