/** Members of an organisation: list, roles, removal, ending their sessions. For administrators. */
import type { z } from 'zod';
import type { memberListSchema } from '../../domain/api/people.ts';
import { roleNames, type Role } from '../../domain/vocabulary.ts';
import { recordEvent } from '../db/audit-repository.ts';
import { db, inTransaction, type Db } from '../db/connection.ts';
import { listOpenInvitations } from '../db/one-time-links-repository.ts';
import { lockOrganisation } from '../db/organisations-repository.ts';
import {
  findMember,
  listMembers as listRows,
  markMemberRemoved,
  replaceRoles,
  type MemberRecord,
} from '../db/people-repository.ts';
import { revokeSessionsOf } from '../db/sessions-repository.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { MemberScope } from '../scope.ts';
import { foreignRole } from './invitations.ts';

type MemberList = z.infer<typeof memberListSchema>;
type Member = MemberList['items'][number];

const toMember = (record: MemberRecord): Member => ({
  id: record.id,
  userId: record.userId,
  name: record.name,
  email: record.email,
  roles: record.roles,
  joinedAt: record.joinedAt.toISOString(),
  lastSeenAt: record.lastSeenAt?.toISOString() ?? null,
  openSessions: record.openSessions,
});

const noSuchMember = refuse('not_found', 'There is no such member.');

export async function listMembers(scope: MemberScope): Promise<Answer<MemberList>> {
  const no = lacking(scope, 'member:read');
  if (no) return no;
  const items = (await listRows(db(), scope)).map(toMember);
  const invitations = (await listOpenInvitations(db(), scope)).map((link) => ({
    id: link.id,
    email: link.email,
    roles: link.roles,
    expiresAt: link.expiresAt.toISOString(),
  }));
  return done({ items, invitations });
}

/** Somebody must be able to administer: refuses a change that would leave nobody. Called with the organisation locked. */
async function lastAdministrator(
  trx: Db,
  scope: MemberScope,
  member: MemberRecord,
): Promise<Answer<never> | null> {
  if (!member.roles.includes('administrator')) return null;
  const others = (await listRows(trx, scope)).filter(
    (row) => row.id !== member.id && row.roles.includes('administrator'),
  );
  if (others.length > 0) return null;
  return refuse('conflict', `${member.name} is the only administrator. Make somebody else one first.`);
}

export async function setRoles(
  scope: MemberScope,
  memberId: string,
  roles: readonly Role[],
): Promise<Answer<Member>> {
  const no = lacking(scope, 'member:edit') ?? foreignRole(scope, roles);
  if (no) return no;
  return inTransaction(async (trx) => {
    await lockOrganisation(trx, scope, scope.organisationId);
    const member = await findMember(trx, scope, memberId);
    if (!member) return noSuchMember;
    const last = roles.includes('administrator') ? null : await lastAdministrator(trx, scope, member);
    if (last) return last;
    await replaceRoles(trx, scope, member, roles);
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'member.roles_changed',
      subjectKind: 'member',
      subjectId: member.id,
      detail: {
        name: member.name,
        from: member.roles.map((r) => roleNames[r]),
        to: roles.map((r) => roleNames[r]),
      },
    });
    const changed = await findMember(trx, scope, memberId);
    return changed ? done(toMember(changed)) : noSuchMember;
  });
}

/** Ends the membership and the sessions in it; what the person did stays under their name. */
export async function removeMember(scope: MemberScope, memberId: string): Promise<Answer<{ id: string }>> {
  const no = lacking(scope, 'member:edit');
  if (no) return no;
  return inTransaction(async (trx) => {
    await lockOrganisation(trx, scope, scope.organisationId);
    const member = await findMember(trx, scope, memberId);
    if (!member) return noSuchMember;
    const last = await lastAdministrator(trx, scope, member);
    if (last) return last;
    await markMemberRemoved(trx, scope, member.id);
    await revokeSessionsOf(trx, scope, member.userId, scope.organisationId);
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'member.removed',
      subjectKind: 'member',
      subjectId: member.id,
      detail: { name: member.name, email: member.email },
    });
    return done({ id: member.id });
  });
}

/**
 * Ends every session of the person, also those in which they work elsewhere: a session can change organisation, so
 * leaving one open would leave the way in open. They may sign in again.
 */
export async function endSessions(scope: MemberScope, memberId: string): Promise<Answer<{ ended: number }>> {
  const no = lacking(scope, 'member:edit');
  if (no) return no;
  return inTransaction(async (trx) => {
    const member = await findMember(trx, scope, memberId);
    if (!member) return noSuchMember;
    const ended = await revokeSessionsOf(trx, scope, member.userId);
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'member.sessions_ended',
      subjectKind: 'member',
      subjectId: member.id,
      detail: { name: member.name },
    });
    return done({ ended });
  });
}
