/** Channels, what they are held to, and who may deliver to them: an organisation's own, and those that it may deliver to. */
import type { Knex } from 'knex';
import type { ChannelKind, ContentKind } from '../../domain/vocabulary.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

export interface ChannelRecord {
  id: string;
  name: string;
  kind: ChannelKind;
  timeZone: string;
  organisation: { id: string; name: string };
}

export interface AssignmentRecord {
  id: string;
  channelId: string;
  contentKind: ContentKind;
  specId: string;
  specName: string;
  inForceFrom: Date;
  standing: 'now' | 'planned' | 'past';
}

export interface AgreementRecord {
  id: string;
  channelId: string;
  supplier: { id: string; name: string };
  createdAt: Date;
}

interface ChannelRow {
  id: string;
  name: string;
  kind: ChannelKind;
  time_zone: string;
  organisation_id: string;
  organisation_name: string;
}

const channelRows = (db: Db, scope: Scope): Knex.QueryBuilder =>
  db('channels as c')
    .join('organisations as o', 'o.id', 'c.organisation_id')
    .whereNull('c.archived_at')
    .modify((query: Knex.QueryBuilder) => {
      if (scope.kind !== 'member') return;
      const { organisationId } = scope;
      query.where((either) =>
        either
          .where('c.organisation_id', organisationId)
          .orWhereExists((agreed) =>
            agreed
              .select('g.id')
              .from('agreements as g')
              .whereRaw('g.channel_id = c.id')
              .where('g.supplier_id', organisationId)
              .whereNull('g.ended_at'),
          ),
      );
    })
    .select('c.id', 'c.name', 'c.kind', 'c.time_zone', 'c.organisation_id', 'o.name as organisation_name');

const toChannel = (row: ChannelRow): ChannelRecord => ({
  id: row.id,
  name: row.name,
  kind: row.kind,
  timeZone: row.time_zone,
  organisation: { id: row.organisation_id, name: row.organisation_name },
});

/** By organisation and name. */
export async function listChannels(db: Db, scope: Scope): Promise<ChannelRecord[]> {
  const rows: ChannelRow[] = await channelRows(db, scope).orderByRaw('lower(o.name), lower(c.name), c.id');
  return rows.map(toChannel);
}

export async function findChannel(db: Db, scope: Scope, id: string): Promise<ChannelRecord | null> {
  const row: ChannelRow | undefined = await channelRows(db, scope).where('c.id', id).first();
  return row ? toChannel(row) : null;
}

/** Holds a channel of the scope's own organisation until the transaction ends. */
export async function lockOwnChannel(
  db: Db,
  scope: Scope,
  id: string,
): Promise<{ id: string; name: string } | null> {
  const row = await db('channels')
    .where({ id })
    .whereNull('archived_at')
    .modify(within(scope, 'organisation_id'))
    .forUpdate()
    .first<{ id: string; name: string } | undefined>('id', 'name');
  return row ?? null;
}

/** Assignments of channels that the caller has reached: by kind, newest first; 'now' is the last that has begun. */
export async function listAssignments(
  db: Db,
  _scope: Scope,
  channelIds: readonly string[],
): Promise<AssignmentRecord[]> {
  const rows: {
    id: string;
    channel_id: string;
    content_kind: ContentKind;
    spec_id: string;
    spec_name: string;
    in_force_from: Date;
    standing: AssignmentRecord['standing'];
  }[] = await db('channel_assignments as a')
    .join('specs as s', 's.id', 'a.spec_id')
    .whereIn('a.channel_id', channelIds as string[])
    .orderBy([{ column: 'a.content_kind' }, { column: 'a.in_force_from', order: 'desc' }])
    .select(
      'a.id',
      'a.channel_id',
      'a.content_kind',
      'a.spec_id',
      's.name as spec_name',
      'a.in_force_from',
      db.raw(`CASE WHEN a.in_force_from > now() THEN 'planned'
        WHEN EXISTS (SELECT FROM channel_assignments b WHERE b.channel_id = a.channel_id AND b.content_kind = a.content_kind
          AND b.in_force_from > a.in_force_from AND b.in_force_from <= now()) THEN 'past'
        ELSE 'now' END AS standing`),
    );
  return rows.map((row) => ({
    id: row.id,
    channelId: row.channel_id,
    contentKind: row.content_kind,
    specId: row.spec_id,
    specName: row.spec_name,
    inForceFrom: row.in_force_from,
    standing: row.standing,
  }));
}

