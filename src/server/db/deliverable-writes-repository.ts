/** Writes to deliverables: arrival, the states of measuring, details. The read side is deliverables-repository. */
import type { Knex } from 'knex';
import type { ContentKind, DeliverableState } from '../../domain/vocabulary.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

export interface DeliverableCore {
  id: string;
  organisationId: string;
  uploadedBy: string;
  fileName: string;
  byteSize: number;
  storageKey: string;
  sha256Declared: string | null;
  state: DeliverableState;
  measureAttempts: number;
  contentKind: ContentKind;
  programmeId: string | null;
  episodeId: string | null;
  /** How it is measured; `null`: the whole file. */
  planId: string | null;
}

interface CoreRow {
  id: string;
  organisation_id: string;
  uploaded_by: string;
  file_name: string;
  byte_size: number;
  storage_key: string;
  sha256_declared: string | null;
  state: DeliverableState;
  measure_attempts: number;
  content_kind: ContentKind;
  programme_id: string | null;
  episode_id: string | null;
  plan_id: string | null;
}
const coreColumns = [
  'id',
  'organisation_id',
  'uploaded_by',
  'file_name',
  'byte_size',
  'storage_key',
  'sha256_declared',
  'state',
  'measure_attempts',
  'content_kind',
  'programme_id',
  'episode_id',
  'plan_id',
] as const;
const toCore = (row: CoreRow): DeliverableCore => ({
  id: row.id,
  organisationId: row.organisation_id,
  uploadedBy: row.uploaded_by,
  fileName: row.file_name,
  byteSize: row.byte_size,
  storageKey: row.storage_key,
  sha256Declared: row.sha256_declared,
  state: row.state,
  measureAttempts: row.measure_attempts,
  contentKind: row.content_kind,
  programmeId: row.programme_id,
  episodeId: row.episode_id,
  planId: row.plan_id,
});

/** A deliverable that was not discarded; undefined when the scope has none of that id. */
export async function findDeliverableCore(
  db: Db,
  scope: Scope,
  id: string,
): Promise<DeliverableCore | undefined> {
  const row = await db<CoreRow>('deliverables')
    .where('id', id)
    .whereNull('discarded_at')
    .modify(within(scope, 'organisation_id'))
    .first<CoreRow | undefined>(...coreColumns);
  return row && toCore(row);
}

export async function insertDeliverable(
  db: Db,
  _scope: Scope,
  deliverable: Pick<
    DeliverableCore,
    'id' | 'organisationId' | 'uploadedBy' | 'fileName' | 'byteSize' | 'storageKey'
  >,
): Promise<void> {
  await db('deliverables').insert({
    id: deliverable.id,
    organisation_id: deliverable.organisationId,
    uploaded_by: deliverable.uploadedBy,
    file_name: deliverable.fileName,
    byte_size: deliverable.byteSize,
    storage_key: deliverable.storageKey,
  });
}

/** From 'uploading' to 'waiting'; false when it had left 'uploading' already. */
export async function markArrived(
  db: Db,
  scope: Scope,
  id: string,
  sha256Declared: string,
): Promise<boolean> {
  const changed = await db('deliverables')
    .where({ id, state: 'uploading', discarded_at: null })
    .modify(within(scope, 'organisation_id'))
    .update({ state: 'waiting', sha256_declared: sha256Declared, uploaded_at: db.fn.now() });
  return changed === 1;
}

export async function markDiscarded(db: Db, scope: Scope, id: string): Promise<void> {
  await db('deliverables')
    .where({ id, discarded_at: null })
    .modify(within(scope, 'organisation_id'))
    .update({ discarded_at: db.fn.now() });
}

/** The newest other deliverable of the same organisation that holds the same bytes. */
export async function findSameContent(
  db: Db,
  organisationId: string,
  sha256: string,
  exceptId: string,
): Promise<{ id: string; fileName: string; createdAt: Date } | null> {
  const row = await db('deliverables')
    .where('organisation_id', organisationId)
    .where((either) => either.where('sha256', sha256).orWhere('sha256_declared', sha256))
    .whereNot('id', exceptId)
    .whereNot('state', 'uploading')
    .whereNull('discarded_at')
    .orderBy('created_at', 'desc')
    .first<{ id: string; file_name: string; created_at: Date } | undefined>('id', 'file_name', 'created_at');
  return row ? { id: row.id, fileName: row.file_name, createdAt: row.created_at } : null;
}

