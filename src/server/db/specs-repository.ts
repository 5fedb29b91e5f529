/** Specs and their versions: an organisation's own, and those that a channel which it may deliver to is held to. */
import type { Knex } from 'knex';
import { specBodySchema, type SpecBody } from '../../domain/spec.ts';
import type { ContentKind } from '../../domain/vocabulary.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

export interface SpecRecord {
  id: string;
  name: string;
  organisation: { id: string; name: string };
}

export interface VersionRecord {
  id: string;
  specId: string;
  /** `null` for the draft. */
  number: number | null;
  body: SpecBody;
  changeNote: string;
  createdBy: { id: string; name: string } | null;
  updatedAt: Date;
  publishedBy: { id: string; name: string } | null;
  publishedAt: Date | null;
  inForceFrom: Date | null;
  /** The newest of its spec that is in force now. */
  isCurrent: boolean;
}

export interface SpecUse {
  specId: string;
  channelId: string;
  channelName: string;
  contentKind: ContentKind;
}

interface SpecRow {
  id: string;
  name: string;
  organisation_id: string;
  organisation_name: string;
}

interface VersionRow {
  id: string;
  spec_id: string;
  number: number | null;
  body: unknown;
  change_note: string;
  created_by: string | null;
  creator_name: string | null;
  updated_at: Date;
  published_by: string | null;
  publisher_name: string | null;
  published_at: Date | null;
  in_force_from: Date | null;
  is_current: boolean;
}

/** Channels that the scope's organisation may deliver to. */
const agreedChannels = (organisationId: string) => (query: Knex.QueryBuilder) =>
  query
    .select('g.channel_id')
    .from('agreements as g')
    .where('g.supplier_id', organisationId)
    .whereNull('g.ended_at');

const readable = (scope: Scope) => (query: Knex.QueryBuilder) => {
  if (scope.kind !== 'member') return;
  const { organisationId } = scope;
  query.where((either) =>
    either.where('s.organisation_id', organisationId).orWhereExists((use) =>
      use
        .select('a.id')
        .from('channel_assignments as a')
        .whereRaw('a.spec_id = s.id')
        .whereIn('a.channel_id', agreedChannels(organisationId))
        .whereExists((version) =>
          version
            .select('v.id')
            .from('spec_versions as v')
            .whereRaw('v.spec_id = s.id')
            .whereNotNull('v.published_at'),
        ),
    ),
  );
};

const specRows = (db: Db, scope: Scope): Knex.QueryBuilder =>
  db('specs as s')
    .join('organisations as o', 'o.id', 's.organisation_id')
    .whereNull('s.archived_at')
    .modify(readable(scope))
    .select('s.id', 's.name', 's.organisation_id', 'o.name as organisation_name');

const toSpec = (row: SpecRow): SpecRecord => ({
  id: row.id,
  name: row.name,
  organisation: { id: row.organisation_id, name: row.organisation_name },
});

/** By organisation and name. */
export async function listSpecs(db: Db, scope: Scope): Promise<SpecRecord[]> {
  const rows: SpecRow[] = await specRows(db, scope).orderByRaw('lower(o.name), lower(s.name), s.id');
  return rows.map(toSpec);
}

export async function findSpec(db: Db, scope: Scope, id: string): Promise<SpecRecord | null> {
  const row: SpecRow | undefined = await specRows(db, scope).where('s.id', id).first();
  return row ? toSpec(row) : null;
}

/** Holds a spec of the scope's own organisation until the transaction ends: changes to it come one after the other. */
export async function lockOwnSpec(
  db: Db,
  scope: Scope,
  id: string,
): Promise<{ id: string; name: string } | null> {
  const row = await db('specs')
    .where({ id })
    .whereNull('archived_at')
    .modify(within(scope, 'organisation_id'))
    .forUpdate()
    .first<{ id: string; name: string } | undefined>('id', 'name');
  return row ?? null;
}

const person = (id: string | null, name: string | null) => (id && name ? { id, name } : null);

/** Versions of specs that the caller has reached, newest first; drafts before all, and only those of the scope's organisation. */
export async function listVersions(
  db: Db,
  scope: Scope,
  specIds: readonly string[],
  { drafts }: { drafts: boolean },
): Promise<VersionRecord[]> {
  const rows: VersionRow[] = await db('spec_versions as v')
    .leftJoin('users as c', 'c.id', 'v.created_by')
    .leftJoin('users as p', 'p.id', 'v.published_by')
    .whereIn('v.spec_id', specIds as string[])
    .where((either) => {
      either.whereNotNull('v.published_at');
      if (drafts)
        either.orWhere((own) => own.whereNull('v.published_at').modify(within(scope, 'v.organisation_id')));
    })
    .orderByRaw('v.number DESC NULLS FIRST')
    .select(
      'v.*',
      'c.name as creator_name',
      'p.name as publisher_name',
      db.raw(
        `v.id IS NOT DISTINCT FROM (SELECT w.id FROM spec_versions w WHERE w.spec_id = v.spec_id AND w.published_at IS NOT NULL
          AND w.in_force_from <= now() ORDER BY w.in_force_from DESC, w.number DESC LIMIT 1) AS is_current`,
      ),
    );
  return rows.map((row) => ({
    id: row.id,
    specId: row.spec_id,
    number: row.number,
    body: specBodySchema.parse(row.body),
    changeNote: row.change_note,
    createdBy: person(row.created_by, row.creator_name),
    updatedAt: row.updated_at,
    publishedBy: person(row.published_by, row.publisher_name),
    publishedAt: row.published_at,
    inForceFrom: row.in_force_from,
    isCurrent: row.is_current,
  }));
}