/** Open agreements of the scope's own channels; suppliers see none of each other. */
export async function listAgreements(
  db: Db,
  scope: Scope,
  channelIds: readonly string[],
): Promise<AgreementRecord[]> {
  const rows: {
    id: string;
    channel_id: string;
    supplier_id: string;
    supplier_name: string;
    created_at: Date;
  }[] = await db('agreements as g')
    .join('organisations as o', 'o.id', 'g.supplier_id')
    .whereIn('g.channel_id', channelIds as string[])
    .whereNull('g.ended_at')
    .modify(within(scope, 'g.organisation_id'))
    .orderByRaw('lower(o.name)')
    .select('g.id', 'g.channel_id', 'g.supplier_id', 'o.name as supplier_name', 'g.created_at');
  return rows.map((row) => ({
    id: row.id,
    channelId: row.channel_id,
    supplier: { id: row.supplier_id, name: row.supplier_name },
    createdAt: row.created_at,
  }));
}

/** A new channel's id; `null` where its organisation has one of that name already. */
export async function insertChannel(
  db: Db,
  _scope: Scope,
  made: { organisationId: string; name: string; kind: ChannelKind; timeZone: string },
): Promise<string | null> {
  const [row] = await db('channels')
    .insert({
      organisation_id: made.organisationId,
      name: made.name,
      kind: made.kind,
      time_zone: made.timeZone,
    })
    .onConflict(['organisation_id', 'name'])
    .ignore()
    .returning<{ id: string }[]>('id');
  return row?.id ?? null;
}

/** False where another channel of the organisation has that name. */
export async function updateChannel(
  db: Db,
  scope: Scope,
  id: string,
  changes: { name?: string; kind?: ChannelKind; timeZone?: string },
): Promise<boolean> {
  const columns = {
    ...(changes.name !== undefined && { name: changes.name }),
    ...(changes.kind !== undefined && { kind: changes.kind }),
    ...(changes.timeZone !== undefined && { time_zone: changes.timeZone }),
  };
  if (Object.keys(columns).length === 0) return true;
  try {
    await db('channels').where({ id }).modify(within(scope, 'organisation_id')).update(columns);
    return true;
  } catch (error) {
    if (error instanceof Error && 'code' in error && error.code === '23505') return false;
    throw error;
  }
}

/** From a moment (`null`: this transaction's own). A new assignment's id; `null` where that kind has one from that very moment. */
export async function insertAssignment(
  db: Db,
  _scope: Scope,
  made: {
    organisationId: string;
    channelId: string;
    contentKind: ContentKind;
    specId: string;
    inForceFrom: Date | null;
    by: string;
  },
): Promise<string | null> {
  const [row] = await db('channel_assignments')
    .insert({
      organisation_id: made.organisationId,
      channel_id: made.channelId,
      content_kind: made.contentKind,
      spec_id: made.specId,
      in_force_from: made.inForceFrom ?? db.fn.now(),
      created_by: made.by,
    })
    .onConflict(['channel_id', 'content_kind', 'in_force_from'])
    .ignore()
    .returning<{ id: string }[]>('id');
  return row?.id ?? null;
}

/** Deletes an assignment that has not begun; false where it has. */
export async function deletePlannedAssignment(db: Db, scope: Scope, id: string): Promise<boolean> {
  const gone = await db('channel_assignments')
    .where({ id })
    .where('in_force_from', '>', db.fn.now())
    .modify(within(scope, 'organisation_id'))
    .delete();
  return gone > 0;
}

/** A new agreement's id; `null` where there is one already. */
export async function insertAgreement(
  db: Db,
  _scope: Scope,
  made: { organisationId: string; channelId: string; supplierId: string },
): Promise<string | null> {
  const [row] = await db('agreements')
    .insert({
      organisation_id: made.organisationId,
      channel_id: made.channelId,
      supplier_id: made.supplierId,
    })
    .onConflict(db.raw('(channel_id, supplier_id) WHERE ended_at IS NULL'))
    .ignore()
    .returning<{ id: string }[]>('id');
  return row?.id ?? null;
}

/** The supplier of the agreement that was ended; `null` where there was none open. */
export async function endAgreement(
  db: Db,
  scope: Scope,
  { id, channelId }: { id: string; channelId: string },
): Promise<{ id: string; name: string } | null> {
  const [row] = await db('agreements as g')
    .where({ id, channel_id: channelId })
    .whereNull('ended_at')
    .modify(within(scope, 'organisation_id'))
    .update({ ended_at: db.fn.now() })
    .returning<{ supplier_id: string }[]>('supplier_id');
  if (!row) return null;
  return (await findSupplier(db, scope, row.supplier_id)) ?? { id: row.supplier_id, name: '' };
}

/** Organisations that deliver. Their names are no secret among those who may invite them. */
export async function listSuppliers(db: Db, _scope: Scope): Promise<{ id: string; name: string }[]> {
  return db('organisations').where('is_supplier', true).orderByRaw('lower(name), id').select('id', 'name');
}

export async function findSupplier(
  db: Db,
  _scope: Scope,
  id: string,
): Promise<{ id: string; name: string } | null> {
  const row = await db('organisations')
    .where({ id, is_supplier: true })
    .first<{ id: string; name: string } | undefined>('id', 'name');
  return row ?? null;
}
