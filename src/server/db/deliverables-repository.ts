/** Reading deliverables: lists and reports of the organisation that they belong to. Writes are deliverable-writes. */
import type { Knex } from 'knex';
import { z } from 'zod';
import type { deliverableQuerySchema, ChannelVerdict } from '../../domain/api/deliverables.ts';
import {
  figuresSchema,
  findingSchema,
  formatSchema,
  frameRateSchema,
} from '../../domain/api/deliverables.ts';
import { overPresentations } from '../../domain/presentations-verdict.ts';
import { verdictBodySchema } from '../../domain/verdict.ts';
import type {
  ContentKind,
  DeliverableState,
  OverallOutcome,
  SubmissionState,
} from '../../domain/vocabulary.ts';
import type { FrameRateName } from '../../engine/timecode.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { containing, cutPage, naturalKey, pageByKey, type Cursor, type SortKey } from './keyset.ts';
import { within } from './within.ts';

type Format = z.infer<typeof formatSchema>;
type Figures = z.infer<typeof figuresSchema>;

export interface DeliverableRecord {
  id: string;
  organisationId: string;
  fileName: string;
  byteSize: number;
  storageKey: string;
  state: DeliverableState;
  reason: string | null;
  programmeTitle: string | null;
  episodeLabel: string | null;
  versionLabel: string;
  contentKind: ContentKind;
  outcome: OverallOutcome | null;
  measurement: MeasurementRecord | null;
  sha256: string | null;
  uploadedBy: { id: string; name: string };
  replaces: { id: string; fileName: string } | null;
  /** How it is measured now; `null`: the whole file. */
  planId: string | null;
  /** Frames a second by which its times are counted, where the file tells none. */
  frameRate: FrameRateName | null;
  createdAt: Date;
  measuredAt: Date | null;
}

export interface MeasurementRecord {
  id: string;
  engineVersion: string;
  format: Format;
  figures: Figures;
  findings: z.infer<typeof findingSchema>[];
  seriesKey: string;
  measuringSeconds: number;
  createdAt: Date;
}

interface Row {
  id: string;
  organisation_id: string;
  file_name: string;
  byte_size: number;
  storage_key: string;
  state: DeliverableState;
  reason: string | null;
  programme_title: string | null;
  episode_label: string | null;
  version_label: string;
  content_kind: ContentKind;
  outcome: OverallOutcome | null;
  sha256: string | null;
  uploaded_by: string;
  uploader_name: string;
  replaces_id: string | null;
  replaces_file_name: string | null;
  plan_id: string | null;
  frame_rate: string | null;
  created_at: Date;
  measured_at: Date | null;
  sort_key: string | null;
}

/** Columns of `measurements as m` under names of their own, and the record that they make. */
export const measurementColumns = [
  'm.id as measurement_id',
  'm.engine_version',
  'm.format',
  'm.figures',
  'm.findings',
  'm.series_key',
  'm.measuring_seconds',
  'm.created_at as measurement_created_at',
];
export interface MeasurementColumns {
  measurement_id: string;
  engine_version: string;
  format: unknown;
  figures: unknown;
  findings: unknown;
  series_key: string;
  measuring_seconds: number;
  measurement_created_at: Date;
}
export const toMeasurement = (row: MeasurementColumns): MeasurementRecord => ({
  id: row.measurement_id,
  engineVersion: row.engine_version,
  format: formatSchema.parse(row.format),
  figures: figuresSchema.parse(row.figures),
  findings: z.array(findingSchema).parse(row.findings),
  seriesKey: row.series_key,
  measuringSeconds: row.measuring_seconds,
  createdAt: row.measurement_created_at,
});

/** Worst outcome over the channels that a deliverable is for; null while none is judged. */
const worstOutcome = `(SELECT v.outcome FROM deliverable_channels dc JOIN verdicts v ON v.id = dc.verdict_id
  WHERE dc.deliverable_id = d.id ORDER BY array_position(ARRAY['fail', 'advisory', 'pass'], v.outcome) LIMIT 1)`;

/** The measurement of the first presentation: the one that the row shows. */
const firstMeasurement = `LEFT JOIN LATERAL (SELECT * FROM current_measurements WHERE deliverable_id = d.id
  ORDER BY position LIMIT 1) m ON true`;

const figure = (path: string) => `(m.figures #>> '{${path}}')::float8`;
export const deliverableSortKeys: Record<z.infer<typeof deliverableQuerySchema>['sort'], SortKey> = {
  created: { expression: 'd.created_at', type: 'timestamptz', nullable: false },
  programme: {
    expression: `(${naturalKey("p.title || chr(1) || coalesce(e.label, '') || chr(1) || d.version_label")})`,
    type: 'text',
    nullable: true,
  },
  integrated: { expression: figure('loudness,integratedLufs'), type: 'float8', nullable: true },
  truePeak: { expression: figure('truePeak,maxDbtp'), type: 'float8', nullable: true },
  range: { expression: figure('loudness,rangeLu'), type: 'float8', nullable: true },
  duration: { expression: `(m.format ->> 'durationSeconds')::float8`, type: 'float8', nullable: true },
};

