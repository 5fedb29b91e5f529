/** Submissions as both of their sides read them: a supplier its own, a distributor those to its channels. */
import type { Knex } from 'knex';
import type { z } from 'zod';
import { figuresSchema, formatSchema } from '../../domain/api/deliverables.ts';
import type { submissionQuerySchema } from '../../domain/api/submissions.ts';
import { overPresentations } from '../../domain/presentations-verdict.ts';
import type { VerdictBody } from '../../domain/verdict.ts';
import type { ContentKind, OverallOutcome, SubmissionState } from '../../domain/vocabulary.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { presentationVerdictsSchema } from './deliverables-repository.ts';
import { containing, cutPage, naturalKey, pageByKey, type Cursor, type SortKey } from './keyset.ts';

export interface PersonRef {
  id: string;
  name: string;
}

export interface SubmissionRecord {
  id: string;
  state: SubmissionState;
  version: number;
  deliverableId: string;
  fileName: string;
  programmeTitle: string | null;
  episodeLabel: string | null;
  versionLabel: string;
  contentKind: ContentKind;
  supplier: PersonRef;
  distributor: PersonRef;
  channel: { id: string; name: string; timeZone: string };
  specName: string;
  specVersionId: string;
  specVersionNumber: number;
  measurementId: string;
  format: z.infer<typeof formatSchema>;
  figures: z.infer<typeof figuresSchema>;
  verdict: VerdictBody;
  airAt: Date | null;
  submittedAt: Date;
  submittedBy: PersonRef;
  decidedBy: PersonRef | null;
  decidedAt: Date | null;
  decisionReason: string | null;
  failingRuleIds: string[];
  uploadedBy: string;
  replacesId: string | null;
  sha256: string;
}

interface Row {
  id: string;
  state: SubmissionState;
  version: number;
  deliverable_id: string;
  file_name: string;
  programme_title: string | null;
  episode_label: string | null;
  version_label: string;
  content_kind: ContentKind;
  supplier_id: string;
  supplier_name: string;
  distributor_id: string;
  distributor_name: string;
  channel_id: string;
  channel_name: string;
  channel_time_zone: string;
  spec_name: string;
  spec_version_id: string;
  spec_version_number: number;
  measurement_id: string;
  format: unknown;
  figures: unknown;
  verdicts: unknown;
  air_at: Date | null;
  submitted_at: Date;
  submitted_by: string;
  submitter_name: string;
  decided_by: string | null;
  decider_name: string | null;
  decided_at: Date | null;
  decision_reason: string | null;
  failing_rule_ids: string[];
  uploaded_by: string;
  replaces_id: string | null;
  sha256: string;
  sort_key: string | null;
}

const toSubmission = (row: Row): SubmissionRecord => ({
  id: row.id,
  state: row.state,
  version: row.version,
  deliverableId: row.deliverable_id,
  fileName: row.file_name,
  programmeTitle: row.programme_title,
  episodeLabel: row.episode_label,
  versionLabel: row.version_label,
  contentKind: row.content_kind,
  supplier: { id: row.supplier_id, name: row.supplier_name },
  distributor: { id: row.distributor_id, name: row.distributor_name },
  channel: { id: row.channel_id, name: row.channel_name, timeZone: row.channel_time_zone },
  specName: row.spec_name,
  specVersionId: row.spec_version_id,
  specVersionNumber: row.spec_version_number,
  measurementId: row.measurement_id,
  format: formatSchema.parse(row.format),
  figures: figuresSchema.parse(row.figures),
  verdict: overPresentations(presentationVerdictsSchema.parse(row.verdicts)),
  airAt: row.air_at,
  submittedAt: row.submitted_at,
  submittedBy: { id: row.submitted_by, name: row.submitter_name },
  decidedBy: row.decided_by && row.decider_name ? { id: row.decided_by, name: row.decider_name } : null,
  decidedAt: row.decided_at,
  decisionReason: row.decision_reason,
  failingRuleIds: row.failing_rule_ids,
  uploadedBy: row.uploaded_by,
  replacesId: row.replaces_id,
  sha256: row.sha256,
});

/** Holds a query on `submissions as s` to those that the scope's organisation is a side of. The system sees all. */
export const ofEitherSide =
  (scope: Scope) =>
  (query: Knex.QueryBuilder): void => {
    if (scope.kind !== 'member') return;
    const { organisationId } = scope;
    query.where((side) =>
      side.where('s.organisation_id', organisationId).orWhere('s.distributor_id', organisationId),
    );
  };

const figure = (path: string) => `(m.figures #>> '{${path}}')::float8`;
export const submissionSortKeys: Record<z.infer<typeof submissionQuerySchema>['sort'], SortKey> = {
  submitted: { expression: 's.submitted_at', type: 'timestamptz', nullable: false },
  airs: { expression: 's.air_at', type: 'timestamptz', nullable: true },
  programme: {
    expression: `(${naturalKey("p.title || chr(1) || coalesce(e.label, '') || chr(1) || d.version_label")})`,
    type: 'text',
    nullable: true,
  },
  integrated: { expression: figure('loudness,integratedLufs'), type: 'float8', nullable: true },
  truePeak: { expression: figure('truePeak,maxDbtp'), type: 'float8', nullable: true },
};

