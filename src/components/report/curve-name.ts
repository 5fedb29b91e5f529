import type { Excursion } from '@/domain/verdict.ts';

/** What passed the limit at that moment: 'Short-term', where the rule is of its maximum. */
export function curveName({ name }: Pick<Excursion, 'name'>): string {
  const short = name.replace(/^Maximum /, '');
  return short.charAt(0).toUpperCase() + short.slice(1);
}
