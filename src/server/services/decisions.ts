/** Deciding on submissions: approve, reject, approve with waivers, and taking a decision back in time. */
import type { z } from 'zod';
import type { decisionSchema, SubmissionRow } from '../../domain/api/submissions.ts';
import { isDecided, stateAfter, takeBackDeadline, whyNotDecide } from '../../domain/submission-states.ts';
import { config } from '../config.ts';
import { inTransaction, type Db } from '../db/connection.ts';
import { findMemberByUser, listRoleHolders } from '../db/people-repository.ts';
import { findLastAct } from '../db/submission-details-repository.ts';
import {
  decisionMailHasGone,
  deleteWaivers,
  hasSuccessor,
  insertWaivers,
  lockSubmission,
  moveSubmission,
} from '../db/submission-writes-repository.ts';
import { findSubmission, type SubmissionRecord } from '../db/submissions-repository.ts';
import { cancelMailAbout, queueMail } from '../mail/outbox.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { MemberScope, Scope } from '../scope.ts';
import { itemResult, type ItemResult } from './item-results.ts';
import { acted, mailFacts, recordAct, tellAndRead, type Acted } from './submission-rows.ts';

type Decision = z.infer<typeof decisionSchema>;

const noSubmission = refuse('not_found', 'There is no such submission.');

/**
 * Decides on each by itself; one answer per item, in the order asked. A decision names the version that its reader saw:
 * the second of two people is refused with what the first did. The supplier's mail waits until it cannot be taken back.
 */
export async function decideSubmissions(
  scope: MemberScope,
  items: readonly Decision[],
): Promise<Answer<{ items: ItemResult<SubmissionRow>[] }>> {
  const no = lacking(scope, 'submission:decide');
  if (no) return no;
  const answers: Answer<Acted>[] = [];
  for (const decision of items) answers.push(await decideOne(scope, decision));
  const rowOf = await tellAndRead(
    scope,
    answers.flatMap((answer) => (answer.ok ? [answer.value] : [])),
  );
  return done({
    items: answers.map((answer, i) =>
      itemResult(items[i].id, answer.ok ? done(rowOf(answer.value.id)) : answer),
    ),
  });
}

async function decideOne(scope: MemberScope, decision: Decision): Promise<Answer<Acted>> {
  return inTransaction(async (trx) => {
    const held = await holdForDeciding(trx, scope, decision.id);
    if (!held.ok) return held;
    const record = held.value;
    const to = stateAfter(record.state, decision.decision);
    if (!to || record.version !== decision.version)
      return refuse('conflict', await whatHappened(trx, scope, record));
    if (record.uploadedBy === scope.userId)
      return refuse('forbidden', 'You uploaded this file yourself, so somebody else decides on it.');
    const fault = whyNotDecide(record.verdict, decision);
    if (fault) return refuse(fault.code, fault.message);

    const rejecting = decision.decision === 'reject' ? decision : null;
    const moved = await moveSubmission(trx, scope, record.id, to, {
      by: scope.userId,
      reason: rejecting?.reason ?? null,
      failingRuleIds: rejecting?.failingRuleIds ?? [],
    });
    const waivers = decision.decision === 'approve_with_waiver' ? decision.waivers : [];
    if (waivers.length > 0) await insertWaivers(trx, record.distributor.id, record.id, scope.userId, waivers);
    await mailSupplier(trx, scope, record, decision, moved.decidedAt ?? new Date());
    await recordAct(trx, scope, record, to, {
      ...(rejecting && { reason: rejecting.reason, failingRuleIds: rejecting.failingRuleIds }),
      ...(waivers.length > 0 && { waivers }),
    });
    return done(acted(record, to, moved.version));
  });
}

/** Puts a decision back to awaiting review while its mail has not gone. Any of the distributor's QC operators may. */
export async function takeBackDecision(scope: MemberScope, id: string): Promise<Answer<SubmissionRow>> {
  const no = lacking(scope, 'submission:decide');
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const held = await holdForDeciding(trx, scope, id);
    if (!held.ok) return held;
    const record = held.value;
    const to = stateAfter(record.state, 'take_back');
    if (!to || !record.decidedAt) return refuse('conflict', await whatHappened(trx, scope, record));
    const { UNDO_SECONDS } = config();
    const tooLate = refuse(
      'conflict',
      `The decision stands: it could be taken back for ${UNDO_SECONDS} s, and the supplier is told now.`,
    );
    if (takeBackDeadline(record.decidedAt, UNDO_SECONDS) <= new Date()) return tooLate;
    if (await hasSuccessor(trx, scope, id))
      return refuse(
        'conflict',
        'It has been delivered anew since. Decide on the new delivery; this decision stands.',
      );
    await cancelMailAbout(trx, id, ['submission_approved', 'submission_rejected']);
    // Cancelling waits for a mail that is just being sent: only now is it known whether one has gone.
    if (await decisionMailHasGone(trx, scope, id, record.decidedAt)) return tooLate;
    await deleteWaivers(trx, scope, id);
    const { version } = await moveSubmission(trx, scope, id, to, 'undecided');
    await recordAct(trx, scope, record, 'taken_back', {
      was: record.state,
      decidedBy: record.decidedBy?.name,
    });
    return done(acted(record, to, version));
  });
  return answer.ok ? done((await tellAndRead(scope, [answer.value]))(id)) : answer;
}

