/** Putting deliverables to channels, taking them back, and reading both for supplier and distributor. */
import type { z } from 'zod';
import type {
  createSubmissionsSchema,
  noteSchema,
  SubmissionReport,
  SubmissionRow,
  submissionListSchema,
  submissionQuerySchema,
} from '../../domain/api/submissions.ts';
import { judge } from '../../domain/judge.ts';
import { overPresentations } from '../../domain/presentations-verdict.ts';
import { stateAfter } from '../../domain/submission-states.ts';
import { overallOutcomeSchema, submissionStateNames, submissionStates } from '../../domain/vocabulary.ts';
import { db, inTransaction, type Db } from '../db/connection.ts';
import { findVersionInForce } from '../db/judged-specs-repository.ts';
import { listFrozenPresentations } from '../db/presentations-repository.ts';
import {
  findReplacedFigures,
  findSubmissionFreeze,
  listNotes,
  listWaivers,
  type NoteRecord,
} from '../db/submission-details-repository.ts';
import { insertNote, lockSubmission, moveSubmission, setAirAt } from '../db/submission-writes-repository.ts';
import {
  countSubmissions,
  findSubmission,
  listSubmissions as listRecords,
  submissionSortKeys,
  type SubmissionRecord,
} from '../db/submissions-repository.ts';
import { cancelMailAbout } from '../mail/outbox.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { MemberScope, Scope } from '../scope.ts';
import { itemResult, type ItemResult } from './item-results.ts';
import { cursorOf, listedWords } from './list-filters.ts';
import { toMeasurementAnswer } from './measurement-answer.ts';
import {
  acted,
  recordAct,
  tellAndRead,
  tellBothSides,
  toSubmissionRows,
  type Acted,
} from './submission-rows.ts';
import { submitOne, type Submitted } from './submitting.ts';

type Query = z.infer<typeof submissionQuerySchema>;
type List = z.infer<typeof submissionListSchema>;
type Note = SubmissionReport['notes'][number];

const noSubmission = refuse('not_found', 'There is no such submission.');

/** A page of the submissions that the caller's organisation is a side of, with counts over the whole filter. */
export async function listSubmissions(scope: Scope, query: Query): Promise<Answer<List>> {
  const no = lacking(scope, 'submission:read');
  if (no) return no;
  const states = listedWords(query.state, submissionStates, 'state');
  if (!states.ok) return states;
  const outcomes = listedWords(query.verdict, overallOutcomeSchema.options, 'verdict');
  if (!outcomes.ok) return outcomes;
  const { sort, order, limit } = query;
  const cursor = cursorOf(query, submissionSortKeys[sort]);
  if (!cursor.ok) return cursor;
  const filter = {
    q: query.q?.trim() || undefined,
    states: states.value,
    outcomes: outcomes.value,
    channelId: query.channel,
    supplierId: query.supplier,
  };
  const [{ records, nextCursor }, { total, ...counts }] = await Promise.all([
    listRecords(db(), scope, filter, { sort, order, limit, cursor: cursor.value }),
    countSubmissions(db(), scope, filter),
  ]);
  return done({ items: await toSubmissionRows(scope, records), nextCursor, total, counts });
}

/**
 * Puts deliverables to channels, each item by itself: hash, measurement, spec version and verdict of this moment are
 * frozen together, and earlier deliveries of the same thing are chained. An item's id is '<deliverableId>/<channelId>'.
 */
export async function createSubmissions(
  scope: MemberScope,
  items: z.infer<typeof createSubmissionsSchema>['items'],
): Promise<Answer<{ items: ItemResult<SubmissionRow>[] }>> {
  const no = lacking(scope, 'submission:create');
  if (no) return no;
  const answers: Answer<Submitted>[] = [];
  for (const item of items)
    answers.push(
      await submitOne(scope, { ...item, airAt: item.airAt === null ? null : new Date(item.airAt) }),
    );
  const submitted = answers.flatMap((answer) => (answer.ok ? [answer.value] : []));
  await tellBothSides(submitted.flatMap(({ replaced }) => replaced));
  const rowOf = await tellAndRead(
    scope,
    submitted.map((one) => one.submission),
  );
  return done({
    items: answers.map((answer, i) =>
      itemResult(
        `${items[i].deliverableId}/${items[i].channelId}`,
        answer.ok ? done(rowOf(answer.value.submission.id)) : answer,
      ),
    ),
  });
}

const toNote = (note: NoteRecord): Note => ({ ...note, createdAt: note.createdAt.toISOString() });

