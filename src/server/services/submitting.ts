/** One deliverable put to one channel: what must be true, what is frozen, what it is chained to, who is told. */
import { isOpen, stateAfter, versionFamily } from '../../domain/submission-states.ts';
import type { DeliverableState } from '../../domain/vocabulary.ts';
import { inTransaction, type Db } from '../db/connection.ts';
import { addChannels } from '../db/deliverable-details-repository.ts';
import { listRoleHolders } from '../db/people-repository.ts';
import { freezePresentations } from '../db/presentations-repository.ts';
import {
  findDeliveryChannel,
  findVerdictInForce,
  insertSubmission,
  listEarlierSubmissions,
  listSubmissionsOfDeliverable,
  lockDeliverable,
  lockEpisode,
  setReplaces,
  type JudgedForChannel,
  type LockedDeliverable,
} from '../db/submission-making-repository.ts';
import { lockSubmission, moveSubmission } from '../db/submission-writes-repository.ts';
import { findSubmission, type SubmissionRecord } from '../db/submissions-repository.ts';
import { cancelMailAbout, queueMail } from '../mail/outbox.ts';
import { done, refuse, type Answer } from '../refusals.ts';
import type { MemberScope } from '../scope.ts';
import { judgeDeliverables } from './judging.ts';
import { acted, mailFacts, recordAct, type Acted } from './submission-rows.ts';

export interface Submitting {
  deliverableId: string;
  channelId: string;
  airAt: Date | null;
}

/** A new submission, and the earlier ones that it replaced in the queue. */
export interface Submitted {
  submission: Acted;
  replaced: Acted[];
}

const notYet: Record<Exclude<DeliverableState, 'measured' | 'unreadable'>, string> = {
  uploading: 'It is still being uploaded. Submit it once it has been measured.',
  waiting: 'It waits to be measured. Submit it once it has been.',
  measuring: 'It is being measured. Submit it once that has ended.',
};

/**
 * Submits in one transaction, or refuses with a sentence that says what stands in the way. The caller has checked the
 * permission, and tells both sides.
 */
export async function submitOne(scope: MemberScope, item: Submitting): Promise<Answer<Submitted>> {
  return inTransaction(async (trx) => {
    const ready = await whatIsSubmitted(trx, scope, item);
    return ready.ok ? freeze(trx, scope, item, ready.value) : ready;
  });
}

interface Ready {
  deliverable: LockedDeliverable;
  distributorId: string;
  judged: JudgedForChannel;
}

/** The deliverable, held, with its verdict under the spec version that is in force at this moment. */
async function whatIsSubmitted(
  trx: Db,
  scope: MemberScope,
  { deliverableId, channelId }: Submitting,
): Promise<Answer<Ready>> {
  const deliverable = await lockDeliverable(trx, scope, deliverableId);
  if (!deliverable) return refuse('not_found', 'There is no such deliverable.');
  const channel = await findDeliveryChannel(trx, scope, scope.organisationId, channelId);
  if (!channel)
    return refuse('not_found', 'There is no such channel among those that you have an agreement for.');
  if (!channel.open)
    return refuse(
      'conflict',
      `Your agreement with ${channel.distributorName} for ${channel.name} has ended, so nothing is delivered to it. Ask them for a new one.`,
    );
  if (deliverable.state === 'unreadable')
    return refuse('conflict', `It could not be measured and so is not submitted: ${deliverable.reason}`);
  if (deliverable.state !== 'measured') return refuse('conflict', notYet[deliverable.state]);

  const open = (await listSubmissionsOfDeliverable(trx, scope, deliverableId, channelId)).find(({ state }) =>
    isOpen(state),
  );
  if (open)
    return refuse(
      'conflict',
      open.state === 'awaiting_review'
        ? `It awaits review at ${channel.name} already. Withdraw it first to submit it anew.`
        : `It is approved for ${channel.name} already; there is nothing to submit again.`,
    );

  await addChannels(trx, scope, scope.organisationId, deliverableId, [channelId]);
  await judgeDeliverables(trx, scope, { deliverableIds: [deliverableId], channelIds: [channelId] });
  const judged = await findVerdictInForce(trx, scope, deliverableId, channelId);
  if (!judged)
    return refuse(
      'conflict',
      `${channel.name} has no delivery spec in force for this kind of content, so there is nothing to hold it against. Ask ${channel.distributorName}, or mend the kind of content.`,
    );
  return done({ deliverable, distributorId: channel.distributorId, judged });
}

