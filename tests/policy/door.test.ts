// PRODUCT's table "Who may do what" held against the site: every route has its need, and the door keeps it.
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { allows, permissions, routes, type Need, type Permission } from '../../src/domain/permissions.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import { makeOrganisation, openWorld, type World } from '../factories/world.ts';
import { knock, type Knock } from './knock.ts';
import { routeFiles } from './routes.ts';
import { cookieOf, memberOf, standings } from './standings.ts';

const files = routeFiles();
/** Served by an integration, not by a file of ours. */
const injected = new Set(['/api/auth/[...auth]']);
const asked = Object.entries(routes).flatMap(([pattern, methods]) =>
  Object.entries(methods).map(([method, need]) => ({ pattern, method, need: need as Need })),
);

describe('the route table', () => {
  it('names every page and endpoint with every method that it answers', () => {
    const unknown = files.flatMap(({ pattern, file, methods }) =>
      methods
        .filter((method) => !(method in (routes[pattern] ?? {})))
        .map((method) => `${method} ${pattern} (src/pages/${file})`),
    );
    expect(unknown, 'add these to `routes` in src/domain/permissions.ts').toEqual([]);
  });

  it('names nothing that does not exist', () => {
    const exists = (pattern: string, method: string) =>
      injected.has(pattern) || files.some((f) => f.pattern === pattern && f.methods.includes(method));
    const missing = asked.filter((a) => !exists(a.pattern, a.method)).map((a) => `${a.method} ${a.pattern}`);
    expect(missing, 'in `routes`, but no file answers it').toEqual([]);
  });

  it('finds the files that it is about', () => {
    expect(files.map((f) => f.pattern)).toEqual(
      expect.arrayContaining(['/', '/sign-in', '/invitation/[token]', '/api/v1/members/[id]']),
    );
    expect(files.find((f) => f.pattern === '/sign-in')?.methods).toEqual(['GET', 'POST']);
    expect(files.find((f) => f.pattern === '/api/v1/members/[id]')?.methods.sort()).toEqual([
      'DELETE',
      'PATCH',
    ]);
  });

  it('leaves open only what a stranger needs', () => {
    const open = asked.filter((a) => a.need === 'anyone').map((a) => `${a.method} ${a.pattern}`);
    expect(open.sort()).toEqual(
      [
        'GET /',
        'GET /403',
        'GET /404',
        'GET /500',
        'GET /api/auth/[...auth]',
        'GET /api/health',
        'GET /forgot-password',
        'GET /invitation/[token]',
        'GET /reset-password/[token]',
        'GET /sign-in',
        'POST /api/auth/[...auth]',
        'POST /forgot-password',
        'POST /invitation/[token]',
        'POST /reset-password/[token]',
        'POST /sign-in',
        'POST /sign-out',
      ].sort(),
    );
  });
});

describe('the permission table', () => {
  // PRODUCT.md, "Who may do what", written out once more by hand: role at side -> what they may.
  const mixer: Permission[] = [
    'deliverable:read',
    'deliverable:upload',
    'submission:create',
    'submission:withdraw',
    'submission:read',
    'note:write',
    'spec:read',
    'channel:read',
    'activity:read',
  ];
  const reader: Permission[] = ['submission:read', 'spec:read', 'channel:read', 'activity:read'];
  const expected: Record<string, Permission[]> = {
    'mix_engineer at a supplier': mixer,
    'administrator at a supplier': [...reader, 'deliverable:read', 'member:read', 'member:edit'],
    'qc_operator at a distributor': [...reader, 'submission:decide', 'note:write'],
    'spec_owner at a distributor': [...reader, 'spec:edit', 'channel:edit'],
    'administrator at a distributor': [...reader, 'member:read', 'member:edit'],
    // Roles on the side where they have no work: they read, and write notes on what they may read.
    'qc_operator at a supplier': [...reader, 'note:write'],
    'spec_owner at a supplier': reader,
    'mix_engineer at a distributor': [...reader, 'note:write'],
  };

  it.each(standings)('gives a $name what PRODUCT says and nothing more', ({ name, role, side }) => {
    const who = { roles: [role], isSupplier: side === 'supplier', isDistributor: side === 'distributor' };
    const may = (Object.keys(permissions) as Permission[]).filter((permission) => allows(who, permission));
    expect(may.sort()).toEqual([...expected[name]].sort());
  });
});

