/** Organisations that a person belongs to. */
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';

export interface OrganisationRecord {
  id: string;
  name: string;
  isSupplier: boolean;
  isDistributor: boolean;
  timeZone: string;
}

interface OrganisationRow {
  id: string;
  name: string;
  is_supplier: boolean;
  is_distributor: boolean;
  time_zone: string;
}

const toOrganisation = (row: OrganisationRow): OrganisationRecord => ({
  id: row.id,
  name: row.name,
  isSupplier: row.is_supplier,
  isDistributor: row.is_distributor,
  timeZone: row.time_zone,
});

export async function findOrganisation(
  db: Db,
  _scope: Scope,
  id: string,
): Promise<OrganisationRecord | null> {
  const row = await db('organisations').where('id', id).first();
  return row ? toOrganisation(row) : null;
}

/** Holds the organisation's row until the transaction ends: changes of members come one after the other. */
export async function lockOrganisation(db: Db, _scope: Scope, id: string): Promise<void> {
  await db('organisations').where('id', id).forNoKeyUpdate().first('id');
}

/** Where a person is a member now; first the one that they worked in last, then by age of the membership. */
export async function listOrganisationsOfUser(
  db: Db,
  _scope: Scope,
  userId: string,
): Promise<OrganisationRecord[]> {
  const rows = await db('memberships as m')
    .join('organisations as o', 'o.id', 'm.organisation_id')
    .where('m.user_id', userId)
    .whereNull('m.removed_at')
    .orderByRaw(
      `(SELECT max(s.last_seen_at) FROM sessions s WHERE s.user_id = m.user_id AND s.organisation_id = m.organisation_id)
       DESC NULLS LAST, m.created_at, o.name`,
    )
    .select('o.*');
  return rows.map(toOrganisation);
}
