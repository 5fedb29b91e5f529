/** Forgotten passwords: a one-time link by mail, and the new password that it is for. */
import { passwordSchema } from '../../domain/api/people.ts';
import { hashOfToken, newToken, tokenPattern } from '../auth/one-time-tokens.ts';
import { hashPassword } from '../auth/passwords.ts';
import { resetLimit, type TryLimit } from '../auth/sign-in-limit.ts';
import { recordEvent } from '../db/audit-repository.ts';
import { db, inTransaction } from '../db/connection.ts';
import { endLinks, findLink, insertLink, takeLink } from '../db/one-time-links-repository.ts';
import { listOrganisationsOfUser } from '../db/organisations-repository.ts';
import { findUser, findUserByEmail, setPassword } from '../db/people-repository.ts';
import { revokeSessionsOf } from '../db/sessions-repository.ts';
import { queueMail } from '../mail/outbox.ts';
import { redis } from '../redis.ts';
import { done, refuse, type Answer } from '../refusals.ts';
import { systemScope } from '../scope.ts';

const scope = systemScope('forgotten password');
const linkMs = 3600_000;

let limit: TryLimit | undefined;

const linkIsDead = refuse(
  'gone',
  'This link was used already, or is more than an hour old. Ask for a new one.',
);

/**
 * Queues a mail with a link that works once within the hour, when somebody of this address exists. The answer is the
 * same when nobody does. Refusal: `too_many` asks from one network address.
 */
export async function forgotPassword(email: string, networkAddress: string): Promise<Answer<null>> {
  limit ??= resetLimit(redis());
  const address = email.trim().toLowerCase();
  const wait = await limit.take(address, networkAddress);
  if (wait !== null)
    return refuse('too_many', `Too many tries. Wait ${Math.ceil(wait / 60)} min and try again.`);
  return inTransaction(async (trx) => {
    const user = await findUserByEmail(trx, scope, address);
    const [organisation] = user ? await listOrganisationsOfUser(trx, scope, user.id) : [];
    if (!user || !organisation) return done(null);
    const token = newToken();
    const expiresAt = new Date(Date.now() + linkMs);
    await endLinks(trx, scope, { kind: 'password_reset', email: address });
    await insertLink(trx, scope, {
      kind: 'password_reset',
      tokenHash: hashOfToken(token),
      email: address,
      userId: user.id,
      expiresAt,
    });
    await queueMail(trx, {
      organisationId: organisation.id,
      kind: 'password_reset',
      to: address,
      model: { name: user.name, token, expiresAt },
    });
    return done(null);
  });
}

/** Whose link this is, for the page that asks for the new password; `gone` when it does not work any more. */
export async function readResetLink(token: string): Promise<Answer<{ email: string }>> {
  if (!tokenPattern.test(token)) return linkIsDead;
  const link = await findLink(db(), scope, 'password_reset', hashOfToken(token));
  return link?.state === 'open' ? done({ email: link.email }) : linkIsDead;
}

/** Sets the new password, uses the link up, and ends every session of the person. */
export async function resetPassword(token: string, password: string): Promise<Answer<{ email: string }>> {
  const parsed = passwordSchema.safeParse(password);
  if (!parsed.success) {
    const message = parsed.error.issues[0]?.message ?? 'Choose another password.';
    return refuse('bad_input', message, { password: message });
  }
  // Hashing is dear on purpose: not for a link that is dead anyway.
  const link = await readResetLink(token);
  if (!link.ok) return link;
  const passwordHash = await hashPassword(parsed.data);
  return inTransaction(async (trx) => {
    const taken = await takeLink(trx, scope, 'password_reset', hashOfToken(token));
    if (!taken?.userId) return linkIsDead;
    const user = await findUser(trx, scope, taken.userId);
    if (!user) return linkIsDead;
    await setPassword(trx, scope, user.id, passwordHash);
    await revokeSessionsOf(trx, scope, user.id);
    for (const organisation of await listOrganisationsOfUser(trx, scope, user.id)) {
      await recordEvent(trx, scope, {
        organisationId: organisation.id,
        action: 'member.password_reset',
        subjectKind: 'member',
        subjectId: user.id,
        detail: { name: user.name },
      });
    }
    return done({ email: user.email });
  });
}
