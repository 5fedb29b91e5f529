/** One-time links by the hash of their token: invitations and new passwords. */
import type { Role } from '../../domain/vocabulary.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

export type LinkKind = 'invitation' | 'password_reset';

export interface LinkRecord {
  id: string;
  kind: LinkKind;
  email: string;
  userId: string | null;
  organisationId: string | null;
  organisationName: string | null;
  roles: Role[];
  expiresAt: Date;
  /** 'open', or why it does not work any more. */
  state: 'open' | 'used' | 'over';
}

interface LinkRow {
  id: string;
  kind: LinkKind;
  email: string;
  user_id: string | null;
  organisation_id: string | null;
  organisation_name: string | null;
  roles: Role[];
  expires_at: Date;
  state: LinkRecord['state'];
}

const toLink = (row: LinkRow): LinkRecord => ({
  id: row.id,
  kind: row.kind,
  email: row.email,
  userId: row.user_id,
  organisationId: row.organisation_id,
  organisationName: row.organisation_name,
  roles: row.roles,
  expiresAt: row.expires_at,
  state: row.state,
});

function links(db: Db) {
  return db('one_time_links as l')
    .leftJoin('organisations as o', 'o.id', 'l.organisation_id')
    .select(
      'l.*',
      'o.name as organisation_name',
      db.raw(
        "CASE WHEN l.used_at IS NOT NULL THEN 'used' WHEN l.expires_at <= now() THEN 'over' ELSE 'open' END AS state",
      ),
    );
}

export async function insertLink(
  db: Db,
  scope: Scope,
  link: {
    kind: LinkKind;
    tokenHash: Buffer;
    email: string;
    userId?: string;
    organisationId?: string;
    roles?: readonly Role[];
    expiresAt: Date;
  },
): Promise<string> {
  const [row] = await db('one_time_links')
    .insert({
      kind: link.kind,
      token_hash: link.tokenHash,
      email: link.email,
      user_id: link.userId ?? null,
      organisation_id: link.organisationId ?? null,
      roles: link.roles ?? [],
      created_by: scope.kind === 'member' ? scope.userId : null,
      expires_at: link.expiresAt,
    })
    .returning('id');
  return row.id;
}

/** The link of this token, used or not. Whoever holds the token may see it: the token is the leave. */
export async function findLink(
  db: Db,
  _scope: Scope,
  kind: LinkKind,
  tokenHash: Buffer,
): Promise<LinkRecord | null> {
  const row: LinkRow | undefined = await links(db)
    .where({ 'l.kind': kind, 'l.token_hash': tokenHash })
    .first();
  return row ? toLink(row) : null;
}

/** Uses the link up; of two at once only one gets it. `null`: used, over or unknown. */
export async function takeLink(
  db: Db,
  scope: Scope,
  kind: LinkKind,
  tokenHash: Buffer,
): Promise<LinkRecord | null> {
  const taken = await db('one_time_links')
    .where({ kind, token_hash: tokenHash })
    .whereNull('used_at')
    .whereRaw('expires_at > now()')
    .update({ used_at: db.fn.now() });
  return taken === 1 ? findLink(db, scope, kind, tokenHash) : null;
}

/** Ends what is still open: a newer link to the same end takes its place, or it is taken back. */
export async function endLinks(
  db: Db,
  _scope: Scope,
  which: { kind: LinkKind; email: string; organisationId?: string },
): Promise<void> {
  await db('one_time_links')
    .where({ kind: which.kind, email: which.email })
    .whereNull('used_at')
    .whereRaw('expires_at > now()')
    .modify((query) => {
      if (which.organisationId) query.where('organisation_id', which.organisationId);
    })
    .update({ expires_at: db.fn.now() });
}

/** Ends one open invitation of the scope's organisation; gives its address, or `null` when there is none. */
export async function endInvitation(db: Db, scope: Scope, id: string): Promise<string | null> {
  const rows: { email: string }[] = await db('one_time_links')
    .where({ id, kind: 'invitation' })
    .whereNull('used_at')
    .whereRaw('expires_at > now()')
    .modify(within(scope, 'organisation_id'))
    .update({ expires_at: db.fn.now() })
    .returning('email');
  return rows[0]?.email ?? null;
}

/** Open invitations of the scope's organisation, the newest first. */
export async function listOpenInvitations(db: Db, scope: Scope): Promise<LinkRecord[]> {
  const rows: LinkRow[] = await links(db)
    .where('l.kind', 'invitation')
    .whereNull('l.used_at')
    .whereRaw('l.expires_at > now()')
    .modify(within(scope, 'l.organisation_id'))
    .orderBy('l.created_at', 'desc');
  return rows.map(toLink);
}
