import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { hashPassword } from '../../../src/server/auth/passwords.ts';
import { failuresPerEmail } from '../../../src/server/auth/sign-in-limit.ts';
import { changeOrganisation, readMe } from '../../../src/server/services/me.ts';
import { endSession, resumeSession, signIn } from '../../../src/server/services/sign-in.ts';
import { makeMember, makeOrganisation, openWorld, type World } from '../../factories/world.ts';

/** A network address that nobody tried from: other files count in the same Redis. */
const from = () => ({ address: randomUUID(), userAgent: 'a test' });
const password = 'twelve or more';
let world: World;
let passwordHash: string;

beforeAll(async () => {
  world = await openWorld();
  passwordHash = await hashPassword(password);
});
afterAll(() => world.close());

async function somebody() {
  return makeMember(world.db, await makeOrganisation(world.db, 'supplier'), ['mix_engineer'], {
    passwordHash,
  });
}

async function signedIn(email: string) {
  const answer = await signIn(email, password, from());
  if (!answer.ok) throw new Error(answer.refusal.message);
  return answer.value;
}

describe('signing in', () => {
  it('opens a session whose scope is the person, their organisation and their roles', async () => {
    const member = await somebody();
    const { sessionId, sessionVersion } = await signedIn(`  ${member.email.toUpperCase()} `);
    expect(await resumeSession(sessionId, sessionVersion)).toEqual({ ...member, sessionId });
  });

  it('says the same of a wrong password and of an address that nobody has', async () => {
    const member = await somebody();
    const wrong = await signIn(member.email, 'not the password', from());
    const nobody = await signIn('nobody@people.example', password, from());
    expect(wrong).toEqual(nobody);
    expect(wrong).toMatchObject({ ok: false, refusal: { code: 'unauthenticated' } });
  });

  it('refuses somebody without a password yet, and somebody who was removed', async () => {
    const organisation = await makeOrganisation(world.db, 'supplier');
    const invited = await makeMember(world.db, organisation, ['mix_engineer']);
    expect(await signIn(invited.email, '', from())).toMatchObject({ refusal: { code: 'unauthenticated' } });
    const removed = await makeMember(world.db, organisation, ['mix_engineer'], { passwordHash });
    await world.db('memberships').where('user_id', removed.userId).update({ removed_at: world.db.fn.now() });
    expect(await signIn(removed.email, password, from())).toMatchObject({ refusal: { code: 'forbidden' } });
  });

  it('holds back even the right password after too many wrong ones', async () => {
    const member = await somebody();
    for (let i = 0; i < failuresPerEmail; i += 1) await signIn(member.email, 'wrong', from());
    expect(await signIn(member.email, password, from())).toMatchObject({
      ok: false,
      refusal: { code: 'too_many' },
    });
  });

  it('counts tries that arrive at once', async () => {
    const member = await somebody();
    const answers = await Promise.all(
      Array.from({ length: failuresPerEmail + 5 }, () => signIn(member.email, 'wrong', from())),
    );
    const held = answers.filter((answer) => !answer.ok && answer.refusal.code === 'too_many');
    expect(held).toHaveLength(5);
  });
});

describe('a session', () => {
  it('ends when it is ended, and no other of the person with it', async () => {
    const member = await somebody();
    const one = await signedIn(member.email);
    const two = await signedIn(member.email);
    await endSession(one.sessionId);
    expect(await resumeSession(one.sessionId, one.sessionVersion)).toBeNull();
    expect(await resumeSession(two.sessionId, two.sessionVersion)).not.toBeNull();
  });

  it('is void when the session version moved on, when its time is over, and when the membership ended', async () => {
    const member = await somebody();
    const one = await signedIn(member.email);
    expect(await resumeSession(one.sessionId, one.sessionVersion + 1)).toBeNull();
    await world
      .db('sessions')
      .where('id', one.sessionId)
      .update({ expires_at: world.db.raw("now() - interval '1 second'") });
    expect(await resumeSession(one.sessionId, one.sessionVersion)).toBeNull();
    const two = await signedIn(member.email);
    await world.db('memberships').where('user_id', member.userId).update({ removed_at: world.db.fn.now() });
    expect(await resumeSession(two.sessionId, two.sessionVersion)).toBeNull();
  });

  it('has the roles of this moment', async () => {
    const member = await somebody();
    const { sessionId, sessionVersion } = await signedIn(member.email);
    await world
      .db('membership_roles')
      .where('organisation_id', member.organisationId)
      .update({ role: 'administrator' });
    expect((await resumeSession(sessionId, sessionVersion))?.roles).toEqual(['administrator']);
  });

  it('changes to another organisation of the person and to no other, and the next sign-in begins there', async () => {
    const member = await somebody();
    const second = await makeOrganisation(world.db, 'distributor', 'A second place');
    await makeMember(world.db, second, ['qc_operator'], { userId: member.userId });
    const foreign = await makeOrganisation(world.db, 'distributor');
    const { sessionId, sessionVersion } = await signedIn(member.email);
    const scope = await resumeSession(sessionId, sessionVersion);
    if (!scope) throw new Error('no session');
    expect(await changeOrganisation(scope, foreign.id)).toMatchObject({ refusal: { code: 'not_found' } });
    const me = await changeOrganisation(scope, second.id);
    expect(me).toMatchObject({
      value: { organisation: { id: second.id, isDistributor: true }, roles: ['qc_operator'] },
    });
    await world
      .db('sessions')
      .where('id', sessionId)
      .update({ last_seen_at: world.db.raw("now() + interval '1 second'") });
    const next = await signedIn(member.email);
    expect((await resumeSession(next.sessionId, next.sessionVersion))?.organisationId).toBe(second.id);
    const answer = await readMe(scope);
    expect(answer.ok && answer.value.organisations.map((o) => o.name)).toContain('A second place');
  });
});
