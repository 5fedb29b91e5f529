/** Taking several mono files as one deliverable. */
import { randomUUID } from 'node:crypto';
import type { z } from 'zod';
import type { createSetSchema, DeliverableRow } from '../../domain/api/deliverables.ts';
import { recordEvent } from '../db/audit-repository.ts';
import { inTransaction } from '../db/connection.ts';
import { insertSet, lockPartCandidates, type PartCandidate } from '../db/mono-sets-repository.ts';
import { publishEvent } from '../events.ts';
import { enqueueMeasuring } from '../queue/measuring-queue.ts';
import { redis } from '../redis.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { MemberScope } from '../scope.ts';
import { hashOfParts } from '../storage/hashing-source.ts';
import { setKey } from '../storage/storage.ts';
import { readDeliverableRow } from './deliverables.ts';

const mostBytes = 64 * 1024 ** 3;

/**
 * Makes one deliverable of several files, with the details and channels of the first, and has it measured. The files go
 * out of every list, and come back when the set is discarded.
 */
export async function createSet(
  scope: MemberScope,
  { name, parts }: z.infer<typeof createSetSchema>,
): Promise<Answer<DeliverableRow>> {
  const no = lacking(scope, 'deliverable:upload');
  if (no) return no;
  const id = randomUUID();
  const answer = await inTransaction<{ fileNames: string[] }>(async (trx) => {
    const found = await lockPartCandidates(
      trx,
      scope,
      parts.map(({ deliverableId }) => deliverableId),
    );
    const byId = new Map(found.map((one) => [one.partId, one]));
    const files = parts.flatMap(({ deliverableId, speaker }) => {
      const candidate = byId.get(deliverableId);
      return candidate ? [{ ...candidate, speaker }] : [];
    });
    if (files.length < parts.length) return refuse('not_found', 'One of these files is not there any more.');
    const why = files.map(whyNoPart).find((sentence) => sentence !== null);
    if (why) return refuse('conflict', why);
    const byteSize = files.reduce((sum, file) => sum + file.byteSize, 0);
    if (byteSize > mostBytes)
      return refuse(
        'bad_input',
        `The set has ${(byteSize / 1024 ** 3).toFixed(1)} GiB; 64 GiB are the most for one deliverable.`,
      );
    const fileName = `${name} (${files.length} mono files)`;
    await insertSet(trx, scope, {
      id,
      organisationId: scope.organisationId,
      uploadedBy: scope.userId,
      fileName,
      byteSize,
      storageKey: setKey(scope.organisationId, id),
      sha256Declared: hashOfParts(files.map((file) => file.sha256Declared)),
      parts: files,
    });
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'deliverable.set_made',
      subjectKind: 'deliverable',
      subjectId: id,
      detail: { fileName, files: files.map((file) => `${file.speaker}: ${file.fileName}`) },
    });
    return done({ fileNames: files.map((file) => file.fileName) });
  });
  if (!answer.ok) return answer;
  await enqueueMeasuring(id);
  await publishEvent(redis(), [scope.organisationId], {
    kind: 'deliverable',
    id,
    state: 'waiting',
    progress: null,
  });
  return readDeliverableRow(scope, id);
}

function whyNoPart({ fileName, state, isSet, isSubmitted, channels }: PartCandidate): string | null {
  if (state === 'uploading')
    return `${fileName} is still being uploaded. Take the set once every file has arrived.`;
  if (isSet) return `${fileName} is a set itself.`;
  if (isSubmitted) return `${fileName} was submitted by itself, so it stays by itself.`;
  if (channels !== null && channels !== 1)
    return `${fileName} has ${channels} audio channels; a set is made of mono files. Leave it out.`;
  return null;
}
