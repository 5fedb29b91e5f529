import { randomUUID } from 'node:crypto';
import { getSession } from 'auth-astro/server';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import authConfig from '../../../src/auth.config.ts';
import { hashPassword } from '../../../src/server/auth/passwords.ts';
import { withRequestOrigin } from '../../../src/server/auth/request-origin.ts';
import { signInThrough } from '../../../src/server/auth/through-auth.ts';
import { makeMember, makeOrganisation, openWorld, type World } from '../../factories/world.ts';

const origin = 'https://plimsoll.example';
let world: World;
beforeAll(async () => {
  world = await openWorld({ APP_ORIGIN: origin });
});
afterAll(() => world.close());

describe('on a site that is reached by https', () => {
  // RFC 6265bis, 4.1.3: a name that begins with __Secure- is kept only with the Secure attribute.
  // Behind a proxy the server itself may be asked by http: the cookies must be the same.
  it.each([origin, 'http://plimsoll.example'])(
    'cookies are Secure and found again, asked as %s',
    async (asked) => {
      const passwordHash = await hashPassword('twelve or more');
      const member = await makeMember(
        world.db,
        await makeOrganisation(world.db, 'supplier'),
        ['mix_engineer'],
        {
          passwordHash,
        },
      );
      const answer = await withRequestOrigin({ address: randomUUID(), userAgent: '' }, () =>
        signInThrough(authConfig, asked, { email: member.email, password: 'twelve or more' }),
      );
      if (!('setCookies' in answer)) throw new Error(answer.refusal.message);
      const session = answer.setCookies.find((line) => line.startsWith('__Secure-authjs.session-token='));
      expect(session).toMatch(/; Secure/);
      const cookie = session?.split(';', 1)[0] ?? '';
      expect((await getSession(new Request(`${asked}/`, { headers: { cookie } })))?.scope.userId).toBe(
        member.userId,
      );
    },
  );
});
