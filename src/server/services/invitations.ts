/** Invitations: an administrator's offer of membership, sent by mail, taken once. */
import { z } from 'zod';
import { passwordSchema } from '../../domain/api/people.ts';
import { rolesOfSide } from '../../domain/permissions.ts';
import { roleNames, type Role } from '../../domain/vocabulary.ts';
import { hashOfToken, newToken, tokenPattern } from '../auth/one-time-tokens.ts';
import { hashPassword } from '../auth/passwords.ts';
import { recordEvent } from '../db/audit-repository.ts';
import { db, inTransaction } from '../db/connection.ts';
import { endInvitation, endLinks, findLink, insertLink, takeLink } from '../db/one-time-links-repository.ts';
import { findMemberByUser, findUserByEmail, insertUser, upsertMembership } from '../db/people-repository.ts';
import { queueMail } from '../mail/outbox.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import { systemScope, type MemberScope } from '../scope.ts';

const byLink = systemScope('an invitation is its own leave');
const linkMs = 7 * 24 * 3600_000;

const linkIsDead = refuse(
  'gone',
  'This invitation was taken already, taken back, or is more than a week old. Ask for a new one.',
);

/** A refusal when one of the roles does not exist on this side, else `null`. */
export function foreignRole(scope: MemberScope, roles: readonly Role[]): Answer<never> | null {
  const possible = rolesOfSide(scope);
  const wrong = roles.find((role) => !possible.includes(role));
  if (!wrong) return null;
  const message = `${scope.organisationName} has no work for a ${roleNames[wrong]}: choose another role.`;
  return refuse('bad_input', message, { roles: message });
}

/**
 * Mails a link that works once within a week. An open invitation of the same address is replaced. Refusals:
 * `conflict` for somebody who is a member, `bad_input` for a role of the other side.
 */
export async function invite(
  scope: MemberScope,
  { email, roles }: { email: string; roles: readonly Role[] },
): Promise<Answer<{ id: string; email: string; roles: readonly Role[]; expiresAt: string }>> {
  const no = lacking(scope, 'member:edit') ?? foreignRole(scope, roles);
  if (no) return no;
  return inTransaction(async (trx) => {
    const user = await findUserByEmail(trx, byLink, email);
    if (user && (await findMemberByUser(trx, byLink, scope.organisationId, user.id))) {
      const message = `${email} is a member already. Change their roles in the list.`;
      return refuse('conflict', message, { email: message });
    }
    const token = newToken();
    const expiresAt = new Date(Date.now() + linkMs);
    await endLinks(trx, scope, { kind: 'invitation', email, organisationId: scope.organisationId });
    const id = await insertLink(trx, scope, {
      kind: 'invitation',
      tokenHash: hashOfToken(token),
      email,
      organisationId: scope.organisationId,
      roles,
      expiresAt,
    });
    await queueMail(trx, {
      organisationId: scope.organisationId,
      kind: 'invitation',
      to: email,
      model: {
        organisationName: scope.organisationName,
        inviterName: scope.userName,
        roles,
        token,
        expiresAt,
      },
    });
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'member.invited',
      subjectKind: 'invitation',
      subjectId: id,
      detail: { email, roles: roles.map((role) => roleNames[role]) },
    });
    return done({ id, email, roles, expiresAt: expiresAt.toISOString() });
  });
}

/** Ends an open invitation: its link works no more. `not_found` for one that was taken, is over, or is not the organisation's. */
export async function takeBackInvitation(scope: MemberScope, id: string): Promise<Answer<{ id: string }>> {
  const no = lacking(scope, 'member:edit');
  if (no) return no;
  return inTransaction(async (trx) => {
    const email = await endInvitation(trx, scope, id);
    if (email === null) return refuse('not_found', 'There is no such open invitation.');
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'member.invitation_taken_back',
      subjectKind: 'invitation',
      subjectId: id,
      detail: { email },
    });
    return done({ id });
  });
}

export interface InvitationOffer {
  email: string;
  organisationName: string;
  roles: Role[];
  /** Somebody of this address exists: they join with the password that they have. */
  hasAccount: boolean;
}

/** What an invitation offers, for its page; `gone` when it does not work any more. */
export async function readInvitation(token: string): Promise<Answer<InvitationOffer>> {
  if (!tokenPattern.test(token)) return linkIsDead;
  const link = await findLink(db(), byLink, 'invitation', hashOfToken(token));
  if (link?.state !== 'open' || !link.organisationName) return linkIsDead;
  const user = await findUserByEmail(db(), byLink, link.email);
  return done({
    email: link.email,
    organisationName: link.organisationName,
    roles: link.roles,
    hasAccount: user !== null,
  });
}

const newcomerSchema = z.object({
  name: z.string().trim().min(1, 'Say what you are called.').max(120, 'Use 120 characters or fewer.'),
  password: passwordSchema,
});

/**
 * Joins: somebody new gives name and password, somebody known nothing. Uses the link up. Refusals: `gone`, `bad_input`
 * with the fields named.
 */
export async function acceptInvitation(
  token: string,
  given: { name?: string; password?: string },
): Promise<Answer<{ email: string; organisationName: string }>> {
  const offer = await readInvitation(token);
  if (!offer.ok) return offer;
  const newcomer = offer.value.hasAccount ? null : newcomerSchema.safeParse(given);
  if (newcomer && !newcomer.success) {
    const fields = Object.fromEntries(
      newcomer.error.issues.map((issue) => [issue.path.join('.'), issue.message]),
    );
    return refuse('bad_input', 'Something is missing below.', fields);
  }
  const made = newcomer?.success
    ? { name: newcomer.data.name, passwordHash: await hashPassword(newcomer.data.password) }
    : null;
  return inTransaction(async (trx) => {
    const link = await takeLink(trx, byLink, 'invitation', hashOfToken(token));
    if (!link?.organisationId || !link.organisationName) return linkIsDead;
    const user =
      (await findUserByEmail(trx, byLink, link.email)) ??
      (made && (await insertUser(trx, byLink, { email: link.email, ...made })));
    if (!user)
      return refuse('conflict', 'Somebody joined with this address at the same moment. Try the link again.');
    const memberId = await upsertMembership(trx, byLink, link.organisationId, user.id, link.roles);
    await recordEvent(trx, byLink, {
      organisationId: link.organisationId,
      action: 'member.joined',
      subjectKind: 'member',
      subjectId: memberId,
      detail: { name: user.name, email: user.email, roles: link.roles.map((role) => roleNames[role]) },
    });
    return done({ email: user.email, organisationName: link.organisationName });
  });
}
