import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { hashPassword } from '../../../src/server/auth/passwords.ts';
import { resumeSession, signIn } from '../../../src/server/services/sign-in.ts';
import { listActivity } from '../../../src/server/services/activity.ts';
import {
  acceptInvitation,
  invite,
  readInvitation,
  takeBackInvitation,
} from '../../../src/server/services/invitations.ts';
import { endSessions, listMembers, removeMember, setRoles } from '../../../src/server/services/members.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import {
  makeMember,
  makeOrganisation,
  openWorld,
  type MadeOrganisation,
  type World,
} from '../../factories/world.ts';

const from = { address: randomUUID(), userAgent: '' };
let world: World;
beforeAll(async () => {
  world = await openWorld();
});
afterAll(() => world.close());

async function place(
  side: 'supplier' | 'distributor' = 'supplier',
): Promise<{ organisation: MadeOrganisation; admin: MemberScope }> {
  const organisation = await makeOrganisation(world.db, side);
  return { organisation, admin: await makeMember(world.db, organisation, ['administrator']) };
}

const membershipOf = async (member: MemberScope): Promise<string> =>
  (
    await world
      .db('memberships')
      .where({ user_id: member.userId, organisation_id: member.organisationId })
      .first('id')
  ).id;

async function tokenMailedTo(email: string): Promise<string> {
  const mail = await world
    .db('mail_outbox')
    .where({ to_address: email, kind: 'invitation' })
    .orderBy('created_at', 'desc')
    .first();
  const token = /\/invitation\/([\w-]+)/.exec(mail?.text_body ?? '')?.[1];
  if (!token) throw new Error('no link in the mail');
  return token;
}

describe('inviting', () => {
  it('mails a link by which somebody new joins once, with name and password of their own', async () => {
    const { admin, organisation } = await place();
    const invited = await invite(admin, { email: 'newcomer@people.example', roles: ['mix_engineer'] });
    expect(invited.ok).toBe(true);
    const list = await listMembers(admin);
    expect(list.ok && list.value.invitations.map((i) => i.email)).toEqual(['newcomer@people.example']);

    const token = await tokenMailedTo('newcomer@people.example');
    expect(await readInvitation(token)).toMatchObject({
      value: { hasAccount: false, organisationName: organisation.name },
    });
    expect(await acceptInvitation(token, { name: ' ', password: 'short' })).toMatchObject({
      refusal: { fields: { name: 'Say what you are called.', password: 'Use 12 characters or more.' } },
    });
    expect((await acceptInvitation(token, { name: 'Newcomer', password: 'twelve or more' })).ok).toBe(true);
    expect(await acceptInvitation(token, { name: 'Again', password: 'twelve or more' })).toMatchObject({
      refusal: { code: 'gone' },
    });

    const session = await signIn('newcomer@people.example', 'twelve or more', from);
    if (!session.ok) throw new Error('no session');
    expect(await resumeSession(session.value.sessionId, session.value.sessionVersion)).toMatchObject({
      organisationId: organisation.id,
      roles: ['mix_engineer'],
      userName: 'Newcomer',
    });
    const after = await listMembers(admin);
    expect(after.ok && after.value.invitations).toEqual([]);
  });

  it('lets somebody known join with the password that they have', async () => {
    const first = await place();
    const second = await place('distributor');
    const passwordHash = await hashPassword('their own password');
    const member = await makeMember(world.db, first.organisation, ['mix_engineer'], { passwordHash });
    await invite(second.admin, { email: member.email, roles: ['qc_operator'] });
    const token = await tokenMailedTo(member.email);
    expect(await readInvitation(token)).toMatchObject({ value: { hasAccount: true } });
    expect((await acceptInvitation(token, { name: 'Ignored', password: 'an attempt at one' })).ok).toBe(true);
    expect((await signIn(member.email, 'their own password', from)).ok).toBe(true);
    expect((await signIn(member.email, 'an attempt at one', from)).ok).toBe(false);
    const list = await listMembers(second.admin);
    expect(list.ok && list.value.items.find((m) => m.email === member.email)).toMatchObject({
      roles: ['qc_operator'],
      name: member.userName,
    });
  });

  it('refuses a member, and a role that the organisation has no work for', async () => {
    const { admin, organisation } = await place();
    const member = await makeMember(world.db, organisation, ['mix_engineer']);
    expect(await invite(admin, { email: member.email, roles: ['mix_engineer'] })).toMatchObject({
      refusal: { code: 'conflict' },
    });
    expect(await invite(admin, { email: 'q@people.example', roles: ['qc_operator'] })).toMatchObject({
      refusal: { code: 'bad_input' },
    });
  });

  it('replaces an older invitation of the same address', async () => {
    const { admin } = await place();
    await invite(admin, { email: 'twice@people.example', roles: ['mix_engineer'] });
    const older = await tokenMailedTo('twice@people.example');
    await invite(admin, { email: 'twice@people.example', roles: ['mix_engineer', 'administrator'] });
    expect(await readInvitation(older)).toMatchObject({ refusal: { code: 'gone' } });
    const list = await listMembers(admin);
    expect(list.ok && list.value.invitations).toMatchObject([{ roles: ['mix_engineer', 'administrator'] }]);
  });

  it('can be taken back while it is open', async () => {
    const { admin } = await place();
    const invited = await invite(admin, { email: 'mistaken@people.example', roles: ['mix_engineer'] });
    if (!invited.ok) throw new Error('not invited');
    const token = await tokenMailedTo('mistaken@people.example');
    const elsewhere = await place();
    expect(await takeBackInvitation(elsewhere.admin, invited.value.id)).toMatchObject({
      refusal: { code: 'not_found' },
    });
    expect((await takeBackInvitation(admin, invited.value.id)).ok).toBe(true);
    expect(await acceptInvitation(token, { name: 'N', password: 'twelve or more' })).toMatchObject({
      refusal: { code: 'gone' },
    });
    expect(await takeBackInvitation(admin, invited.value.id)).toMatchObject({
      refusal: { code: 'not_found' },
    });
  });

  it('brings a removed member back with the new roles', async () => {
    const { admin, organisation } = await place();
    const member = await makeMember(world.db, organisation, ['administrator']);
    await removeMember(admin, await membershipOf(member));
    await invite(admin, { email: member.email, roles: ['mix_engineer'] });
    expect((await acceptInvitation(await tokenMailedTo(member.email), {})).ok).toBe(true);
    const list = await listMembers(admin);
    expect(list.ok && list.value.items.find((m) => m.userId === member.userId)?.roles).toEqual([
      'mix_engineer',
    ]);
  });
});

