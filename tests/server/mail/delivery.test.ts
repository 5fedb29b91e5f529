import nodemailer from 'nodemailer';
import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { db } from '../../../src/server/db/connection.ts';
import { backoffSeconds, maximumAttempts, sendNextMail } from '../../../src/server/mail/delivery.ts';
import { cancelMailAbout, queueMail } from '../../../src/server/mail/outbox.ts';
import {
  figures,
  makeChain,
  makeDeliverable,
  makeSubmission,
  makeVerdict,
  openWorld,
  type World,
} from '../../factories/world.ts';
import { openInbox, type Inbox } from './inbox.ts';

let world: World;
let inbox: Inbox;
let transport: ReturnType<typeof nodemailer.createTransport>;

beforeAll(async () => {
  world = await openWorld();
});
afterAll(() => world.close());
beforeEach(async () => {
  await world.db('mail_outbox').delete();
  inbox = await openInbox();
  transport = nodemailer.createTransport(inbox.url);
});
afterEach(async () => {
  transport.close();
  await inbox.close();
});

const token = 'T'.repeat(43);
const queue = (to: string, more: { sendAfter?: Date } = {}) =>
  queueMail(db(), {
    organisationId: null,
    kind: 'password_reset',
    to,
    model: { name: 'Maren', token, expiresAt: new Date() },
    ...more,
  });
const row = () => world.db('mail_outbox').first();
const makeDue = () => world.db('mail_outbox').update({ send_after: world.db.fn.now() });

