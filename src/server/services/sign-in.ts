/** Signing in and out, and what a session's token stands for at each request. */
import { isPassword } from '../auth/passwords.ts';
import type { RequestOrigin } from '../auth/request-origin.ts';
import { signInLimit, type SignInLimit } from '../auth/sign-in-limit.ts';
import { db } from '../db/connection.ts';
import { listOrganisationsOfUser } from '../db/organisations-repository.ts';
import { findUserByEmail } from '../db/people-repository.ts';
import { findLiveSession, insertSession, markSeen, revokeSession } from '../db/sessions-repository.ts';
import { log } from '../log.ts';
import { redis } from '../redis.ts';
import { done, refuse, type Answer } from '../refusals.ts';
import { systemScope, type MemberScope } from '../scope.ts';

const scope = systemScope('sign-in');

let limit: SignInLimit | undefined;

export interface SignedIn {
  userId: string;
  name: string;
  email: string;
  sessionId: string;
  sessionVersion: number;
}

/**
 * Checks e-mail and password and opens a session in the organisation worked in last. Refusals: `unauthenticated` (wrong,
 * or nobody of that address: the same words), `too_many` (wait), `forbidden` (a member of nothing any more).
 */
export async function signIn(
  email: string,
  password: string,
  from: RequestOrigin,
): Promise<Answer<SignedIn>> {
  limit ??= signInLimit(redis());
  const address = email.trim().toLowerCase();
  const wait = await limit.take(address, from.address);
  if (wait !== null) {
    log.warn({ address: from.address, waitSeconds: wait }, 'sign-in held back by its rate limit');
    return refuse('too_many', `Too many tries. Wait ${Math.ceil(wait / 60)} min, or choose a new password.`);
  }
  const user = await findUserByEmail(db(), scope, address);
  const right = await isPassword(password, user?.passwordHash ?? null);
  if (!user || !right)
    return refuse('unauthenticated', 'This e-mail address and password do not belong together.');
  await limit.giveBack(address, from.address);
  const [organisation] = await listOrganisationsOfUser(db(), scope, user.id);
  if (!organisation) {
    return refuse(
      'forbidden',
      'You are not a member of an organisation any more. Ask an administrator to invite you.',
    );
  }
  const sessionId = await insertSession(db(), scope, {
    userId: user.id,
    organisationId: organisation.id,
    userAgent: from.userAgent,
  });
  return done({
    userId: user.id,
    name: user.name,
    email: user.email,
    sessionId,
    sessionVersion: user.sessionVersion,
  });
}

/** The scope behind a token's claims, or `null` when that session has ended. Notes once a minute that it is in use. */
export async function resumeSession(sessionId: string, sessionVersion: number): Promise<MemberScope | null> {
  const live = await findLiveSession(db(), sessionId, sessionVersion);
  if (!live) return null;
  if (live.seenSecondsAgo > 60) await markSeen(db(), sessionId);
  return live.scope;
}

export async function endSession(sessionId: string): Promise<void> {
  await revokeSession(db(), sessionId);
}
