/** How deliverables are measured: plans are written once, and a deliverable names the one that holds now. */
import { z } from 'zod';
import { findingSchema, formatSchema } from '../../domain/api/deliverables.ts';
import { measuringPlanSchema } from '../../domain/measuring-plan.ts';
import { wholeFile, type MeasuringPlan } from '../../engine/plan.ts';
import type { FrameRateName } from '../../engine/timecode.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

/** The plan of that id; `null` stands for the whole file. Throws when there is none: a row names it. */
export async function readPlan(db: Db, scope: Scope, planId: string | null): Promise<MeasuringPlan> {
  if (planId === null) return wholeFile;
  const row = await db('measuring_plans')
    .where('id', planId)
    .modify(within(scope, 'organisation_id'))
    .first<{ body: unknown } | undefined>('body');
  if (!row) throw new Error(`Measuring plan ${planId} is named and not there`);
  return measuringPlanSchema.parse(row.body);
}

/** The deliverable's plan of this hash, written down when it is new. */
export async function ensurePlan(
  db: Db,
  scope: Scope,
  made: { organisationId: string; deliverableId: string; plan: MeasuringPlan; parametersHash: string },
): Promise<string> {
  await db('measuring_plans')
    .insert({
      organisation_id: made.organisationId,
      deliverable_id: made.deliverableId,
      body: JSON.stringify(made.plan),
      parameters_hash: made.parametersHash,
      created_by: scope.kind === 'member' ? scope.userId : null,
    })
    .onConflict(['deliverable_id', 'parameters_hash'])
    .ignore();
  const row = await db('measuring_plans')
    .where({ deliverable_id: made.deliverableId, parameters_hash: made.parametersHash })
    .first<{ id: string } | undefined>('id');
  if (!row) throw new Error('A measuring plan was neither there nor taken');
  return row.id;
}

/** How many presentations this engine has measured by these parameters. */
export async function countMeasured(
  db: Db,
  scope: Scope,
  of: { deliverableId: string; engineVersion: string; parametersHash: string },
): Promise<number> {
  const row = await db('measurements')
    .where({
      deliverable_id: of.deliverableId,
      engine_version: of.engineVersion,
      parameters_hash: of.parametersHash,
    })
    .modify(within(scope, 'organisation_id'))
    .countDistinct<{ count: number }[]>('presentation_id as count')
    .first();
  return row?.count ?? 0;
}

/** The file as some plan has measured it, the whole file's own first; `null` where nothing ever was. */
export async function findKnownFile(
  db: Db,
  scope: Scope,
  deliverableId: string,
): Promise<{
  format: z.infer<typeof formatSchema>;
  findings: z.infer<typeof findingSchema>[];
  /** Measured whole: its times are the file's. */
  isWhole: boolean;
} | null> {
  const row = await db('measurements as m')
    .join('presentations as pr', 'pr.id', 'm.presentation_id')
    .where('m.deliverable_id', deliverableId)
    .modify(within(scope, 'm.organisation_id'))
    .orderByRaw('pr.plan_id IS NULL DESC, m.created_at DESC, m.id DESC')
    .first<{ format: unknown; findings: unknown; plan_id: string | null } | undefined>(
      'm.format',
      'm.findings',
      'pr.plan_id',
    );
  return row
    ? {
        format: formatSchema.parse(row.format),
        findings: z.array(findingSchema).parse(row.findings),
        isWhole: row.plan_id === null,
      }
    : null;
}

/** Names the plan that holds now. With `again` the file waits to be measured, its starts uncounted; else what stands is kept. */
export async function setCurrentPlan(
  db: Db,
  scope: Scope,
  deliverableId: string,
  { planId, frameRate, again }: { planId: string | null; frameRate: FrameRateName | null; again: boolean },
): Promise<void> {
  await db('deliverables')
    .where('id', deliverableId)
    .modify(within(scope, 'organisation_id'))
    .update({
      plan_id: planId,
      frame_rate: frameRate,
      state: again ? 'waiting' : 'measured',
      reason: null,
      reason_code: null,
      ...(again && { measure_attempts: 0 }),
    });
}

export interface PlanRecord {
  plan: MeasuringPlan;
  createdBy: { id: string; name: string } | null;
  createdAt: Date;
  isCurrent: boolean;
}

/** Every plan that the deliverable was ever given, newest first; the whole file, which needs none, is not among them. */
export async function listPlans(db: Db, scope: Scope, deliverableId: string): Promise<PlanRecord[]> {
  const rows: {
    body: unknown;
    created_by: string | null;
    name: string | null;
    created_at: Date;
    is_current: boolean;
  }[] = await db('measuring_plans as mp')
    .join('deliverables as d', 'd.id', 'mp.deliverable_id')
    .leftJoin('users as u', 'u.id', 'mp.created_by')
    .where('mp.deliverable_id', deliverableId)
    .modify(within(scope, 'mp.organisation_id'))
    .orderBy([
      { column: 'mp.created_at', order: 'desc' },
      { column: 'mp.id', order: 'desc' },
    ])
    .select('mp.body', 'mp.created_by', 'u.name', 'mp.created_at', db.raw('d.plan_id = mp.id AS is_current'));
  return rows.map((row) => ({
    plan: measuringPlanSchema.parse(row.body),
    createdBy: row.created_by && row.name ? { id: row.created_by, name: row.name } : null,
    createdAt: row.created_at,
    isCurrent: row.is_current === true,
  }));
}
