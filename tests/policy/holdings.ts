/** One chain of delivery with one of everything that an address can name, and who stands in it. */
import { randomBytes } from 'node:crypto';
import type { Knex } from 'knex';
import type { Role } from '../../src/domain/vocabulary.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import {
  makeAgreement,
  makeAssignment,
  makeChain,
  makeDeliverable,
  makeMember,
  makeOrganisation,
  makeSpecVersion,
  makeSubmission,
  makeVerdict,
  type MadeOrganisation,
} from '../factories/world.ts';

export interface Holdings {
  supplier: MadeOrganisation;
  distributor: MadeOrganisation;
  ids: {
    deliverable: string;
    /** Measured, for the channel, not submitted. */
    spareDeliverable: string;
    upload: string;
    submission: string;
    spec: string;
    channel: string;
    assignment: string;
    agreement: string;
    otherSupplier: string;
    supplierInvitation: string;
    distributorInvitation: string;
    supplierMember: string;
    distributorMember: string;
    specVersion: string;
  };
}

const membershipId = async (db: Knex, member: MemberScope): Promise<string> =>
  (
    await db('memberships')
      .where({ user_id: member.userId, organisation_id: member.organisationId })
      .first('id')
  ).id;

export async function makeHoldings(db: Knex): Promise<Holdings> {
  const { supplier, distributor, channel, spec, mixer, operator } = await makeChain(db);
  const made = { channelIds: [channel.id] };
  const deliverable = await makeDeliverable(db, mixer, made);
  const spare = await makeDeliverable(db, mixer, made);
  const verdictId = await makeVerdict(db, mixer, deliverable, spec.id, { channelId: channel.id });
  await makeVerdict(db, mixer, spare, spec.id, { channelId: channel.id });
  const submission = await makeSubmission(db, mixer, deliverable, {
    distributor,
    channel,
    specVersionId: spec.id,
    verdictId,
  });
  await makeSpecVersion(db, distributor, { specId: spec.specId, draft: true });
  const assignment = await makeAssignment(db, distributor, channel, spec.specId, {
    inForceFrom: new Date(Date.now() + 30 * 24 * 3600_000),
  });
  const otherSupplier = await makeOrganisation(db, 'supplier');
  const agreement = await makeAgreement(db, distributor, channel, otherSupplier);
  const upload = await makeDeliverable(db, mixer);
  await db('deliverables')
    .where('id', upload.id)
    .update({ state: 'uploading', sha256: null, measured_at: null });
  await db('uploads').insert({
    deliverable_id: upload.id,
    organisation_id: supplier.id,
    storage_upload_id: 'none',
    part_bytes: 8 * 1024 ** 2,
    part_count: 4,
    last_modified_ms: 0,
  });
  const invitation = async (organisation: MadeOrganisation): Promise<string> => {
    const [row] = await db('one_time_links')
      .insert({
        kind: 'invitation',
        token_hash: randomBytes(32),
        email: 'open@people.example',
        organisation_id: organisation.id,
        roles: ['administrator'],
        expires_at: db.raw("now() + interval '1 day'"),
      })
      .returning('id');
    return row.id;
  };
  return {
    supplier,
    distributor,
    ids: {
      deliverable: deliverable.id,
      spareDeliverable: spare.id,
      upload: upload.id,
      submission,
      spec: spec.specId,
      channel: channel.id,
      assignment,
      agreement,
      otherSupplier: otherSupplier.id,
      supplierInvitation: await invitation(supplier),
      distributorInvitation: await invitation(distributor),
      supplierMember: await membershipId(db, mixer),
      distributorMember: await membershipId(db, operator),
      specVersion: spec.id,
    },
  };
}

/** Somebody with one role in the chain's supplier or distributor. */
export const memberIn = (
  db: Knex,
  holdings: Holdings,
  side: 'supplier' | 'distributor',
  role: Role,
): Promise<MemberScope> => makeMember(db, holdings[side], [role]);

/** Which of the holdings an address's [id] means, by the place that it stands under. */
export function paramsFor(
  pattern: string,
  holdings: Holdings,
  side: 'supplier' | 'distributor',
): Record<string, string> {
  const { ids } = holdings;
  const place = /^\/(?:api\/v1\/)?([a-z-]+)\//.exec(pattern)?.[1] ?? '';
  const byPlace: Record<string, string | undefined> = {
    deliverables: ids.deliverable,
    uploads: ids.upload,
    submissions: ids.submission,
    review: ids.submission,
    specs: ids.spec,
    channels: ids.channel,
    invitations: side === 'supplier' ? ids.supplierInvitation : ids.distributorInvitation,
    members: side === 'supplier' ? ids.supplierMember : ids.distributorMember,
  };
  const id = byPlace[place];
  if (pattern.includes('[id]') && !id)
    throw new Error(`Say in tests/policy/holdings.ts what ${pattern} names`);
  return { id: id ?? '', assignmentId: ids.assignment, agreementId: ids.agreement };
}