describe('the outbox', () => {
  it('reaches the inbox with both bodies, the sender, and the Message-ID of its row', async () => {
    await queue('maren@people.example');
    const before = await row();
    expect(await sendNextMail(transport)).toBe('sent');
    const [mail] = inbox.mails;
    expect(mail.to).toMatchObject({ text: 'maren@people.example' });
    expect(mail.from?.text).toContain('no-reply@plimsoll.example');
    expect(mail.messageId).toBe(before.message_id);
    expect(mail.text).toContain(`http://plimsoll.example/reset-password/${token}`);
    expect(mail.html).toContain(`http://plimsoll.example/reset-password/${token}`);
    expect(await sendNextMail(transport)).toBe('none');
    expect(inbox.mails).toHaveLength(1);
  });

  it('does not keep a one-time link once it was sent', async () => {
    await queue('maren@people.example');
    await sendNextMail(transport);
    expect(await row()).toMatchObject({ state: 'sent', text_body: '', html_body: '' });
  });

  it('takes back a mail with the transaction that queued it', async () => {
    await expect(
      db().transaction(async (trx) => {
        await queueMail(trx, {
          organisationId: null,
          kind: 'password_reset',
          to: 'a@people.example',
          model: { name: 'A', token, expiresAt: new Date() },
        });
        throw new Error('rolled back');
      }),
    ).rejects.toThrow('rolled back');
    expect(await sendNextMail(transport)).toBe('none');
  });

  it('waits until a mail is due', async () => {
    await queue('a@people.example', { sendAfter: new Date(Date.now() + 60_000) });
    expect(await sendNextMail(transport)).toBe('none');
    await makeDue();
    expect(await sendNextMail(transport)).toBe('sent');
  });

  it('tries again later under the same Message-ID while the server says not now', async () => {
    await queue('a@people.example');
    const before = await row();
    inbox.refuseWith(451);
    expect(await sendNextMail(transport)).toBe('retry');
    const after = await row();
    expect(after).toMatchObject({ state: 'queued', attempts: 1, message_id: before.message_id });
    expect(after.last_error).toContain('not taken');
    const wait = (after.send_after.getTime() - Date.now()) / 1000;
    expect(wait).toBeGreaterThan(backoffSeconds(1) - 3);
    expect(wait).toBeLessThanOrEqual(backoffSeconds(1));
    expect(await sendNextMail(transport)).toBe('none');
    inbox.refuseWith(null);
    await makeDue();
    expect(await sendNextMail(transport)).toBe('sent');
    expect(inbox.mails[0].messageId).toBe(before.message_id);
  });

  it('outlives a mail server that is not there', async () => {
    await queue('a@people.example');
    await inbox.close();
    expect(await sendNextMail(transport)).toBe('retry');
    inbox = await openInbox(inbox.port);
    await makeDue();
    expect(await sendNextMail(transport)).toBe('sent');
    expect(inbox.mails).toHaveLength(1);
  });

  it('gives up after eight tries, and at once on a final no', async () => {
    await queue('a@people.example');
    inbox.refuseWith(451);
    const outcomes = [];
    for (let i = 0; i < maximumAttempts; i += 1) {
      await makeDue();
      outcomes.push(await sendNextMail(transport));
    }
    expect(outcomes).toEqual([...Array(maximumAttempts - 1).fill('retry'), 'failed']);
    expect(await row()).toMatchObject({ state: 'failed', attempts: maximumAttempts });
    await world.db('mail_outbox').delete();
    await queue('nobody@people.example');
    inbox.refuseWith(550);
    expect(await sendNextMail(transport)).toBe('failed');
    expect(await row()).toMatchObject({ state: 'failed', attempts: 1 });
  });

  it('is emptied by several workers at once without sending anything twice', async () => {
    for (let i = 0; i < 12; i += 1) await queue(`p${i}@people.example`);
    const worker = async () => {
      while ((await sendNextMail(transport)) !== 'none');
    };
    await Promise.all([worker(), worker(), worker(), worker()]);
    const to = inbox.mails.map((mail) => [mail.to].flat()[0]?.text);
    expect(to.sort()).toEqual(Array.from({ length: 12 }, (_, i) => `p${i}@people.example`).sort());
  });

  it('sends the mail of a worker that died before it could say so once more, under the same Message-ID', async () => {
    await queue('a@people.example');
    await world.db
      .raw(`CREATE OR REPLACE FUNCTION fail_once() RETURNS trigger LANGUAGE plpgsql AS $$ BEGIN RAISE EXCEPTION 'worker died'; END $$;
      CREATE TRIGGER dies BEFORE UPDATE ON mail_outbox FOR EACH ROW EXECUTE FUNCTION fail_once()`);
    await expect(sendNextMail(transport)).rejects.toThrow('worker died');
    await world.db.raw('DROP TRIGGER dies ON mail_outbox');
    expect(await sendNextMail(transport)).toBe('sent');
    expect(inbox.mails).toHaveLength(2);
    expect(inbox.mails[0].messageId).toBe(inbox.mails[1].messageId);
  });

  it('cancels what is still waiting about a submission whose decision was taken back', async () => {
    const chain = await makeChain(world.db);
    const deliverable = await makeDeliverable(world.db, chain.mixer, {
      figures: figures(),
      channelIds: [chain.channel.id],
    });
    const verdictId = await makeVerdict(world.db, chain.mixer, deliverable, chain.spec.id);
    const submissionId = await makeSubmission(world.db, chain.mixer, deliverable, {
      distributor: chain.distributor,
      channel: chain.channel,
      specVersionId: chain.spec.id,
      verdictId,
    });
    await queueMail(db(), {
      organisationId: chain.distributor.id,
      kind: 'submission_approved',
      to: chain.mixer.email,
      model: {
        submissionId,
        deliverableId: deliverable.id,
        fileName: deliverable.fileName,
        programmeTitle: null,
        episodeLabel: null,
        channelName: chain.channel.name,
        distributorName: chain.distributor.name,
        waivers: [],
      },
      submissionId,
    });
    expect(await cancelMailAbout(db(), submissionId, ['submission_approved', 'submission_rejected'])).toBe(1);
    expect(await sendNextMail(transport)).toBe('none');
    expect(inbox.mails).toHaveLength(0);
  });
});
