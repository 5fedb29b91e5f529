/** What an event stream asks while it is open. */
import type { DeliverableState } from '../../domain/vocabulary.ts';
import type { MemberScope } from '../scope.ts';
import type { Db } from './connection.ts';

/**
 * What the session stands on (its organisation, the person's roles there, the session version), as one text to compare;
 * `null` when it has ended.
 */
export async function readSessionStanding(db: Db, scope: MemberScope): Promise<string | null> {
  const row = await db('sessions as s')
    .join('users as u', 'u.id', 's.user_id')
    .join('memberships as m', (on) =>
      on.on('m.user_id', 's.user_id').andOn('m.organisation_id', 's.organisation_id'),
    )
    .where({ 's.id': scope.sessionId, 's.user_id': scope.userId, 's.organisation_id': scope.organisationId })
    .whereNull('s.revoked_at')
    .whereNull('m.removed_at')
    .where('s.expires_at', '>', db.fn.now())
    .first<{ session_version: number; roles: string | null } | undefined>(
      'u.session_version',
      db.raw(
        `(SELECT string_agg(r.role, ',' ORDER BY r.role) FROM membership_roles r WHERE r.membership_id = m.id) AS roles`,
      ),
    );
  return row ? `${row.session_version} ${row.roles ?? ''}` : null;
}

/** Deliverables of the person's organisation that wait or are measured now, newest first; at most 500. */
export async function listOnTheirWay(
  db: Db,
  scope: MemberScope,
): Promise<{ id: string; state: DeliverableState }[]> {
  return db('deliverables')
    .where('organisation_id', scope.organisationId)
    .whereIn('state', ['waiting', 'measuring'])
    .whereNull('discarded_at')
    .orderBy('created_at', 'desc')
    .limit(500)
    .select<{ id: string; state: DeliverableState }[]>('id', 'state');
}
