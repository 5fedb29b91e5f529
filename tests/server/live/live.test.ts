import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { liveEventSchema, type LiveEvent } from '../../../src/domain/api/people.ts';
import { db } from '../../../src/server/db/connection.ts';
import { eventsTopic, publishEvent } from '../../../src/server/events.ts';
import { setProgress } from '../../../src/server/queue/progress.ts';
import { redis } from '../../../src/server/redis.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import { openLiveStream } from '../../../src/server/services/live.ts';
import { arrivedFile } from '../arrived-file.ts';
import { makePerson, openServiceWorld } from '../service-world.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
beforeAll(async () => {
  world = await openServiceWorld(5);
});
afterAll(() => world.close());

const neverInTest = { beat: 1_000_000, sessionCheck: 1_000_000 };

/** A browser at the other end of a stream. */
async function browser(scope: MemberScope, times = neverInTest) {
  const leaving = new AbortController();
  const answer = await openLiveStream(scope, leaving.signal, times);
  if (!answer.ok) throw new Error(answer.refusal.message);
  const reader = answer.value.getReader();
  const decoder = new TextDecoder();
  let text = '';
  /** The next whole message; null when the stream has ended. */
  const next = async (): Promise<string | null> => {
    for (;;) {
      const end = text.indexOf('\n\n');
      if (end >= 0) {
        const message = text.slice(0, end);
        text = text.slice(end + 2);
        return message;
      }
      const { done, value } = await reader.read();
      if (done) return null;
      text += decoder.decode(value, { stream: true });
    }
  };
  const nextEvent = async (): Promise<LiveEvent> => {
    for (;;) {
      const message = await next();
      if (message === null) throw new Error('The stream ended');
      if (message.startsWith('data: ')) return liveEventSchema.parse(JSON.parse(message.slice(6)));
    }
  };
  return { next, nextEvent, leave: () => leaving.abort(), cancel: () => reader.cancel() };
}

const listening = async (organisationId: string) => {
  const [, count] = (await redis().pubsub('NUMSUB', eventsTopic(organisationId))) as [string, number];
  return count;
};
const untilListening = async (organisationId: string) => {
  while ((await listening(organisationId)) === 0) await new Promise((go) => setImmediate(go));
};
const specs = { kind: 'specs' } as const;
const submission = { kind: 'submission', id: randomUUID(), state: 'approved', version: 2 } as const;

describe('the event stream', () => {
  it('begins with where running measurements stand, then tells what happens', async () => {
    const engineer = await makePerson();
    const id = await arrivedFile(engineer, new Uint8Array([1]));
    await setProgress(id, { secondsDone: 12.5, secondsTotal: 60 });
    const page = await browser(engineer);
    expect(await page.next()).toMatch(/^retry: \d+$/);
    expect(await page.nextEvent()).toEqual({
      kind: 'deliverable',
      id,
      state: 'waiting',
      progress: { secondsDone: 12.5, secondsTotal: 60 },
    });
    await publishEvent(redis(), [engineer.organisationId], submission);
    expect(await page.nextEvent()).toEqual(submission);
    page.leave();
  });

  it('carries nothing of another organisation', async () => {
    const [engineer, stranger] = [await makePerson(), await makePerson()];
    await arrivedFile(stranger, new Uint8Array([1]));
    const page = await browser(engineer);
    await untilListening(engineer.organisationId);
    await publishEvent(redis(), [stranger.organisationId], specs);
    await publishEvent(redis(), [engineer.organisationId], submission);
    expect(await page.nextEvent()).toEqual(submission);
    page.leave();
  });

  it('tells nobody of what their roles do not let them read', async () => {
    const operator = await makePerson(['qc_operator']);
    const page = await browser(operator);
    await untilListening(operator.organisationId);
    await publishEvent(redis(), [operator.organisationId], {
      kind: 'deliverable',
      id: randomUUID(),
      state: 'measured',
      progress: null,
    });
    await publishEvent(redis(), [operator.organisationId], submission);
    expect(await page.nextEvent()).toEqual(submission);
    page.leave();
  });

  it('shares one subscription per organisation, and lets it go with the last browser', async () => {
    const engineer = await makePerson();
    const [first, second] = [await browser(engineer), await browser(engineer)];
    await untilListening(engineer.organisationId);
    expect(await listening(engineer.organisationId)).toBe(1);
    first.leave();
    await publishEvent(redis(), [engineer.organisationId], specs);
    expect(await second.nextEvent()).toEqual(specs);
    await second.cancel();
    while ((await listening(engineer.organisationId)) > 0) await new Promise((go) => setImmediate(go));
  });

  it('keeps the connection alive with comments', async () => {
    const page = await browser(await makePerson(), { ...neverInTest, beat: 5 });
    await page.next();
    expect(await page.next()).toBe(': beat');
    page.leave();
  });

  it.each([
    [
      'the session is revoked',
      (scope: MemberScope) =>
        db()('sessions').where({ id: scope.sessionId }).update({ revoked_at: db().fn.now() }),
    ],
    [
      'the membership ends',
      (scope: MemberScope) =>
        db()('memberships').where({ user_id: scope.userId }).update({ removed_at: db().fn.now() }),
    ],
    [
      'all sessions are ended',
      (scope: MemberScope) => db()('users').where({ id: scope.userId }).increment('session_version', 1),
    ],
    [
      'the roles change',
      (scope: MemberScope) =>
        db()('membership_roles')
          .where({ organisation_id: scope.organisationId })
          .update({ role: 'spec_owner' }),
    ],
  ])('ends when %s', async (_what, change) => {
    const engineer = await makePerson();
    const page = await browser(engineer, { ...neverInTest, sessionCheck: 5 });
    await page.next();
    await change(engineer);
    expect(await page.next()).toBeNull();
  });

  it('is refused to a session that has ended', async () => {
    const engineer = await makePerson();
    await db()('sessions').where({ id: engineer.sessionId }).update({ revoked_at: db().fn.now() });
    expect(await openLiveStream(engineer, new AbortController().signal)).toMatchObject({
      ok: false,
      refusal: { code: 'unauthenticated' },
    });
  });
});
