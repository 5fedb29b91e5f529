import { createHash, randomBytes } from 'node:crypto';
import type { APIContext, APIRoute } from 'astro';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { problemSchema } from '../../../src/domain/api/common.ts';
import {
  completeUploadResultSchema,
  createUploadsResultSchema,
  signPartsResultSchema,
  uploadListSchema,
} from '../../../src/domain/api/deliverables.ts';
import { GET as events } from '../../../src/pages/api/v1/events.ts';
import { DELETE as giveUp } from '../../../src/pages/api/v1/uploads/[id]/index.ts';
import { POST as complete } from '../../../src/pages/api/v1/uploads/[id]/complete.ts';
import { POST as sign, PUT as record } from '../../../src/pages/api/v1/uploads/[id]/parts.ts';
import { GET as list, POST as create } from '../../../src/pages/api/v1/uploads/index.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import { makePerson, openServiceWorld } from '../service-world.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let engineer: MemberScope;
beforeAll(async () => {
  world = await openServiceWorld(9);
  engineer = await makePerson();
});
afterAll(() => world.close());

/** Calls a route as Astro would after middleware: with the scope in locals. */
async function call(
  route: APIRoute,
  scope: MemberScope | null,
  given: { id?: string; body?: unknown; method?: string } = {},
) {
  const url = new URL('http://plimsoll.example/api/v1/uploads');
  const body =
    given.body === undefined
      ? undefined
      : typeof given.body === 'string'
        ? given.body
        : JSON.stringify(given.body);
  const request = new Request(url, { method: body === undefined ? 'GET' : 'POST', body });
  const context = { locals: { scope }, params: { id: given.id }, request, url } as unknown as APIContext;
  return (await route(context)) as Response;
}
const file = (given: object = {}) => ({
  fileName: 'spot07.wav',
  byteSize: 1000,
  lastModifiedMs: 1_700_000_000_000,
  ...given,
});
const problem = async (answer: Response) => problemSchema.parse(await answer.json()).error;

describe('the API of uploads', () => {
  it('takes a file from its name to waiting for measurement', async () => {
    const bytes = randomBytes(1000);
    const begun = createUploadsResultSchema.parse(
      await (await call(create, engineer, { body: { files: [file()] } })).json(),
    );
    if (!begun.items[0].ok) throw new Error(begun.items[0].error.message);
    const id = begun.items[0].value.deliverableId;
    expect(
      uploadListSchema.parse(await (await call(list, engineer)).json()).items.map((u) => u.deliverableId),
    ).toEqual([id]);
    const signed = signPartsResultSchema.parse(
      await (await call(sign, engineer, { id, body: { numbers: [1] } })).json(),
    );
    const put = await fetch(signed.items[0].url, { method: 'PUT', body: new Uint8Array(bytes) });
    const told = await call(record, engineer, {
      id,
      body: { number: 1, etag: put.headers.get('etag'), byteSize: 1000 },
    });
    expect(await told.json()).toEqual({ partsDone: [1] });
    const sha256 = createHash('sha256').update(bytes).digest('hex');
    const arrived = completeUploadResultSchema.parse(
      await (await call(complete, engineer, { id, body: { sha256 } })).json(),
    );
    expect(arrived.deliverable).toMatchObject({ id, state: 'waiting' });
    expect(uploadListSchema.parse(await (await call(list, engineer)).json()).items).toEqual([]);
  });

  it('answers an empty file among others by itself', async () => {
    const answer = await call(create, engineer, {
      body: { files: [file({ byteSize: 0 }), file({ fileName: 'a.wav' })] },
    });
    expect(answer.status).toBe(200);
    expect(createUploadsResultSchema.parse(await answer.json()).items.map((item) => item.ok)).toEqual([
      false,
      true,
    ]);
  });

  it.each([
    ['no JSON', '{', 422],
    ['no files', { files: [] }, 422],
    ['half a byte', { files: [file({ byteSize: 0.5 })] }, 422],
  ])('refuses %s', async (_what, body, status) => {
    const answer = await call(create, engineer, { body });
    expect(answer.status).toBe(status);
    expect((await problem(answer)).code).toBe('bad_input');
  });

  it('refuses a hash that is none, an id that is none, a foreign upload, and nobody', async () => {
    const begun = createUploadsResultSchema.parse(
      await (await call(create, engineer, { body: { files: [file({ lastModifiedMs: 5 })] } })).json(),
    );
    const id = begun.items[0].ok ? begun.items[0].value.deliverableId : '';
    const stranger = await makePerson();
    const body = { sha256: 'a'.repeat(64) };
    expect((await call(complete, engineer, { id, body: { sha256: 'a'.repeat(63) } })).status).toBe(422);
    expect((await call(complete, engineer, { id: '../x', body })).status).toBe(404);
    expect((await call(complete, stranger, { id, body })).status).toBe(404);
    expect((await call(giveUp, stranger, { id })).status).toBe(404);
    expect((await call(complete, null, { id, body })).status).toBe(401);
    expect((await call(complete, { ...engineer, roles: ['administrator'] }, { id, body })).status).toBe(403);
    expect((await call(giveUp, engineer, { id })).status).toBe(200);
  });
});

it('gives the event stream as a stream that no proxy keeps', async () => {
  const answer = await call(events, engineer);
  expect(answer.headers.get('content-type')).toBe('text/event-stream');
  expect(answer.headers.get('cache-control')).toContain('no-transform');
  const reader = answer.body?.getReader();
  expect(new TextDecoder().decode((await reader?.read())?.value)).toMatch(/^retry: /);
  await reader?.cancel();
});
