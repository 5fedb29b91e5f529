/** Reading what services answer. */
import type { Answer, Refusal } from '../../src/server/refusals.ts';

/** The value; a refusal fails the test with its sentence. */
export function valueOf<T>(answer: Answer<T>): T {
  if (!answer.ok) throw new Error(`refused as ${answer.refusal.code}: ${answer.refusal.message}`);
  return answer.value;
}

/** The refusal; a value fails the test. */
export function refusalOf(answer: Answer<unknown>): Refusal {
  if (answer.ok) throw new Error(`was not refused: ${JSON.stringify(answer.value)}`);
  return answer.refusal;
}

export const codeOf = (answer: Answer<unknown>): string => (answer.ok ? 'ok' : answer.refusal.code);

type Item<T> = { ok: true; id: string; value: T } | { ok: false; id: string; error: Refusal };

/** The answer for the first item of a bulk call. */
export function firstOf<T>(answer: Answer<{ items: Item<T>[] }>): Answer<T> {
  const [item] = valueOf(answer).items;
  return item.ok ? { ok: true, value: item.value } : { ok: false, refusal: item.error };
}
