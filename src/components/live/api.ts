/** The one way from an island to /api/v1: answers parsed by their schemas, refusals as errors with a sentence. */
import type { z } from 'zod';
import { problemSchema } from '@/domain/api/common.ts';

/** A refusal of the API. `message` is for the person; `fields` names inputs at fault. */
export class ApiProblem extends Error {
  constructor(
    readonly status: number,
    readonly code: string,
    message: string,
    readonly fields: Record<string, string> = {},
  ) {
    super(message);
    this.name = 'ApiProblem';
  }
}

async function ask(method: string, path: string, body?: unknown, signal?: AbortSignal): Promise<unknown> {
  let response: Response;
  try {
    response = await fetch(path, {
      method,
      signal,
      headers: body === undefined ? {} : { 'content-type': 'application/json' },
      body: body === undefined ? undefined : JSON.stringify(body),
    });
  } catch (error) {
    if (signal?.aborted) throw error;
    throw new ApiProblem(0, 'offline', 'The server cannot be reached. What you see is kept; try again.');
  }
  const answer: unknown = await response.json().catch(() => null);
  if (response.ok) return answer;
  if (response.status === 401)
    location.assign(`/sign-in?callbackUrl=${encodeURIComponent(location.pathname + location.search)}`);
  const problem = problemSchema.safeParse(answer);
  if (problem.success) {
    const { code, message, fields } = problem.data.error;
    throw new ApiProblem(response.status, code, message, fields);
  }
  throw new ApiProblem(
    response.status,
    'surprise',
    `The server answered ${response.status} and gave no reason. Try again.`,
  );
}

/** Sends; the answer through its schema, or `undefined` where the caller asks nothing of it. */
async function send(method: Writing, path: string, body?: unknown): Promise<undefined>;
async function send<T extends z.ZodType>(
  method: Writing,
  path: string,
  body: unknown,
  schema: T,
): Promise<z.output<T>>;
async function send(method: Writing, path: string, body?: unknown, schema?: z.ZodType): Promise<unknown> {
  const answer = await ask(method, path, body);
  return schema?.parse(answer);
}
type Writing = 'POST' | 'PUT' | 'PATCH' | 'DELETE';

export const api = {
  get: async <T extends z.ZodType>(path: string, schema: T, signal?: AbortSignal): Promise<z.output<T>> =>
    schema.parse(await ask('GET', path, undefined, signal)),
  send,
};
