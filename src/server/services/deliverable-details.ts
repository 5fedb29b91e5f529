/** Says what a deliverable is and which channels it is for. */
import type { DeliverableDetails } from '../../domain/api/deliverables.ts';
import type { Db } from '../db/connection.ts';
import {
  addChannels,
  findEpisodeLabel,
  findOrMakeEpisode,
  findOrMakeProgramme,
  listAgreedChannels,
  listChosenChannels,
  removeChannels,
  unjudge,
  updateDetails,
} from '../db/deliverable-details-repository.ts';
import { findDeliverableCore, type DeliverableCore } from '../db/deliverable-writes-repository.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { Scope } from '../scope.ts';

/**
 * Sets the given details and leaves the others; titles and labels that do not exist yet are made. Runs in the caller's
 * transaction, which judges anew afterwards when kind or channels changed (judgeDeliverables).
 */
export async function setDeliverableDetails(
  trx: Db,
  scope: Scope,
  id: string,
  details: DeliverableDetails,
): Promise<Answer<{ id: string }>> {
  const no = lacking(scope, 'deliverable:upload');
  if (no) return no;
  const deliverable = await findDeliverableCore(trx, scope, id);
  if (!deliverable) return refuse('not_found', 'There is no such deliverable.');

  const named = await resolveNames(trx, scope, deliverable, details);
  if (!named.ok) return named;
  if (details.channelIds) {
    const chosen = await chooseChannels(trx, scope, deliverable, details.channelIds);
    if (!chosen.ok) return chosen;
  }
  if (details.contentKind && details.contentKind !== deliverable.contentKind) await unjudge(trx, scope, id);
  const { versionLabel, contentKind } = details;
  await updateDetails(trx, scope, id, { ...named.value, versionLabel, contentKind });
  return done({ id });
}

/** Titles to rows. An episode belongs to its programme: with another programme its label moves along. */
async function resolveNames(
  trx: Db,
  scope: Scope,
  { organisationId, programmeId: programmeNow, episodeId: episodeNow }: DeliverableCore,
  { programmeTitle, episodeLabel }: DeliverableDetails,
): Promise<Answer<{ programmeId?: string | null; episodeId?: string | null }>> {
  if (programmeTitle === undefined && episodeLabel === undefined) return done({});
  const title = programmeTitle?.trim();
  const label = episodeLabel?.trim();
  if (programmeTitle !== undefined && !title) {
    if (label)
      return refuse('bad_input', 'An episode needs its programme. Give the programme too.', {
        programmeTitle: 'Give the programme.',
      });
    return done({ programmeId: null, episodeId: null });
  }
  const programmeId = title ? await findOrMakeProgramme(trx, scope, organisationId, title) : programmeNow;
  if (episodeLabel !== undefined) {
    if (!label) return done({ programmeId, episodeId: null });
    if (!programmeId)
      return refuse('bad_input', 'An episode needs its programme. Give the programme too.', {
        programmeTitle: 'Give the programme.',
      });
    return done({
      programmeId,
      episodeId: await findOrMakeEpisode(trx, scope, organisationId, programmeId, label),
    });
  }
  if (programmeId === programmeNow || !programmeId || !episodeNow) return done({ programmeId });
  const kept = await findEpisodeLabel(trx, scope, episodeNow);
  return done({
    programmeId,
    episodeId: kept && (await findOrMakeEpisode(trx, scope, organisationId, programmeId, kept)),
  });
}

async function chooseChannels(
  trx: Db,
  scope: Scope,
  { id, organisationId }: DeliverableCore,
  channelIds: readonly string[],
): Promise<Answer<null>> {
  const wanted = [...new Set(channelIds)];
  const chosen = await listChosenChannels(trx, scope, id);
  const added = wanted.filter((channelId) => !chosen.some((c) => c.channelId === channelId));
  const agreed = await listAgreedChannels(trx, scope, organisationId, added);
  if (agreed.length < added.length)
    return refuse(
      'bad_input',
      'You have no agreement for one of these channels now. Choose among those in the list.',
      {
        channelIds: 'One of these channels has no agreement with you.',
      },
    );
  const dropped = chosen.filter((c) => !wanted.includes(c.channelId));
  const held = dropped.find((c) => c.hasSubmission);
  if (held)
    return refuse(
      'conflict',
      `It is submitted to ${held.channelName}, so that channel stays. Withdraw the submission first.`,
      {
        channelIds: `Submitted to ${held.channelName}.`,
      },
    );
  await removeChannels(
    trx,
    scope,
    id,
    dropped.map((c) => c.channelId),
  );
  await addChannels(trx, scope, organisationId, id, added);
  return done(null);
}
