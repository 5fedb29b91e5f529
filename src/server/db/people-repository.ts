/** People, their memberships and roles. */
import type { Role } from '../../domain/vocabulary.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

export interface UserRecord {
  id: string;
  email: string;
  name: string;
  passwordHash: string | null;
  sessionVersion: number;
}

export interface MemberRecord {
  id: string;
  userId: string;
  organisationId: string;
  name: string;
  email: string;
  roles: Role[];
  joinedAt: Date;
  lastSeenAt: Date | null;
  openSessions: number;
}

interface UserRow {
  id: string;
  email: string;
  name: string;
  password_hash: string | null;
  session_version: number;
}
interface MemberRow {
  id: string;
  user_id: string;
  organisation_id: string;
  name: string;
  email: string;
  roles: Role[];
  created_at: Date;
  last_seen_at: Date | null;
  open_sessions: number;
}

const toUser = (row: UserRow): UserRecord => ({
  id: row.id,
  email: row.email,
  name: row.name,
  passwordHash: row.password_hash,
  sessionVersion: row.session_version,
});

/** The person of this address, whichever organisation they belong to: for sign-in, invitations and resets only. */
export async function findUserByEmail(db: Db, _scope: Scope, email: string): Promise<UserRecord | null> {
  const row = await db('users').where('email', email.toLowerCase()).first();
  return row ? toUser(row) : null;
}

export async function findUser(db: Db, _scope: Scope, id: string): Promise<UserRecord | null> {
  const row = await db('users').where('id', id).first();
  return row ? toUser(row) : null;
}

/** Adds a person; `null` when the address is taken already. */
export async function insertUser(
  db: Db,
  _scope: Scope,
  user: { email: string; name: string; passwordHash: string },
): Promise<UserRecord | null> {
  const [row] = await db('users')
    .insert({ email: user.email.toLowerCase(), name: user.name, password_hash: user.passwordHash })
    .onConflict('email')
    .ignore()
    .returning('*');
  return row ? toUser(row) : null;
}

/** A new password moves the session version on, so that every token given out before is void. */
export async function setPassword(
  db: Db,
  _scope: Scope,
  userId: string,
  passwordHash: string,
): Promise<void> {
  await db('users')
    .where('id', userId)
    .update({ password_hash: passwordHash, session_version: db.raw('session_version + 1') });
}

/** Makes somebody a member with these roles, or a former member one again. */
export async function upsertMembership(
  db: Db,
  _scope: Scope,
  organisationId: string,
  userId: string,
  roles: readonly Role[],
): Promise<string> {
  const [row] = await db('memberships')
    .insert({ organisation_id: organisationId, user_id: userId })
    .onConflict(['organisation_id', 'user_id'])
    .merge({ removed_at: null })
    .returning('id');
  await writeRoles(db, row.id, organisationId, roles);
  return row.id;
}

async function writeRoles(
  db: Db,
  membershipId: string,
  organisationId: string,
  roles: readonly Role[],
): Promise<void> {
  await db('membership_roles').where('membership_id', membershipId).delete();
  await db('membership_roles').insert(
    [...new Set(roles)].map((role) => ({
      membership_id: membershipId,
      organisation_id: organisationId,
      role,
    })),
  );
}

export async function replaceRoles(
  db: Db,
  scope: Scope,
  member: MemberRecord,
  roles: readonly Role[],
): Promise<void> {
  if (scope.kind === 'member' && scope.organisationId !== member.organisationId)
    throw new Error('A foreign member');
  await writeRoles(db, member.id, member.organisationId, roles);
}

export async function markMemberRemoved(db: Db, scope: Scope, membershipId: string): Promise<void> {
  await db('memberships')
    .where('id', membershipId)
    .modify(within(scope, 'organisation_id'))
    .update({ removed_at: db.fn.now() });
}

function members(db: Db, scope: Scope) {
  return db('memberships as m')
    .join('users as u', 'u.id', 'm.user_id')
    .whereNull('m.removed_at')
    .modify(within(scope, 'm.organisation_id'))
    .select(
      'm.id',
      'm.user_id',
      'm.organisation_id',
      'm.created_at',
      'u.name',
      'u.email',
      db.raw(
        'ARRAY(SELECT r.role FROM membership_roles r WHERE r.membership_id = m.id ORDER BY r.role) AS roles',
      ),
      db.raw(`(SELECT max(s.last_seen_at) FROM sessions s
        WHERE s.user_id = m.user_id AND s.organisation_id = m.organisation_id) AS last_seen_at`),
      db.raw(`(SELECT count(*) FROM sessions s WHERE s.user_id = m.user_id AND s.organisation_id = m.organisation_id
        AND s.revoked_at IS NULL AND s.expires_at > now()) AS open_sessions`),
    );
}

const toMember = (row: MemberRow): MemberRecord => ({
  id: row.id,
  userId: row.user_id,
  organisationId: row.organisation_id,
  name: row.name,
  email: row.email,
  roles: row.roles,
  joinedAt: row.created_at,
  lastSeenAt: row.last_seen_at,
  openSessions: row.open_sessions,
});

export async function listMembers(db: Db, scope: Scope): Promise<MemberRecord[]> {
  return (await members(db, scope).orderBy('u.name')).map(toMember);
}

export async function findMember(db: Db, scope: Scope, membershipId: string): Promise<MemberRecord | null> {
  const row = await members(db, scope).where('m.id', membershipId).first();
  return row ? toMember(row) : null;
}

export async function findMemberByUser(
  db: Db,
  _scope: Scope,
  organisationId: string,
  userId: string,
): Promise<MemberRecord | null> {
  const row = await members(db, { kind: 'system', why: 'membership of a known person' })
    .where({ 'm.organisation_id': organisationId, 'm.user_id': userId })
    .first();
  return row ? toMember(row) : null;
}

/** Members of an organisation who hold a role, for mails to them. The caller has settled that it may know them. */
export async function listRoleHolders(
  db: Db,
  _scope: Scope,
  organisationId: string,
  role: Role,
): Promise<{ userId: string; email: string; name: string }[]> {
  const rows = await db('membership_roles as r')
    .join('memberships as m', 'm.id', 'r.membership_id')
    .join('users as u', 'u.id', 'm.user_id')
    .where({ 'r.organisation_id': organisationId, 'r.role': role })
    .whereNull('m.removed_at')
    .orderBy('u.email')
    .select('u.id', 'u.email', 'u.name');
  return rows.map((row) => ({ userId: row.id, email: row.email, name: row.name }));
}
