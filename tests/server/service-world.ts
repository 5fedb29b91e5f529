/** What the tests of uploads and measuring stand on: a database of their own, a Redis database, a bucket, and people. */
import { randomUUID } from 'node:crypto';
import { closeDb, db } from '../../src/server/db/connection.ts';
import { closeMeasuringQueue } from '../../src/server/queue/measuring-queue.ts';
import { closeRedis, redis } from '../../src/server/redis.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import { closeStorage } from '../../src/server/storage/storage.ts';
import type { Role } from '../../src/domain/vocabulary.ts';
import { freshDatabase } from '../setup/database.ts';

const given = (name: string): string => {
  const value = process.env[name];
  if (!value) throw new Error(`The test set-up gave no ${name}`);
  return value;
};

/**
 * Sets the environment that `config()` reads. Every test file names a Redis database of its own (1 to 15), so that
 * queues of files that run at the same time do not meet; `overrides` puts something between, such as a storage gate.
 */
export async function openServiceWorld(redisDatabase: number, overrides: Record<string, string> = {}) {
  const database = await freshDatabase();
  const environment: Record<string, string> = {
    APP_ORIGIN: 'http://127.0.0.1:4321',
    AUTH_SECRET: 'only-for-tests-only-for-tests-only-for-tests',
    DATABASE_URL: database.appUrl,
    MIGRATION_DATABASE_URL: database.ownerUrl,
    REDIS_URL: `${given('TEST_REDIS_URL').replace(/\/\d*$/, '')}/${redisDatabase}`,
    S3_ENDPOINT: given('TEST_S3_ENDPOINT'),
    S3_PUBLIC_ENDPOINT: given('TEST_S3_ENDPOINT'),
    S3_REGION: 'us-east-1',
    S3_BUCKET: `test-${randomUUID().slice(0, 8)}`,
    // The pair that s3rver knows.
    S3_ACCESS_KEY_ID: 'S3RVER',
    S3_SECRET_ACCESS_KEY: 'S3RVER',
    S3_FORCE_PATH_STYLE: 'true',
    SMTP_URL: 'smtp://127.0.0.1:1',
    MAIL_FROM: 'Plimsoll <plimsoll@plimsoll.example>',
    MEASURE_CONCURRENCY: '2',
    AWS_SDK_JS_NODE_VERSION_SUPPORT_WARNING_DISABLED: 'true',
    ...overrides,
  };
  Object.assign(process.env, environment);
  await redis().flushdb();
  return {
    environment,
    async close() {
      await closeMeasuringQueue();
      await redis().flushdb();
      await closeRedis();
      await closeDb();
      closeStorage();
      await database.drop();
    },
  };
}

let made = 0;

/** An organisation with one person in it who has these roles, and a session of theirs. */
export async function makePerson(roles: Role[] = ['mix_engineer'], side: 'supplier' | 'distributor' = 'supplier'): Promise<MemberScope> {
  const number = ++made;
  const isSupplier = side === 'supplier';
  const [organisation] = await db()('organisations')
    .insert({ name: `House ${number}`, slug: `house-${number}`, is_supplier: isSupplier, is_distributor: !isSupplier })
    .returning<{ id: string }[]>('id');
  const email = `person${number}@house${number}.example`;
  const [user] = await db()('users').insert({ email, name: `Person ${number}` }).returning<{ id: string }[]>('id');
  const [membership] = await db()('memberships')
    .insert({ organisation_id: organisation.id, user_id: user.id })
    .returning<{ id: string }[]>('id');
  await db()('membership_roles').insert(
    roles.map((role) => ({ membership_id: membership.id, organisation_id: organisation.id, role })),
  );
  const [session] = await db()('sessions')
    .insert({ user_id: user.id, organisation_id: organisation.id, expires_at: new Date(Date.now() + 3_600_000) })
    .returning<{ id: string }[]>('id');
  return {
    kind: 'member',
    sessionId: session.id,
    userId: user.id,
    userName: `Person ${number}`,
    email,
    organisationId: organisation.id,
    organisationName: `House ${number}`,
    timeZone: 'Etc/UTC',
    isSupplier,
    isDistributor: !isSupplier,
    roles,
  };
}

/** A channel of the distributor's, with an agreement for the supplier unless told otherwise. */
export async function makeChannel(distributor: MemberScope, name: string, supplier: MemberScope | null): Promise<string> {
  const [channel] = await db()('channels')
    .insert({ organisation_id: distributor.organisationId, name, kind: 'television', time_zone: 'Etc/UTC' })
    .returning<{ id: string }[]>('id');
  if (supplier)
    await db()('agreements').insert({
      organisation_id: distributor.organisationId,
      channel_id: channel.id,
      supplier_id: supplier.organisationId,
    });
  return channel.id;
}