describe('members', () => {
  it('are those of the own organisation only', async () => {
    const { admin, organisation } = await place();
    const member = await makeMember(world.db, organisation, ['mix_engineer']);
    await place();
    const list = await listMembers(admin);
    expect(list.ok && list.value.items.map((m) => m.userId).sort()).toEqual(
      [admin.userId, member.userId].sort(),
    );
    expect(list.ok && list.value.items.every((m) => m.openSessions === 1)).toBe(true);
  });

  it('change roles, which leaves a trace that reads as a sentence', async () => {
    const { admin, organisation } = await place();
    const member = await makeMember(world.db, organisation, ['mix_engineer'], { name: 'Maren' });
    const answer = await setRoles(admin, await membershipOf(member), ['mix_engineer', 'administrator']);
    expect(answer).toMatchObject({ value: { roles: ['administrator', 'mix_engineer'] } });
    const activity = await listActivity(admin, { limit: 10 });
    expect(activity).toMatchObject({
      value: {
        items: [
          {
            sentence: 'made Maren Mix engineer and Administrator (before: Mix engineer)',
            actor: { id: admin.userId },
          },
        ],
      },
    });
  });

  it('of another organisation are not there for any of it', async () => {
    const { admin } = await place();
    const foreign = await place();
    const id = await membershipOf(await makeMember(world.db, foreign.organisation, ['mix_engineer']));
    for (const answer of [
      await setRoles(admin, id, ['administrator']),
      await removeMember(admin, id),
      await endSessions(admin, id),
    ]) {
      expect(answer).toMatchObject({ refusal: { code: 'not_found' } });
    }
  });

  it('lose their sessions when an administrator ends them, wherever they work, and may sign in again', async () => {
    const { admin, organisation } = await place();
    const elsewhere = await makeOrganisation(world.db, 'distributor');
    const member = await makeMember(world.db, organisation, ['mix_engineer'], {
      passwordHash: await hashPassword('twelve or more'),
    });
    const there = await makeMember(world.db, elsewhere, ['qc_operator'], { userId: member.userId });
    expect(await endSessions(admin, await membershipOf(member))).toMatchObject({ value: { ended: 2 } });
    expect(await resumeSession(member.sessionId, 1)).toBeNull();
    expect(await resumeSession(there.sessionId, 1)).toBeNull();
    expect((await signIn(member.email, 'twelve or more', from)).ok).toBe(true);
  });

  it('who are removed lose the sessions in this organisation and keep those in another', async () => {
    const { admin, organisation } = await place();
    const elsewhere = await makeOrganisation(world.db, 'distributor');
    const member = await makeMember(world.db, organisation, ['mix_engineer']);
    const there = await makeMember(world.db, elsewhere, ['qc_operator'], { userId: member.userId });
    expect((await removeMember(admin, await membershipOf(member))).ok).toBe(true);
    expect(await resumeSession(member.sessionId, 1)).toBeNull();
    expect(await resumeSession(there.sessionId, 1)).not.toBeNull();
  });

  it('never lose their last administrator, also when two leave at once', async () => {
    const { admin, organisation } = await place();
    expect(await removeMember(admin, await membershipOf(admin))).toMatchObject({
      refusal: { code: 'conflict' },
    });
    expect(await setRoles(admin, await membershipOf(admin), ['mix_engineer'])).toMatchObject({
      refusal: { code: 'conflict' },
    });
    const second = await makeMember(world.db, organisation, ['administrator']);
    const answers = await Promise.all([
      removeMember(admin, await membershipOf(second)),
      removeMember(second, await membershipOf(admin)),
    ]);
    expect(answers.filter((answer) => answer.ok)).toHaveLength(1);
  });

  it('are no business of anybody but administrators', async () => {
    const { organisation } = await place();
    const member = await makeMember(world.db, organisation, ['mix_engineer']);
    const id = await membershipOf(member);
    for (const answer of [
      await listMembers(member),
      await setRoles(member, id, ['administrator']),
      await removeMember(member, id),
      await endSessions(member, id),
      await invite(member, { email: 'x@people.example', roles: ['mix_engineer'] }),
    ]) {
      expect(answer).toMatchObject({ refusal: { code: 'forbidden' } });
    }
  });
});
