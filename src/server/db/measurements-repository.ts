/** Measurements: written once, never changed. */
import type { Measurement } from '../../engine/figures.ts';
import type { Presentation } from '../../engine/plan.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';

/** The presentation at this place of a plan, made when it is not there. */
export async function ensurePresentation(
  db: Db,
  _scope: Scope,
  of: {
    organisationId: string;
    deliverableId: string;
    /** `null`: the whole file. */
    planId: string | null;
    position: number;
    presentation: Presentation;
    layout: string;
  },
): Promise<string> {
  await db('presentations')
    .insert({
      organisation_id: of.organisationId,
      deliverable_id: of.deliverableId,
      plan_id: of.planId,
      position: of.position,
      name: of.presentation.name,
      audio_channels: of.presentation.audioChannels,
      speakers: of.presentation.speakers,
      layout: of.layout,
    })
    .onConflict(['deliverable_id', 'plan_id', 'position'])
    .ignore();
  const row = await db('presentations')
    .where({ deliverable_id: of.deliverableId, position: of.position, organisation_id: of.organisationId })
    .whereRaw('plan_id IS NOT DISTINCT FROM ?', [of.planId])
    .first<{ id: string } | undefined>('id');
  if (!row) throw new Error(`Deliverable ${of.deliverableId} has no presentation and took none`);
  return row.id;
}

export interface NewMeasurement extends Measurement {
  organisationId: string;
  deliverableId: string;
  presentationId: string;
  engineVersion: string;
  parametersHash: string;
  sha256: string;
  seriesKey: string;
  measuringSeconds: number;
}

/** Inserts a measurement, or leaves the one that stands: the same engine and parameters give the same. True when new. */
export async function insertMeasurement(db: Db, _scope: Scope, made: NewMeasurement): Promise<boolean> {
  const rows = await db('measurements')
    .insert({
      organisation_id: made.organisationId,
      deliverable_id: made.deliverableId,
      presentation_id: made.presentationId,
      engine_version: made.engineVersion,
      parameters_hash: made.parametersHash,
      sha256: made.sha256,
      format: JSON.stringify(made.format),
      figures: JSON.stringify(made.figures),
      findings: JSON.stringify(made.findings),
      series_key: made.seriesKey,
      measuring_seconds: made.measuringSeconds,
    })
    .onConflict(['deliverable_id', 'presentation_id', 'engine_version', 'parameters_hash'])
    .ignore()
    .returning<{ id: string }[]>('id');
  return rows.length === 1;
}
