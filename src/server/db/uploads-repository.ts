/** Uploads on their way: which file, cut how, and which parts storage holds (kept here, since not every store lists them). */
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

export interface UploadRecord {
  deliverableId: string;
  organisationId: string;
  uploadedBy: string;
  fileName: string;
  byteSize: number;
  storageKey: string;
  storageUploadId: string;
  partBytes: number;
  partCount: number;
  lastModifiedMs: number;
  createdAt: Date;
  completedAt: Date | null;
  abortedAt: Date | null;
  partsDone: number[];
}

interface UploadRow {
  deliverable_id: string;
  organisation_id: string;
  uploaded_by: string;
  file_name: string;
  byte_size: number;
  storage_key: string;
  storage_upload_id: string;
  part_bytes: number;
  part_count: number;
  last_modified_ms: number;
  created_at: Date;
  completed_at: Date | null;
  aborted_at: Date | null;
  parts_done: number[];
}

const toRecord = (row: UploadRow): UploadRecord => ({
  deliverableId: row.deliverable_id,
  organisationId: row.organisation_id,
  uploadedBy: row.uploaded_by,
  fileName: row.file_name,
  byteSize: row.byte_size,
  storageKey: row.storage_key,
  storageUploadId: row.storage_upload_id,
  partBytes: row.part_bytes,
  partCount: row.part_count,
  lastModifiedMs: row.last_modified_ms,
  createdAt: row.created_at,
  completedAt: row.completed_at,
  abortedAt: row.aborted_at,
  partsDone: row.parts_done,
});

const select = (db: Db, scope: Scope) =>
  db<UploadRow>('uploads as u')
    .join('deliverables as d', 'd.id', 'u.deliverable_id')
    .modify(within(scope, 'u.organisation_id'))
    .select<UploadRow[]>(
      'u.deliverable_id',
      'u.organisation_id',
      'd.uploaded_by',
      'd.file_name',
      'd.byte_size',
      'd.storage_key',
      'u.storage_upload_id',
      'u.part_bytes',
      'u.part_count',
      'u.last_modified_ms',
      'u.created_at',
      'u.completed_at',
      'u.aborted_at',
      db.raw(
        `ARRAY(SELECT p.number FROM upload_parts p WHERE p.deliverable_id = u.deliverable_id ORDER BY p.number) AS parts_done`,
      ),
    );
const open = { 'u.completed_at': null, 'u.aborted_at': null };

/** The upload of a deliverable in any state; undefined when the scope has none of that id. */
export async function findUpload(
  db: Db,
  scope: Scope,
  deliverableId: string,
): Promise<UploadRecord | undefined> {
  const [row] = await select(db, scope).where('u.deliverable_id', deliverableId);
  return row && toRecord(row);
}

/** Uploads that may go on, newest first; at most 200. */
export async function listOpenUploads(db: Db, scope: Scope): Promise<UploadRecord[]> {
  const rows = await select(db, scope).where(open).orderBy('u.created_at', 'desc').limit(200);
  return rows.map(toRecord);
}

/** Broken-off uploads of what looks like the same file: same name, size and time of change. Newest first. */
export async function findSameFile(
  db: Db,
  scope: Scope,
  file: { fileName: string; byteSize: number; lastModifiedMs: number },
): Promise<UploadRecord[]> {
  const rows = await select(db, scope)
    .where(open)
    .where({
      'd.file_name': file.fileName,
      'd.byte_size': file.byteSize,
      'u.last_modified_ms': file.lastModifiedMs,
    })
    .orderBy('u.created_at', 'desc')
    .limit(20);
  return rows.map(toRecord);
}

/** Open uploads begun before a moment, for the sweep. */
export async function findOpenUploadsBefore(db: Db, scope: Scope, moment: Date): Promise<UploadRecord[]> {
  const rows = await select(db, scope)
    .where(open)
    .where('u.created_at', '<', moment)
    .orderBy('u.created_at')
    .limit(200);
  return rows.map(toRecord);
}

export async function insertUpload(
  db: Db,
  _scope: Scope,
  upload: Pick<
    UploadRecord,
    'deliverableId' | 'organisationId' | 'storageUploadId' | 'partBytes' | 'partCount' | 'lastModifiedMs'
  >,
): Promise<void> {
  await db('uploads').insert({
    deliverable_id: upload.deliverableId,
    organisation_id: upload.organisationId,
    storage_upload_id: upload.storageUploadId,
    part_bytes: upload.partBytes,
    part_count: upload.partCount,
    last_modified_ms: upload.lastModifiedMs,
  });
}

export interface PartRecord {
  number: number;
  etag: string;
  byteSize: number;
}

/** Writes down a part that storage took; told twice, the later one stands. */
export async function upsertPart(
  db: Db,
  _scope: Scope,
  upload: UploadRecord,
  part: PartRecord,
): Promise<void> {
  await db('upload_parts')
    .insert({
      deliverable_id: upload.deliverableId,
      organisation_id: upload.organisationId,
      number: part.number,
      etag: part.etag,
      byte_size: part.byteSize,
    })
    .onConflict(['deliverable_id', 'number'])
    .merge();
}

export async function listParts(db: Db, scope: Scope, deliverableId: string): Promise<PartRecord[]> {
  const rows = await db('upload_parts')
    .where('deliverable_id', deliverableId)
    .modify(within(scope, 'organisation_id'))
    .orderBy('number')
    .select<{ number: number; etag: string; byte_size: number }[]>('number', 'etag', 'byte_size');
  return rows.map((row) => ({ number: row.number, etag: row.etag, byteSize: row.byte_size }));
}

/** Forgets what storage turned out not to hold, so that it is sent again. */
export async function deleteParts(db: Db, scope: Scope, deliverableId: string): Promise<void> {
  await db('upload_parts')
    .where('deliverable_id', deliverableId)
    .modify(within(scope, 'organisation_id'))
    .delete();
}

/** Ends an open upload; false when it had ended already. */
export async function endUpload(
  db: Db,
  scope: Scope,
  deliverableId: string,
  how: 'completed' | 'aborted',
): Promise<boolean> {
  const ended = await db('uploads')
    .where({ deliverable_id: deliverableId, completed_at: null, aborted_at: null })
    .modify(within(scope, 'organisation_id'))
    .update(how === 'completed' ? 'completed_at' : 'aborted_at', db.fn.now());
  return ended === 1;
}
