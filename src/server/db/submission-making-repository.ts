/** What must be true, and held still, while a submission is made: its deliverable, channel, verdict and chain. */
import { verdictBodySchema, type VerdictBody } from '../../domain/verdict.ts';
import type { ContentKind, DeliverableState, SubmissionState } from '../../domain/vocabulary.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

export interface LockedDeliverable {
  id: string;
  organisationId: string;
  fileName: string;
  state: DeliverableState;
  reasonCode: string | null;
  reason: string | null;
  programmeTitle: string | null;
  episodeLabel: string | null;
  episodeId: string | null;
  versionLabel: string;
  contentKind: ContentKind;
  replacesId: string | null;
  planId: string | null;
  createdAt: Date;
}

/** A deliverable of the organisation, held until the transaction ends; undefined when it has none of that id. */
export async function lockDeliverable(
  db: Db,
  scope: Scope,
  id: string,
): Promise<LockedDeliverable | undefined> {
  const row = await db('deliverables as d')
    .leftJoin('programmes as p', 'p.id', 'd.programme_id')
    .leftJoin('episodes as e', 'e.id', 'd.episode_id')
    .where('d.id', id)
    .whereNull('d.discarded_at')
    .modify(within(scope, 'd.organisation_id'))
    .forUpdate('d')
    .first('d.*', 'p.title as programme_title', 'e.label as episode_label');
  return (
    row && {
      id: row.id,
      organisationId: row.organisation_id,
      fileName: row.file_name,
      state: row.state,
      reasonCode: row.reason_code,
      reason: row.reason,
      programmeTitle: row.programme_title,
      episodeLabel: row.episode_label,
      episodeId: row.episode_id,
      versionLabel: row.version_label,
      contentKind: row.content_kind,
      replacesId: row.replaces_id,
      planId: row.plan_id,
      createdAt: row.created_at,
    }
  );
}

/** Submissions of one deliverable, newest first, to one channel where it is named. */
export async function listSubmissionsOfDeliverable(
  db: Db,
  scope: Scope,
  deliverableId: string,
  channelId?: string,
): Promise<{ id: string; state: SubmissionState; channelName: string; submittedAt: Date }[]> {
  const rows: { id: string; state: SubmissionState; name: string; submitted_at: Date }[] = await db(
    'submissions as s',
  )
    .join('channels as c', 'c.id', 's.channel_id')
    .where('s.deliverable_id', deliverableId)
    .modify((query) => void (channelId && query.where('s.channel_id', channelId)))
    .modify(within(scope, 's.organisation_id'))
    .orderBy([{ column: 's.submitted_at', order: 'desc' }, 's.id'])
    .select('s.id', 's.state', 'c.name', 's.submitted_at');
  return rows.map((row) => ({
    id: row.id,
    state: row.state,
    channelName: row.name,
    submittedAt: row.submitted_at,
  }));
}

export interface DeliveryChannel {
  id: string;
  name: string;
  distributorId: string;
  distributorName: string;
  /** Whether the supplier may deliver to it now. */
  open: boolean;
}

/** A channel that the supplier has, or had, leave to deliver to; undefined for every other. */
export async function findDeliveryChannel(
  db: Db,
  _scope: Scope,
  supplierId: string,
  channelId: string,
): Promise<DeliveryChannel | undefined> {
  const row = await db('channels as c')
    .join('organisations as o', 'o.id', 'c.organisation_id')
    .where('c.id', channelId)
    .whereExists(
      db('agreements as a')
        .whereRaw('a.channel_id = c.id')
        .where('a.supplier_id', supplierId)
        .select(db.raw('1')),
    )
    .first(
      'c.id',
      'c.name',
      'c.organisation_id',
      'o.name as distributor_name',
      db.raw(
        `c.archived_at IS NULL AND EXISTS (SELECT FROM agreements a
          WHERE a.channel_id = c.id AND a.supplier_id = ? AND a.ended_at IS NULL) AS open`,
        [supplierId],
      ),
    );
  return (
    row && {
      id: row.id,
      name: row.name,
      distributorId: row.organisation_id,
      distributorName: row.distributor_name,
      open: row.open,
    }
  );
}

export interface JudgedForChannel {
  /** The worst of all presentations. */
  verdictId: string;
  verdict: VerdictBody;
  /** Of the first presentation. */
  measurementId: string;
  sha256: string;
  layout: string;
  specVersionId: string;
}

