/** Submissions as the API shows them to one caller, and what every service that moves one shares. */
import type { SubmissionRow } from '../../domain/api/submissions.ts';
import { isDecided, takeBackDeadline } from '../../domain/submission-states.ts';
import { config } from '../config.ts';
import { recordEvent } from '../db/audit-repository.ts';
import { db, type Db } from '../db/connection.ts';
import { findSubmission, type SubmissionRecord } from '../db/submissions-repository.ts';
import { publishEvent } from '../events.ts';
import { redis } from '../redis.ts';
import { mayDo, type Scope } from '../scope.ts';
import { readPresence } from './presence.ts';

/** Whether the caller is of the side that decides on it, and may. */
export const mayDecideOn = (scope: Scope, record: SubmissionRecord): boolean =>
  scope.kind === 'system' || (scope.organisationId === record.distributor.id && mayDo(scope, 'submission:decide'));

/** Rows for the caller: who else has it open and until when it can be taken back is told to those who decide only. */
export async function toSubmissionRows(scope: Scope, records: readonly SubmissionRecord[]): Promise<SubmissionRow[]> {
  const decidable = records.filter((record) => mayDecideOn(scope, record));
  const present = await readPresence(
    scope,
    decidable.map((record) => record.id),
  );
  const now = new Date();
  return records.map((record) => {
    const deadline =
      record.decidedAt && isDecided(record.state) && mayDecideOn(scope, record)
        ? takeBackDeadline(record.decidedAt, config().UNDO_SECONDS)
        : null;
    return {
      id: record.id,
      state: record.state,
      version: record.version,
      deliverableId: record.deliverableId,
      fileName: record.fileName,
      programmeTitle: record.programmeTitle,
      episodeLabel: record.episodeLabel,
      versionLabel: record.versionLabel,
      contentKind: record.contentKind,
      supplier: record.supplier,
      distributor: record.distributor,
      channel: record.channel,
      specName: record.specName,
      specVersionNumber: record.specVersionNumber,
      format: record.format,
      figures: record.figures,
      verdict: record.verdict,
      airAt: record.airAt?.toISOString() ?? null,
      submittedAt: record.submittedAt.toISOString(),
      submittedBy: record.submittedBy,
      decidedBy: record.decidedBy,
      decidedAt: record.decidedAt?.toISOString() ?? null,
      decisionReason: record.decisionReason,
      failingRuleIds: record.failingRuleIds,
      takeBackUntil: deadline && deadline > now ? deadline.toISOString() : null,
      openBy: present.get(record.id) ?? [],
      ownUpload: scope.kind === 'member' && record.uploadedBy === scope.userId,
    };
  });
}

/** The row as it is now. Throws when it is not there: the caller has just written it. */
export async function readSubmissionRow(scope: Scope, id: string): Promise<SubmissionRow> {
  const record = await findSubmission(db(), scope, id);
  if (!record) throw new Error(`Submission ${id} was written and not found`);
  return (await toSubmissionRows(scope, [record]))[0];
}

/** Audit event of an act on a submission, readable by both sides; the caller's side is the one that acts. */
export async function recordAct(
  trx: Db,
  scope: Scope,
  record: SubmissionRecord,
  what: string,
  detail: Record<string, unknown> = {},
): Promise<void> {
  const { supplier, distributor } = record;
  const bySupplier = scope.kind === 'member' && scope.organisationId === supplier.id;
  await recordEvent(trx, scope, {
    organisationId: bySupplier ? supplier.id : distributor.id,
    counterpartId: bySupplier ? distributor.id : supplier.id,
    action: `submission.${what}`,
    subjectKind: 'submission',
    subjectId: record.id,
    detail: {
      programmeTitle: record.programmeTitle,
      episodeLabel: record.episodeLabel,
      fileName: record.fileName,
      channelName: record.channel.name,
      ...detail,
    },
  });
}

/** Tells the open pages of both sides, after the commit. */
export async function tellBothSides(
  sides: { supplierId: string; distributorId: string },
  submission: { id: string; state: string; version: number },
): Promise<void> {
  const { id, state, version } = submission;
  await publishEvent(redis(), [sides.supplierId, sides.distributorId], { kind: 'submission', id, state, version });
}

/** What every mail about a submission names. */
export const mailFacts = (record: SubmissionRecord) => ({
  submissionId: record.id,
  deliverableId: record.deliverableId,
  fileName: record.fileName,
  programmeTitle: record.programmeTitle,
  episodeLabel: record.episodeLabel,
  channelName: record.channel.name,
});
