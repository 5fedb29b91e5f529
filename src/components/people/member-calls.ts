/** The members screen's calls of the API, each parsed by the API's own schemas. */
import { z } from 'zod';
import { api } from '@/components/live/api.ts';
import { invitationSchema, memberListSchema, memberSchema } from '@/domain/api/people.ts';
import type { Role } from '@/domain/vocabulary.ts';

export type Member = z.infer<typeof memberSchema>;
export type Invitation = z.infer<typeof invitationSchema>;
export type MemberList = z.infer<typeof memberListSchema>;

const doneSchema = z.object({ id: z.string() });
const endedSchema = z.object({ ended: z.number() });

export const listMembers = () => api.get('/api/v1/members', memberListSchema);
export const setRoles = (id: string, roles: readonly Role[]) =>
  api.send('PATCH', `/api/v1/members/${id}`, { roles }, memberSchema);
export const removeMember = (id: string) =>
  api.send('DELETE', `/api/v1/members/${id}`, undefined, doneSchema);
export const endSessions = (id: string) =>
  api.send('DELETE', `/api/v1/members/${id}/sessions`, undefined, endedSchema);
export const invite = (asked: { email: string; roles: readonly Role[] }) =>
  api.send('POST', '/api/v1/invitations', asked, invitationSchema);
export const takeBackInvitation = (id: string) =>
  api.send('DELETE', `/api/v1/invitations/${id}`, undefined, doneSchema);
