/** Verdicts, and which of them stands for a deliverable with each channel that it is for. */
import { z } from 'zod';
import { figuresSchema, findingSchema, formatSchema } from '../../domain/api/deliverables.ts';
import { specBodySchema, type SpecBody } from '../../domain/spec.ts';
import type { VerdictBody } from '../../domain/verdict.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

export interface JudgingFilter {
  deliverableIds?: string[];
  channelIds?: string[];
  specIds?: string[];
}

/** A deliverable's standing with one channel whose verdicts are not all under the version now in force. */
export interface StaleStanding {
  organisationId: string;
  deliverableId: string;
  channelId: string;
  /** Outcome of the verdict that stands, `null` where there is none. */
  outcome: string | null;
  /** `null` where no spec is in force (any more): nothing to be judged by. */
  specVersionId: string | null;
  specBody: SpecBody | null;
  /** Of each presentation, in order. */
  measurements: (z.infer<typeof measurementRow> & { id: string })[];
}

const measurementRow = z.object({
  format: formatSchema,
  figures: figuresSchema,
  findings: z.array(findingSchema),
});

interface StaleRow {
  organisation_id: string;
  deliverable_id: string;
  channel_id: string;
  outcome: string | null;
  spec_version_id: string | null;
  body: unknown;
  measurement_id: string;
  format: unknown;
  figures: unknown;
  findings: unknown;
}

/** The version in force is not that of the verdict, or some presentation's measurement has no verdict under it. */
const isStale = `v.spec_version_id IS DISTINCT FROM sv.id OR sv.id IS NOT NULL AND (
  NOT EXISTS (SELECT FROM current_measurements c WHERE c.deliverable_id = d.id AND c.id = v.measurement_id)
  OR EXISTS (SELECT FROM current_measurements c WHERE c.deliverable_id = d.id AND NOT EXISTS (
    SELECT FROM verdicts x WHERE x.measurement_id = c.id AND x.spec_version_id = sv.id)))`;

/**
 * Measured deliverables' standings to be judged anew, by the measurements that stand now. A spec owner's publishing reaches the
 * deliverables of every supplier of the channel, so a member's scope narrows only by its own organisation's deliverables or channels.
 */
export async function listStaleStandings(
  db: Db,
  scope: Scope,
  filter: JudgingFilter,
): Promise<StaleStanding[]> {
  const rows: StaleRow[] = await db('deliverable_channels as dc')
    .join('deliverables as d', 'd.id', 'dc.deliverable_id')
    .join('channels as c', 'c.id', 'dc.channel_id')
    .joinRaw('JOIN LATERAL (SELECT * FROM current_measurements WHERE deliverable_id = d.id) m ON true')
    .joinRaw(
      'LEFT JOIN spec_versions sv ON sv.id = spec_version_in_force(dc.channel_id, d.content_kind, now())',
    )
    .leftJoin('verdicts as v', 'v.id', 'dc.verdict_id')
    .whereNull('d.discarded_at')
    .whereRaw(`(${isStale})`)
    .modify((query) => {
      if (scope.kind === 'member')
        query.where((own) =>
          own
            .where('d.organisation_id', scope.organisationId)
            .orWhere('c.organisation_id', scope.organisationId),
        );
      if (filter.deliverableIds) query.whereIn('d.id', filter.deliverableIds);
      if (filter.channelIds) query.whereIn('dc.channel_id', filter.channelIds);
      if (filter.specIds) query.whereIn('sv.spec_id', filter.specIds);
    })
    .orderBy(['dc.deliverable_id', 'dc.channel_id', 'm.position'])
    .select(
      'd.organisation_id',
      'dc.deliverable_id',
      'dc.channel_id',
      'v.outcome',
      'sv.id as spec_version_id',
      'sv.body',
      'm.id as measurement_id',
      'm.format',
      'm.figures',
      'm.findings',
    );
  const standings: StaleStanding[] = [];
  for (const row of rows) {
    const { format, figures, findings } = row;
    const measurement = {
      id: row.measurement_id,
      ...measurementRow.parse({ format, figures, findings }),
    };
    const last = standings.at(-1);
    if (last?.deliverableId === row.deliverable_id && last.channelId === row.channel_id)
      last.measurements.push(measurement);
    else
      standings.push({
        organisationId: row.organisation_id,
        deliverableId: row.deliverable_id,
        channelId: row.channel_id,
        outcome: row.outcome,
        specVersionId: row.spec_version_id,
        specBody: row.spec_version_id === null ? null : specBodySchema.parse(row.body),
        measurements: [measurement],
      });
  }
  return standings;
}

/** The verdict of a measurement under a version: the one that stands, or a new one. Returns its id. */
export async function ensureVerdict(
  db: Db,
  _scope: Scope,
  made: { organisationId: string; measurementId: string; specVersionId: string; verdict: VerdictBody },
): Promise<string> {
  await db('verdicts')
    .insert({
      organisation_id: made.organisationId,
      measurement_id: made.measurementId,
      spec_version_id: made.specVersionId,
      outcome: made.verdict.outcome,
      body: JSON.stringify(made.verdict),
    })
    .onConflict(['measurement_id', 'spec_version_id'])
    .ignore();
  const row = await db('verdicts')
    .where({ measurement_id: made.measurementId, spec_version_id: made.specVersionId })
    .first<{ id: string } | undefined>('id');
  if (!row) throw new Error('A verdict was neither there nor taken');
  return row.id;
}

/** Lets a verdict, or none, stand for a deliverable with a channel. */
export async function setStandingVerdict(
  db: Db,
  _scope: Scope,
  of: { deliverableId: string; channelId: string; verdictId: string | null },
): Promise<void> {
  await db('deliverable_channels')
    .where({ deliverable_id: of.deliverableId, channel_id: of.channelId })
    .update({ verdict_id: of.verdictId });
}

/** The organisations whose deliverables are for any of these channels, for telling them. */
export async function listSuppliersOf(
  db: Db,
  scope: Scope,
  channelIds: readonly string[],
): Promise<string[]> {
  const rows: { organisation_id: string }[] = await db('deliverable_channels as dc')
    .join('channels as c', 'c.id', 'dc.channel_id')
    .whereIn('dc.channel_id', channelIds as string[])
    .modify(within(scope, 'c.organisation_id'))
    .distinct('dc.organisation_id');
  return rows.map((row) => row.organisation_id);
}