/** The submission, held until the transaction ends; refused to everybody but its distributor. */
async function holdForDeciding(trx: Db, scope: MemberScope, id: string): Promise<Answer<SubmissionRecord>> {
  const record = (await lockSubmission(trx, scope, id)) ? await findSubmission(trx, scope, id) : null;
  if (!record) return noSubmission;
  if (record.distributor.id !== scope.organisationId)
    return refuse('forbidden', `${record.distributor.name} decides on this submission.`);
  return done(record);
}

const deeds: Record<string, string> = {
  'submission.approved': 'approved it',
  'submission.approved_with_waiver': 'approved it with a waiver',
  'submission.rejected': 'rejected it',
  'submission.taken_back': 'took the decision back',
  'submission.withdrawn': 'withdrew it',
  'submission.replaced': 'replaced it by a new delivery',
};

/** 'Odile Strand (Harrow Sound Television) approved it on 1 December 2026 at 14:02:09 GMT. …', in the channel's zone. */
async function whatHappened(trx: Db, scope: Scope, record: SubmissionRecord): Promise<string> {
  const next = isDecided(record.state)
    ? 'Your decision was not taken.'
    : record.state === 'awaiting_review'
      ? 'It awaits a decision again: read it as it is now, then decide.'
      : 'There is nothing left to decide.';
  const last = await findLastAct(trx, scope, record.id);
  if (!last) return `It has changed since you read it. ${next}`;
  const when = new Intl.DateTimeFormat('en-GB', {
    timeZone: record.channel.timeZone,
    dateStyle: 'long',
    timeStyle: 'long',
  }).format(last.at);
  const who = last.actorName ? `${last.actorName} (${last.organisationName})` : last.organisationName;
  return `${who} ${deeds[last.action]} on ${when}. ${next}`;
}

/** To whoever submitted it; where they have left, to the supplier's mix engineers. */
async function mailSupplier(
  trx: Db,
  scope: MemberScope,
  record: SubmissionRecord,
  decision: Decision,
  decidedAt: Date,
): Promise<void> {
  const common = {
    organisationId: record.supplier.id,
    submissionId: record.id,
    sendAfter: takeBackDeadline(decidedAt, config().UNDO_SECONDS),
  };
  const facts = { ...mailFacts(record), distributorName: record.distributor.name };
  for (const to of await supplierAddresses(trx, scope, record)) {
    if (decision.decision === 'reject') {
      const rules = record.verdict.rules.filter(
        (rule) => rule.outcome === 'fail' || decision.failingRuleIds.includes(rule.ruleId),
      );
      const failingRules = rules.map(({ name, judgedText, permittedText, marginText }) => ({
        name,
        judgedText,
        permittedText,
        marginText,
      }));
      await queueMail(trx, {
        ...common,
        to,
        kind: 'submission_rejected',
        model: { ...facts, reason: decision.reason, failingRules },
      });
    } else {
      const waived = decision.decision === 'approve_with_waiver' ? decision.waivers : [];
      const nameOf = (ruleId: string) =>
        record.verdict.rules.find((rule) => rule.ruleId === ruleId)?.name ?? ruleId;
      const waivers = waived.map(({ ruleId, reason }) => ({ ruleName: nameOf(ruleId), reason }));
      await queueMail(trx, { ...common, to, kind: 'submission_approved', model: { ...facts, waivers } });
    }
  }
}

async function supplierAddresses(trx: Db, scope: Scope, record: SubmissionRecord): Promise<string[]> {
  const { supplier, submittedBy } = record;
  const submitter = await findMemberByUser(trx, scope, supplier.id, submittedBy.id);
  if (submitter) return [submitter.email];
  return (await listRoleHolders(trx, scope, supplier.id, 'mix_engineer')).map(({ email }) => email);
}
