import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import authConfig from '../../../src/auth.config.ts';
import { hashPassword } from '../../../src/server/auth/passwords.ts';
import { withRequestOrigin } from '../../../src/server/auth/request-origin.ts';
import { failuresPerEmail } from '../../../src/server/auth/sign-in-limit.ts';
import { signInThrough, signOutThrough } from '../../../src/server/auth/through-auth.ts';
import { makeMember, makeOrganisation, openWorld, type World } from '../../factories/world.ts';
import { knock } from '../../policy/knock.ts';

const origin = 'http://plimsoll.example';
const password = 'twelve or more';
let world: World;
let passwordHash: string;

beforeAll(async () => {
  world = await openWorld();
  passwordHash = await hashPassword(password);
});
afterAll(() => world.close());

const somebody = async () =>
  makeMember(world.db, await makeOrganisation(world.db, 'supplier'), ['mix_engineer'], { passwordHash });
const from = <T>(work: () => T): T =>
  withRequestOrigin({ address: randomUUID(), userAgent: 'a browser' }, work);
const pairs = (lines: readonly string[]) => lines.map((line) => line.split(';', 1)[0]).join('; ');

async function cookiesOf(email: string): Promise<string[]> {
  const answer = await from(() => signInThrough(authConfig, origin, { email, password }));
  if (!('setCookies' in answer)) throw new Error(answer.refusal.message);
  return answer.setCookies;
}
const isKnown = async (cookie: string) =>
  (await knock({ pattern: '/api/v1/me', method: 'GET', cookie })).passed;

describe('the sign-in form', () => {
  it('gives the browser a cookie that the door knows, out of reach of scripts and other sites', async () => {
    const { email } = await somebody();
    const lines = await cookiesOf(email);
    const session = lines.find((line) => line.startsWith('authjs.session-token='));
    expect(session).toMatch(/HttpOnly/);
    expect(session).toMatch(/SameSite=Lax/);
    expect(await isKnown(pairs(lines))).toBe(true);
  });

  it('notes the browser that the session is of', async () => {
    const { email, userId } = await somebody();
    await cookiesOf(email);
    const sessions = await world.db('sessions').where('user_id', userId).pluck('user_agent');
    expect(sessions).toContain('a browser');
  });

  it('says that the two do not belong together, and no more', async () => {
    const { email } = await somebody();
    const wrong = await from(() => signInThrough(authConfig, origin, { email, password: 'not this one' }));
    const nobody = await from(() =>
      signInThrough(authConfig, origin, { email: 'nobody@people.example', password }),
    );
    const missing = await from(() => signInThrough(authConfig, origin, { email: '', password: '' }));
    expect(wrong).toMatchObject({ refusal: { code: 'unauthenticated' } });
    expect(nobody).toEqual(wrong);
    expect(missing).toEqual(wrong);
  });

  it('says to wait after too many tries', async () => {
    const { email } = await somebody();
    for (let i = 0; i < failuresPerEmail; i += 1) {
      await from(() => signInThrough(authConfig, origin, { email, password: 'wrong' }));
    }
    const answer = await from(() => signInThrough(authConfig, origin, { email, password }));
    expect(answer).toMatchObject({
      refusal: { code: 'too_many', message: expect.stringContaining('quarter of an hour') },
    });
  });
});

describe('signing out', () => {
  it('ends the session for good, also for a copy of its cookie', async () => {
    const { email } = await somebody();
    const copy = pairs(await cookiesOf(email));
    const lines = await signOutThrough(authConfig, origin, copy);
    expect(lines.find((line) => line.startsWith('authjs.session-token='))).toMatch(
      /^authjs\.session-token=;|Max-Age=0/,
    );
    expect(await isKnown(copy)).toBe(false);
  });

  it('leaves the other sessions of the person alone', async () => {
    const { email } = await somebody();
    const one = pairs(await cookiesOf(email));
    const two = pairs(await cookiesOf(email));
    await signOutThrough(authConfig, origin, one);
    expect(await isKnown(two)).toBe(true);
  });

  it('does not trouble somebody who is signed in nowhere', async () => {
    await expect(signOutThrough(authConfig, origin, '')).resolves.toBeInstanceOf(Array);
  });
});
