/** What belongs to one submission: what it froze, its notes and waivers, and what happened to it last. */
import { specBodySchema, type SpecBody } from '../../domain/spec.ts';
import type { OverallOutcome } from '../../domain/vocabulary.ts';
import { figuresSchema, frameRateSchema } from '../../domain/api/deliverables.ts';
import type { FrameRateName } from '../../engine/timecode.ts';
import type { z } from 'zod';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import {
  measurementColumns,
  toMeasurement,
  type MeasurementColumns,
  type MeasurementRecord,
} from './deliverables-repository.ts';
import { ofEitherSide, type PersonRef } from './submissions-repository.ts';

/** Measurement, spec and file that a submission froze together. */
export interface SubmissionFreeze {
  measurement: MeasurementRecord;
  specBody: SpecBody;
  storageKey: string;
  fileName: string;
  frameRate: FrameRateName | null;
  /** Several mono files, which cannot be played as one. */
  isSet: boolean;
}

export async function findSubmissionFreeze(
  db: Db,
  scope: Scope,
  id: string,
): Promise<SubmissionFreeze | null> {
  const row:
    | (MeasurementColumns & {
        body: unknown;
        storage_key: string;
        file_name: string;
        frame_rate: string | null;
        is_set: boolean;
      })
    | undefined = await db('submissions as s')
    .join('measurements as m', 'm.id', 's.measurement_id')
    .join('spec_versions as sv', 'sv.id', 's.spec_version_id')
    .join('deliverables as d', 'd.id', 's.deliverable_id')
    .where('s.id', id)
    .modify(ofEitherSide(scope))
    .first(
      ...measurementColumns,
      'sv.body',
      'd.storage_key',
      'd.file_name',
      'd.frame_rate',
      db.raw('EXISTS (SELECT FROM deliverable_parts p WHERE p.deliverable_id = d.id) AS is_set'),
    );
  if (!row) return null;
  return {
    measurement: toMeasurement(row),
    specBody: specBodySchema.parse(row.body),
    storageKey: row.storage_key,
    fileName: row.file_name,
    frameRate: frameRateSchema.nullable().parse(row.frame_rate),
    isSet: row.is_set,
  };
}

export interface NoteRecord {
  id: string;
  author: PersonRef;
  organisationName: string;
  atSeconds: number | null;
  text: string;
  createdAt: Date;
}
interface NoteRow {
  id: string;
  author_id: string;
  author_name: string;
  organisation_name: string;
  at_seconds: number | null;
  text: string;
  created_at: Date;
}

/** Oldest first. */
export async function listNotes(db: Db, scope: Scope, submissionId: string): Promise<NoteRecord[]> {
  const rows: NoteRow[] = await db('notes as n')
    .join('submissions as s', 's.id', 'n.submission_id')
    .join('users as u', 'u.id', 'n.author_id')
    .join('organisations as o', 'o.id', 'n.organisation_id')
    .where('n.submission_id', submissionId)
    .modify(ofEitherSide(scope))
    .orderBy(['n.created_at', 'n.id'])
    .select(
      'n.id',
      'n.author_id',
      'u.name as author_name',
      'o.name as organisation_name',
      'n.at_seconds',
      'n.text',
      'n.created_at',
    );
  return rows.map((row) => ({
    id: row.id,
    author: { id: row.author_id, name: row.author_name },
    organisationName: row.organisation_name,
    atSeconds: row.at_seconds,
    text: row.text,
    createdAt: row.created_at,
  }));
}

export interface WaiverRecord {
  ruleId: string;
  reason: string;
  waivedBy: PersonRef;
  createdAt: Date;
}

export async function listWaivers(db: Db, scope: Scope, submissionId: string): Promise<WaiverRecord[]> {
  const rows: { rule_id: string; reason: string; waived_by: string; name: string; created_at: Date }[] =
    await db('waivers as w')
      .join('submissions as s', 's.id', 'w.submission_id')
      .join('users as u', 'u.id', 'w.waived_by')
      .where('w.submission_id', submissionId)
      .modify(ofEitherSide(scope))
      .orderBy('w.rule_id')
      .select('w.rule_id', 'w.reason', 'w.waived_by', 'u.name', 'w.created_at');
  return rows.map((row) => ({
    ruleId: row.rule_id,
    reason: row.reason,
    waivedBy: { id: row.waived_by, name: row.name },
    createdAt: row.created_at,
  }));
}

/** The figures of an earlier submission, for the change figure by figure. */
export async function findReplacedFigures(
  db: Db,
  scope: Scope,
  submissionId: string,
): Promise<{
  id: string;
  submittedAt: Date;
  figures: z.infer<typeof figuresSchema>;
  outcome: OverallOutcome;
} | null> {
  const row: { id: string; submitted_at: Date; figures: unknown; outcome: OverallOutcome } | undefined =
    await db('submissions as s')
      .join('measurements as m', 'm.id', 's.measurement_id')
      .join('verdicts as v', 'v.id', 's.verdict_id')
      .where('s.id', submissionId)
      .modify(ofEitherSide(scope))
      .first('s.id', 's.submitted_at', 'm.figures', 'v.outcome');
  return row
    ? {
        id: row.id,
        submittedAt: row.submitted_at,
        figures: figuresSchema.parse(row.figures),
        outcome: row.outcome,
      }
    : null;
}

/** Who did what last, by the audit: for the sentence that a second person is told. */
export async function findLastAct(
  db: Db,
  scope: Scope,
  submissionId: string,
): Promise<{ action: string; actorName: string | null; organisationName: string; at: Date } | null> {
  const row:
    { action: string; actor_name: string | null; organisation_name: string; created_at: Date } | undefined =
    await db('audit_events as a')
      .join('submissions as s', (on) => on.on(db.raw('s.id::text = a.subject_id')))
      .join('organisations as o', 'o.id', 'a.organisation_id')
      .leftJoin('users as u', 'u.id', 'a.actor_id')
      .where({ 's.id': submissionId, 'a.subject_kind': 'submission' })
      .whereIn('a.action', [
        'submission.approved',
        'submission.approved_with_waiver',
        'submission.rejected',
        'submission.taken_back',
        'submission.withdrawn',
        'submission.replaced',
      ])
      .modify(ofEitherSide(scope))
      // The index on (organisation, id) serves: an act is written by one of the two sides.
      .whereRaw('a.organisation_id IN (s.organisation_id, s.distributor_id)')
      .orderBy('a.id', 'desc')
      .first('a.action', 'u.name as actor_name', 'o.name as organisation_name', 'a.created_at');
  return row
    ? {
        action: row.action,
        actorName: row.actor_name,
        organisationName: row.organisation_name,
        at: row.created_at,
      }
    : null;
}
