/** The limits of a verdict's rules that the passage chart draws. */
import type { Rule, SpecBody } from '@/domain/spec.ts';
import type { Draught } from './drawing.ts';

export function draughtsOf(body: SpecBody): Draught[] {
  const as = (rule: Rule) => ({
    breach: rule.breach,
    tolerance: rule.measurementTolerance,
    rounding: body.rounding,
  });
  return body.rules.flatMap((rule): Draught[] => {
    if (rule.kind === 'integrated') return [{ value: rule.targetLufs, of: 'target', ...as(rule) }];
    if (rule.kind !== 'limits' || rule.atMost === null) return [];
    const of = (
      { shortTermMaxLufs: 'shortTerm', momentaryMaxLufs: 'momentary', truePeakDbtp: 'truePeak' } as const
    )[rule.metric as string];
    return of ? [{ value: rule.atMost, of, ...as(rule) }] : [];
  });
}
