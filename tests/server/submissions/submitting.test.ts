import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import {
  createSubmissionsResultSchema,
  submissionReportSchema,
  submissionRowSchema,
} from '../../../src/domain/api/submissions.ts';
import type { LiveEvent } from '../../../src/domain/api/people.ts';
import { closeEventsHub, listenToEvents } from '../../../src/server/events-hub.ts';
import { createSubmissions, getSubmissionReport } from '../../../src/server/services/submissions.ts';
import {
  makeAgreement,
  makeAssignment,
  makeChain,
  makeChannel,
  makeDeliverable,
  makeMember,
  makeSpecVersion,
  openWorld,
  r128Body,
  type World,
} from '../../factories/world.ts';
import { codeOf, firstOf, refusalOf, valueOf } from '../answers.ts';
import { actionsOn, failing, mailsAbout, makeSubmitted, submit, type Chain } from './delivery.ts';

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
afterAll(async () => {
  closeEventsHub();
  await world.close();
});

describe('submitting', () => {
  it('freezes hash, measurement, spec version and verdict together, and both sides read it', async () => {
    const made = await makeDeliverable(world.db, chain.mixer, {
      channelIds: [chain.channel.id],
      figures: failing,
      programmeTitle: 'The Tallow Road',
      episodeLabel: '1.04',
    });
    const row = submissionRowSchema.parse(valueOf(await submit(chain, made, '2026-12-04T18:00:00Z')));
    expect(row).toMatchObject({
      state: 'awaiting_review',
      version: 1,
      deliverableId: made.id,
      programmeTitle: 'The Tallow Road',
      supplier: { id: chain.supplier.id },
      distributor: { id: chain.distributor.id },
      specVersionNumber: 1,
      verdict: { outcome: 'fail' },
      airAt: '2026-12-04T18:00:00.000Z',
      decidedBy: null,
    });
    const frozen = await world.db('submissions').where('id', row.id).first();
    expect(frozen).toMatchObject({
      sha256: made.sha256,
      measurement_id: made.measurementId,
      spec_version_id: chain.spec.id,
    });
    for (const scope of [chain.mixer, chain.operator, chain.specOwner])
      expect(codeOf(await getSubmissionReport(scope, row.id))).toBe('ok');
    expect(await actionsOn(world.db, row.id)).toEqual(['submission.submitted']);
    const audit = await world.db('audit_events').where('subject_id', row.id).first();
    expect(audit).toMatchObject({
      organisation_id: chain.supplier.id,
      counterpart_id: chain.distributor.id,
      actor_id: chain.mixer.userId,
    });
  });

  it('mails every QC operator of the distributor, and nobody else', async () => {
    const second = await makeMember(world.db, chain.distributor, ['qc_operator', 'administrator']);
    const { id } = await makeSubmitted(world.db, chain);
    const mails = await mailsAbout(world.db, id);
    expect(mails.map((mail) => mail.to_address).sort()).toEqual([chain.operator.email, second.email].sort());
    expect(mails[0]).toMatchObject({ kind: 'submission_received', state: 'queued' });
    expect(mails[0].text_body).toContain(`/review/${id}`);
  });

  it('judges by the version in force at that moment, and keeps it when a newer one comes', async () => {
    const made = await makeDeliverable(world.db, chain.mixer, { channelIds: [chain.channel.id] });
    const second = await makeSpecVersion(world.db, chain.distributor, {
      specId: chain.spec.specId,
      inForceFrom: new Date('2026-02-01T00:00:00Z'),
    });
    const row = valueOf(await submit(chain, made));
    expect(row.specVersionNumber).toBe(2);
    const stricter = {
      ...r128Body,
      rules: r128Body.rules.map((rule) => (rule.kind === 'integrated' ? { ...rule, targetLufs: -16 } : rule)),
    };
    await makeSpecVersion(world.db, chain.distributor, {
      specId: chain.spec.specId,
      body: stricter,
      inForceFrom: new Date('2026-03-01T00:00:00Z'),
    });
    const report = submissionReportSchema.parse(valueOf(await getSubmissionReport(chain.operator, row.id)));
    expect(report).toMatchObject({
      specVersionId: second.id,
      verdict: { outcome: 'pass' },
      underNewer: { specVersionNumber: 3, outcome: 'fail' },
    });
    expect(report.specBody).toEqual(r128Body);
  });

  it('says nothing of a newer version while none is in force', async () => {
    const { id } = await makeSubmitted(world.db, chain);
    await makeSpecVersion(world.db, chain.distributor, {
      specId: chain.spec.specId,
      inForceFrom: new Date('2126-01-01T00:00:00Z'),
    });
    expect(valueOf(await getSubmissionReport(chain.operator, id)).underNewer).toBeNull();
  });

  it('answers each item by itself, also when the same is asked twice at once', async () => {
    const [one, two] = [
      await makeDeliverable(world.db, chain.mixer),
      await makeDeliverable(world.db, chain.mixer),
    ];
    const theirs = await makeDeliverable(world.db, stranger.mixer);
    const ask = [one, theirs, two, one].map(({ id }) => ({
      deliverableId: id,
      channelId: chain.channel.id,
      airAt: null,
    }));
    const { items } = createSubmissionsResultSchema.parse(valueOf(await createSubmissions(chain.mixer, ask)));
    expect(items.map((item) => item.id)).toEqual(
      ask.map((item) => `${item.deliverableId}/${item.channelId}`),
    );
    expect(items.map((item) => (item.ok ? 'ok' : item.error.code))).toEqual([
      'ok',
      'not_found',
      'ok',
      'conflict',
    ]);
    const three = await makeDeliverable(world.db, chain.mixer);
    const both = await Promise.all([submit(chain, three), submit(chain, three)]);
    expect(both.map(codeOf).sort()).toEqual(['conflict', 'ok']);
  });

  it('tells the open pages of both sides after it is written', async () => {
    const listen = async (organisationId: string) => {
      const heard: LiveEvent[] = [];
      let stop = () => {};
      let ready = Promise.resolve();
      const first = new Promise<void>((resolve) => {
        const onEvent = (event: LiveEvent) => {
          heard.push(event);
          resolve();
        };
        ({ stop, ready } = listenToEvents(organisationId, { onEvent, onGap: () => {} }));
      });
      await ready;
      return { heard, first, stop };
    };
    const sides = [await listen(chain.supplier.id), await listen(chain.distributor.id)];
    const { id } = await makeSubmitted(world.db, chain);
    await Promise.all(sides.map((side) => side.first));
    for (const side of sides) side.stop();
    const event = { kind: 'submission', id, state: 'awaiting_review', version: 1 };
    expect(sides.map((side) => side.heard)).toEqual([[event], [event]]);
  });
});