// Measuring ---------------------------------------------------------------------------------------------------

/** Counts a start and sets 'measuring'. Undefined when there is nothing to measure or it began `mostStarts` times. */
export async function beginMeasuring(
  db: Db,
  scope: Scope,
  id: string,
  mostStarts: number,
): Promise<DeliverableCore | undefined> {
  const [row] = await db<CoreRow>('deliverables')
    .where('id', id)
    .whereIn('state', ['waiting', 'measuring'])
    .whereNull('discarded_at')
    .where('measure_attempts', '<', mostStarts)
    .modify(within(scope, 'organisation_id'))
    .update({ state: 'measuring', measure_attempts: db.raw('measure_attempts + 1') })
    .returning<CoreRow[]>([...coreColumns]);
  return row && toCore(row);
}

/** Back to 'waiting' after an orderly end: the start that did not kill anybody is not counted. */
export async function handBack(db: Db, scope: Scope, id: string): Promise<void> {
  await db('deliverables')
    .where({ id, state: 'measuring' })
    .modify(within(scope, 'organisation_id'))
    .update({ state: 'waiting', measure_attempts: db.raw('greatest(measure_attempts - 1, 0)') });
}

/** Back to 'waiting' because nobody is at work on it; the starts stay counted, for whoever was has died. */
export async function takeFromTheDead(db: Db, scope: Scope, id: string): Promise<boolean> {
  const changed = await db('deliverables')
    .where({ id, state: 'measuring' })
    .modify(within(scope, 'organisation_id'))
    .update({ state: 'waiting' });
  return changed === 1;
}

/** A run ends its deliverable only while that is still to be measured, and by the plan that the run was made by. */
const endedBy =
  (scope: Scope, { id, planId }: Pick<DeliverableCore, 'id' | 'planId'>) =>
  (query: Knex.QueryBuilder): void => {
    query
      .where('id', id)
      .whereIn('state', ['waiting', 'measuring'])
      .whereRaw('plan_id IS NOT DISTINCT FROM ?', [planId])
      .modify(within(scope, 'organisation_id'));
  };

/** Ends as measured, from 'waiting' too (somebody else may have handed it back); false when it had ended already. */
export async function markMeasured(
  db: Db,
  scope: Scope,
  run: Pick<DeliverableCore, 'id' | 'planId'>,
  sha256: string,
): Promise<boolean> {
  const changed = await db('deliverables')
    .modify(endedBy(scope, run))
    .update({ state: 'measured', sha256, measured_at: db.fn.now() });
  return changed === 1;
}

/** Ends as unreadable with a stable code and a sentence; false when it had ended already. */
export async function markUnreadable(
  db: Db,
  scope: Scope,
  run: Pick<DeliverableCore, 'id' | 'planId'>,
  reason: { code: string; message: string },
  sha256: string | null,
): Promise<boolean> {
  const changed = await db('deliverables')
    .modify(endedBy(scope, run))
    .update({ state: 'unreadable', reason_code: reason.code, reason: reason.message, sha256 });
  return changed === 1;
}

/** Ids in a state, in order of id, after `afterId`: the sweep walks them in pages. */
export async function listIdsInState(
  db: Db,
  scope: Scope,
  state: 'waiting' | 'measuring',
  afterId: string | null,
  limit: number,
): Promise<string[]> {
  const rows = await db('deliverables')
    .where('state', state)
    .whereNull('discarded_at')
    .modify(within(scope, 'organisation_id'))
    .modify((query) => void (afterId && query.where('id', '>', afterId)))
    .orderBy('id')
    .limit(limit)
    .select<{ id: string }[]>('id');
  return rows.map((row) => row.id);
}