describe('the door', () => {
  let world: World;
  const members: Record<string, MemberScope> = {};
  const cookies: Record<string, string> = {};

  beforeAll(async () => {
    world = await openWorld();
    const organisations = {
      supplier: await makeOrganisation(world.db, 'supplier'),
      distributor: await makeOrganisation(world.db, 'distributor'),
    };
    for (const { name, role, side } of standings) {
      members[name] = await memberOf(world.db, organisations[side], role);
      cookies[name] = await cookieOf(members[name]);
    }
  });
  afterAll(() => world.close());

  const outcome = async (one: Knock) => {
    const { passed, response } = await knock(one);
    return passed ? 'passed' : `${response.status}`;
  };

  it.each(asked)(
    'lets nobody unknown through $method $pattern unless it is for anyone',
    async ({ pattern, method, need }) => {
      const isApi = pattern.startsWith('/api/');
      const refused = isApi ? '401' : '303';
      expect(await outcome({ pattern, method })).toBe(need === 'anyone' ? 'passed' : refused);
      if (need === 'anyone' || isApi) return;
      const { response } = await knock({ pattern, method });
      expect(response.headers.get('location')).toMatch(/^\/sign-in\?callbackUrl=%2F/);
    },
  );

  it.each(asked)('lets through $method $pattern whom the table says', async ({ pattern, method, need }) => {
    for (const { name } of standings) {
      const may = need === 'anyone' || need === 'signed-in' || allows(members[name], need);
      expect(await outcome({ pattern, method, cookie: cookies[name] }), name).toBe(may ? 'passed' : '403');
    }
  });

  it('refuses a route that the table does not name, and a method that it does not', async () => {
    const cookie = cookies['administrator at a distributor'];
    expect(await outcome({ pattern: '/api/v1/secrets', method: 'GET', cookie })).toBe('403');
    expect(await outcome({ pattern: '/api/v1/secrets', method: 'GET' })).toBe('401');
    expect(await outcome({ pattern: '/secrets', method: 'GET' })).toBe('303');
    expect(await outcome({ pattern: '/api/v1/members', method: 'DELETE', cookie })).toBe('405');
    expect(await outcome({ pattern: '/constructor', method: 'GET', cookie })).toBe('403');
  });

  it('answers an unknown address of the API as the API does', async () => {
    const { response } = await knock({ pattern: '/404', method: 'GET' });
    expect(response.headers.get('content-type')).not.toContain('json');
    const url = '/api/v1/nothing-here';
    const onApi = await knock({ pattern: '/404', method: 'GET', path: url });
    expect(onApi.response.status).toBe(404);
    expect(await onApi.response.json()).toMatchObject({ error: { code: 'not_found' } });
  });

  it.each(['POST', 'PUT', 'PATCH', 'DELETE'])(
    'refuses a %s that another site sends with our cookie',
    async (method) => {
      const cookie = cookies['administrator at a supplier'];
      const pattern = '/api/v1/members/[id]';
      for (const headers of [
        { origin: 'https://elsewhere.example' },
        { origin: 'null' },
        { origin: 'http://plimsoll.example:8080' },
      ]) {
        expect(await outcome({ pattern, method, cookie, headers })).toBe('403');
      }
      const noOrigin = await knock({
        pattern,
        method,
        cookie,
        headers: { origin: '', 'sec-fetch-site': 'cross-site' },
      });
      expect(noOrigin.response.status).toBe(403);
      const { response } = await knock({
        pattern,
        method,
        cookie,
        headers: { origin: 'https://elsewhere.example' },
      });
      expect(await response.json()).toMatchObject({
        error: { message: expect.stringContaining('another site') },
      });
    },
  );

  it('knows nobody by a cookie that is forged, cut short, or of a session that has ended', async () => {
    const who = members['mix_engineer at a supplier'];
    const pattern = '/api/v1/me';
    const good = await cookieOf(who);
    expect(await outcome({ pattern, method: 'GET', cookie: good })).toBe('passed');
    expect(await outcome({ pattern, method: 'GET', cookie: `${good.slice(0, -4)}AAAA` })).toBe('401');
    expect(await outcome({ pattern, method: 'GET', cookie: 'authjs.session-token=garbage' })).toBe('401');
    const leaving = await memberOf(
      world.db,
      { id: who.organisationId, name: '', isSupplier: true, isDistributor: false },
      'mix_engineer',
    );
    const cookie = await cookieOf(leaving);
    expect(await outcome({ pattern, method: 'GET', cookie })).toBe('passed');
    await world.db('sessions').where('id', leaving.sessionId).update({ revoked_at: world.db.fn.now() });
    expect(await outcome({ pattern, method: 'GET', cookie })).toBe('401');
  });

  it('sends headers with every answer that keep it out of frames, guesses and shared caches', async () => {
    for (const one of [
      { pattern: '/', method: 'GET' },
      { pattern: '/api/v1/me', method: 'GET' },
    ]) {
      const { headers } = (await knock(one)).response;
      expect(headers.get('x-content-type-options')).toBe('nosniff');
      expect(headers.get('x-frame-options')).toBe('DENY');
      expect(headers.get('referrer-policy')).toBe('same-origin');
    }
    expect(
      (await knock({ pattern: '/api/v1/me', method: 'GET' })).response.headers.get('cache-control'),
    ).toBe('no-store');
  });
});
