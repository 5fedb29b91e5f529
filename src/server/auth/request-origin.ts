/** Where the request at hand comes from, for code that the framework's auth library calls without it. */
import { AsyncLocalStorage } from 'node:async_hooks';

export interface RequestOrigin {
  /** The client's address as the web server sees it. */
  address: string;
  userAgent: string;
}

const store = new AsyncLocalStorage<RequestOrigin & { trouble?: unknown }>();

/** Runs `work` so that `requestOrigin()` inside it answers with this one. */
export const withRequestOrigin = <T>(origin: RequestOrigin, work: () => T): T =>
  store.run({ ...origin }, work);

export const requestOrigin = (): RequestOrigin => store.getStore() ?? { address: 'unknown', userAgent: '' };

/**
 * The auth library takes every error behind a session for a bad cookie, and would call somebody signed out while the
 * database is away. Here the error is kept for middleware, which tells them apart.
 */
export function keepTrouble(error: unknown): void {
  const request = store.getStore();
  if (request) request.trouble = error;
}

/** What went wrong while this request's session was looked up; `undefined` when nothing did. */
export const keptTrouble = (): unknown => store.getStore()?.trouble;
