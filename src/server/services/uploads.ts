/** Uploads: begun, signed part by part, joined, given up. Bytes go from the browser to storage and never pass here. */
import { randomUUID } from 'node:crypto';
import type { z } from 'zod';
import type {
  completeUploadResultSchema,
  createUploadsSchema,
  Upload,
} from '../../domain/api/deliverables.ts';
import { partSize, planUpload, whyNotUploadable } from '../../domain/upload-plan.ts';
import { recordEvent } from '../db/audit-repository.ts';
import { setBenchFigures } from '../db/bench-figures-repository.ts';
import { db, inTransaction } from '../db/connection.ts';
import {
  findDeliverableCore,
  findSameContent,
  insertDeliverable,
  markArrived,
  markDiscarded,
} from '../db/deliverable-writes-repository.ts';
import {
  deleteParts,
  endUpload,
  findSameFile,
  findUpload,
  insertUpload,
  listOpenUploads,
  listParts,
  upsertPart,
  type PartRecord,
  type UploadRecord,
} from '../db/uploads-repository.ts';
import { publishEvent } from '../events.ts';
import { log } from '../log.ts';
import { enqueueMeasuring } from '../queue/measuring-queue.ts';
import { redis } from '../redis.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { MemberScope, Scope } from '../scope.ts';
import {
  abortMultipart,
  completeMultipart,
  createMultipart,
  deleteObject,
  headObject,
  multipartStands,
  originalKey,
  presignedPart,
  StorageTrouble,
} from '../storage/storage.ts';
import { setDeliverableDetails } from './deliverable-details.ts';
import { readDeliverableRow } from './deliverables.ts';
import type { ItemResult } from './item-results.ts';

export type NewFile = z.infer<typeof createUploadsSchema>['files'][number];
export type Arrival = z.infer<typeof completeUploadResultSchema>;

const createdAtOnce = 8;
const storageAway = refuse(
  'unavailable',
  'Storage does not answer at the moment. What has arrived is kept; try again in a minute.',
);

/** Turns storage being away into an answer; everything else goes on as the surprise that it is. */
async function orStorageAway<T>(work: () => Promise<Answer<T>>): Promise<Answer<T>> {
  try {
    return await work();
  } catch (error) {
    if (!(error instanceof StorageTrouble)) throw error;
    log.warn({ err: error }, 'storage is away');
    return storageAway;
  }
}

const toUpload = (record: UploadRecord, resumed: boolean): Upload => ({
  deliverableId: record.deliverableId,
  fileName: record.fileName,
  byteSize: record.byteSize,
  lastModifiedMs: record.lastModifiedMs,
  partBytes: record.partBytes,
  partCount: record.partCount,
  partsDone: record.partsDone,
  resumed,
  createdAt: record.createdAt.toISOString(),
});

/** Uploads of the organisation that were begun and not ended, newest first. */
export async function listUploads(scope: Scope): Promise<Answer<{ items: Upload[] }>> {
  const no = lacking(scope, 'deliverable:upload');
  if (no) return no;
  const records = await listOpenUploads(db(), scope);
  return done({ items: records.map((record) => toUpload(record, false)) });
}

/**
 * Begins an upload per file, or goes on with the organisation's broken-off upload of the same name, size and time of
 * change (its details stay). One answer per file; an item's id is the file's place in the request.
 */
export async function createUploads(
  scope: MemberScope,
  files: readonly NewFile[],
): Promise<Answer<{ items: ItemResult<Upload>[] }>> {
  const no = lacking(scope, 'deliverable:upload');
  if (no) return no;
  // Two files of one request may look the same (another folder): each goes on with an upload of its own.
  const taken = new Set<string>();
  const items: ItemResult<Upload>[] = [];
  for (let from = 0; from < files.length; from += createdAtOnce) {
    const answers = await Promise.all(
      files
        .slice(from, from + createdAtOnce)
        .map((file) => orStorageAway(() => createUpload(scope, file, taken))),
    );
    answers.forEach((answer, i) => {
      const id = String(from + i);
      items.push(
        answer.ok ? { ok: true, id, value: answer.value } : { ok: false, id, error: answer.refusal },
      );
    });
  }
  return done({ items });
}

