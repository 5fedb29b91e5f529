/** Delivery specs: read, drafted, published. A published version is never changed; a change is the next version. */
import type { z } from 'zod';
import type {
  createSpecSchema,
  PublishSpecResult,
  publishSpecSchema,
  saveDraftSchema,
  SpecDetail,
  SpecRow,
  StartingSpecList,
} from '../../domain/api/specs.ts';
import { findStartingSpec, plainBody, startingSpecs } from '../../domain/starting-specs.ts';
import { recordEvent } from '../db/audit-repository.ts';
import { db, inTransaction, type Db } from '../db/connection.ts';
import {
  deleteDraft,
  findDraft,
  findSpec,
  insertSpec,
  listSpecs as listRows,
  listSuppliersUnder,
  listUses,
  listVersions,
  lockOwnSpec,
  publishDraft,
  writeDraft,
  type SpecRecord,
  type SpecUse,
  type VersionRecord,
} from '../db/specs-repository.ts';
import { listSuppliersOf } from '../db/verdicts-repository.ts';
import { publishEvent } from '../events.ts';
import { redis } from '../redis.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import { mayDo, type MemberScope } from '../scope.ts';
import { judgeDeliverables } from './judging.ts';

const noSuchSpec = refuse('not_found', 'There is no such spec.');

const isEditable = (scope: MemberScope, spec: SpecRecord): boolean =>
  spec.organisation.id === scope.organisationId && mayDo(scope, 'spec:edit');

const toVersion = (version: VersionRecord): SpecDetail['versions'][number] => ({
  id: version.id,
  number: version.number,
  body: version.body,
  changeNote: version.changeNote,
  createdBy: version.createdBy,
  updatedAt: version.updatedAt.toISOString(),
  publishedBy: version.publishedBy,
  publishedAt: version.publishedAt?.toISOString() ?? null,
  inForceFrom: version.inForceFrom?.toISOString() ?? null,
});

function toRow(spec: SpecRecord, versions: readonly VersionRecord[], uses: readonly SpecUse[]): SpecRow {
  const own = versions.filter((version) => version.specId === spec.id);
  const current = own.find((version) => version.isCurrent);
  return {
    ...spec,
    current: current ? toVersion(current) : null,
    hasDraft: own.some((version) => version.number === null),
    usedBy: uses
      .filter((use) => use.specId === spec.id)
      .map(({ channelId, channelName, contentKind }) => ({ channelId, channelName, contentKind })),
  };
}

/** The organisation's own specs and those of the channels that it may deliver to. */
export async function listSpecs(scope: MemberScope): Promise<Answer<{ items: SpecRow[] }>> {
  const no = lacking(scope, 'spec:read');
  if (no) return no;
  const specs = await listRows(db(), scope);
  const ids = specs.map(({ id }) => id);
  const [versions, uses] = await Promise.all([
    listVersions(db(), scope, ids, { drafts: mayDo(scope, 'spec:edit') }),
    listUses(db(), scope, ids),
  ]);
  return done({ items: specs.map((spec) => toRow(spec, versions, uses)) });
}

async function readDetail(at: Db, scope: MemberScope, id: string): Promise<SpecDetail | null> {
  const spec = await findSpec(at, scope, id);
  if (!spec) return null;
  const editable = isEditable(scope, spec);
  const versions = await listVersions(at, scope, [id], { drafts: editable });
  const uses = await listUses(at, scope, [id]);
  return { ...toRow(spec, versions, uses), versions: versions.map(toVersion), editable };
}

export async function readSpec(scope: MemberScope, id: string): Promise<Answer<SpecDetail>> {
  const no = lacking(scope, 'spec:read');
  if (no) return no;
  const detail = await readDetail(db(), scope, id);
  return detail ? done(detail) : noSuchSpec;
}

export async function listStartingSpecs(scope: MemberScope): Promise<Answer<StartingSpecList>> {
  const no = lacking(scope, 'spec:edit');
  if (no) return no;
  return done({
    items: startingSpecs.map(({ id, name, contentKinds, body }) => ({
      id,
      name,
      contentKinds: [...contentKinds],
      body,
    })),
  });
}

/** Makes a spec with a draft: from a published document, a given body, or a first plain one. */
export async function createSpec(
  scope: MemberScope,
  asked: z.output<typeof createSpecSchema>,
): Promise<Answer<SpecDetail>> {
  const no = lacking(scope, 'spec:edit');
  if (no) return no;
  const starting = asked.startingSpecId === undefined ? null : findStartingSpec(asked.startingSpecId);
  if (asked.startingSpecId !== undefined && !starting)
    return refuse('bad_input', 'There is no such starting spec. Nothing was made; choose one of the list.', {
      startingSpecId: 'Choose one of the list.',
    });
  const body = asked.body ?? starting?.body ?? plainBody;
  const answer = await inTransaction(async (trx) => {
    const { organisationId, userId } = scope;
    const id = await insertSpec(trx, scope, { organisationId, name: asked.name, createdBy: userId });
    if (!id)
      return refuse(
        'conflict',
        `There is a spec of the name ${asked.name} already. Give this one another name.`,
        {
          name: 'This name is taken.',
        },
      );
    const changeNote = starting ? `From ${starting.name}` : '';
    await writeDraft(trx, scope, { organisationId, specId: id, body, changeNote, by: userId });
    await recordEvent(trx, scope, {
      organisationId,
      action: 'spec.created',
      subjectKind: 'spec',
      subjectId: id,
      detail: { name: asked.name, ...(starting && { startingSpec: starting.name }) },
    });
    const detail = await readDetail(trx, scope, id);
    return detail ? done(detail) : noSuchSpec;
  });
  if (answer.ok) await publishEvent(redis(), [scope.organisationId], { kind: 'specs' });
  return answer;
}

