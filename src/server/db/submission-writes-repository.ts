/** Moving submissions on, and what is written beside them: waivers and notes. */
import type { SubmissionState } from '../../domain/vocabulary.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { ofEitherSide } from './submissions-repository.ts';
import { within } from './within.ts';

/** Holds a submission of either side until the transaction ends; false when the scope has none of that id. */
export async function lockSubmission(db: Db, scope: Scope, id: string): Promise<boolean> {
  const row = await db('submissions as s')
    .where('s.id', id)
    .modify(ofEitherSide(scope))
    .forUpdate('s')
    .first('s.id');
  return row !== undefined;
}

/** Moves a submission on and counts its version up; the caller holds it. Returns what the row says afterwards. */
export async function moveSubmission(
  db: Db,
  scope: Scope,
  id: string,
  to: SubmissionState,
  decision?: { by: string; reason: string | null; failingRuleIds: readonly string[] } | 'undecided',
): Promise<{ version: number; decidedAt: Date | null }> {
  const [row] = await db('submissions as s')
    .where('s.id', id)
    .modify(ofEitherSide(scope))
    .update({
      state: to,
      version: db.raw('version + 1'),
      ...(decision === 'undecided'
        ? { decided_by: null, decided_at: null, decision_reason: null, failing_rule_ids: [] }
        : decision && {
            decided_by: decision.by,
            // Of the clock, not of the transaction's start: the time to take it back begins when it is made.
            decided_at: db.raw('clock_timestamp()'),
            decision_reason: decision.reason,
            failing_rule_ids: [...decision.failingRuleIds],
          }),
    })
    .returning<{ version: number; decided_at: Date | null }[]>(['version', 'decided_at']);
  if (!row) throw new Error(`Submission ${id} was held and is not there`);
  return { version: row.version, decidedAt: row.decided_at };
}

export async function setAirAt(db: Db, scope: Scope, id: string, airAt: Date | null): Promise<void> {
  await db('submissions').where('id', id).modify(within(scope, 'organisation_id')).update({ air_at: airAt });
}

export async function insertWaivers(
  db: Db,
  distributorId: string,
  submissionId: string,
  waivedBy: string,
  waivers: readonly { ruleId: string; reason: string }[],
): Promise<void> {
  await db('waivers').insert(
    waivers.map(({ ruleId, reason }) => ({
      organisation_id: distributorId,
      submission_id: submissionId,
      rule_id: ruleId,
      reason,
      waived_by: waivedBy,
    })),
  );
}

/** Removes the waivers of a decision that is taken back; the audit keeps them. */
export async function deleteWaivers(db: Db, scope: Scope, submissionId: string): Promise<void> {
  await db('waivers').where('submission_id', submissionId).modify(within(scope, 'organisation_id')).delete();
}

export async function insertNote(
  db: Db,
  _scope: Scope,
  note: {
    organisationId: string;
    submissionId: string;
    authorId: string;
    atSeconds: number | null;
    text: string;
  },
): Promise<string> {
  const [row] = await db('notes')
    .insert({
      organisation_id: note.organisationId,
      submission_id: note.submissionId,
      author_id: note.authorId,
      at_seconds: note.atSeconds,
      text: note.text,
    })
    .returning<{ id: string }[]>('id');
  return row.id;
}

/** Whether a later delivery was chained to this one. */
export async function hasSuccessor(db: Db, scope: Scope, submissionId: string): Promise<boolean> {
  const row = await db('submissions as s')
    .where('s.replaces_id', submissionId)
    .modify(ofEitherSide(scope))
    .first('s.id');
  return row !== undefined;
}

/** Whether a mail about the decision made at `since` has gone out (it was to wait beyond that; older ones were cancelled). */
export async function decisionMailHasGone(
  db: Db,
  scope: Scope,
  submissionId: string,
  since: Date,
): Promise<boolean> {
  const row = await db('mail_outbox as o')
    .join('submissions as s', 's.id', 'o.submission_id')
    .where({ 's.id': submissionId, 'o.state': 'sent' })
    .whereIn('o.kind', ['submission_approved', 'submission_rejected'])
    .where('o.send_after', '>', since)
    .modify(ofEitherSide(scope))
    .first('o.id');
  return row !== undefined;
}