describe('what is not submitted', () => {
  it.each([
    ['uploading', /being uploaded/],
    ['waiting', /waits to be measured/],
    ['measuring', /being measured/],
  ])('refuses what is %s', async (state, message) => {
    const made = await makeDeliverable(world.db, chain.mixer);
    await world.db('deliverables').where('id', made.id).update({ state });
    expect(refusalOf(await submit(chain, made))).toMatchObject({
      code: 'conflict',
      message: expect.stringMatching(message),
    });
  });

  it('refuses what is unreadable, with the reason', async () => {
    const made = await makeDeliverable(world.db, chain.mixer);
    await world
      .db('deliverables')
      .where('id', made.id)
      .update({ state: 'unreadable', reason_code: 'empty', reason: 'It holds no audio.' });
    expect(refusalOf(await submit(chain, made)).message).toContain('It holds no audio.');
  });

  it('refuses a kind of content for which the channel has no spec in force', async () => {
    const made = await makeDeliverable(world.db, chain.mixer, { contentKind: 'music_programme' });
    expect(refusalOf(await submit(chain, made))).toMatchObject({
      code: 'conflict',
      message: expect.stringMatching(/no delivery spec in force/),
    });
    await makeAssignment(world.db, chain.distributor, chain.channel, chain.spec.specId, {
      contentKind: 'music_programme',
      inForceFrom: new Date('2126-01-01T00:00:00Z'),
    });
    expect(codeOf(await submit(chain, made))).toBe('conflict');
    expect(await world.db('submissions').where('deliverable_id', made.id)).toEqual([]);
  });

  it('knows no channel that the supplier never had an agreement for, and says when one has ended', async () => {
    const made = await makeDeliverable(world.db, chain.mixer);
    const channel = await makeChannel(world.db, chain.distributor);
    await makeAssignment(world.db, chain.distributor, channel, chain.spec.specId);
    const to = { ...chain, channel };
    expect(codeOf(await submit(to, made))).toBe('not_found');
    const agreement = await makeAgreement(world.db, chain.distributor, channel, chain.supplier);
    await world.db('agreements').where('id', agreement).update({ ended_at: world.db.fn.now() });
    expect(refusalOf(await submit(to, made))).toMatchObject({
      code: 'conflict',
      message: expect.stringMatching(/agreement .* has ended/),
    });
    await makeAgreement(world.db, chain.distributor, channel, chain.supplier);
    expect(codeOf(await submit(to, made))).toBe('ok');
  });

  it('refuses what awaits review or is approved at that channel already, and takes it again once rejected', async () => {
    const row = await makeSubmitted(world.db, chain);
    const again = () => submit(chain, { id: row.deliverableId });
    expect(refusalOf(await again()).message).toMatch(/awaits review .* already/);
    const decided = {
      decided_by: chain.operator.userId,
      decided_at: world.db.fn.now(),
      decision_reason: 'Too wide.',
    };
    await world
      .db('submissions')
      .where('id', row.id)
      .update({ state: 'approved', ...decided });
    expect(refusalOf(await again()).message).toMatch(/approved .* already/);
    await world
      .db('submissions')
      .where('id', row.id)
      .update({ state: 'rejected', ...decided });
    expect(codeOf(await again())).toBe('ok');
  });

  it('refuses everybody but mix engineers of the supplier', async () => {
    const made = await makeDeliverable(world.db, chain.mixer);
    const administrator = await makeMember(world.db, chain.supplier, ['administrator']);
    for (const scope of [administrator, chain.operator])
      expect(
        codeOf(
          await createSubmissions(scope, [
            { deliverableId: made.id, channelId: chain.channel.id, airAt: null },
          ]),
        ),
      ).toBe('forbidden');
    const foreign = await createSubmissions(stranger.mixer, [
      { deliverableId: made.id, channelId: chain.channel.id, airAt: null },
    ]);
    expect(codeOf(firstOf(foreign))).toBe('not_found');
  });
});