async function createUpload(scope: MemberScope, file: NewFile, taken: Set<string>): Promise<Answer<Upload>> {
  const why = whyNotUploadable(file.fileName, file.byteSize);
  if (why) return refuse('bad_input', why);
  const broken = (await findSameFile(db(), scope, file)).find(
    ({ deliverableId }) => !taken.has(deliverableId),
  );
  if (broken) {
    taken.add(broken.deliverableId);
    if ((await multipartStands(broken.storageKey, broken.storageUploadId)) !== 'gone') {
      if (file.benchFigures) await setBenchFigures(db(), scope, broken.deliverableId, file.benchFigures);
      return done(toUpload(broken, true));
    }
    await giveUp(scope, broken);
  }

  const deliverableId = randomUUID();
  const storageKey = originalKey(scope.organisationId, deliverableId);
  const plan = planUpload(file.byteSize);
  const storageUploadId = await createMultipart(storageKey);
  const dropParts = () => abortMultipart(storageKey, storageUploadId);
  const answer = await inTransaction(async (trx) => {
    await insertDeliverable(trx, scope, {
      id: deliverableId,
      organisationId: scope.organisationId,
      uploadedBy: scope.userId,
      fileName: file.fileName,
      byteSize: file.byteSize,
      storageKey,
    });
    await insertUpload(trx, scope, {
      deliverableId,
      organisationId: scope.organisationId,
      storageUploadId,
      lastModifiedMs: file.lastModifiedMs,
      ...plan,
    });
    if (file.benchFigures) await setBenchFigures(trx, scope, deliverableId, file.benchFigures);
    const detailed = await setDeliverableDetails(trx, scope, deliverableId, file.details);
    if (!detailed.ok) return detailed;
    const record = await findUpload(trx, scope, deliverableId);
    if (!record) throw new Error('An upload was written and not found');
    return done(toUpload(record, false));
  }).catch(async (error: unknown) => {
    await dropParts();
    throw error;
  });
  if (answer.ok) taken.add(deliverableId);
  else await dropParts();
  return answer;
}

async function findOpen(scope: Scope, deliverableId: string): Promise<Answer<UploadRecord>> {
  const no = lacking(scope, 'deliverable:upload');
  if (no) return no;
  const upload = await findUpload(db(), scope, deliverableId);
  if (!upload) return refuse('not_found', 'There is no such upload.');
  if (upload.abortedAt) return refuse('gone', 'This upload was given up. Pick the file again to begin anew.');
  return done(upload);
}

const arrivedAlready = refuse('conflict', 'This file has arrived whole; there is nothing more to send.');

/** Addresses to which the browser puts these parts; each takes exactly that part's bytes, for four hours. */
export async function signParts(
  scope: Scope,
  deliverableId: string,
  numbers: readonly number[],
): Promise<Answer<{ items: { number: number; url: string }[] }>> {
  const found = await findOpen(scope, deliverableId);
  if (!found.ok) return found;
  const upload = found.value;
  if (upload.completedAt) return arrivedAlready;
  const beyond = numbers.find((number) => number > upload.partCount);
  if (beyond !== undefined)
    return refuse('bad_input', `Part ${beyond} was asked for; this file has ${upload.partCount}.`);
  const items = await Promise.all(
    numbers.map(async (number) => ({
      number,
      url: await presignedPart(
        upload.storageKey,
        upload.storageUploadId,
        number,
        partSize(upload.byteSize, upload, number),
      ),
    })),
  );
  return done({ items });
}

/** Writes down that storage took a part; told twice, the later one stands. */
export async function recordPart(
  scope: Scope,
  deliverableId: string,
  part: PartRecord,
): Promise<Answer<{ partsDone: number[] }>> {
  const found = await findOpen(scope, deliverableId);
  if (!found.ok) return found;
  const upload = found.value;
  if (upload.completedAt) return arrivedAlready;
  if (part.number > upload.partCount)
    return refuse('bad_input', `Part ${part.number} was told; this file has ${upload.partCount}.`);
  const asked = partSize(upload.byteSize, upload, part.number);
  if (part.byteSize !== asked)
    return refuse(
      'bad_input',
      `Part ${part.number} has ${part.byteSize} bytes where ${asked} belong. Send it again.`,
    );
  await upsertPart(db(), scope, upload, part);
  return done({ partsDone: [...new Set([...upload.partsDone, part.number])].sort((a, b) => a - b) });
}

/**
 * Joins the parts, checks the size in storage, and hands the deliverable to measuring. Safe to repeat: a second call
 * after a lost answer gives the same. Refuses while parts are missing, and says which.
 */
