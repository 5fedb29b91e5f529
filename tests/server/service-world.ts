/** The tests' world with what uploads and measuring need besides: a Redis database and a bucket of their own. */
import { randomUUID } from 'node:crypto';
import { mkdtemp, rm } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { Role } from '../../src/domain/vocabulary.ts';
import { db } from '../../src/server/db/connection.ts';
import { closeEventsHub } from '../../src/server/events-hub.ts';
import { closeMeasuringQueue } from '../../src/server/queue/measuring-queue.ts';
import { redis } from '../../src/server/redis.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import { closeStorage } from '../../src/server/storage/storage.ts';
import { makeAgreement, makeChannel, makeMember, makeOrganisation, openWorld } from '../factories/world.ts';

/**
 * Every test file names a Redis database of its own (1 to 15), so that the queues of files that run at the same time do
 * not meet; `overrides` puts something between, such as a storage gate.
 */
export async function openServiceWorld(redisDatabase: number, overrides: Record<string, string> = {}) {
  const scratch = await mkdtemp(join(tmpdir(), 'plimsoll-test-'));
  const environment = {
    SCRATCH_DIR: scratch,
    REDIS_URL: `${process.env.TEST_REDIS_URL?.replace(/\/\d*$/, '')}/${redisDatabase}`,
    S3_BUCKET: `test-${randomUUID().slice(0, 8)}`,
    MEASURE_CONCURRENCY: '2',
    AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true',
    ...overrides,
  };
  const world = await openWorld(environment);
  await redis().flushdb();
  return {
    environment,
    async close() {
      closeEventsHub();
      await closeMeasuringQueue();
      await redis().flushdb();
      closeStorage();
      await world.close();
      await rm(scratch, { recursive: true, force: true });
    },
  };
}

/** A person with these roles in an organisation of their own. */
export async function makePerson(
  roles: Role[] = ['mix_engineer'],
  side: 'supplier' | 'distributor' = 'supplier',
): Promise<MemberScope> {
  return makeMember(db(), await makeOrganisation(db(), side), roles);
}

/** The person's organisation as the world's makers take it. */
export const organisationOf = (scope: MemberScope) => ({
  id: scope.organisationId,
  name: scope.organisationName,
  isSupplier: scope.isSupplier,
  isDistributor: scope.isDistributor,
});

/** A channel of the distributor's with an agreement for the supplier. */
export async function makeAgreedChannel(distributor: MemberScope, supplier: MemberScope): Promise<string> {
  const channel = await makeChannel(db(), organisationOf(distributor));
  await makeAgreement(db(), organisationOf(distributor), channel, organisationOf(supplier));
  return channel.id;
}