/** Everything about one submission, for either side. */
export async function getSubmissionReport(scope: Scope, id: string): Promise<Answer<SubmissionReport>> {
  const no = lacking(scope, 'submission:read');
  if (no) return no;
  const record = await findSubmission(db(), scope, id);
  const frozen = record && (await findSubmissionFreeze(db(), scope, id));
  if (!record || !frozen) return noSubmission;
  const [[row], presentations, notes, waivers, replaces, inForce] = await Promise.all([
    toSubmissionRows(scope, [record]),
    listFrozenPresentations(db(), scope, id),
    listNotes(db(), scope, id),
    listWaivers(db(), scope, id),
    record.replacesId ? findReplacedFigures(db(), scope, record.replacesId) : null,
    findVersionInForce(db(), scope, record.channel.id, record.contentKind),
  ]);
  // Judged here and now: a verdict row under the newer version need not exist for what has been submitted.
  const newer =
    inForce && inForce.id !== record.specVersionId
      ? overPresentations(
          presentations.map(({ name, measurement }) => ({ name, verdict: judge(measurement, inForce.body) })),
        )
      : null;
  return done({
    ...row,
    sha256: record.sha256,
    measurement: toMeasurementAnswer(frozen.measurement),
    presentations: presentations.map((one) => ({
      ...one,
      measurement: toMeasurementAnswer(one.measurement),
    })),
    frameRate: frozen.frameRate,
    isSet: frozen.isSet,
    specBody: frozen.specBody,
    specVersionId: record.specVersionId,
    underNewer:
      newer && inForce
        ? { specVersionNumber: inForce.number, outcome: newer.outcome, nearestText: newer.nearestText }
        : null,
    notes: notes.map(toNote),
    waivers: waivers.map((waiver) => ({ ...waiver, createdAt: waiver.createdAt.toISOString() })),
    replaces: replaces && { ...replaces, submittedAt: replaces.submittedAt.toISOString() },
  });
}

/** Takes back what awaits review; the queue loses it, the supplier may submit it again. */
export async function withdrawSubmission(scope: MemberScope, id: string): Promise<Answer<SubmissionRow>> {
  return supplierActs(scope, id, 'submission:withdraw', async (trx, record) => {
    const to = stateAfter(record.state, 'withdraw');
    if (!to)
      return refuse(
        'conflict',
        `It is ${submissionStateNames[record.state].toLowerCase()} now; only what awaits review can be withdrawn.`,
      );
    const { version } = await moveSubmission(trx, scope, id, to);
    await cancelMailAbout(trx, id, ['submission_received']);
    await recordAct(trx, scope, record, 'withdrawn');
    return done(acted(record, to, version));
  });
}

/** Sets or clears when it airs, while it is awaiting review or approved. */
export async function setSubmissionAirDate(
  scope: MemberScope,
  id: string,
  airAt: string | null,
): Promise<Answer<SubmissionRow>> {
  return supplierActs(scope, id, 'submission:create', async (trx, record) => {
    if (!['awaiting_review', 'approved', 'approved_with_waiver'].includes(record.state))
      return refuse(
        'conflict',
        `It is ${submissionStateNames[record.state].toLowerCase()}; its air date is not changed any more.`,
      );
    await setAirAt(trx, scope, id, airAt === null ? null : new Date(airAt));
    await recordAct(trx, scope, record, 'air_date_changed', { from: record.airAt, to: airAt });
    return done(acted(record, record.state, record.version));
  });
}

/** Holds a submission of the caller's own organisation, acts on it in one transaction, then tells and reads. */
async function supplierActs(
  scope: MemberScope,
  id: string,
  permission: 'submission:withdraw' | 'submission:create',
  act: (trx: Db, record: SubmissionRecord) => Promise<Answer<Acted>>,
): Promise<Answer<SubmissionRow>> {
  const no = lacking(scope, permission);
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const record = (await lockSubmission(trx, scope, id)) ? await findSubmission(trx, scope, id) : null;
    if (!record) return noSubmission;
    if (record.supplier.id !== scope.organisationId)
      return refuse('forbidden', `${record.supplier.name} submitted this; only they can change it.`);
    return act(trx, record);
  });
  return answer.ok ? done((await tellAndRead(scope, [answer.value]))(id)) : answer;
}

/** Adds a note that both sides read, at a time of the programme where `atSeconds` says so. */
export async function addNote(
  scope: MemberScope,
  id: string,
  { text, atSeconds }: z.infer<typeof noteSchema>,
): Promise<Answer<Note>> {
  const no = lacking(scope, 'note:write');
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const record = await findSubmission(trx, scope, id);
    if (!record) return noSubmission;
    const { durationSeconds } = record.format;
    if (atSeconds !== null && atSeconds > durationSeconds)
      return refuse(
        'bad_input',
        `The programme ends at ${durationSeconds.toFixed(3)} s; the note was to stand at ${atSeconds.toFixed(3)} s.`,
        {
          atSeconds: 'This is after the end of the programme.',
        },
      );
    const noteId = await insertNote(trx, scope, {
      organisationId: scope.organisationId,
      submissionId: id,
      authorId: scope.userId,
      atSeconds,
      text,
    });
    await recordAct(trx, scope, record, 'note_added', { atSeconds });
    return done({ record, noteId });
  });
  if (!answer.ok) return answer;
  const { record, noteId } = answer.value;
  await tellBothSides([acted(record, record.state, record.version)]);
  const note = (await listNotes(db(), scope, id)).find((one) => one.id === noteId);
  if (!note) throw new Error(`Note ${noteId} was written and not found`);
  return done(toNote(note));
}
