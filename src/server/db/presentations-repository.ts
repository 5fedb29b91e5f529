/** The presentations of a deliverable's plan with their measurements, and those that a submission froze. */
import type { Presentation } from '../../engine/plan.ts';
import { verdictBodySchema, type VerdictBody } from '../../domain/verdict.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import {
  measurementColumns,
  toMeasurement,
  type MeasurementColumns,
  type MeasurementRecord,
} from './deliverables-repository.ts';
import { ofEitherSide } from './submissions-repository.ts';
import { within } from './within.ts';

export interface MeasuredPresentation extends Presentation {
  /** From 1, in the plan's order. */
  position: number;
  measurement: MeasurementRecord;
}

interface PresentationRow extends MeasurementColumns {
  position: number;
  presentation_name: string;
  audio_channels: number[];
  speakers: Presentation['speakers'];
}

const toPresentation = (row: PresentationRow): MeasuredPresentation => ({
  position: row.position,
  name: row.presentation_name,
  audioChannels: row.audio_channels,
  speakers: row.speakers,
  measurement: toMeasurement(row),
});

/** The measured presentations of the plan that holds now, in order; none while it is being measured. */
export async function listPresentations(
  db: Db,
  scope: Scope,
  deliverableId: string,
): Promise<MeasuredPresentation[]> {
  const rows: PresentationRow[] = await db('current_measurements as m')
    .where('m.deliverable_id', deliverableId)
    .modify(within(scope, 'm.organisation_id'))
    .orderBy('m.position')
    .select(...measurementColumns, 'm.position', 'm.presentation_name', 'm.audio_channels', 'm.speakers');
  return rows.map(toPresentation);
}

/** Their verdicts under these spec versions, by place. */
export async function listPresentationVerdicts(
  db: Db,
  scope: Scope,
  deliverableId: string,
  specVersionIds: readonly string[],
): Promise<{ position: number; specVersionId: string; verdict: VerdictBody }[]> {
  const rows: { position: number; spec_version_id: string; body: unknown }[] = await db(
    'current_measurements as m',
  )
    .join('verdicts as v', 'v.measurement_id', 'm.id')
    .where('m.deliverable_id', deliverableId)
    .whereIn('v.spec_version_id', specVersionIds as string[])
    .modify(within(scope, 'm.organisation_id'))
    .orderBy('m.position')
    .select('m.position', 'v.spec_version_id', 'v.body');
  return rows.map((row) => ({
    position: row.position,
    specVersionId: row.spec_version_id,
    verdict: verdictBodySchema.parse(row.body),
  }));
}

export interface FrozenPresentation extends MeasuredPresentation {
  verdict: VerdictBody;
}

/** What a submission froze of each presentation, in order. */
export async function listFrozenPresentations(
  db: Db,
  scope: Scope,
  submissionId: string,
): Promise<FrozenPresentation[]> {
  const rows: (PresentationRow & { body: unknown })[] = await db('submission_measurements as sm')
    .join('submissions as s', 's.id', 'sm.submission_id')
    .join('measurements as m', 'm.id', 'sm.measurement_id')
    .join('presentations as pr', 'pr.id', 'm.presentation_id')
    .join('verdicts as v', 'v.id', 'sm.verdict_id')
    .where('sm.submission_id', submissionId)
    .modify(ofEitherSide(scope))
    .orderBy('sm.position')
    .select(
      ...measurementColumns,
      'sm.position',
      'sm.name as presentation_name',
      'pr.audio_channels',
      'pr.speakers',
      'v.body',
    );
  return rows.map((row) => ({ ...toPresentation(row), verdict: verdictBodySchema.parse(row.body) }));
}

/** Freezes the measurements that stand now, with their verdicts under the version, for a submission. */
export async function freezePresentations(
  db: Db,
  of: { submissionId: string; deliverableId: string; specVersionId: string },
): Promise<void> {
  await db.raw(
    `INSERT INTO submission_measurements (submission_id, organisation_id, position, name, measurement_id, verdict_id)
     SELECT ?, m.organisation_id, m.position, m.presentation_name, m.id, v.id
     FROM current_measurements m JOIN verdicts v ON v.measurement_id = m.id AND v.spec_version_id = ?
     WHERE m.deliverable_id = ?`,
    [of.submissionId, of.specVersionId, of.deliverableId],
  );
}