async function freeze(
  trx: Db,
  scope: MemberScope,
  { channelId, airAt }: Submitting,
  { deliverable, distributorId, judged }: Ready,
): Promise<Answer<Submitted>> {
  const chain = await earlierDeliveries(trx, scope, deliverable, channelId, judged.layout);
  const replaced: Submitted['replaced'] = [];
  for (const { id } of chain.awaiting) {
    await lockSubmission(trx, scope, id);
    // A decision may have come in between: read again under the lock.
    const record = await findSubmission(trx, scope, id);
    const to = record && stateAfter(record.state, 'replace');
    if (!record || !to) continue;
    const { version } = await moveSubmission(trx, scope, id, to);
    await cancelMailAbout(trx, id, ['submission_received']);
    await recordAct(trx, scope, record, 'replaced');
    replaced.push(acted(record, to, version));
  }
  const { newest } = chain;
  if (
    newest &&
    !deliverable.replacesId &&
    newest.deliverableId !== deliverable.id &&
    newest.deliverableCreatedAt < deliverable.createdAt
  )
    await setReplaces(trx, scope, deliverable.id, newest.deliverableId);

  const id = await insertSubmission(trx, scope, {
    organisationId: scope.organisationId,
    distributorId,
    channelId,
    deliverableId: deliverable.id,
    measurementId: judged.measurementId,
    specVersionId: judged.specVersionId,
    verdictId: judged.verdictId,
    sha256: judged.sha256,
    // A re-delivery is for the same slot unless another is named.
    airAt: airAt ?? newest?.airAt ?? null,
    submittedBy: scope.userId,
    replacesId: newest?.id ?? null,
  });
  await freezePresentations(trx, {
    submissionId: id,
    deliverableId: deliverable.id,
    specVersionId: judged.specVersionId,
  });
  const record = await findSubmission(trx, scope, id);
  if (!record) throw new Error(`Submission ${id} was written and not found`);
  await recordAct(trx, scope, record, 'submitted', {
    outcome: judged.verdict.outcome,
    specName: record.specName,
    specVersionNumber: record.specVersionNumber,
    sha256: judged.sha256,
  });
  await mailQcOperators(trx, scope, record);
  return done({ submission: acted(record, record.state, record.version), replaced });
}

/**
 * Earlier submissions to the channel that this is a re-delivery of: of the same deliverable or one that it is said to
 * replace, else of the same episode, kind, layout and version family. What was withdrawn was never delivered.
 */
async function earlierDeliveries(
  trx: Db,
  scope: MemberScope,
  deliverable: LockedDeliverable,
  channelId: string,
  layout: string,
) {
  if (deliverable.episodeId) await lockEpisode(trx, scope, deliverable.episodeId);
  const family = versionFamily(deliverable.versionLabel);
  const chain = (await listEarlierSubmissions(trx, scope, deliverable, channelId)).filter(
    (earlier) =>
      earlier.named || (earlier.layout === layout && versionFamily(earlier.versionLabel) === family),
  );
  return {
    newest: chain.find(({ state }) => state !== 'withdrawn') ?? null,
    awaiting: chain.filter(({ state }) => state === 'awaiting_review'),
  };
}

async function mailQcOperators(trx: Db, scope: MemberScope, record: SubmissionRecord): Promise<void> {
  for (const { email } of await listRoleHolders(trx, scope, record.distributor.id, 'qc_operator'))
    await queueMail(trx, {
      organisationId: record.distributor.id,
      kind: 'submission_received',
      to: email,
      submissionId: record.id,
      model: {
        ...mailFacts(record),
        supplierName: record.supplier.name,
        outcome: record.verdict.outcome,
        nearestText: record.verdict.nearestText,
        airAt: record.airAt,
        timeZone: record.channel.timeZone,
      },
    });
}
