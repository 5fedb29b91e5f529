/** One answer per item of a bulk call. */
import type { Answer, Refusal } from '../refusals.ts';

export type ItemResult<T> = { ok: true; id: string; value: T } | { ok: false; id: string; error: Refusal };

export const itemResult = <T>(id: string, answer: Answer<T>): ItemResult<T> =>
  answer.ok ? { ok: true, id, value: answer.value } : { ok: false, id, error: answer.refusal };