export interface DeliverableFilter {
  q?: string;
  /** A programme's title in any case of letters. */
  programme?: string;
  channelId?: string;
  kind?: ContentKind;
  outcomes?: readonly OverallOutcome[];
  /** Those that are not judged as well; alone when `outcomes` is empty. */
  notJudged?: boolean;
  states?: readonly DeliverableState[];
  /** Where the newest submission to some channel stands so. */
  submissionStates?: readonly SubmissionState[];
}

function deliverables(db: Db, scope: Scope) {
  return db('deliverables as d')
    .leftJoin('programmes as p', 'p.id', 'd.programme_id')
    .leftJoin('episodes as e', 'e.id', 'd.episode_id')
    .whereNull('d.discarded_at')
    .modify(within(scope, 'd.organisation_id'));
}

const filtered =
  (filter: DeliverableFilter) =>
  (query: Knex.QueryBuilder): void => {
    const { q, programme, channelId, kind, outcomes, notJudged, states, submissionStates } = filter;
    for (const word of q?.split(/\s+/).filter(Boolean).slice(0, 12) ?? [])
      query.whereRaw(`concat_ws(' ', p.title, e.label, d.version_label, d.file_name) ILIKE ?`, [
        containing(word),
      ]);
    if (programme) query.whereRaw('lower(p.title) = lower(?)', [programme]);
    if (kind) query.where('d.content_kind', kind);
    if (channelId)
      query.whereRaw(
        'EXISTS (SELECT FROM deliverable_channels dc WHERE dc.deliverable_id = d.id AND dc.channel_id = ?)',
        [channelId],
      );
    if (outcomes || notJudged) {
      // Within one channel the question is how it stands there.
      const outcome = channelId
        ? `(SELECT v.outcome FROM deliverable_channels dc JOIN verdicts v ON v.id = dc.verdict_id
            WHERE dc.deliverable_id = d.id AND dc.channel_id = ?)`
        : worstOutcome;
      const bindings = channelId ? [channelId] : [];
      query.where((either) => {
        if (outcomes?.length) either.orWhereRaw(`${outcome} = ANY (?)`, [...bindings, [...outcomes]]);
        if (notJudged) either.orWhereRaw(`${outcome} IS NULL`, bindings);
      });
    }
    if (states || submissionStates) {
      query.where((either) => {
        if (states?.length) either.orWhereRaw('d.state = ANY (?)', [[...states]]);
        if (submissionStates?.length)
          either.orWhereRaw(
            `EXISTS (SELECT FROM (SELECT DISTINCT ON (s.channel_id) s.state FROM submissions s WHERE s.deliverable_id = d.id
               ORDER BY s.channel_id, s.submitted_at DESC, s.id) newest WHERE newest.state = ANY (?))`,
            [[...submissionStates]],
          );
      });
    }
  };

const columns = [
  'd.id',
  'd.organisation_id',
  'd.file_name',
  'd.byte_size',
  'd.storage_key',
  'd.state',
  'd.reason',
  'd.version_label',
  'd.content_kind',
  'd.sha256',
  'd.uploaded_by',
  'd.replaces_id',
  'd.plan_id',
  'd.frame_rate',
  'd.created_at',
  'd.measured_at',
  'p.title as programme_title',
  'e.label as episode_label',
  'u.name as uploader_name',
  'r.file_name as replaces_file_name',
  ...measurementColumns,
];
const wholeRows = (db: Db, scope: Scope) =>
  deliverables(db, scope)
    .join('users as u', 'u.id', 'd.uploaded_by')
    .leftJoin('deliverables as r', 'r.id', 'd.replaces_id')
    .joinRaw(firstMeasurement)
    .select(...columns, db.raw(`${worstOutcome} AS outcome`));

type WholeRow = Row & (MeasurementColumns | { [K in keyof MeasurementColumns]: null });
const isMeasured = (row: WholeRow): row is Row & MeasurementColumns => row.measurement_id !== null;
const toDeliverable = (row: WholeRow): DeliverableRecord => ({
  id: row.id,
  organisationId: row.organisation_id,
  fileName: row.file_name,
  byteSize: row.byte_size,
  storageKey: row.storage_key,
  state: row.state,
  reason: row.reason,
  programmeTitle: row.programme_title,
  episodeLabel: row.episode_label,
  versionLabel: row.version_label,
  contentKind: row.content_kind,
  outcome: row.outcome,
  measurement: isMeasured(row) ? toMeasurement(row) : null,
  sha256: row.sha256,
  uploadedBy: { id: row.uploaded_by, name: row.uploader_name },
  replaces:
    row.replaces_id && row.replaces_file_name
      ? { id: row.replaces_id, fileName: row.replaces_file_name }
      : null,
  planId: row.plan_id,
  frameRate: frameRateSchema.nullable().parse(row.frame_rate),
  createdAt: row.created_at,
  measuredAt: row.measured_at,
});

