/** Puts a file where an upload would have left it, without the browser's part of the way. */
import { createHash, randomUUID } from 'node:crypto';
import { db } from '../../src/server/db/connection.ts';
import { markArrived, insertDeliverable } from '../../src/server/db/deliverable-writes-repository.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import { originalKey, putObject } from '../../src/server/storage/storage.ts';

/** A deliverable that waits to be measured; `declared` is the hash that its browser told, its own unless given. */
export async function arrivedFile(
  scope: MemberScope,
  bytes: Uint8Array,
  { fileName = 'tallow_104.wav', declared }: { fileName?: string; declared?: string } = {},
): Promise<string> {
  const id = randomUUID();
  const storageKey = originalKey(scope.organisationId, id);
  await putObject(storageKey, bytes);
  await insertDeliverable(db(), scope, {
    id,
    organisationId: scope.organisationId,
    uploadedBy: scope.userId,
    fileName,
    byteSize: bytes.length,
    storageKey,
  });
  await markArrived(db(), scope, id, declared ?? createHash('sha256').update(bytes).digest('hex'));
  return id;
}
