/** A database of a test's own, and rows to fill it with. Every made thing has sensible defaults that a test may name over. */
import { randomBytes, randomUUID } from 'node:crypto';
import knex, { type Knex } from 'knex';
import { freshDatabase } from '../setup/database.ts';
import type { Figures, AudioFormat, Finding } from '../../src/engine/figures.ts';
import { specBodySchema, type SpecBody } from '../../src/domain/spec.ts';
import type { VerdictBody } from '../../src/domain/verdict.ts';
import type { ChannelKind, ContentKind, Role, SubmissionState } from '../../src/domain/vocabulary.ts';
import type { MemberScope } from '../../src/server/scope.ts';

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

export const stereoFormat: AudioFormat = {
  container: 'WAV',
  codec: 'PCM',
  sampleRateHz: 48_000,
  bitDepth: 24,
  channels: 2,
  layout: 'stereo',
  durationSeconds: 90,
};

/** Figures that pass `r128Body`; name over what the test is about. */
export function figures(
  given: { integratedLufs?: number | null; maxDbtp?: number | null; rangeLu?: number | null } = {},
): Figures {
  const value = <K extends keyof typeof given>(key: K, otherwise: number) =>
    given[key] === undefined ? otherwise : given[key];
  const peak = value('maxDbtp', -3);
  const integratedLufs = value('integratedLufs', -23);
  return {
    loudness: {
      integratedLufs,
      relativeThresholdLufs: integratedLufs === null ? null : integratedLufs - 10,
      rangeLu: value('rangeLu', 9),
      rangeLowLufs: -29,
      rangeHighLufs: -20,
      momentaryMaxLufs: -16,
      shortTermMaxLufs: -18,
    },
    truePeak: { maxDbtp: peak, perChannelDbtp: [peak, peak] },
    samplePeak: {
      maxDbfs: peak === null ? null : peak - 0.2,
      perChannelDbfs: [peak, peak].map((p) => (p === null ? null : p - 0.2)),
    },
    times: { momentaryMaxAtSeconds: 12.4, shortTermMaxAtSeconds: 13, truePeakMaxAtSeconds: 12.2 },
    measuredSeconds: 90,
  };
}

export interface MadeDeliverable {
  id: string;
  presentationId: string;
  measurementId: string;
  sha256: string;
  fileName: string;
}

/** A measured deliverable of a member's organisation, for these channels; not judged yet. */
export async function makeDeliverable(
  db: Knex,
  by: MemberScope,
  given: {
    fileName?: string;
    figures?: Figures;
    format?: AudioFormat;
    findings?: Finding[];
    channelIds?: readonly string[];
    contentKind?: ContentKind;
    programmeTitle?: string;
    episodeLabel?: string;
    sha256?: string;
    seriesKey?: string;
  } = {},
): Promise<MadeDeliverable> {
  const organisation_id = by.organisationId;
  const sha256 = given.sha256 ?? randomBytes(32).toString('hex');
  const fileName = given.fileName ?? `mix_${nth()}.wav`;
  const programme_id = given.programmeTitle
    ? (
        await db('programmes')
          .insert({ organisation_id, title: given.programmeTitle })
          .onConflict(db.raw('(organisation_id, lower(title))'))
          .merge(['title'])
          .returning('id')
      )[0].id
    : null;
  const episode_id =
    programme_id && given.episodeLabel
      ? (
          await db('episodes')
            .insert({ organisation_id, programme_id, label: given.episodeLabel })
            .onConflict(db.raw('(programme_id, lower(label))'))
            .merge(['label'])
            .returning('id')
        )[0].id
      : null;
  const [deliverable] = await db('deliverables')
    .insert({
      organisation_id,
      uploaded_by: by.userId,
      file_name: fileName,
      byte_size: 25_920_044,
      storage_key: `originals/${randomUUID()}`,
      sha256_declared: sha256,
      sha256,
      state: 'measured',
      programme_id,
      episode_id,
      content_kind: given.contentKind ?? 'long_form',
      uploaded_at: db.fn.now(),
      measured_at: db.fn.now(),
    })
    .returning('id');
  const [presentation] = await db('presentations')
    .insert({
      organisation_id,
      deliverable_id: deliverable.id,
      name: 'Full mix',
      layout: (given.format ?? stereoFormat).layout,
    })
    .returning('id');
  const [measurement] = await db('measurements')
    .insert({
      organisation_id,
      deliverable_id: deliverable.id,
      presentation_id: presentation.id,
      engine_version: '1.0.0',
      parameters_hash: 'whole file',
      sha256,
      format: JSON.stringify(given.format ?? stereoFormat),
      figures: JSON.stringify(given.figures ?? figures()),
      findings: JSON.stringify(given.findings ?? []),
      series_key: given.seriesKey ?? `series/${randomUUID()}`,
      measuring_seconds: 1.5,
    })
    .returning('id');
  if (given.channelIds?.length) {
    await db('deliverable_channels').insert(
      given.channelIds.map((channel_id) => ({ organisation_id, deliverable_id: deliverable.id, channel_id })),
    );
  }
  return {
    id: deliverable.id,
    presentationId: presentation.id,
    measurementId: measurement.id,
    sha256,
    fileName,
  };
}

