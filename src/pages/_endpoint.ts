// How every endpoint of /api/v1 answers: parse, authorise (middleware and service), call, render.
import { randomUUID } from 'node:crypto';
import type { APIContext, APIRoute } from 'astro';
import { z } from 'zod';
import { log } from '@/server/log.ts';
import type { MemberScope } from '@/server/scope.ts';
import { refusalStatus, type Answer, type Refusal } from '@/server/refusals.ts';

export const json = (body: unknown, status = 200, headers: Record<string, string> = {}) =>
  Response.json(body, { status, headers: { 'cache-control': 'no-store', ...headers } });

export const refusalResponse = ({ code, message, fields }: Refusal) =>
  json({ error: { code, message, fields } }, refusalStatus[code]);

class BadInput extends Error {
  constructor(readonly refusal: Refusal) {
    super(refusal.message);
  }
}

const badInput = (error: z.ZodError) => {
  const fields = Object.fromEntries(error.issues.map((issue) => [issue.path.join('.'), issue.message]));
  return new BadInput({
    code: 'bad_input',
    message: error.issues[0]?.message ?? 'This input does not fit.',
    fields,
  });
};

/** The JSON body through its schema; anything else ends as 422 with the fields named. */
export async function body<T extends z.ZodType>(context: APIContext, schema: T): Promise<z.infer<T>> {
  const text = await context.request.text();
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch {
    throw new BadInput({ code: 'bad_input', message: 'The body is not JSON.' });
  }
  const parsed = schema.safeParse(value);
  if (!parsed.success) throw badInput(parsed.error);
  return parsed.data;
}

export function query<T extends z.ZodType>(context: APIContext, schema: T): z.infer<T> {
  const parsed = schema.safeParse(Object.fromEntries(context.url.searchParams));
  if (!parsed.success) throw badInput(parsed.error);
  return parsed.data;
}

/** A path parameter that names a row; what is not a UUID names nothing. */
export function idParam(context: APIContext, name = 'id'): string {
  const parsed = z.uuid().safeParse(context.params[name]);
  if (!parsed.success)
    throw new BadInput({ code: 'not_found', message: 'There is nothing under this address.' });
  return parsed.data;
}

/** Wraps an endpoint: answers become responses, surprises are logged whole and told as one sentence with a reference. */
export function endpoint(
  handle: (context: APIContext, scope: MemberScope) => Promise<Answer<unknown> | Response>,
): APIRoute {
  return async (context) => {
    const { scope } = context.locals;
    if (!scope) return refusalResponse({ code: 'unauthenticated', message: 'Sign in to go on.' });
    try {
      const answer = await handle(context, scope);
      if (answer instanceof Response) return answer;
      return answer.ok ? json(answer.value) : refusalResponse(answer.refusal);
    } catch (error) {
      if (error instanceof BadInput) return refusalResponse(error.refusal);
      const reference = randomUUID();
      log.error({ err: error, reference, path: context.url.pathname }, 'endpoint failed');
      const message = `Something went wrong on our side. Try again; if it stays, quote ${reference}.`;
      return json({ error: { code: 'surprise', message, reference } }, 500);
    }
  };
}
