/** Where the request at hand comes from, for code that the framework's auth library calls without it. */
import { AsyncLocalStorage } from 'node:async_hooks';

export interface RequestOrigin {
  /** The client's address as the web server sees it. */
  address: string;
  userAgent: string;
}

const store = new AsyncLocalStorage<RequestOrigin>();

/** Runs `work` so that `requestOrigin()` inside it answers with this one. */
export const withRequestOrigin = <T>(origin: RequestOrigin, work: () => T): T => store.run(origin, work);

export const requestOrigin = (): RequestOrigin => store.getStore() ?? { address: 'unknown', userAgent: '' };