type Draft = Awaited<ReturnType<typeof findDraft>>;

/** A refusal where the draft is not the one that the writer saw. Times are held against each other in milliseconds. */
function changedSince(draft: Draft, seen: string | null | undefined): Answer<never> | null {
  if (seen === undefined) return null;
  const there = draft ? draft.updatedAt.getTime() : null;
  if (there === (seen === null ? null : new Date(seen).getTime())) return null;
  return refuse(
    'conflict',
    draft
      ? `${draft.byName ?? 'Somebody'} saved this draft after you opened it. Nothing was written; what you typed is still on your page. Open the draft anew to see theirs.`
      : 'The draft was published or discarded after you opened it. Nothing was written; what you typed is still on your page. Open the spec anew.',
  );
}

export async function saveDraft(
  scope: MemberScope,
  id: string,
  { body, changeNote, seenUpdatedAt }: z.output<typeof saveDraftSchema>,
): Promise<Answer<SpecDetail>> {
  const no = lacking(scope, 'spec:edit');
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const spec = await lockOwnSpec(trx, scope, id);
    if (!spec) return noSuchSpec;
    const changed = changedSince(await findDraft(trx, scope, id), seenUpdatedAt);
    if (changed) return changed;
    const { organisationId, userId } = scope;
    await writeDraft(trx, scope, { organisationId, specId: id, body, changeNote, by: userId });
    const detail = await readDetail(trx, scope, id);
    return detail ? done(detail) : noSuchSpec;
  });
  if (answer.ok) await publishEvent(redis(), [scope.organisationId], { kind: 'specs' });
  return answer;
}

export async function discardDraft(scope: MemberScope, id: string): Promise<Answer<SpecDetail>> {
  const no = lacking(scope, 'spec:edit');
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const spec = await lockOwnSpec(trx, scope, id);
    if (!spec) return noSuchSpec;
    if (!(await deleteDraft(trx, scope, id)))
      return refuse('conflict', `${spec.name} has no draft. Nothing was changed.`);
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'spec.draft_discarded',
      subjectKind: 'spec',
      subjectId: id,
      detail: { name: spec.name },
    });
    const detail = await readDetail(trx, scope, id);
    return detail ? done(detail) : noSuchSpec;
  });
  if (answer.ok) await publishEvent(redis(), [scope.organisationId], { kind: 'specs' });
  return answer;
}

/** A refusal for a moment that has gone by. */
export const inThePast = (moment: Date | null): Answer<never> | null =>
  moment && moment.getTime() < Date.now()
    ? refuse('bad_input', 'This moment has gone by. Choose one to come, or "at once". Nothing was changed.', {
        inForceFrom: 'This moment has gone by.',
      })
    : null;

/**
 * Publishes the draft as the next version, in force at once or from a moment. At once, every kept measurement that is held
 * to this spec is judged anew in the same transaction; from a later moment, the sweep judges when it comes.
 */
export async function publishSpec(
  scope: MemberScope,
  id: string,
  asked: z.output<typeof publishSpecSchema>,
): Promise<Answer<PublishSpecResult>> {
  const no = lacking(scope, 'spec:edit');
  if (no) return no;
  const inForceFrom = asked.inForceFrom === null ? null : new Date(asked.inForceFrom);
  const gone = inThePast(inForceFrom);
  if (gone) return gone;
  const answer = await inTransaction(async (trx) => {
    const spec = await lockOwnSpec(trx, scope, id);
    if (!spec) return noSuchSpec;
    const draft = await findDraft(trx, scope, id);
    const changed = changedSince(draft, asked.seenUpdatedAt);
    if (changed) return changed;
    if (!draft) return refuse('conflict', `${spec.name} has no draft to publish. Write and save one first.`);
    const number = await publishDraft(trx, scope, {
      draftId: draft.id,
      specId: id,
      by: scope.userId,
      inForceFrom,
    });
    const judged = await judgeDeliverables(trx, scope, { specIds: [id] });
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'spec.published',
      subjectKind: 'spec',
      subjectId: id,
      detail: { name: spec.name, number, inForceFrom: (inForceFrom ?? new Date()).toISOString(), ...judged },
    });
    const detail = await readDetail(trx, scope, id);
    if (!detail) return noSuchSpec;
    const channelIds = detail.usedBy.map(({ channelId }) => channelId);
    const told = [
      ...(await listSuppliersUnder(trx, scope, id)),
      ...(await listSuppliersOf(trx, scope, channelIds)),
    ];
    return done({ result: { spec: detail, ...judged }, told });
  });
  if (!answer.ok) return answer;
  await publishEvent(redis(), [scope.organisationId, ...answer.value.told], { kind: 'specs' });
  return done(answer.value.result);
}
