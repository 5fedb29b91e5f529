import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { hashPassword } from '../../../src/server/auth/passwords.ts';
import { forgotPassword, readResetLink, resetPassword } from '../../../src/server/services/passwords.ts';
import { resumeSession, signIn } from '../../../src/server/services/sign-in.ts';
import { makeMember, makeOrganisation, openWorld, type World } from '../../factories/world.ts';

const from = { address: randomUUID(), userAgent: '' };
let world: World;
beforeAll(async () => {
  world = await openWorld();
});
afterAll(() => world.close());

async function somebody() {
  const organisation = await makeOrganisation(world.db, 'supplier');
  return makeMember(world.db, organisation, ['mix_engineer'], {
    passwordHash: await hashPassword('the old password'),
  });
}

const mailsTo = (email: string) =>
  world.db('mail_outbox').where('to_address', email).orderBy('created_at', 'desc');

async function tokenMailedTo(email: string): Promise<string> {
  const [mail] = await mailsTo(email);
  const token = /\/reset-password\/([\w-]+)/.exec(mail.text_body)?.[1];
  if (!token) throw new Error('no link in the mail');
  return token;
}

describe('a forgotten password', () => {
  it('is answered the same whether somebody has the address or not, and mails only somebody', async () => {
    const member = await somebody();
    const known = await forgotPassword(member.email.toUpperCase(), randomUUID());
    const unknown = await forgotPassword('nobody@people.example', randomUUID());
    expect(known).toEqual({ ok: true, value: null });
    expect(unknown).toEqual(known);
    expect(await mailsTo(member.email)).toHaveLength(1);
    expect(await mailsTo('nobody@people.example')).toHaveLength(0);
  });

  it('sets the new password once, ends every session, and leaves a trace', async () => {
    const member = await somebody();
    const before = await signIn(member.email, 'the old password', from);
    if (!before.ok) throw new Error('no session');
    await forgotPassword(member.email, randomUUID());
    const token = await tokenMailedTo(member.email);
    expect(await readResetLink(token)).toEqual({ ok: true, value: { email: member.email } });

    expect((await resetPassword(token, 'a quite new one')).ok).toBe(true);
    expect(await resumeSession(before.value.sessionId, before.value.sessionVersion)).toBeNull();
    expect((await signIn(member.email, 'the old password', from)).ok).toBe(false);
    expect((await signIn(member.email, 'a quite new one', from)).ok).toBe(true);
    expect(await resetPassword(token, 'and once again!!')).toMatchObject({ refusal: { code: 'gone' } });
    expect(await readResetLink(token)).toMatchObject({ refusal: { code: 'gone' } });
    const events = await world
      .db('audit_events')
      .where({ organisation_id: member.organisationId, action: 'member.password_reset' });
    expect(events).toHaveLength(1);
  });

  it('keeps the hash of the token only, for an hour', async () => {
    const member = await somebody();
    await forgotPassword(member.email, randomUUID());
    const token = await tokenMailedTo(member.email);
    const link = await world.db('one_time_links').where('user_id', member.userId).first();
    expect(JSON.stringify(link)).not.toContain(token);
    expect(link.token_hash).toHaveLength(32);
    const minutes = (link.expires_at.getTime() - link.created_at.getTime()) / 60_000;
    expect(minutes).toBeGreaterThan(59);
    expect(minutes).toBeLessThanOrEqual(60.1);
    await world
      .db('one_time_links')
      .where('id', link.id)
      .update({ expires_at: world.db.raw("now() - interval '1 second'") });
    expect(await resetPassword(token, 'a quite new one')).toMatchObject({ refusal: { code: 'gone' } });
  });

  it('refuses a short password and keeps the link for a better one', async () => {
    const member = await somebody();
    await forgotPassword(member.email, randomUUID());
    const token = await tokenMailedTo(member.email);
    expect(await resetPassword(token, 'short')).toMatchObject({
      refusal: { code: 'bad_input', fields: { password: 'Use 12 characters or more.' } },
    });
    expect((await resetPassword(token, 'long enough now')).ok).toBe(true);
  });

  it('makes an older link void when a newer one is asked for', async () => {
    const member = await somebody();
    await forgotPassword(member.email, randomUUID());
    const older = await tokenMailedTo(member.email);
    await forgotPassword(member.email, randomUUID());
    expect(await readResetLink(older)).toMatchObject({ refusal: { code: 'gone' } });
  });

  it('lets only one of two uses at once through', async () => {
    const member = await somebody();
    await forgotPassword(member.email, randomUUID());
    const token = await tokenMailedTo(member.email);
    const answers = await Promise.all([
      resetPassword(token, 'the first of two'),
      resetPassword(token, 'the second of two'),
    ]);
    expect(answers.filter((answer) => answer.ok)).toHaveLength(1);
  });

  it('does not fill a mailbox', async () => {
    const member = await somebody();
    const answers = [];
    for (let i = 0; i < 7; i += 1) answers.push(await forgotPassword(member.email, randomUUID()));
    expect(answers.filter((answer) => answer.ok)).toHaveLength(5);
    expect(answers.at(-1)).toMatchObject({ refusal: { code: 'too_many' } });
  });

  it.each(['', 'x', '../../etc', 'A'.repeat(44)])('knows no link of the token %j', async (token) => {
    expect(await readResetLink(token)).toMatchObject({ refusal: { code: 'gone' } });
  });
});