/** A verdict as the caller words it (the judge's own work is tested with the judge), made the row's verdict for a channel. */
export async function makeVerdict(
  db: Knex,
  by: MemberScope,
  deliverable: MadeDeliverable,
  specVersionId: string,
  given: { outcome?: VerdictBody['outcome']; body?: VerdictBody; channelId?: string } = {},
): Promise<string> {
  const outcome = given.outcome ?? 'pass';
  const body: VerdictBody = given.body ?? {
    outcome,
    rounding: 'shown',
    rules: [],
    nearestRuleId: null,
    nearestText: 'integrated 0.5 LU inside',
  };
  const [row] = await db('verdicts')
    .insert({
      organisation_id: by.organisationId,
      measurement_id: deliverable.measurementId,
      spec_version_id: specVersionId,
      outcome,
      body: JSON.stringify(body),
    })
    .onConflict(['measurement_id', 'spec_version_id'])
    .ignore()
    .returning('id');
  const id: string =
    row?.id ??
    (
      await db('verdicts')
        .where({ measurement_id: deliverable.measurementId, spec_version_id: specVersionId })
        .first('id')
    ).id;
  if (given.channelId) {
    await db('deliverable_channels')
      .where({ deliverable_id: deliverable.id, channel_id: given.channelId })
      .update({ verdict_id: id });
  }
  return id;
}

/** A submission awaiting review, or one that was decided when `state` and `decidedBy` say so. */
export async function makeSubmission(
  db: Knex,
  by: MemberScope,
  deliverable: MadeDeliverable,
  to: { distributor: MadeOrganisation; channel: { id: string }; specVersionId: string; verdictId: string },
  given: {
    state?: SubmissionState;
    decidedBy?: string;
    decidedAt?: Date;
    reason?: string;
    airAt?: Date | null;
    submittedAt?: Date;
  } = {},
): Promise<string> {
  const [row] = await db('submissions')
    .insert({
      organisation_id: by.organisationId,
      distributor_id: to.distributor.id,
      channel_id: to.channel.id,
      deliverable_id: deliverable.id,
      measurement_id: deliverable.measurementId,
      spec_version_id: to.specVersionId,
      verdict_id: to.verdictId,
      sha256: deliverable.sha256,
      state: given.state ?? 'awaiting_review',
      air_at: given.airAt ?? null,
      submitted_by: by.userId,
      submitted_at: given.submittedAt ?? db.fn.now(),
      decided_by: given.decidedBy ?? null,
      decided_at: given.decidedBy ? (given.decidedAt ?? db.fn.now()) : null,
      decision_reason: given.reason ?? null,
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
