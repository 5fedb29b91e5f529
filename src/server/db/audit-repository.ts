/** Audit events: who did what to which thing. Rows are only ever added. */
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';

export interface NewEvent {
  organisationId: string;
  /** The other side of a submission, who may read the event too. */
  counterpartId?: string | null;
  /** '<subject>.<what happened>' in the past tense: 'submission.approved'. */
  action: string;
  subjectKind: string;
  subjectId: string;
  /** Names as they were at that moment, for the sentence on the activity screen. No secrets. */
  detail?: Record<string, unknown>;
}

export interface EventRecord {
  id: string;
  organisationId: string;
  organisationName: string;
  action: string;
  subjectKind: string;
  subjectId: string;
  detail: Record<string, unknown>;
  actor: { id: string; name: string } | null;
  createdAt: Date;
}

interface EventRow {
  id: number;
  organisation_id: string;
  organisation_name: string;
  action: string;
  subject_kind: string;
  subject_id: string;
  detail: Record<string, unknown>;
  actor_id: string | null;
  actor_name: string | null;
  created_at: Date;
}

/** Adds an event in the caller's transaction; the actor is the scope's person, or nobody for the system. */
export async function recordEvent(db: Db, scope: Scope, event: NewEvent): Promise<void> {
  await db('audit_events').insert({
    organisation_id: event.organisationId,
    counterpart_id: event.counterpartId ?? null,
    actor_id: scope.kind === 'member' ? scope.userId : null,
    action: event.action,
    subject_kind: event.subjectKind,
    subject_id: event.subjectId,
    detail: JSON.stringify(event.detail ?? {}),
  });
}

/**
 * Newest first, those of the scope's organisation and those that name it as the other side. `q` looks in the actor's
 * name, the action and the detail's words; `beforeId` is the cursor; `actions` narrows to these.
 */
export async function listEvents(
  db: Db,
  scope: Scope,
  {
    beforeId,
    limit,
    q,
    actions,
  }: { beforeId?: string; limit: number; q?: string; actions?: readonly string[] },
): Promise<EventRecord[]> {
  const rows = await db('audit_events as e')
    .join('organisations as o', 'o.id', 'e.organisation_id')
    .leftJoin('users as u', 'u.id', 'e.actor_id')
    .modify((query) => {
      if (scope.kind === 'member') {
        const { organisationId } = scope;
        query.where((w) =>
          w.where('e.organisation_id', organisationId).orWhere('e.counterpart_id', organisationId),
        );
      }
      if (beforeId !== undefined) query.where('e.id', '<', beforeId);
      if (actions) query.whereIn('e.action', actions as string[]);
      if (q) {
        const like = `%${q.replace(/[\\%_]/g, '\\$&')}%`;
        query.where((w) =>
          w
            .whereILike('u.name', like)
            .orWhereILike('o.name', like)
            .orWhereRaw("replace(replace(e.action, '.', ' '), '_', ' ') ILIKE ?", [like])
            .orWhereRaw('EXISTS (SELECT FROM jsonb_each_text(e.detail) d WHERE d.value ILIKE ?)', [like]),
        );
      }
    })
    .orderBy('e.id', 'desc')
    .limit(limit)
    .select('e.*', 'o.name as organisation_name', 'u.name as actor_name');
  return rows.map((row: EventRow) => ({
    id: String(row.id),
    organisationId: row.organisation_id,
    organisationName: row.organisation_name,
    action: row.action,
    subjectKind: row.subject_kind,
    subjectId: row.subject_id,
    detail: row.detail,
    actor: row.actor_id && row.actor_name ? { id: row.actor_id, name: row.actor_name } : null,
    createdAt: row.created_at,
  }));
}
