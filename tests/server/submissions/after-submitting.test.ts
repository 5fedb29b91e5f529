import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { submissionReportSchema } from '../../../src/domain/api/submissions.ts';
import {
  addNote,
  getSubmissionReport,
  setSubmissionAirDate,
  withdrawSubmission,
} from '../../../src/server/services/submissions.ts';
import {
  figures,
  makeAgreement,
  makeAssignment,
  makeChain,
  makeChannel,
  makeDeliverable,
  openWorld,
  stereoFormat,
  type World,
} from '../../factories/world.ts';
import { codeOf, refusalOf, valueOf } from '../answers.ts';
import { actionsOn, failing, mailsAbout, makeSubmitted, passing, submit, type Chain } from './delivery.ts';

let world: World;
let chain: Chain;
let stranger: Chain;
beforeAll(async () => {
  world = await openWorld();
  stranger = await makeChain(world.db);
});
beforeEach(async () => {
  chain = await makeChain(world.db);
});
afterAll(() => world.close());

const stateOf = async (id: string): Promise<{ state: string; version: number }> =>
  world.db('submissions').where({ id }).first('state', 'version');

describe('delivering again', () => {
  const episode = { programmeTitle: 'Small Gales', episodeLabel: '2.12' };

  it('replaces what awaits review of the same episode, and shows the change', async () => {
    const first = await makeSubmitted(world.db, chain, {
      ...episode,
      figures: failing,
      airAt: '2026-12-05T09:00:00Z',
    });
    const second = await makeSubmitted(world.db, chain, { ...episode, figures: passing });
    expect(await stateOf(first.id)).toEqual({ state: 'replaced', version: 2 });
    expect(await actionsOn(world.db, first.id)).toEqual(['submission.submitted', 'submission.replaced']);
    expect((await mailsAbout(world.db, first.id)).map((mail) => mail.state)).toEqual(['cancelled']);
    const report = submissionReportSchema.parse(
      valueOf(await getSubmissionReport(chain.operator, second.id)),
    );
    expect(report.replaces).toEqual({
      id: first.id,
      submittedAt: first.submittedAt,
      figures: failing,
      outcome: 'fail',
    });
    expect(report.airAt).toBe('2026-12-05T09:00:00.000Z');
    expect((await world.db('deliverables').where('id', second.deliverableId).first()).replaces_id).toBe(
      first.deliverableId,
    );
  });

  it('is chained to a rejected delivery, which stays rejected', async () => {
    const first = await makeSubmitted(world.db, chain, episode);
    await world.db('submissions').where('id', first.id).update({
      state: 'rejected',
      decided_by: chain.operator.userId,
      decided_at: world.db.fn.now(),
      decision_reason: 'Too loud.',
    });
    const second = await makeSubmitted(world.db, chain, episode);
    expect((await stateOf(first.id)).state).toBe('rejected');
    expect(valueOf(await getSubmissionReport(chain.mixer, second.id)).replaces?.id).toBe(first.id);
  });

  it('follows the deliverable that it is said to replace, whatever both are called', async () => {
    const first = await makeSubmitted(world.db, chain);
    const made = await makeDeliverable(world.db, chain.mixer);
    await world.db('deliverables').where('id', made.id).update({ replaces_id: first.deliverableId });
    const second = valueOf(await submit(chain, made));
    expect((await stateOf(first.id)).state).toBe('replaced');
    expect(valueOf(await getSubmissionReport(chain.mixer, second.id)).replaces?.id).toBe(first.id);
  });

  it('leaves other layouts, versions, kinds, episodes, channels and suppliers alone', async () => {
    const { db } = world;
    const first = await makeSubmitted(db, chain, episode);
    await makeAssignment(db, chain.distributor, chain.channel, chain.spec.specId, { contentKind: 'trailer' });
    const second = await makeChannel(db, chain.distributor);
    await makeAssignment(db, chain.distributor, second, chain.spec.specId);
    await makeAgreement(db, chain.distributor, second, chain.supplier);
    const rival = { ...chain, mixer: stranger.mixer };
    await makeAgreement(db, chain.distributor, chain.channel, stranger.supplier);

    await makeSubmitted(db, chain, { ...episode, format: { ...stereoFormat, channels: 6, layout: '5.1' } });
    await makeSubmitted(db, chain, { ...episode, contentKind: 'trailer' });
    await makeSubmitted(db, chain, { ...episode, episodeLabel: '2.13' });
    await makeSubmitted(db, { ...chain, channel: second }, episode);
    await makeSubmitted(db, rival, episode);
    const foreign = await makeDeliverable(db, chain.mixer, episode);
    await db('deliverables').where('id', foreign.id).update({ version_label: 'M&E v1' });
    valueOf(await submit(chain, foreign));
    expect(await stateOf(first.id)).toEqual({ state: 'awaiting_review', version: 1 });

    const revised = await makeDeliverable(db, chain.mixer, episode);
    await db('deliverables').where('id', revised.id).update({ version_label: 'v2' });
    valueOf(await submit(chain, revised));
    expect((await stateOf(first.id)).state).toBe('replaced');
  });

  it('is not chained to what was withdrawn', async () => {
    const first = await makeSubmitted(world.db, chain, episode);
    valueOf(await withdrawSubmission(chain.mixer, first.id));
    const second = await makeSubmitted(world.db, chain, episode);
    expect(valueOf(await getSubmissionReport(chain.mixer, second.id)).replaces).toBeNull();
    expect((await stateOf(first.id)).state).toBe('withdrawn');
  });
});

