import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { closeDb } from '../../../src/server/db/connection.ts';
import { makeMember, makeOrganisation, openWorld, type World } from '../../factories/world.ts';
import { knock } from '../../policy/knock.ts';
import { cookieOf } from '../../policy/standings.ts';

let world: World;
let cookie: string;
beforeAll(async () => {
  world = await openWorld();
  cookie = await cookieOf(
    await makeMember(world.db, await makeOrganisation(world.db, 'supplier'), ['mix_engineer']),
  );
  await closeDb();
  await world.db.raw('ALTER TABLE sessions RENAME TO sessions_away');
});
afterAll(() => world.close());

describe('while the database cannot say whose session it is', () => {
  it('tells a caller of the API that it is our trouble, not that they are signed out', async () => {
    const { response } = await knock({ pattern: '/api/v1/me', method: 'GET', cookie });
    expect(response.status).toBe(503);
    expect(await response.json()).toMatchObject({ error: { code: 'unavailable' } });
  });

  it('sends nobody from a page to the sign-in', async () => {
    await expect(knock({ pattern: '/deliverables', method: 'GET', cookie })).rejects.toThrow(/sessions/);
  });

  it('goes on serving strangers what needs no session', async () => {
    expect((await knock({ pattern: '/sign-in', method: 'GET' })).passed).toBe(true);
  });
});
