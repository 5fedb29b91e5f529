/** Channels of a distributor: what they are, which spec each kind of content is held to, and who may deliver. */
import type { z } from 'zod';
import type {
  ChannelRow,
  createAssignmentSchema,
  CreateAssignmentResult,
  createChannelSchema,
  patchChannelSchema,
} from '../../domain/api/specs.ts';
import { contentKindNames } from '../../domain/vocabulary.ts';
import { recordEvent } from '../db/audit-repository.ts';
import {
  deletePlannedAssignment,
  endAgreement,
  findChannel,
  findSupplier,
  insertAgreement,
  insertAssignment,
  insertChannel,
  listAgreements,
  listAssignments,
  listChannels as listRows,
  listSuppliers as listSupplierRows,
  lockOwnChannel,
  updateChannel,
  type AgreementRecord,
  type AssignmentRecord,
  type ChannelRecord,
} from '../db/channels-repository.ts';
import { db, inTransaction, type Db } from '../db/connection.ts';
import { hasVersionBy, lockOwnSpec } from '../db/specs-repository.ts';
import { listSuppliersOf } from '../db/verdicts-repository.ts';
import { publishEvent } from '../events.ts';
import { redis } from '../redis.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import { mayDo, type MemberScope } from '../scope.ts';
import { judgeDeliverables } from './judging.ts';
import { inThePast } from './specs.ts';

const noSuchChannel = refuse('not_found', 'There is no such channel.');
const nameTaken = (name: string) =>
  refuse('conflict', `There is a channel of the name ${name} already. Give this one another name.`, {
    name: 'This name is taken.',
  });

const toRow = (
  scope: MemberScope,
  channel: ChannelRecord,
  assignments: readonly AssignmentRecord[],
  agreements: readonly AgreementRecord[],
): ChannelRow => ({
  ...channel,
  assignments: assignments
    .filter(({ channelId }) => channelId === channel.id)
    .map(({ channelId: _channel, inForceFrom, ...rest }) => ({
      ...rest,
      inForceFrom: inForceFrom.toISOString(),
    })),
  agreements: agreements
    .filter(({ channelId }) => channelId === channel.id)
    .map(({ id, supplier, createdAt }) => ({ id, supplier, createdAt: createdAt.toISOString() })),
  editable: channel.organisation.id === scope.organisationId && mayDo(scope, 'channel:edit'),
});

/** The organisation's own channels and those that it may deliver to. */
export async function listChannels(scope: MemberScope): Promise<Answer<{ items: ChannelRow[] }>> {
  const no = lacking(scope, 'channel:read');
  if (no) return no;
  const channels = await listRows(db(), scope);
  const ids = channels.map(({ id }) => id);
  const [assignments, agreements] = await Promise.all([
    listAssignments(db(), scope, ids),
    listAgreements(db(), scope, ids),
  ]);
  return done({ items: channels.map((channel) => toRow(scope, channel, assignments, agreements)) });
}

async function readRow(at: Db, scope: MemberScope, id: string): Promise<Answer<ChannelRow>> {
  const channel = await findChannel(at, scope, id);
  if (!channel) return noSuchChannel;
  const assignments = await listAssignments(at, scope, [id]);
  return done(toRow(scope, channel, assignments, await listAgreements(at, scope, [id])));
}

export async function readChannel(scope: MemberScope, id: string): Promise<Answer<ChannelRow>> {
  return lacking(scope, 'channel:read') ?? readRow(db(), scope, id);
}

/** Tells the organisation, and every supplier with an agreement for the channel or a deliverable for it, after the commit. */
async function tellOf(scope: MemberScope, channelId: string, besides: readonly string[] = []): Promise<void> {
  const agreed = (await listAgreements(db(), scope, [channelId])).map(({ supplier }) => supplier.id);
  const delivering = await listSuppliersOf(db(), scope, [channelId]);
  await publishEvent(redis(), [scope.organisationId, ...agreed, ...delivering, ...besides], {
    kind: 'specs',
  });
}

export async function createChannel(
  scope: MemberScope,
  asked: z.output<typeof createChannelSchema>,
): Promise<Answer<ChannelRow>> {
  const no = lacking(scope, 'channel:edit');
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const id = await insertChannel(trx, scope, { organisationId: scope.organisationId, ...asked });
    if (!id) return nameTaken(asked.name);
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'channel.created',
      subjectKind: 'channel',
      subjectId: id,
      detail: { name: asked.name },
    });
    return readRow(trx, scope, id);
  });
  if (answer.ok) await tellOf(scope, answer.value.id);
  return answer;
}

export async function changeChannel(
  scope: MemberScope,
  id: string,
  changes: z.output<typeof patchChannelSchema>,
): Promise<Answer<ChannelRow>> {
  const no = lacking(scope, 'channel:edit');
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const channel = await lockOwnChannel(trx, scope, id);
    if (!channel) return noSuchChannel;
    if (!(await updateChannel(trx, scope, id, changes))) return nameTaken(changes.name ?? channel.name);
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'channel.changed',
      subjectKind: 'channel',
      subjectId: id,
      detail: { name: changes.name ?? channel.name, before: channel.name, changes },
    });
    return readRow(trx, scope, id);
  });
  if (answer.ok) await tellOf(scope, id);
  return answer;
}

/**
 * Holds a kind of content to a spec, at once or from a moment. At once, the kept measurements of the channel's deliverables
 * are judged anew in the same transaction; from a later moment, the sweep judges when it comes.
 */