describe('after submitting', () => {
  it('withdraws what awaits review, once, and only its supplier does', async () => {
    const { id } = await makeSubmitted(world.db, chain);
    expect(codeOf(await withdrawSubmission(stranger.mixer, id))).toBe('not_found');
    expect(codeOf(await withdrawSubmission(chain.operator, id))).toBe('forbidden');
    expect(valueOf(await withdrawSubmission(chain.mixer, id))).toMatchObject({
      state: 'withdrawn',
      version: 2,
    });
    expect(refusalOf(await withdrawSubmission(chain.mixer, id))).toMatchObject({
      code: 'conflict',
      message: expect.stringContaining('withdrawn'),
    });
    expect(await actionsOn(world.db, id)).toEqual(['submission.submitted', 'submission.withdrawn']);
  });

  it('sets and clears the air date', async () => {
    const { id } = await makeSubmitted(world.db, chain);
    const set = async (airAt: string | null) =>
      valueOf(await setSubmissionAirDate(chain.mixer, id, airAt)).airAt;
    expect(await set('2026-12-05T09:00:00+01:00')).toBe('2026-12-05T08:00:00.000Z');
    expect(await set(null)).toBeNull();
    expect(codeOf(await setSubmissionAirDate(stranger.mixer, id, null))).toBe('not_found');
    valueOf(await withdrawSubmission(chain.mixer, id));
    expect(codeOf(await setSubmissionAirDate(chain.mixer, id, null))).toBe('conflict');
  });

  it('takes notes of both sides, at times within the programme', async () => {
    const { id } = await makeSubmitted(world.db, chain);
    valueOf(await addNote(chain.operator, id, { text: 'Breath noise here.', atSeconds: 12.4 }));
    const answer = valueOf(
      await addNote(chain.mixer, id, { text: 'Meant so by the director.', atSeconds: null }),
    );
    const { notes } = submissionReportSchema.parse(valueOf(await getSubmissionReport(chain.mixer, id)));
    expect(notes).toMatchObject([
      {
        author: { name: chain.operator.userName },
        organisationName: chain.distributor.name,
        atSeconds: 12.4,
      },
      { author: { name: chain.mixer.userName }, organisationName: chain.supplier.name, atSeconds: null },
    ]);
    expect(notes[1]).toEqual(answer);
    expect(codeOf(await addNote(chain.mixer, id, { text: 'Late.', atSeconds: 90.5 }))).toBe('bad_input');
    expect(codeOf(await addNote(stranger.mixer, id, { text: 'Hello?', atSeconds: null }))).toBe('not_found');
    expect(codeOf(await addNote(chain.specOwner, id, { text: 'Hello?', atSeconds: null }))).toBe('forbidden');
  });

  it('is not there for a third organisation', async () => {
    const { id } = await makeSubmitted(world.db, chain, { figures: figures({ rangeLu: 20 }) });
    for (const scope of [stranger.mixer, stranger.operator, stranger.specOwner])
      expect(codeOf(await getSubmissionReport(scope, id))).toBe('not_found');
    expect(codeOf(await getSubmissionReport(chain.mixer, randomUUID()))).toBe('not_found');
  });
});