export interface SubmissionFilter {
  q?: string;
  states?: readonly SubmissionState[];
  outcomes?: readonly OverallOutcome[];
  channelId?: string;
  supplierId?: string;
}

function submissions(db: Db, scope: Scope) {
  return db('submissions as s')
    .join('deliverables as d', 'd.id', 's.deliverable_id')
    .join('organisations as su', 'su.id', 's.organisation_id')
    .join('channels as c', 'c.id', 's.channel_id')
    .join('verdicts as v', 'v.id', 's.verdict_id')
    .leftJoin('programmes as p', 'p.id', 'd.programme_id')
    .leftJoin('episodes as e', 'e.id', 'd.episode_id')
    .modify(ofEitherSide(scope));
}

const filtered =
  ({ q, states, outcomes, channelId, supplierId }: SubmissionFilter) =>
  (query: Knex.QueryBuilder): void => {
    for (const word of q?.split(/\s+/).filter(Boolean).slice(0, 12) ?? [])
      query.whereRaw(
        `concat_ws(' ', p.title, e.label, d.version_label, d.file_name, su.name, c.name) ILIKE ?`,
        [containing(word)],
      );
    if (states) query.whereIn('s.state', states as SubmissionState[]);
    if (outcomes) query.whereIn('v.outcome', outcomes as OverallOutcome[]);
    if (channelId) query.where('s.channel_id', channelId);
    if (supplierId) query.where('s.organisation_id', supplierId);
  };

const wholeRows = (db: Db, scope: Scope) =>
  submissions(db, scope)
    .join('organisations as di', 'di.id', 's.distributor_id')
    .join('spec_versions as sv', 'sv.id', 's.spec_version_id')
    .join('specs as sp', 'sp.id', 'sv.spec_id')
    .join('measurements as m', 'm.id', 's.measurement_id')
    .join('users as sb', 'sb.id', 's.submitted_by')
    .leftJoin('users as de', 'de.id', 's.decided_by')
    .select(
      's.id',
      's.state',
      's.version',
      's.deliverable_id',
      's.spec_version_id',
      's.measurement_id',
      's.air_at',
      's.submitted_at',
      's.submitted_by',
      's.decided_by',
      's.decided_at',
      's.decision_reason',
      's.failing_rule_ids',
      's.replaces_id',
      's.sha256',
      'd.file_name',
      'd.version_label',
      'd.content_kind',
      'd.uploaded_by',
      'p.title as programme_title',
      'e.label as episode_label',
      'su.id as supplier_id',
      'su.name as supplier_name',
      'di.id as distributor_id',
      'di.name as distributor_name',
      'c.id as channel_id',
      'c.name as channel_name',
      'c.time_zone as channel_time_zone',
      'sp.name as spec_name',
      'sv.number as spec_version_number',
      'm.format',
      'm.figures',
      db.raw(
        `(SELECT jsonb_agg(jsonb_build_object('name', sm.name, 'verdict', x.body) ORDER BY sm.position)
          FROM submission_measurements sm JOIN verdicts x ON x.id = sm.verdict_id WHERE sm.submission_id = s.id) AS verdicts`,
      ),
      'sb.name as submitter_name',
      'de.name as decider_name',
    );

/** A page of the submissions that the organisation is a side of. */
export async function listSubmissions(
  db: Db,
  scope: Scope,
  filter: SubmissionFilter,
  page: {
    sort: keyof typeof submissionSortKeys;
    order: 'asc' | 'desc';
    limit: number;
    cursor: Cursor | null;
  },
): Promise<{ records: SubmissionRecord[]; nextCursor: string | null }> {
  const query = wholeRows(db, scope).modify(filtered(filter));
  pageByKey(db, query, submissionSortKeys[page.sort], { ...page, idColumn: 's.id' });
  const found: Row[] = await query;
  const { rows, nextCursor } = cutPage(found, page);
  return { records: rows.map(toSubmission), nextCursor };
}

/** Over the whole filter: all, those that await a decision, and those of them that air within the next 24 hours. */
export async function countSubmissions(
  db: Db,
  scope: Scope,
  filter: SubmissionFilter,
): Promise<{ total: number; awaiting: number; airingWithin24h: number }> {
  const row = await submissions(db, scope)
    .modify(filtered(filter))
    .first<{ total: number; awaiting: number; airing: number } | undefined>(
      db.raw(`count(*) AS total`),
      db.raw(`count(*) FILTER (WHERE s.state = 'awaiting_review') AS awaiting`),
      db.raw(
        `count(*) FILTER (WHERE s.state = 'awaiting_review' AND s.air_at BETWEEN now() AND now() + interval '24 hours') AS airing`,
      ),
    );
  return { total: row?.total ?? 0, awaiting: row?.awaiting ?? 0, airingWithin24h: row?.airing ?? 0 };
}

/** These submissions, in any order; those that the organisation is no side of are left out. */
export async function readSubmissions(
  db: Db,
  scope: Scope,
  ids: readonly string[],
): Promise<SubmissionRecord[]> {
  const rows: Row[] = await wholeRows(db, scope).whereIn('s.id', ids as string[]);
  return rows.map(toSubmission);
}

export async function findSubmission(db: Db, scope: Scope, id: string): Promise<SubmissionRecord | null> {
  const [record] = await readSubmissions(db, scope, [id]);
  return record ?? null;
}