/** The deliverable's verdict for the channel, if it is one under the version in force now. */
export async function findVerdictInForce(
  db: Db,
  scope: Scope,
  deliverableId: string,
  channelId: string,
): Promise<JudgedForChannel | undefined> {
  const row = await db('deliverable_channels as dc')
    .join('deliverables as d', 'd.id', 'dc.deliverable_id')
    .join('verdicts as v', 'v.id', 'dc.verdict_id')
    .joinRaw(
      'JOIN LATERAL (SELECT * FROM current_measurements WHERE deliverable_id = d.id ORDER BY position LIMIT 1) m ON true',
    )
    .where({ 'dc.deliverable_id': deliverableId, 'dc.channel_id': channelId })
    .whereRaw('v.spec_version_id = spec_version_in_force(dc.channel_id, d.content_kind, now())')
    .modify(within(scope, 'dc.organisation_id'))
    .first(
      'v.id',
      'v.body',
      'm.id as measurement_id',
      'v.spec_version_id',
      'm.sha256',
      db.raw(`m.format ->> 'layout' AS layout`),
    );
  return (
    row && {
      verdictId: row.id,
      verdict: verdictBodySchema.parse(row.body),
      measurementId: row.measurement_id,
      sha256: row.sha256,
      layout: row.layout,
      specVersionId: row.spec_version_id,
    }
  );
}

/** Holds an episode, so that two deliveries of it are chained one after the other. */
export async function lockEpisode(db: Db, scope: Scope, episodeId: string): Promise<void> {
  await db('episodes')
    .where('id', episodeId)
    .modify(within(scope, 'organisation_id'))
    .forUpdate()
    .first('id');
}

export interface EarlierSubmission {
  id: string;
  state: SubmissionState;
  deliverableId: string;
  deliverableCreatedAt: Date;
  versionLabel: string;
  layout: string;
  airAt: Date | null;
  /** Of this deliverable itself, or of one that it is said to replace; else of the same episode and kind only. */
  named: boolean;
}

/** Earlier submissions to the channel that a delivery may be a re-delivery of, newest first. */
export async function listEarlierSubmissions(
  db: Db,
  scope: Scope,
  deliverable: LockedDeliverable,
  channelId: string,
): Promise<EarlierSubmission[]> {
  const rows: {
    id: string;
    state: SubmissionState;
    deliverable_id: string;
    air_at: Date | null;
    deliverable_created_at: Date;
    version_label: string;
    layout: string;
    named: boolean;
  }[] = await db
    .withRecursive(
      'line',
      db.raw(
        `SELECT id, replaces_id FROM deliverables WHERE id = ?
         UNION SELECT d.id, d.replaces_id FROM deliverables d JOIN line ON d.id = line.replaces_id`,
        [deliverable.id],
      ),
    )
    .from('submissions as s')
    .join('deliverables as d', 'd.id', 's.deliverable_id')
    .join('measurements as m', 'm.id', 's.measurement_id')
    .where({ 's.channel_id': channelId, 's.organisation_id': deliverable.organisationId })
    .modify(within(scope, 's.organisation_id'))
    .where((either) => {
      either.whereRaw('s.deliverable_id IN (SELECT id FROM line)');
      if (deliverable.episodeId)
        either.orWhere({ 'd.episode_id': deliverable.episodeId, 'd.content_kind': deliverable.contentKind });
    })
    .orderBy([{ column: 's.submitted_at', order: 'desc' }, 's.id'])
    .select(
      's.id',
      's.state',
      's.deliverable_id',
      's.air_at',
      'd.created_at as deliverable_created_at',
      'd.version_label',
      db.raw(`m.format ->> 'layout' AS layout`),
      db.raw('s.deliverable_id IN (SELECT id FROM line) AS named'),
    );
  return rows.map((row) => ({
    id: row.id,
    state: row.state,
    deliverableId: row.deliverable_id,
    deliverableCreatedAt: row.deliverable_created_at,
    versionLabel: row.version_label,
    layout: row.layout,
    airAt: row.air_at,
    named: row.named,
  }));
}

export async function setReplaces(
  db: Db,
  scope: Scope,
  deliverableId: string,
  replacesId: string,
): Promise<void> {
  await db('deliverables')
    .where('id', deliverableId)
    .modify(within(scope, 'organisation_id'))
    .update({ replaces_id: replacesId });
}

export interface NewSubmission {
  organisationId: string;
  distributorId: string;
  channelId: string;
  deliverableId: string;
  measurementId: string;
  specVersionId: string;
  verdictId: string;
  sha256: string;
  airAt: Date | null;
  submittedBy: string;
  replacesId: string | null;
}

export async function insertSubmission(db: Db, _scope: Scope, made: NewSubmission): Promise<string> {
  const [row] = await db('submissions')
    .insert({
      organisation_id: made.organisationId,
      distributor_id: made.distributorId,
      channel_id: made.channelId,
      deliverable_id: made.deliverableId,
      measurement_id: made.measurementId,
      spec_version_id: made.specVersionId,
      verdict_id: made.verdictId,
      sha256: made.sha256,
      air_at: made.airAt,
      submitted_by: made.submittedBy,
      replaces_id: made.replacesId,
    })
    .returning<{ id: string }[]>('id');
  return row.id;
}
