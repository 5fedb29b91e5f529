// Pages drawn for real, behind the real door: what is one's own is shown, what is another organisation's is not there.
import reactRenderer from '@astrojs/react/server.js';
import { experimental_AstroContainer as AstroContainer } from 'astro/container';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { allows, permissions, routes, type Need, type Permission } from '../../src/domain/permissions.ts';
import { makeOrganisation, openWorld, type World } from '../factories/world.ts';
import { makeHoldings, memberIn, paramsFor, type Holdings } from './holdings.ts';
import { answerOfPage } from './knock.ts';
import { routeFiles } from './routes.ts';
import { cookieOf, isIdle, memberOf, standings } from './standings.ts';

type Page = Parameters<AstroContainer['renderToResponse']>[0];
const sources = import.meta.glob<{ default: Page }>('../../src/pages/**/*.astro');

let world: World;
let foreign: Holdings;
let container: AstroContainer;

beforeAll(async () => {
  world = await openWorld();
  foreign = await makeHoldings(world.db);
  container = await AstroContainer.create();
  container.addServerRenderer({ name: '@astrojs/react', renderer: reactRenderer });
  container.addClientRenderer({ name: '@astrojs/react', entrypoint: '@astrojs/react/client.js' });
});
afterAll(() => world.close());

const pages = routeFiles()
  .filter(({ isPage, pattern }) => isPage && (routes[pattern]?.GET ?? '') in permissions)
  .map(({ pattern, file }) => ({ pattern, file, need: routes[pattern].GET as Permission & Need }));

async function draw(
  file: string,
  pattern: string,
  params: Record<string, string>,
  cookie: string,
): Promise<Response> {
  const { default: page } = await sources[`../../src/pages/${file}`]();
  return answerOfPage({ pattern, method: 'GET', params, cookie }, async (context) => {
    const { request, locals } = context;
    try {
      return await container.renderToResponse(page, { request, params, locals, routeType: 'page' });
    } catch (error) {
      // The container knows this page alone: a rewrite to the page of what is not found ends here.
      if (error instanceof Error && error.message.includes('route /404'))
        return new Response(null, { status: 404 });
      throw error;
    }
  });
}

describe.each(pages)('GET $pattern', ({ pattern, file, need }) => {
  const allowed = standings.filter(({ role, side }) =>
    allows({ roles: [role], isSupplier: side === 'supplier', isDistributor: side === 'distributor' }, need),
  );

  it('is drawn for those who may', async () => {
    for (const { name, role, side } of allowed) {
      const own = await makeHoldings(world.db);
      const cookie = await cookieOf(await memberIn(world.db, own, side, role));
      const response = await draw(file, pattern, paramsFor(pattern, own, side), cookie);
      if (response.status === 404 && isIdle({ role, side })) continue;
      expect(response.status, name).toBe(200);
      expect(await response.text(), name).toContain('<h1');
    }
  });

  it.runIf(pattern.includes('[id]'))('is not there about another organisation’s', async () => {
    for (const { name, role, side } of allowed) {
      const cookie = await cookieOf(await memberOf(world.db, await makeOrganisation(world.db, side), role));
      const response = await draw(file, pattern, paramsFor(pattern, foreign, side), cookie);
      expect(response.status, name).toBe(404);
    }
  });
});
