/** Sets of mono files: the parts of a deliverable that is one programme in several files. */
import { speakers, type Speaker } from '../../engine/layouts.ts';
import { z } from 'zod';
import type { DeliverableState } from '../../domain/vocabulary.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

export interface PartRecord {
  partId: string;
  speaker: Speaker;
  fileName: string;
  byteSize: number;
  storageKey: string;
  sha256Declared: string | null;
}

/** The parts of a deliverable in their order; none for one that is a file by itself. */
export async function listSetParts(db: Db, scope: Scope, deliverableId: string): Promise<PartRecord[]> {
  const rows: {
    part_id: string;
    speaker: string;
    file_name: string;
    byte_size: number;
    storage_key: string;
    sha256_declared: string | null;
  }[] = await db('deliverable_parts as dp')
    .join('deliverables as d', 'd.id', 'dp.part_id')
    .where('dp.deliverable_id', deliverableId)
    .modify(within(scope, 'dp.organisation_id'))
    .orderBy('dp.position')
    .select('dp.part_id', 'dp.speaker', 'd.file_name', 'd.byte_size', 'd.storage_key', 'd.sha256_declared');
  return rows.map((row) => ({
    partId: row.part_id,
    speaker: z.enum(speakers).parse(row.speaker),
    fileName: row.file_name,
    byteSize: row.byte_size,
    storageKey: row.storage_key,
    sha256Declared: row.sha256_declared,
  }));
}

export interface PartCandidate extends Omit<PartRecord, 'speaker'> {
  state: DeliverableState;
  isSet: boolean;
  isSubmitted: boolean;
  /** Audio channels, where it is measured. */
  channels: number | null;
}

/** Deliverables that may become parts, held until the transaction ends; those that the scope has not are left out. */
export async function lockPartCandidates(
  db: Db,
  scope: Scope,
  ids: readonly string[],
): Promise<PartCandidate[]> {
  const rows: {
    id: string;
    file_name: string;
    byte_size: number;
    storage_key: string;
    sha256_declared: string | null;
    state: DeliverableState;
    is_set: boolean;
    is_submitted: boolean;
    channels: number | null;
  }[] = await db('deliverables as d')
    .whereIn('d.id', ids as string[])
    .whereNull('d.discarded_at')
    .modify(within(scope, 'd.organisation_id'))
    .orderBy('d.id')
    .forUpdate('d')
    .select(
      'd.id',
      'd.file_name',
      'd.byte_size',
      'd.storage_key',
      'd.sha256_declared',
      'd.state',
      db.raw('EXISTS (SELECT FROM deliverable_parts p WHERE p.deliverable_id = d.id) AS is_set'),
      db.raw('EXISTS (SELECT FROM submissions s WHERE s.deliverable_id = d.id) AS is_submitted'),
      db.raw(
        `(SELECT (m.format ->> 'channels')::int FROM measurements m WHERE m.deliverable_id = d.id LIMIT 1) AS channels`,
      ),
    );
  return rows.map((row) => ({
    partId: row.id,
    fileName: row.file_name,
    byteSize: row.byte_size,
    storageKey: row.storage_key,
    sha256Declared: row.sha256_declared,
    state: row.state,
    isSet: row.is_set,
    isSubmitted: row.is_submitted,
    channels: row.channels,
  }));
}

/** Writes the set's deliverable with the details and channels of its first part, its parts in order, and takes these out of sight. */
export async function insertSet(
  db: Db,
  _scope: Scope,
  made: {
    id: string;
    organisationId: string;
    uploadedBy: string;
    fileName: string;
    byteSize: number;
    storageKey: string;
    sha256Declared: string | null;
    parts: readonly { partId: string; speaker: Speaker }[];
  },
): Promise<void> {
  const [{ partId: first }] = made.parts;
  await db.raw(
    `INSERT INTO deliverables (id, organisation_id, uploaded_by, file_name, byte_size, storage_key, sha256_declared, state,
       programme_id, episode_id, version_label, content_kind, uploaded_at)
     SELECT ?, organisation_id, ?, ?, ?, ?, ?, 'waiting', programme_id, episode_id, version_label, content_kind, now()
     FROM deliverables WHERE id = ?`,
    [made.id, made.uploadedBy, made.fileName, made.byteSize, made.storageKey, made.sha256Declared, first],
  );
  await db.raw(
    `INSERT INTO deliverable_channels (deliverable_id, organisation_id, channel_id)
     SELECT ?, organisation_id, channel_id FROM deliverable_channels WHERE deliverable_id = ?`,
    [made.id, first],
  );
  await db('deliverable_parts').insert(
    made.parts.map(({ partId, speaker }, i) => ({
      deliverable_id: made.id,
      organisation_id: made.organisationId,
      position: i + 1,
      part_id: partId,
      speaker,
    })),
  );
  await db('deliverables')
    .whereIn(
      'id',
      made.parts.map(({ partId }) => partId),
    )
    .update({ discarded_at: db.fn.now() });
}

/** Brings the parts of a set back as files by themselves; those that wait to be measured are found by the sweep. */
export async function restoreParts(db: Db, scope: Scope, deliverableId: string): Promise<void> {
  await db('deliverables')
    .whereIn('id', db('deliverable_parts').where('deliverable_id', deliverableId).select('part_id'))
    .modify(within(scope, 'organisation_id'))
    .update({ discarded_at: null });
}
