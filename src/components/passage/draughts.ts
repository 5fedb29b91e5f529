/** The limits of a verdict's rules that the passage chart draws. */
import type { SpecBody } from '@/domain/spec.ts';
import type { Draught } from './drawing.ts';

export function draughtsOf(body: SpecBody): Draught[] {
  return body.rules.flatMap((rule): Draught[] => {
    if (rule.kind === 'integrated') return [{ value: rule.targetLufs, of: 'target', breach: rule.breach }];
    if (rule.kind !== 'limits' || rule.atMost === null) return [];
    const of = (
      { shortTermMaxLufs: 'shortTerm', momentaryMaxLufs: 'momentary', truePeakDbtp: 'truePeak' } as const
    )[rule.metric as string];
    return of ? [{ value: rule.atMost, of, breach: rule.breach }] : [];
  });
}
