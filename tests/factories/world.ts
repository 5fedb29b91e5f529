/** A database of a test's own, and rows to fill it with. Every made thing has sensible defaults that a test may name over. */
import { randomBytes, randomUUID } from 'node:crypto';
import knex, { type Knex } from 'knex';
import { freshDatabase } from '../setup/database.ts';
import { specBodySchema, type SpecBody } from '../../src/domain/spec.ts';
import type { ChannelKind, ContentKind, Role } from '../../src/domain/vocabulary.ts';
import type { MemberScope } from '../../src/server/scope.ts';

export * from './deliveries.ts';

export interface World {
  /** As the owner of the database: for rows and for looking; the code under test has the application's role. */
  db: Knex;
  close(): Promise<void>;
}

/**
 * Clones the migrated database and points the process's configuration at it. Call it before anything reads `config()`,
 * in `beforeAll`; `close()` in `afterAll` ends the pools of the code under test too.
 */
export async function openWorld(environment: Record<string, string> = {}): Promise<World> {
  const base = await freshDatabase();
  Object.assign(process.env, {
    APP_ORIGIN: 'http://plimsoll.example',
    AUTH_SECRET: randomBytes(32).toString('hex'),
    DATABASE_URL: base.appUrl,
    MIGRATION_DATABASE_URL: base.ownerUrl,
    REDIS_URL: process.env.TEST_REDIS_URL ?? 'redis://127.0.0.1:1',
    S3_ENDPOINT: process.env.TEST_S3_ENDPOINT ?? 'http://127.0.0.1:1',
    S3_PUBLIC_ENDPOINT: process.env.TEST_S3_ENDPOINT ?? 'http://127.0.0.1:1',
    S3_REGION: 'us-east-1',
    S3_BUCKET: 'plimsoll',
    S3_ACCESS_KEY_ID: 'S3RVER',
    S3_SECRET_ACCESS_KEY: 'S3RVER',
    S3_FORCE_PATH_STYLE: '1',
    SMTP_URL: process.env.TEST_SMTP_URL ?? 'smtp://127.0.0.1:1',
    MAIL_FROM: 'Plimsoll <no-reply@plimsoll.example>',
    LOG_LEVEL: process.env.LOG_LEVEL ?? 'silent',
    ...environment,
  });
  const owner = knex({ client: 'pg', connection: base.ownerUrl, pool: { min: 0, max: 4 } });
  return {
    db: owner,
    async close() {
      const { closeDb } = await import('../../src/server/db/connection.ts');
      const { closeRedis } = await import('../../src/server/redis.ts');
      await closeDb();
      await closeRedis();
      await owner.destroy();
      await base.drop();
    },
  };
}

let counter = 0;
const nth = () => ++counter;

export interface MadeOrganisation {
  id: string;
  name: string;
  isSupplier: boolean;
  isDistributor: boolean;
}

export async function makeOrganisation(
  db: Knex,
  side: 'supplier' | 'distributor' | 'both',
  name = `${side === 'supplier' ? 'Studio' : 'Station'} ${nth()}`,
): Promise<MadeOrganisation> {
  const made = { name, isSupplier: side !== 'distributor', isDistributor: side !== 'supplier' };
  const [row] = await db('organisations')
    .insert({
      name,
      slug: `o-${randomUUID()}`,
      is_supplier: made.isSupplier,
      is_distributor: made.isDistributor,
      time_zone: 'Europe/London',
    })
    .returning('id');
  return { id: row.id, ...made };
}

/** A person with these roles, their membership and an open session: what middleware would put into locals. */
export async function makeMember(
  db: Knex,
  organisation: MadeOrganisation,
  roles: readonly Role[],
  given: { email?: string; name?: string; passwordHash?: string; userId?: string } = {},
): Promise<MemberScope> {
  const n = nth();
  const email = given.email ?? `person${n}-${randomBytes(4).toString('hex')}@people.example`;
  const name = given.name ?? `Person ${n}`;
  const userId =
    given.userId ??
    (
      await db('users')
        .insert({ email, name, password_hash: given.passwordHash ?? null })
        .returning('id')
    )[0].id;
  const [membership] = await db('memberships')
    .insert({ organisation_id: organisation.id, user_id: userId })
    .returning('id');
  if (roles.length > 0) {
    await db('membership_roles').insert(
      roles.map((role) => ({ membership_id: membership.id, organisation_id: organisation.id, role })),
    );
  }
  const [session] = await db('sessions')
    .insert({
      user_id: userId,
      organisation_id: organisation.id,
      expires_at: db.raw("now() + interval '1 day'"),
    })
    .returning('id');
  return {
    kind: 'member',
    sessionId: session.id,
    userId,
    userName: name,
    email,
    organisationId: organisation.id,
    organisationName: organisation.name,
    timeZone: 'Europe/London',
    isSupplier: organisation.isSupplier,
    isDistributor: organisation.isDistributor,
    roles,
  };
}

