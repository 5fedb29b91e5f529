/** Bodies of the spec versions that a measurement was judged by: reached through verdicts only. */
import { specBodySchema, type SpecBody } from '../../domain/spec.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

interface BodyRow {
  id: string;
  body: unknown;
}

/** The bodies of those of these versions that a verdict of the measurement names; the measurement is the scope's own. */
export async function listJudgedBodies(
  db: Db,
  scope: Scope,
  measurementId: string,
  specVersionIds: readonly string[],
): Promise<{ specVersionId: string; body: SpecBody }[]> {
  const rows: BodyRow[] = await db('verdicts as v')
    .join('spec_versions as sv', 'sv.id', 'v.spec_version_id')
    .where('v.measurement_id', measurementId)
    .whereIn('sv.id', specVersionIds as string[])
    .modify(within(scope, 'v.organisation_id'))
    .select('sv.id', 'sv.body');
  return rows.map((row) => ({ specVersionId: row.id, body: specBodySchema.parse(row.body) }));
}

/** The version in force now for a channel and kind of content; the caller has reached both through a row of its own. */
export async function findVersionInForce(
  db: Db,
  _scope: Scope,
  channelId: string,
  contentKind: string,
): Promise<{ id: string; number: number; body: SpecBody } | null> {
  const row = await db('spec_versions as sv')
    .whereRaw('sv.id = spec_version_in_force(?, ?, now())', [channelId, contentKind])
    .first<{ id: string; number: number; body: unknown } | undefined>('sv.id', 'sv.number', 'sv.body');
  return row ? { id: row.id, number: row.number, body: specBodySchema.parse(row.body) } : null;
}