/** Where specs are in force now, of the scope's own channels and those that it may deliver to. */
export async function listUses(db: Db, scope: Scope, specIds: readonly string[]): Promise<SpecUse[]> {
  const rows: { spec_id: string; channel_id: string; channel_name: string; content_kind: ContentKind }[] =
    await db
      .from(
        db('channel_assignments')
          .where('in_force_from', '<=', db.fn.now())
          .distinctOn('channel_id', 'content_kind')
          .orderBy(['channel_id', 'content_kind', { column: 'in_force_from', order: 'desc' }])
          .as('a'),
      )
      .join('channels as c', 'c.id', 'a.channel_id')
      .whereIn('a.spec_id', specIds as string[])
      .whereNull('c.archived_at')
      .modify((query) => {
        if (scope.kind !== 'member') return;
        const { organisationId } = scope;
        query.where((either) =>
          either.where('c.organisation_id', organisationId).orWhereIn('c.id', agreedChannels(organisationId)),
        );
      })
      .orderByRaw('lower(c.name), a.content_kind')
      .select('a.spec_id', 'a.channel_id', 'c.name as channel_name', 'a.content_kind');
  return rows.map((row) => ({
    specId: row.spec_id,
    channelId: row.channel_id,
    channelName: row.channel_name,
    contentKind: row.content_kind,
  }));
}

/** A new spec's id; `null` where its organisation has one of that name already. */
export async function insertSpec(
  db: Db,
  _scope: Scope,
  made: { organisationId: string; name: string; createdBy: string },
): Promise<string | null> {
  const [row] = await db('specs')
    .insert({ organisation_id: made.organisationId, name: made.name, created_by: made.createdBy })
    .onConflict(['organisation_id', 'name'])
    .ignore()
    .returning<{ id: string }[]>('id');
  return row?.id ?? null;
}

export async function findDraft(
  db: Db,
  scope: Scope,
  specId: string,
): Promise<{ id: string; updatedAt: Date; byName: string | null } | null> {
  const row = await db('spec_versions as v')
    .leftJoin('users as u', 'u.id', 'v.created_by')
    .where('v.spec_id', specId)
    .whereNull('v.published_at')
    .modify(within(scope, 'v.organisation_id'))
    .first<{ id: string; updated_at: Date; name: string | null } | undefined>(
      'v.id',
      'v.updated_at',
      'u.name',
    );
  return row ? { id: row.id, updatedAt: row.updated_at, byName: row.name } : null;
}

/** Writes a spec's one draft, new or over the one there is. Called with the spec locked. */
export async function writeDraft(
  db: Db,
  _scope: Scope,
  draft: { organisationId: string; specId: string; body: SpecBody; changeNote: string; by: string },
): Promise<void> {
  const written = {
    body: JSON.stringify(draft.body),
    change_note: draft.changeNote,
    created_by: draft.by,
    // In milliseconds, as it comes back to say which draft was seen.
    updated_at: db.raw("date_trunc('milliseconds', clock_timestamp())"),
  };
  const over = await db('spec_versions')
    .where('spec_id', draft.specId)
    .whereNull('published_at')
    .update(written);
  if (over === 0)
    await db('spec_versions').insert({
      organisation_id: draft.organisationId,
      spec_id: draft.specId,
      ...written,
    });
}

/** Whether there was a draft to delete. */
export async function deleteDraft(db: Db, scope: Scope, specId: string): Promise<boolean> {
  const gone = await db('spec_versions')
    .where('spec_id', specId)
    .whereNull('published_at')
    .modify(within(scope, 'organisation_id'))
    .delete();
  return gone > 0;
}

/** Makes the draft the next numbered version, in force from a moment (`null`: this transaction's own). Called with the spec locked. */
export async function publishDraft(
  db: Db,
  _scope: Scope,
  {
    draftId,
    specId,
    by,
    inForceFrom,
  }: { draftId: string; specId: string; by: string; inForceFrom: Date | null },
): Promise<number> {
  const [row] = await db('spec_versions')
    .where('id', draftId)
    .update({
      number: db.raw('(SELECT coalesce(max(number), 0) + 1 FROM spec_versions WHERE spec_id = ?)', [specId]),
      published_by: by,
      published_at: db.fn.now(),
      in_force_from: inForceFrom ?? db.fn.now(),
    })
    .returning<{ number: number }[]>('number');
  if (!row) throw new Error('The draft was gone while its spec was locked');
  return row.number;
}

/** Whether a spec of the scope's organisation has a version that is in force by the moment (`null`: now). */
export async function hasVersionBy(
  db: Db,
  scope: Scope,
  specId: string,
  moment: Date | null,
): Promise<boolean> {
  const row = await db('spec_versions')
    .where('spec_id', specId)
    .whereNotNull('published_at')
    .where('in_force_from', '<=', moment ?? db.fn.now())
    .modify(within(scope, 'organisation_id'))
    .first('id');
  return row !== undefined;
}

/** Who must hear of a change of a spec: suppliers with an agreement for a channel that is held to it, now or later. */
export async function listSuppliersUnder(db: Db, scope: Scope, specId: string): Promise<string[]> {
  const rows: { supplier_id: string }[] = await db('channel_assignments as a')
    .join('agreements as g', 'g.channel_id', 'a.channel_id')
    .where('a.spec_id', specId)
    .whereNull('g.ended_at')
    .modify(within(scope, 'a.organisation_id'))
    .distinct('g.supplier_id');
  return rows.map((row) => row.supplier_id);
}