export function completeUpload(
  scope: Scope,
  deliverableId: string,
  sha256: string,
): Promise<Answer<Arrival>> {
  return orStorageAway(async () => {
    const found = await findOpen(scope, deliverableId);
    if (!found.ok) return found;
    const upload = found.value;
    if (!upload.completedAt) {
      const joined = await join(scope, upload);
      if (!joined.ok) return joined;
      const arrived = await inTransaction(async (trx) => {
        // Of two calls at once, one ends the upload; the other finds it ended, which is as good.
        if (await endUpload(trx, scope, deliverableId, 'completed')) {
          await markArrived(trx, scope, deliverableId, sha256);
          await recordEvent(trx, scope, {
            organisationId: upload.organisationId,
            action: 'deliverable.uploaded',
            subjectKind: 'deliverable',
            subjectId: deliverableId,
            detail: { fileName: upload.fileName, byteSize: upload.byteSize, sha256 },
          });
        }
        return done(null);
      });
      if (!arrived.ok) return arrived;
    }
    const deliverable = await findDeliverableCore(db(), scope, deliverableId);
    if (!deliverable) return refuse('gone', 'This deliverable was discarded.');
    if (deliverable.state === 'waiting') {
      await enqueueMeasuring(deliverableId);
      await publishEvent(redis(), [upload.organisationId], {
        kind: 'deliverable',
        id: deliverableId,
        state: 'waiting',
        progress: null,
      });
    }
    const row = await readDeliverableRow(scope, deliverableId);
    if (!row.ok) return row;
    const same = await findSameContent(db(), upload.organisationId, sha256, deliverableId);
    return done({
      deliverable: row.value,
      alreadyDelivered: same && { ...same, createdAt: same.createdAt.toISOString() },
    });
  });
}

/** Makes one object of the parts, or finds that an earlier call did. */
async function join(scope: Scope, upload: UploadRecord): Promise<Answer<null>> {
  const parts = await listParts(db(), scope, upload.deliverableId);
  const missing = missingParts(upload, parts);
  if (missing.length > 0) {
    const some = missing.slice(0, 5).join(', ') + (missing.length > 5 ? ', …' : '');
    return refuse(
      'conflict',
      `${missing.length} of ${upload.partCount} parts have not arrived (${some}). Send these and try again.`,
    );
  }
  let joined: 'done' | 'incomplete' | 'gone' | StorageTrouble;
  try {
    joined = await completeMultipart(upload.storageKey, upload.storageUploadId, parts);
  } catch (error) {
    if (!(error instanceof StorageTrouble)) throw error;
    // Perhaps only the answer was lost: the object itself says.
    joined = error;
  }
  const head = joined === 'incomplete' ? null : await headObject(upload.storageKey);
  if (head?.byteSize === upload.byteSize) return done(null);
  if (joined instanceof StorageTrouble && !head) throw joined;
  if (joined === 'incomplete') {
    await deleteParts(db(), scope, upload.deliverableId);
    return refuse(
      'conflict',
      'Storage does not hold every part as it was sent. Pick the file again; all parts are sent anew.',
    );
  }
  await giveUp(scope, upload);
  if (!head) return refuse('gone', 'Storage has forgotten this upload. Pick the file again to begin anew.');
  await deleteObject(upload.storageKey);
  return refuse(
    'conflict',
    `${head.byteSize} bytes arrived where the file has ${upload.byteSize}. Nothing was kept; pick the file again.`,
  );
}

function missingParts(upload: UploadRecord, parts: readonly PartRecord[]): number[] {
  const whole = new Set(
    parts.filter((p) => p.byteSize === partSize(upload.byteSize, upload, p.number)).map((p) => p.number),
  );
  return Array.from({ length: upload.partCount }, (_, i) => i + 1).filter((number) => !whole.has(number));
}

/** Gives an upload up: its row ends, its deliverable is discarded, storage drops the parts. */
export async function abortUpload(
  scope: Scope,
  deliverableId: string,
): Promise<Answer<{ deliverableId: string }>> {
  const no = lacking(scope, 'deliverable:upload');
  if (no) return no;
  const upload = await findUpload(db(), scope, deliverableId);
  if (!upload) return refuse('not_found', 'There is no such upload.');
  if (upload.completedAt)
    return refuse('conflict', 'This file has arrived whole. Discard the deliverable instead.');
  if (!upload.abortedAt) await giveUp(scope, upload);
  return done({ deliverableId });
}

async function giveUp(scope: Scope, upload: UploadRecord): Promise<void> {
  const given = await inTransaction(async (trx) => {
    if (!(await endUpload(trx, scope, upload.deliverableId, 'aborted'))) return done(false);
    await markDiscarded(trx, scope, upload.deliverableId);
    await recordEvent(trx, scope, {
      organisationId: upload.organisationId,
      action: 'upload.aborted',
      subjectKind: 'deliverable',
      subjectId: upload.deliverableId,
      detail: { fileName: upload.fileName },
    });
    return done(true);
  });
  if (!given.ok || !given.value) return;
  try {
    await abortMultipart(upload.storageKey, upload.storageUploadId);
  } catch (error) {
    // The rows say that it is over; parts that stay behind fall to the bucket's own rule for unfinished uploads.
    log.warn({ err: error, deliverableId: upload.deliverableId }, 'storage did not drop an upload');
  }
}