export async function makeChannel(
  db: Knex,
  distributor: MadeOrganisation,
  given: { name?: string; kind?: ChannelKind; timeZone?: string } = {},
): Promise<{ id: string; name: string }> {
  const name = given.name ?? `Channel ${nth()}`;
  const [row] = await db('channels')
    .insert({
      organisation_id: distributor.id,
      name,
      kind: given.kind ?? 'television',
      time_zone: given.timeZone ?? 'Europe/London',
    })
    .returning('id');
  return { id: row.id, name };
}

export async function makeAgreement(
  db: Knex,
  distributor: MadeOrganisation,
  channel: { id: string },
  supplier: MadeOrganisation,
): Promise<string> {
  const [row] = await db('agreements')
    .insert({ organisation_id: distributor.id, channel_id: channel.id, supplier_id: supplier.id })
    .returning('id');
  return row.id;
}

/** R 128 as a distributor might keep it: -23.0 LUFS +-0.5, true peak at most -1 dBTP, range advised. */
export const r128Body: SpecBody = specBodySchema.parse({
  rules: [
    {
      id: 'integrated',
      kind: 'integrated',
      targetLufs: -23,
      toleranceAboveLu: 0.5,
      toleranceBelowLu: 0.5,
      breach: 'reject',
    },
    { id: 'true-peak', kind: 'limits', metric: 'truePeakDbtp', atLeast: null, atMost: -1, breach: 'reject' },
    { id: 'range', kind: 'limits', metric: 'rangeLu', atLeast: null, atMost: 18, breach: 'advise' },
  ],
});

/** A published version (or, with `draft`, a draft), of a spec that is made unless `specId` is given. */
export async function makeSpecVersion(
  db: Knex,
  distributor: MadeOrganisation,
  given: {
    specId?: string;
    name?: string;
    body?: SpecBody;
    inForceFrom?: Date;
    number?: number;
    draft?: boolean;
  } = {},
): Promise<{ specId: string; id: string; number: number | null }> {
  const specId =
    given.specId ??
    (
      await db('specs')
        .insert({ organisation_id: distributor.id, name: given.name ?? `Spec ${nth()}` })
        .returning('id')
    )[0].id;
  const number = given.draft
    ? null
    : (given.number ??
      ((
        await db('spec_versions')
          .where('spec_id', specId)
          .max<{ last: number | null }>('number as last')
          .first()
      )?.last ?? 0) + 1);
  const [row] = await db('spec_versions')
    .insert({
      organisation_id: distributor.id,
      spec_id: specId,
      number,
      body: JSON.stringify(given.body ?? r128Body),
      published_at: given.draft ? null : db.fn.now(),
      in_force_from: given.draft ? null : (given.inForceFrom ?? new Date('2026-01-01T00:00:00Z')),
    })
    .returning('id');
  return { specId, id: row.id, number };
}

export async function makeAssignment(
  db: Knex,
  distributor: MadeOrganisation,
  channel: { id: string },
  specId: string,
  given: { contentKind?: ContentKind; inForceFrom?: Date } = {},
): Promise<string> {
  const [row] = await db('channel_assignments')
    .insert({
      organisation_id: distributor.id,
      channel_id: channel.id,
      content_kind: given.contentKind ?? 'long_form',
      spec_id: specId,
      in_force_from: given.inForceFrom ?? new Date('2026-01-01T00:00:00Z'),
    })
    .returning('id');
  return row.id;
}

/** A distributor with a channel under R 128 and a supplier with leave to deliver to it: most tests begin here. */
export async function makeChain(db: Knex): Promise<{
  distributor: MadeOrganisation;
  supplier: MadeOrganisation;
  channel: { id: string; name: string };
  spec: { specId: string; id: string; number: number | null };
  mixer: MemberScope;
  operator: MemberScope;
  specOwner: MemberScope;
}> {
  const distributor = await makeOrganisation(db, 'distributor');
  const supplier = await makeOrganisation(db, 'supplier');
  const channel = await makeChannel(db, distributor);
  const spec = await makeSpecVersion(db, distributor);
  await makeAssignment(db, distributor, channel, spec.specId);
  await makeAgreement(db, distributor, channel, supplier);
  return {
    distributor,
    supplier,
    channel,
    spec,
    mixer: await makeMember(db, supplier, ['mix_engineer']),
    operator: await makeMember(db, distributor, ['qc_operator']),
    specOwner: await makeMember(db, distributor, ['spec_owner']),
  };
}