export async function assignSpec(
  scope: MemberScope,
  channelId: string,
  asked: z.output<typeof createAssignmentSchema>,
): Promise<Answer<CreateAssignmentResult>> {
  const no = lacking(scope, 'channel:edit');
  if (no) return no;
  const inForceFrom = asked.inForceFrom === null ? null : new Date(asked.inForceFrom);
  const gone = inThePast(inForceFrom);
  if (gone) return gone;
  const answer = await inTransaction<CreateAssignmentResult>(async (trx) => {
    const channel = await lockOwnChannel(trx, scope, channelId);
    if (!channel) return noSuchChannel;
    const spec = await lockOwnSpec(trx, scope, asked.specId);
    if (!spec)
      return refuse('bad_input', 'Choose one of your own specs. Nothing was changed.', {
        specId: 'Choose one of your own specs.',
      });
    if (!(await hasVersionBy(trx, scope, spec.id, inForceFrom)))
      return refuse(
        'conflict',
        `${spec.name} has no version in force by then, so there would be nothing to judge by. Publish one first, or choose a later date.`,
        { specId: 'No version of this spec is in force by then.' },
      );
    const { organisationId, userId } = scope;
    const { contentKind } = asked;
    const made = { organisationId, channelId, contentKind, specId: spec.id, inForceFrom, by: userId };
    if (!(await insertAssignment(trx, scope, made)))
      return refuse(
        'conflict',
        `${contentKindNames[contentKind]} is assigned from that very moment already. Take that assignment back first, or choose another moment.`,
        { inForceFrom: 'There is an assignment from that very moment.' },
      );
    const judged = await judgeDeliverables(trx, scope, { channelIds: [channelId] });
    await recordEvent(trx, scope, {
      organisationId,
      action: 'channel.spec_assigned',
      subjectKind: 'channel',
      subjectId: channelId,
      detail: {
        name: channel.name,
        specName: spec.name,
        contentKind,
        inForceFrom: (inForceFrom ?? new Date()).toISOString(),
        ...judged,
      },
    });
    const row = await readRow(trx, scope, channelId);
    return row.ok ? done({ channel: row.value, ...judged }) : row;
  });
  if (answer.ok) await tellOf(scope, channelId);
  return answer;
}

/** Takes back an assignment that has not begun. What has begun is history: assign another spec instead. */
export async function takeBackAssignment(
  scope: MemberScope,
  channelId: string,
  assignmentId: string,
): Promise<Answer<ChannelRow>> {
  const no = lacking(scope, 'channel:edit');
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const channel = await lockOwnChannel(trx, scope, channelId);
    if (!channel) return noSuchChannel;
    const assignment = (await listAssignments(trx, scope, [channelId])).find(({ id }) => id === assignmentId);
    if (!assignment) return refuse('not_found', 'There is no such assignment.');
    if (!(await deletePlannedAssignment(trx, scope, assignmentId)))
      return refuse(
        'conflict',
        `${assignment.specName} has been in force since its date and cannot be taken back. Assign another spec to follow it.`,
      );
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'channel.assignment_taken_back',
      subjectKind: 'channel',
      subjectId: channelId,
      detail: {
        name: channel.name,
        specName: assignment.specName,
        contentKind: assignment.contentKind,
        inForceFrom: assignment.inForceFrom.toISOString(),
      },
    });
    return readRow(trx, scope, channelId);
  });
  if (answer.ok) await tellOf(scope, channelId);
  return answer;
}

export async function makeAgreement(
  scope: MemberScope,
  channelId: string,
  supplierId: string,
): Promise<Answer<ChannelRow>> {
  const no = lacking(scope, 'channel:edit');
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const channel = await lockOwnChannel(trx, scope, channelId);
    if (!channel) return noSuchChannel;
    const supplier = await findSupplier(trx, scope, supplierId);
    if (!supplier)
      return refuse('bad_input', 'There is no such supplier. Choose one of the list.', {
        supplierId: 'Choose one of the list.',
      });
    const { organisationId } = scope;
    if (!(await insertAgreement(trx, scope, { organisationId, channelId, supplierId })))
      return refuse('conflict', `${supplier.name} may deliver to ${channel.name} already.`);
    await recordEvent(trx, scope, {
      organisationId,
      counterpartId: supplierId,
      action: 'agreement.made',
      subjectKind: 'channel',
      subjectId: channelId,
      detail: { name: supplier.name, channelName: channel.name },
    });
    return readRow(trx, scope, channelId);
  });
  if (answer.ok) await tellOf(scope, channelId);
  return answer;
}

/** Ends an agreement: the supplier can submit no more. What they have submitted stays as it is. */
export async function endAgreementWith(
  scope: MemberScope,
  channelId: string,
  agreementId: string,
): Promise<Answer<ChannelRow>> {
  const no = lacking(scope, 'channel:edit');
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const channel = await lockOwnChannel(trx, scope, channelId);
    if (!channel) return noSuchChannel;
    const supplier = await endAgreement(trx, scope, { id: agreementId, channelId });
    if (!supplier) return refuse('not_found', 'There is no such agreement.');
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      counterpartId: supplier.id,
      action: 'agreement.ended',
      subjectKind: 'channel',
      subjectId: channelId,
      detail: { name: supplier.name, channelName: channel.name },
    });
    const row = await readRow(trx, scope, channelId);
    return row.ok ? done({ row: row.value, supplierId: supplier.id }) : row;
  });
  if (!answer.ok) return answer;
  await tellOf(scope, channelId, [answer.value.supplierId]);
  return done(answer.value.row);
}

/** Organisations that could be given leave to deliver. */
export async function listSuppliers(
  scope: MemberScope,
): Promise<Answer<{ items: { id: string; name: string }[] }>> {
  const no = lacking(scope, 'channel:edit');
  if (no) return no;
  return done({ items: await listSupplierRows(db(), scope) });
}
