/** The members screen's calls of the API, each parsed by the API's own schemas. */
import { z } from 'zod';
import { invitationSchema, memberListSchema, memberSchema } from '@/domain/api/people.ts';
import { problemSchema } from '@/domain/api/common.ts';
import type { Role } from '@/domain/vocabulary.ts';

export type Member = z.infer<typeof memberSchema>;
export type Invitation = z.infer<typeof invitationSchema>;
export type MemberList = z.infer<typeof memberListSchema>;

/** The server said no, in a sentence for the person and by field for the form. */
export class RefusedCall extends Error {
  constructor(
    message: string,
    readonly fields: Record<string, string>,
  ) {
    super(message);
    this.name = 'RefusedCall';
  }
}

const away = 'The server could not be reached. Nothing was changed; try again.';

async function call<T extends z.ZodType>(
  method: string,
  path: string,
  schema: T,
  body?: unknown,
): Promise<z.infer<T>> {
  let response: Response;
  try {
    response = await fetch(`/api/v1/${path}`, {
      method,
      headers: body === undefined ? {} : { 'content-type': 'application/json' },
      body: body === undefined ? undefined : JSON.stringify(body),
    });
  } catch {
    throw new RefusedCall(away, {});
  }
  const value: unknown = await response.json().catch(() => null);
  if (!response.ok) {
    const problem = problemSchema.safeParse(value);
    throw problem.success
      ? new RefusedCall(problem.data.error.message, problem.data.error.fields ?? {})
      : new RefusedCall(away, {});
  }
  return schema.parse(value);
}

export const listMembers = () => call('GET', 'members', memberListSchema);
export const setRoles = (id: string, roles: readonly Role[]) =>
  call('PATCH', `members/${id}`, memberSchema, { roles });
export const removeMember = (id: string) => call('DELETE', `members/${id}`, z.object({ id: z.string() }));
export const endSessions = (id: string) =>
  call('DELETE', `members/${id}/sessions`, z.object({ ended: z.number() }));
export const invite = (asked: { email: string; roles: readonly Role[] }) =>
  call('POST', 'invitations', invitationSchema, asked);
export const takeBackInvitation = (id: string) =>
  call('DELETE', `invitations/${id}`, z.object({ id: z.string() }));
