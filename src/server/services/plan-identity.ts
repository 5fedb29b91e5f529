/** What makes one way of measuring the same as another: the identity of plans and of the measurements made by them. */
import { createHash } from 'node:crypto';
import type { MeasuringPlan } from '../../engine/plan.ts';

/** The plan with its parts in one order, whatever order they came in (PostgreSQL's jsonb keeps none). */
const canonical = ({ stream, window, presentations }: MeasuringPlan) => ({
  stream,
  window: window && { startSeconds: window.startSeconds, endSeconds: window.endSeconds },
  presentations:
    presentations?.map(({ name, audioChannels, speakers }) => ({ name, audioChannels, speakers })) ?? null,
});

/** SHA-256 of the canonical plan, hexadecimal. Names count: a renamed presentation is another one. */
export const planHash = (plan: MeasuringPlan): string =>
  createHash('sha256')
    .update(JSON.stringify(canonical(plan)))
    .digest('hex');

/** Whether the plan says nothing: the whole file, its first stream, in the order that it tells. */
export const isWholeFile = ({ stream, window, presentations }: MeasuringPlan): boolean =>
  stream === 0 && window === null && presentations === null;