/** A page of the organisation's deliverables. */
export async function listDeliverables(
  db: Db,
  scope: Scope,
  filter: DeliverableFilter,
  page: {
    sort: keyof typeof deliverableSortKeys;
    order: 'asc' | 'desc';
    limit: number;
    cursor: Cursor | null;
  },
): Promise<{ records: DeliverableRecord[]; nextCursor: string | null }> {
  const query = wholeRows(db, scope).modify(filtered(filter));
  pageByKey(db, query, deliverableSortKeys[page.sort], { ...page, idColumn: 'd.id' });
  const found: WholeRow[] = await query;
  const { rows, nextCursor } = cutPage(found, page);
  return { records: rows.map(toDeliverable), nextCursor };
}

export async function countDeliverables(db: Db, scope: Scope, filter: DeliverableFilter): Promise<number> {
  const row = await deliverables(db, scope)
    .modify(filtered(filter))
    .count<{ count: number }[]>('* as count')
    .first();
  return row?.count ?? 0;
}

/** These deliverables of the organisation, in any order; those that it has not are left out. */
export async function readDeliverables(
  db: Db,
  scope: Scope,
  ids: readonly string[],
): Promise<DeliverableRecord[]> {
  const rows: WholeRow[] = await wholeRows(db, scope).whereIn('d.id', ids as string[]);
  return rows.map(toDeliverable);
}

interface ChannelRow {
  deliverable_id: string;
  channel_id: string;
  channel_name: string;
  distributor_name: string;
  verdict_id: string | null;
  verdicts: unknown;
  spec_version_id: string | null;
  spec_version_number: number | null;
  spec_name: string | null;
  submission_id: string | null;
  submission_state: SubmissionState | null;
  submitted_at: Date | null;
}
export const presentationVerdictsSchema = z.array(z.object({ name: z.string(), verdict: verdictBodySchema }));
const rank: Record<OverallOutcome, number> = { fail: 0, advisory: 1, pass: 2 };

/** How each deliverable stands with the channels that it is for, worst first, then by name; by deliverable id. */
export async function listStandings(
  db: Db,
  scope: Scope,
  deliverableIds: readonly string[],
): Promise<Map<string, ChannelVerdict[]>> {
  const rows: ChannelRow[] = await db('deliverable_channels as dc')
    .join('channels as c', 'c.id', 'dc.channel_id')
    .join('organisations as o', 'o.id', 'c.organisation_id')
    .leftJoin('verdicts as v', 'v.id', 'dc.verdict_id')
    .leftJoin('spec_versions as sv', 'sv.id', 'v.spec_version_id')
    .leftJoin('specs as sp', 'sp.id', 'sv.spec_id')
    .joinRaw(
      `LEFT JOIN LATERAL (SELECT s.id, s.state, s.submitted_at FROM submissions s
        WHERE s.deliverable_id = dc.deliverable_id AND s.channel_id = dc.channel_id ORDER BY s.submitted_at DESC, s.id LIMIT 1) s ON true`,
    )
    .whereIn('dc.deliverable_id', deliverableIds as string[])
    .modify(within(scope, 'dc.organisation_id'))
    .orderBy('c.name')
    .select(
      'dc.deliverable_id',
      'dc.channel_id',
      'c.name as channel_name',
      'o.name as distributor_name',
      'dc.verdict_id',
      db.raw(
        `(SELECT jsonb_agg(jsonb_build_object('name', m.presentation_name, 'verdict', x.body) ORDER BY m.position)
          FROM current_measurements m JOIN verdicts x ON x.measurement_id = m.id AND x.spec_version_id = v.spec_version_id
          WHERE m.deliverable_id = dc.deliverable_id) AS verdicts`,
      ),
      'v.spec_version_id',
      'sv.number as spec_version_number',
      'sp.name as spec_name',
      's.id as submission_id',
      's.state as submission_state',
      's.submitted_at',
    );
  const standings = new Map<string, ChannelVerdict[]>(deliverableIds.map((id) => [id, []]));
  for (const row of rows) standings.get(row.deliverable_id)?.push(toStanding(row));
  const place = ({ verdict }: ChannelVerdict) => (verdict ? rank[verdict.outcome] : 3);
  for (const all of standings.values()) all.sort((a, b) => place(a) - place(b));
  return standings;
}

const toStanding = (row: ChannelRow): ChannelVerdict => ({
  channelId: row.channel_id,
  channelName: row.channel_name,
  distributorName: row.distributor_name,
  specName: row.spec_name,
  specVersionId: row.spec_version_id,
  specVersionNumber: row.spec_version_number,
  verdictId: row.verdict_id,
  // None while it waits to be measured by another plan.
  verdict: row.verdicts ? overPresentations(presentationVerdictsSchema.parse(row.verdicts)) : null,
  submission:
    row.submission_id && row.submission_state && row.submitted_at
      ? { id: row.submission_id, state: row.submission_state, submittedAt: row.submitted_at.toISOString() }
      : null,
});
