/** What a deliverable is said to be: programme, episode, version, kind, and the channels that it is for. */
import type { ContentKind } from '../../domain/vocabulary.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

/** The programme of this title in any case of letters, made when there is none. */
export async function findOrMakeProgramme(
  db: Db,
  _scope: Scope,
  organisationId: string,
  title: string,
): Promise<string> {
  await db.raw(
    'INSERT INTO programmes (organisation_id, title) VALUES (?, ?) ON CONFLICT (organisation_id, lower(title)) DO NOTHING',
    [organisationId, title],
  );
  const row = await db('programmes')
    .where('organisation_id', organisationId)
    .whereRaw('lower(title) = lower(?)', [title])
    .first<{ id: string } | undefined>('id');
  if (!row) throw new Error('A programme was neither found nor made');
  return row.id;
}

/** The episode of this label in the programme, made when there is none. */
export async function findOrMakeEpisode(
  db: Db,
  _scope: Scope,
  organisationId: string,
  programmeId: string,
  label: string,
): Promise<string> {
  await db.raw(
    `INSERT INTO episodes (organisation_id, programme_id, label) VALUES (?, ?, ?)
     ON CONFLICT (programme_id, lower(label)) DO NOTHING`,
    [organisationId, programmeId, label],
  );
  const row = await db('episodes')
    .where({ organisation_id: organisationId, programme_id: programmeId })
    .whereRaw('lower(label) = lower(?)', [label])
    .first<{ id: string } | undefined>('id');
  if (!row) throw new Error('An episode was neither found nor made');
  return row.id;
}

export async function findEpisodeLabel(db: Db, scope: Scope, episodeId: string): Promise<string | null> {
  const row = await db('episodes')
    .where('id', episodeId)
    .modify(within(scope, 'organisation_id'))
    .first<{ label: string } | undefined>('label');
  return row?.label ?? null;
}

export async function updateDetails(
  db: Db,
  scope: Scope,
  id: string,
  details: {
    programmeId?: string | null;
    episodeId?: string | null;
    versionLabel?: string;
    contentKind?: ContentKind;
  },
): Promise<void> {
  const changes = Object.fromEntries(
    Object.entries({
      programme_id: details.programmeId,
      episode_id: details.episodeId,
      version_label: details.versionLabel,
      content_kind: details.contentKind,
    }).filter(([, value]) => value !== undefined),
  );
  if (Object.keys(changes).length === 0) return;
  await db('deliverables').where('id', id).modify(within(scope, 'organisation_id')).update(changes);
}

/** Which of these channels the supplier has an agreement for now. */
export async function listAgreedChannels(
  db: Db,
  _scope: Scope,
  supplierId: string,
  channelIds: readonly string[],
): Promise<string[]> {
  const rows = await db('agreements as a')
    .join('channels as c', 'c.id', 'a.channel_id')
    .where('a.supplier_id', supplierId)
    .whereIn('a.channel_id', channelIds as string[])
    .whereNull('a.ended_at')
    .whereNull('c.archived_at')
    .distinct<{ channel_id: string }[]>('a.channel_id');
  return rows.map((row) => row.channel_id);
}

/** Channels that a deliverable is for, with whether a submission to it is open or was approved. */
export async function listChosenChannels(
  db: Db,
  scope: Scope,
  deliverableId: string,
): Promise<{ channelId: string; channelName: string; hasSubmission: boolean }[]> {
  const rows = await db('deliverable_channels as dc')
    .join('channels as c', 'c.id', 'dc.channel_id')
    .where('dc.deliverable_id', deliverableId)
    .modify(within(scope, 'dc.organisation_id'))
    .select<{ channel_id: string; name: string; has_submission: boolean }[]>(
      'dc.channel_id',
      'c.name',
      db.raw(`EXISTS (SELECT FROM submissions s WHERE s.deliverable_id = dc.deliverable_id AND s.channel_id = dc.channel_id
        AND s.state IN ('awaiting_review', 'approved', 'approved_with_waiver')) AS has_submission`),
    );
  return rows.map((row) => ({
    channelId: row.channel_id,
    channelName: row.name,
    hasSubmission: row.has_submission,
  }));
}

export async function addChannels(
  db: Db,
  _scope: Scope,
  organisationId: string,
  deliverableId: string,
  channelIds: readonly string[],
): Promise<void> {
  if (channelIds.length === 0) return;
  await db('deliverable_channels')
    .insert(
      channelIds.map((channelId) => ({
        deliverable_id: deliverableId,
        organisation_id: organisationId,
        channel_id: channelId,
      })),
    )
    .onConflict(['deliverable_id', 'channel_id'])
    .ignore();
}

export async function removeChannels(
  db: Db,
  scope: Scope,
  deliverableId: string,
  channelIds: readonly string[],
): Promise<void> {
  if (channelIds.length === 0) return;
  await db('deliverable_channels')
    .where('deliverable_id', deliverableId)
    .whereIn('channel_id', channelIds as string[])
    .modify(within(scope, 'organisation_id'))
    .delete();
}

/** Takes the verdicts from the row until it is judged anew: they were made for another kind of content. */
export async function unjudge(db: Db, scope: Scope, deliverableId: string): Promise<void> {
  await db('deliverable_channels')
    .where('deliverable_id', deliverableId)
    .modify(within(scope, 'organisation_id'))
    .update({ verdict_id: null });
}
