/** Knocking at a route: the real middleware, and behind it the real endpoint or a mark that a page would have been drawn. */
import type { APIContext, APIRoute, MiddlewareNext } from 'astro';
import { onRequest } from '../../src/middleware.ts';
import type { MemberScope } from '../../src/server/scope.ts';

const origin = 'http://plimsoll.example';
const endpoints = import.meta.glob<Record<string, APIRoute>>('../../src/pages/**/*.ts');

export interface Knock {
  pattern: string;
  method: string;
  /** The address, where it is not the pattern with its params filled in. */
  path?: string;
  params?: Record<string, string>;
  cookie?: string;
  body?: unknown;
  query?: string;
  headers?: Record<string, string>;
}

function contextOf({
  pattern,
  method,
  path: given,
  params = {},
  cookie,
  body,
  query = '',
  headers = {},
}: Knock): APIContext {
  const path =
    given ??
    pattern.replace(/\[(?:\.\.\.)?(\w+)\]/g, (_, name: string) => encodeURIComponent(params[name] ?? 'x'));
  const url = new URL(origin + path + query);
  const request = new Request(url, {
    method,
    headers: {
      ...(cookie ? { cookie } : {}),
      ...(method === 'GET' ? {} : { origin, 'content-type': 'application/json' }),
      ...headers,
    },
    body: method === 'GET' ? undefined : JSON.stringify(body ?? {}),
  });
  const context = {
    request,
    url,
    params,
    // As Astro gives it.
    routePattern: pattern.toLowerCase(),
    locals: { scope: null },
    clientAddress: '127.0.0.1',
    redirect: (to: string, status = 302) => new Response(null, { status, headers: { location: to } }),
  };
  // Only what middleware and endpoints use; touching anything else fails the test with its name.
  return new Proxy(context, {
    get(target, name) {
      if (!(name in target)) throw new Error(`the test's context has no ${String(name)}`);
      return target[name as keyof typeof target];
    },
  }) as unknown as APIContext;
}

/** Whether the door lets through, and what it says if not; the route itself is not asked. */
export async function knock(asked: Knock): Promise<{ passed: boolean; response: Response }> {
  let passed = false;
  const next: MiddlewareNext = (instead) => {
    if (instead === '/403') return Promise.resolve(new Response('not for your role', { status: 403 }));
    passed = true;
    return Promise.resolve(new Response('drawn'));
  };
  const response = await onRequest(contextOf(asked), next);
  if (!response) throw new Error('middleware gave no answer');
  return { passed, response };
}

async function handlerOf(file: string, method: string): Promise<APIRoute> {
  const load = endpoints[`../../src/pages/${file}`];
  const handler = (await load())[method];
  if (!handler) throw new Error(`${file} exports no ${method}`);
  return handler;
}

/** Through the door and into the endpoint, as a request would go. */
export async function ask(file: string, asked: Knock): Promise<Response> {
  const context = contextOf(asked);
  const handler = await handlerOf(file, asked.method);
  const response = await onRequest(context, (async () => handler(context)) as MiddlewareNext);
  if (!response) throw new Error('middleware gave no answer');
  return response;
}

/** Straight into the endpoint as this person, past the door: the service must ask again. */
export async function askPastTheDoor(file: string, asked: Knock, scope: MemberScope): Promise<Response> {
  const context = contextOf(asked);
  context.locals.scope = scope;
  return (await handlerOf(file, asked.method))(context);
}

/** Through the door and into a page that `draw` draws, with what middleware put into its locals. */
export async function answerOfPage(
  asked: Knock,
  draw: (context: APIContext) => Promise<Response>,
): Promise<Response> {
  const context = contextOf(asked);
  const next: MiddlewareNext = (instead) =>
    instead === '/403' ? Promise.resolve(new Response(null, { status: 403 })) : draw(context);
  const response = await onRequest(context, next);
  if (!response) throw new Error('middleware gave no answer');
  return response;
}
