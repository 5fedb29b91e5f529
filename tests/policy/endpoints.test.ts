// Behind the door: every endpoint x role x own and foreign organisation, through middleware, handler, service, database.
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { allows, permissions, routes, type Need, type Permission } from '../../src/domain/permissions.ts';
import { makeOrganisation, openWorld, type World } from '../factories/world.ts';
import { bodies } from './bodies.ts';
import { makeHoldings, memberIn, paramsFor, type Holdings } from './holdings.ts';
import { ask, askPastTheDoor } from './knock.ts';
import { routeFiles } from './routes.ts';
import { cookieOf, isIdle, memberOf, standings, type Standing } from './standings.ts';

let world: World;
let foreign: Holdings;
let n = 0;

beforeAll(async () => {
  world = await openWorld();
  foreign = await makeHoldings(world.db);
});
afterAll(() => world.close());

const endpoints = routeFiles()
  .filter(({ isPage, pattern }) => !isPage && pattern.startsWith('/api/v1/'))
  .flatMap(({ pattern, file, methods }) =>
    methods.map((method) => ({
      pattern,
      file,
      method,
      need: routes[pattern]?.[method as 'GET'] ?? ('signed-in' as Need),
      name: `${method} ${pattern}`,
    })),
  );
const permissionOf = (need: Need): Permission | null => (need in permissions ? (need as Permission) : null);
const may = ({ role, side }: Standing, need: Need) => {
  const permission = permissionOf(need);
  return (
    permission === null ||
    allows(
      { roles: [role], isSupplier: side === 'supplier', isDistributor: side === 'distributor' },
      permission,
    )
  );
};

/** Calls whose bodies name rows, answered item by item. */
const bulk = new Set([
  'PATCH /api/v1/deliverables',
  'POST /api/v1/submissions',
  'POST /api/v1/submissions/decisions',
]);

const bodyFor = (name: string, holdings: Holdings, side: Standing['side']): unknown =>
  bodies[name]?.(holdings, (n += 1), side) ?? {};

/** Status, and the refusal code of the answer or of its first item; a stream is left alone and closed. */
async function read(response: Response): Promise<{ status: number; code: string | null; said: string }> {
  if (!response.headers.get('content-type')?.includes('json')) {
    await response.body?.cancel();
    return { status: response.status, code: null, said: '' };
  }
  const said = await response.text();
  const value: { error?: { code: string }; items?: { ok?: boolean; error?: { code: string } }[] } =
    JSON.parse(said);
  const item = value.items?.[0];
  return {
    status: response.status,
    code: value.error?.code ?? (item?.ok === false ? (item.error?.code ?? null) : null),
    said,
  };
}

describe.each(endpoints)('$name', ({ pattern, file, method, need, name }) => {
  const allowed = standings.filter((standing) => may(standing, need));
  const denied = standings.filter((standing) => !may(standing, need));

  it('serves those who may, about what is theirs', async () => {
    expect(allowed.length).toBeGreaterThan(0);
    for (const { role, side, name: who } of allowed) {
      const own = await makeHoldings(world.db);
      const cookie = await cookieOf(await memberIn(world.db, own, side, role));
      const answer = await read(
        await ask(file, {
          pattern,
          method,
          params: paramsFor(pattern, own, side),
          cookie,
          body: bodyFor(name, own, side),
        }),
      );
      const reached = ![401, 403, 404, 405, 422, 500].includes(answer.status);
      // Roles without work on their side (a mix engineer at a distributor) may come and find nothing of theirs.
      expect(
        reached || (answer.status === 404 && isIdle({ role, side })),
        `${who}: ${answer.status} ${answer.said.slice(0, 300)}`,
      ).toBe(true);
    }
  });

  it('refuses those who may not, though it is theirs', async () => {
    const own = await makeHoldings(world.db);
    for (const { role, side, name: who } of denied) {
      const cookie = await cookieOf(await memberIn(world.db, own, side, role));
      const answer = await read(
        await ask(file, {
          pattern,
          method,
          params: paramsFor(pattern, own, side),
          cookie,
          body: bodyFor(name, own, side),
        }),
      );
      expect(`${answer.status} ${answer.code}`, who).toBe('403 forbidden');
    }
  });

  it.runIf(permissionOf(need) !== null)(
    'refuses them also where the door was left open: the service asks again',
    async () => {
      const own = await makeHoldings(world.db);
      for (const { role, side, name: who } of denied) {
        const member = await memberIn(world.db, own, side, role);
        const answer = await read(
          await askPastTheDoor(
            file,
            { pattern, method, params: paramsFor(pattern, own, side), body: bodyFor(name, own, side) },
            member,
          ),
        );
        expect(`${answer.status} ${answer.code}`, `${who}: ${answer.said.slice(0, 300)}`).toBe(
          '403 forbidden',
        );
      }
    },
  );

  it.runIf(pattern.includes('[id]'))('knows nothing of what is another organisation’s', async () => {
    for (const { role, side, name: who } of allowed) {
      const cookie = await cookieOf(await memberOf(world.db, await makeOrganisation(world.db, side), role));
      const answer = await read(
        await ask(file, {
          pattern,
          method,
          params: paramsFor(pattern, foreign, side),
          cookie,
          body: bodyFor(name, foreign, side),
        }),
      );
      expect(`${answer.status} ${answer.code}`, `${who}: ${answer.said.slice(0, 300)}`).toBe('404 not_found');
    }
  });

  it.runIf(bulk.has(name))('answers per item that another organisation’s are not there', async () => {
    for (const { role, side, name: who } of allowed) {
      const cookie = await cookieOf(await memberOf(world.db, await makeOrganisation(world.db, side), role));
      const answer = await read(
        await ask(file, { pattern, method, cookie, body: bodyFor(name, foreign, side) }),
      );
      expect(answer.code, `${who}: ${answer.said.slice(0, 300)}`).toBe('not_found');
    }
  });
});

describe('after all of it', () => {
  it('nothing of the other organisation was changed', async () => {
    const { ids } = foreign;
    expect(await world.db('submissions').where('id', ids.submission).first('state', 'version')).toEqual({
      state: 'awaiting_review',
      version: 1,
    });
    expect(
      await world.db('deliverables').where('id', ids.spareDeliverable).first('version_label', 'discarded_at'),
    ).toEqual({ version_label: '', discarded_at: null });
    expect(
      await world
        .db('memberships')
        .whereIn('id', [ids.supplierMember, ids.distributorMember])
        .whereNotNull('removed_at'),
    ).toEqual([]);
    expect(await world.db('agreements').where('id', ids.agreement).first('ended_at')).toEqual({
      ended_at: null,
    });
    expect(await world.db('channel_assignments').where('id', ids.assignment)).toHaveLength(1);
    expect(await world.db('spec_versions').where({ spec_id: ids.spec, published_at: null })).toHaveLength(1);
    expect(
      await world.db('uploads').where('deliverable_id', ids.upload).first('aborted_at', 'completed_at'),
    ).toEqual({ aborted_at: null, completed_at: null });
    const audited = await world
      .db('audit_events')
      .whereIn('organisation_id', [foreign.supplier.id, foreign.distributor.id]);
    expect(audited).toEqual([]);
  });
});
