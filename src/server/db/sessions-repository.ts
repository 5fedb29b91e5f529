/** Sessions: a row per sign-in, which ends it for good when revoked, whatever token is still about. */
import type { Role } from '../../domain/vocabulary.ts';
import type { MemberScope, Scope } from '../scope.ts';
import type { Db } from './connection.ts';

/** How long a sign-in lasts without signing in again. */
export const sessionSeconds = 7 * 24 * 3600;

export async function insertSession(
  db: Db,
  _scope: Scope,
  session: { userId: string; organisationId: string; userAgent: string },
): Promise<string> {
  const [row] = await db('sessions')
    .insert({
      user_id: session.userId,
      organisation_id: session.organisationId,
      user_agent: session.userAgent.slice(0, 300),
      expires_at: db.raw("now() + ? * interval '1 second'", [sessionSeconds]),
    })
    .returning('id');
  return row.id;
}

/**
 * The scope of a live session in one query: not revoked, not over, the person's session version still the token's, and
 * they are a member of the organisation that they work in. Roles are as they are now. Else `null`.
 */
export async function findLiveSession(
  db: Db,
  sessionId: string,
  sessionVersion: number,
): Promise<{ scope: MemberScope; seenSecondsAgo: number } | null> {
  const row = await db('sessions as s')
    .join('users as u', 'u.id', 's.user_id')
    .join('organisations as o', 'o.id', 's.organisation_id')
    .join('memberships as m', (on) => {
      on.on('m.user_id', 's.user_id').andOn('m.organisation_id', 's.organisation_id');
    })
    .where({ 's.id': sessionId, 'u.session_version': sessionVersion })
    .whereNull('s.revoked_at')
    .whereNull('m.removed_at')
    .whereRaw('s.expires_at > now()')
    .first(
      's.id',
      's.user_id',
      's.organisation_id',
      'u.name',
      'u.email',
      'o.name as organisation_name',
      'o.is_supplier',
      'o.is_distributor',
      'o.time_zone',
      db.raw(
        'ARRAY(SELECT r.role FROM membership_roles r WHERE r.membership_id = m.id ORDER BY r.role) AS roles',
      ),
      db.raw('extract(epoch FROM now() - s.last_seen_at)::float8 AS seen_seconds_ago'),
    );
  if (!row) return null;
  const scope: MemberScope = {
    kind: 'member',
    sessionId: row.id,
    userId: row.user_id,
    userName: row.name,
    email: row.email,
    organisationId: row.organisation_id,
    organisationName: row.organisation_name,
    timeZone: row.time_zone,
    isSupplier: row.is_supplier,
    isDistributor: row.is_distributor,
    roles: row.roles as Role[],
  };
  return { scope, seenSecondsAgo: row.seen_seconds_ago };
}

export async function markSeen(db: Db, sessionId: string): Promise<void> {
  await db('sessions').where('id', sessionId).update({ last_seen_at: db.fn.now() });
}

export async function revokeSession(db: Db, sessionId: string): Promise<void> {
  await db('sessions').where('id', sessionId).whereNull('revoked_at').update({ revoked_at: db.fn.now() });
}

/** Ends a person's sessions: all, or those in which they work for one organisation. Returns how many were open. */
export async function revokeSessionsOf(
  db: Db,
  _scope: Scope,
  userId: string,
  organisationId?: string,
): Promise<number> {
  return db('sessions')
    .where('user_id', userId)
    .whereNull('revoked_at')
    .whereRaw('expires_at > now()')
    .modify((query) => {
      if (organisationId) query.where('organisation_id', organisationId);
    })
    .update({ revoked_at: db.fn.now() });
}

/** The session works for another organisation from its next request on; false when the person is no member there. */
export async function moveSession(db: Db, scope: MemberScope, organisationId: string): Promise<boolean> {
  const moved = await db('sessions')
    .where({ id: scope.sessionId, user_id: scope.userId })
    .whereExists(
      db('memberships')
        .where({ user_id: scope.userId, organisation_id: organisationId })
        .whereNull('removed_at')
        .select(db.raw('1')),
    )
    .update({ organisation_id: organisationId });
  return moved === 1;
}
