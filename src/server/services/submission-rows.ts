/** Submissions as the API shows them to one caller, and what every service that moves one shares. */
import type { SubmissionRow } from '../../domain/api/submissions.ts';
import { isDecided, takeBackDeadline } from '../../domain/submission-states.ts';
import type { SubmissionState } from '../../domain/vocabulary.ts';
import { config } from '../config.ts';
import { recordEvent } from '../db/audit-repository.ts';
import { db, type Db } from '../db/connection.ts';
import { readSubmissions, type SubmissionRecord } from '../db/submissions-repository.ts';
import { publishEvent } from '../events.ts';
import { redis } from '../redis.ts';
import { mayDo, type Scope } from '../scope.ts';
import { readPresence } from './presence.ts';

/** Whether the caller is of the side that decides on it, and may. */
export const mayDecideOn = (scope: Scope, record: SubmissionRecord): boolean =>
  scope.kind === 'system' ||
  (scope.organisationId === record.distributor.id && mayDo(scope, 'submission:decide'));

/** Rows for the caller: who else has it open and until when it can be taken back is told to those who decide only. */
export async function toSubmissionRows(
  scope: Scope,
  records: readonly SubmissionRecord[],
): Promise<SubmissionRow[]> {
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

/** What an act has made of a submission. */
export interface Acted {
  id: string;
  state: SubmissionState;
  version: number;
  supplierId: string;
  distributorId: string;
}

/** What an act has made of a submission that was read before it. */
export const acted = (record: SubmissionRecord, state: SubmissionState, version: number): Acted => ({
  id: record.id,
  state,
  version,
  supplierId: record.supplier.id,
  distributorId: record.distributor.id,
});

/**
 * After the commits: tells the open pages of both sides what happened, all at once, and reads the rows as they are now.
 * Throws when one is not there: the caller has just written it.
 */
export async function tellAndRead(
  scope: Scope,
  all: readonly Acted[],
): Promise<(id: string) => SubmissionRow> {
  await tellBothSides(all);
  const ids = [...new Set(all.map(({ id }) => id))];
  const rows = ids.length > 0 ? await toSubmissionRows(scope, await readSubmissions(db(), scope, ids)) : [];
  const byId = new Map(rows.map((row) => [row.id, row]));
  return (id) => {
    const row = byId.get(id);
    if (!row) throw new Error(`Submission ${id} was written and not found`);
    return row;
  };
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

/** Tells the open pages of both sides. At once for all: with Redis away each one would wait by itself. */
export async function tellBothSides(all: readonly Acted[]): Promise<void> {
  await Promise.all(
    all.map(({ id, state, version, supplierId, distributorId }) =>
      publishEvent(redis(), [supplierId, distributorId], { kind: 'submission', id, state, version }),
    ),
  );
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
