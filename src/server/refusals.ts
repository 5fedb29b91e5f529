/** Expected refusals are values: a code from this one table, mapped to a status once, with a sentence for the person. */
import { mayDo, type Scope } from './scope.ts';
import type { Permission } from '../domain/permissions.ts';

export const refusalStatus = {
  bad_input: 422,
  unauthenticated: 401,
  forbidden: 403,
  /** Also for what exists in a foreign organisation: nobody learns that it does. */
  not_found: 404,
  conflict: 409,
  gone: 410,
  too_large: 413,
  too_many: 429,
  unavailable: 503,
} as const;
export type RefusalCode = keyof typeof refusalStatus;

export interface Refusal {
  code: RefusalCode;
  message: string;
  fields?: Record<string, string>;
}

export type Answer<T> = { ok: true; value: T } | { ok: false; refusal: Refusal };

export const done = <T>(value: T): Answer<T> => ({ ok: true, value });
export const refuse = (
  code: RefusalCode,
  message: string,
  fields?: Record<string, string>,
): Answer<never> => ({
  ok: false,
  refusal: fields ? { code, message, fields } : { code, message },
});

/** A refusal when the scope lacks the permission, else `null`: `const no = lacking(scope, 'spec:edit'); if (no) return no;` */
export const lacking = (scope: Scope, permission: Permission): Answer<never> | null =>
  mayDo(scope, permission)
    ? null
    : refuse('forbidden', 'Your role in this organisation does not include this.');

/** Thrown inside a transaction to roll it back with an expected refusal; `inTransaction` turns it into an answer. */
export class RefusedError extends Error {
  constructor(readonly refusal: Refusal) {
    super(refusal.message);
    this.name = 'RefusedError';
  }
}
