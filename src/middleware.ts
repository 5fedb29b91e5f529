// Who is asking, and may they: every request passes here before its page or endpoint.
import type { APIContext, MiddlewareHandler } from 'astro';
import { getSession } from 'auth-astro/server';
import { allows, routes, type Need } from '@/domain/permissions.ts';
import { keptTrouble, withRequestOrigin } from '@/server/auth/request-origin.ts';
import { config } from '@/server/config.ts';
import { log } from '@/server/log.ts';
import type { MemberScope } from '@/server/scope.ts';
import { refusalStatus, type RefusalCode } from '@/server/refusals.ts';

const safeMethods = new Set(['GET', 'HEAD', 'OPTIONS']);
const isApi = (context: APIContext) => context.url.pathname.startsWith('/api/');

const problem = (code: RefusalCode | 'method_not_allowed', message: string) =>
  Response.json(
    { error: { code, message } },
    {
      status: code === 'method_not_allowed' ? 405 : refusalStatus[code],
      headers: { 'cache-control': 'no-store' },
    },
  );

/** Astro looks only at form-like bodies; a page of somebody else's must not send JSON with our cookie either. */
function isForeign(context: APIContext): boolean {
  if (safeMethods.has(context.request.method)) return false;
  const origin = context.request.headers.get('origin');
  if (origin === null) return context.request.headers.get('sec-fetch-site') === 'cross-site';
  return origin !== context.url.origin && origin !== new URL(config().APP_ORIGIN).origin;
}

/** Astro writes a route's pattern in small letters ('[assignmentid]'), whatever its file is called. */
const routesByPattern = new Map(
  Object.entries(routes).map(([pattern, needs]) => [pattern.toLowerCase(), needs]),
);

/** What the route asks of this method: `undefined` when the policy does not know the route or the method. */
function needOf(context: APIContext): { known: boolean; need: Need | undefined } {
  const route = routesByPattern.get(context.routePattern);
  const method = context.request.method === 'HEAD' ? 'GET' : context.request.method;
  return { known: route !== undefined, need: route?.[method as keyof typeof route] };
}

function mayPass(scope: MemberScope | null, need: Need | undefined): boolean {
  if (need === undefined) return false;
  if (need === 'anyone') return true;
  return scope !== null && (need === 'signed-in' || allows(scope, need));
}

/** The build knows its scripts' hashes; where storage is, for parts to go and sound to come from, is known at run time only. */
function withStorage(policy: string, routePattern: string): string {
  const storage = new URL(config().S3_PUBLIC_ENDPOINT).origin;
  // The visitors' bench promises that nothing is sent: it may not connect to anything.
  const connect = routePattern === '/' ? "'none'" : `'self' ${storage}`;
  const parts = [policy.replace(/;\s*$/, ''), `connect-src ${connect}`, `media-src 'self' ${storage}`];
  // Positions that React writes as style attributes.
  return [...parts, "style-src-attr 'unsafe-inline'"].join('; ');
}

function secured(response: Response, routePattern: string): Response {
  const policy = response.headers.get('content-security-policy');
  if (policy) response.headers.set('content-security-policy', withStorage(policy, routePattern));
  response.headers.set('x-content-type-options', 'nosniff');
  if (!response.headers.has('referrer-policy')) response.headers.set('referrer-policy', 'same-origin');
  response.headers.set('x-frame-options', 'DENY');
  if (
    !response.headers.has('cache-control') &&
    response.headers.get('content-type')?.startsWith('text/html')
  ) {
    // What one person sees must not come back out of a cache for the next one at that desk.
    response.headers.set('cache-control', 'no-store');
  }
  return response;
}

async function answer(context: APIContext, next: Parameters<MiddlewareHandler>[1]): Promise<Response> {
  const { pathname, search } = context.url;
  if (isForeign(context)) return problem('forbidden', 'This request comes from another site and is refused.');
  const { known, need } = needOf(context);
  // Auth.js answers for itself, and health must not need a database session.
  const asks = !pathname.startsWith('/api/auth/') && pathname !== '/api/health';
  if (asks) context.locals.scope = (await getSession(context.request))?.scope ?? null;
  const trouble = keptTrouble();
  if (trouble !== undefined) {
    if (!isApi(context)) throw trouble;
    log.error({ err: trouble, path: pathname }, 'a session could not be looked up');
    return problem(
      'unavailable',
      'We cannot look up your session at the moment. Nothing is lost; try again in a minute.',
    );
  }
  if (mayPass(context.locals.scope, need)) {
    if (context.routePattern === '/404' && isApi(context))
      return problem('not_found', 'There is nothing under this address.');
    return next();
  }
  if (context.locals.scope === null) {
    if (isApi(context)) return problem('unauthenticated', 'Sign in to go on.');
    return context.redirect(`/sign-in?callbackUrl=${encodeURIComponent(pathname + search)}`, 303);
  }
  if (known && need === undefined)
    return problem('method_not_allowed', 'This address does not take that method.');
  if (isApi(context)) return problem('forbidden', 'Your role in this organisation does not include this.');
  return next('/403');
}

export const onRequest: MiddlewareHandler = (context, next) => {
  context.locals.scope = null;
  const userAgent = context.request.headers.get('user-agent') ?? '';
  return withRequestOrigin({ address: context.clientAddress, userAgent }, async () =>
    secured(await answer(context, next), context.routePattern),
  );
};
