import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  presenceSchema,
  submissionListSchema,
  submissionQuerySchema,
  submissionSorts,
} from '../../../src/domain/api/submissions.ts';
import { passageSchema } from '../../../src/domain/api/deliverables.ts';
import type { LiveEvent } from '../../../src/domain/api/people.ts';
import { encodeSeries } from '../../../src/engine/series.ts';
import { closeEventsHub, listenToEvents } from '../../../src/server/events-hub.ts';
import { redis } from '../../../src/server/redis.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import { decideSubmissions } from '../../../src/server/services/decisions.ts';
import { getSubmissionAudio, getSubmissionPassage } from '../../../src/server/services/passages.ts';
import { tellPresence } from '../../../src/server/services/presence.ts';
import { listSubmissions } from '../../../src/server/services/submissions.ts';
import { closeStorage, putObject } from '../../../src/server/storage/storage.ts';
import {
  figures,
  makeAgreement,
  makeAssignment,
  makeChain,
  makeChannel,
  makeMember,
  openWorld,
  type World,
} from '../../factories/world.ts';
import { codeOf, refusalOf, valueOf } from '../answers.ts';
import { failing, makeSubmitted, type Chain } from './delivery.ts';

let world: World;
beforeAll(async () => {
  world = await openWorld({ S3_BUCKET: `test-${randomUUID().slice(0, 8)}` });
});
afterAll(async () => {
  closeEventsHub();
  closeStorage();
  await world.close();
});

type Given = Partial<Record<keyof typeof submissionQuerySchema.shape, string | number>>;
async function list(scope: MemberScope, given: Given = {}) {
  return submissionListSchema.parse(
    valueOf(await listSubmissions(scope, submissionQuerySchema.parse(given))),
  );
}
const hoursFromNow = (hours: number) => new Date(Date.now() + hours * 3_600_000).toISOString();

describe('the list of submissions', () => {
  let chain: Chain;
  let rival: Chain;
  let secondChannel: { id: string; name: string };
  const files = async (scope: MemberScope, given: Given = {}) =>
    (await list(scope, given)).items.map((row) => row.fileName);
  beforeAll(async () => {
    const { db } = world;
    chain = await makeChain(db);
    rival = { ...chain, ...(({ supplier, mixer }) => ({ supplier, mixer }))(await makeChain(db)) };
    await makeAgreement(db, chain.distributor, chain.channel, rival.supplier);
    secondChannel = await makeChannel(db, chain.distributor, { name: 'Harrow Kids' });
    await makeAssignment(db, chain.distributor, secondChannel, chain.spec.specId);
    await makeAgreement(db, chain.distributor, secondChannel, chain.supplier);

    await makeSubmitted(db, chain, {
      fileName: 'gales.wav',
      programmeTitle: 'Small Gales',
      episodeLabel: '2.11',
      airAt: hoursFromNow(30),
    });
    await makeSubmitted(db, chain, { fileName: 'loud.wav', figures: failing, airAt: hoursFromNow(2) });
    await makeSubmitted(db, { ...chain, channel: secondChannel }, { fileName: 'kids.wav' });
    await makeSubmitted(db, chain, { fileName: 'late.wav', airAt: hoursFromNow(-1) });
    await makeSubmitted(db, rival, { fileName: 'rival.wav', airAt: hoursFromNow(23) });
    const { id, version } = await makeSubmitted(db, chain, { fileName: 'done.wav', airAt: hoursFromNow(1) });
    valueOf(await decideSubmissions(chain.operator, [{ id, version, decision: 'approve' }]));
    await makeSubmitted(db, await makeChain(db), { fileName: 'elsewhere.wav' });
  });

  it('is the queue of its channels to a distributor, soonest to air first, undated last', async () => {
    expect(await files(chain.operator)).toEqual([
      'late.wav',
      'done.wav',
      'loud.wav',
      'rival.wav',
      'gales.wav',
      'kids.wav',
    ]);
    expect(await files(chain.operator, { state: 'awaiting_review' })).toEqual([
      'late.wav',
      'loud.wav',
      'rival.wav',
      'gales.wav',
      'kids.wav',
    ]);
  });

  it('is its own submissions to a supplier, and never a rival’s', async () => {
    expect((await files(chain.mixer)).sort()).toEqual([
      'done.wav',
      'gales.wav',
      'kids.wav',
      'late.wav',
      'loud.wav',
    ]);
    expect(await files(rival.mixer)).toEqual(['rival.wav']);
    expect(await files(rival.mixer, { supplier: chain.supplier.id })).toEqual([]);
  });

  it('counts over the whole filter, not over the page', async () => {
    expect(await list(chain.operator, { limit: 1 })).toMatchObject({
      total: 6,
      counts: { awaiting: 5, airingWithin24h: 2 },
    });
    expect(await list(chain.operator, { supplier: rival.supplier.id })).toMatchObject({
      total: 1,
      counts: { awaiting: 1, airingWithin24h: 1 },
    });
    expect((await list(chain.operator, { state: 'approved' })).counts).toEqual({
      awaiting: 0,
      airingWithin24h: 0,
    });
  });

  it('filters by words, verdict, channel and state', async () => {
    expect(await files(chain.operator, { q: 'gales 2.11' })).toEqual(['gales.wav']);
    expect(await files(chain.operator, { q: rival.supplier.name })).toEqual(['rival.wav']);
    expect(await files(chain.operator, { q: 'harrow KIDS' })).toEqual(['kids.wav']);
    expect(await files(chain.operator, { verdict: 'fail' })).toEqual(['loud.wav']);
    expect(await files(chain.operator, { channel: secondChannel.id })).toEqual(['kids.wav']);
    expect(await files(chain.operator, { state: 'approved,rejected' })).toEqual(['done.wav']);
    for (const odd of [{ state: 'pending' }, { verdict: 'none' }, { cursor: 'x' }] satisfies Given[])
      expect(refusalOf(await listSubmissions(chain.operator, submissionQuerySchema.parse(odd))).code).toBe(
        'bad_input',
      );
  });

  it.each(
    submissionSorts.flatMap((sort) => [
      { sort, order: 'asc' },
      { sort, order: 'desc' },
    ]),
  )('gives every row once in pages, by %j', async (given) => {
    const atOnce = await files(chain.operator, given);
    const paged: string[] = [];
    let cursor: string | null = null;
    do {
      const page: Awaited<ReturnType<typeof list>> = await list(chain.operator, {
        ...given,
        limit: 2,
        ...(cursor && { cursor }),
      });
      paged.push(...page.items.map((row) => row.fileName));
      cursor = page.nextCursor;
    } while (cursor);
    expect(atOnce).toHaveLength(6);
    expect(paged).toEqual(atOnce);
  });
});

describe('who has it open', () => {
  let chain: Chain;
  let second: MemberScope;
  let id: string;
  beforeAll(async () => {
    chain = await makeChain(world.db);
    second = await makeMember(world.db, chain.distributor, ['qc_operator']);
    ({ id } = await makeSubmitted(world.db, chain));
  });
  const person = ({ userId, userName }: MemberScope) => ({ id: userId, name: userName });

  it('is told to the others who decide, and to the open pages of the distributor', async () => {
    const heard: LiveEvent[] = [];
    let both = () => {};
    const told = new Promise<void>((resolve) => (both = resolve));
    const listening = listenToEvents(chain.distributor.id, {
      onEvent: (event) => {
        heard.push(event);
        if (heard.length === 2) both();
      },
      onGap: () => {},
    });
    await listening.ready;
    expect(presenceSchema.parse(valueOf(await tellPresence(chain.operator, id)))).toEqual({ openBy: [] });
    expect(valueOf(await tellPresence(second, id))).toEqual({ openBy: [person(chain.operator)] });
    await told;
    listening.stop();
    expect(heard[1]).toEqual({
      kind: 'presence',
      submissionId: id,
      openBy: [person(chain.operator), person(second)].sort((a, b) => a.name.localeCompare(b.name, 'en')),
    });
    expect((await list(chain.operator)).items[0].openBy).toEqual([person(second)]);
    expect((await list(second)).items[0].openBy).toEqual([person(chain.operator)]);
  });

  it('is never told to the supplier, nor may anybody else say it', async () => {
    valueOf(await tellPresence(second, id));
    expect((await list(chain.mixer)).items[0].openBy).toEqual([]);
    expect((await list(chain.specOwner)).items[0].openBy).toEqual([]);
    expect(codeOf(await tellPresence(chain.mixer, id))).toBe('forbidden');
    expect(codeOf(await tellPresence((await makeChain(world.db)).operator, id))).toBe('not_found');
  });

  it('is forgotten half a minute after it was last said', async () => {
    valueOf(await tellPresence(second, id));
    const key = `presence:${id}`;
    expect(await redis().ttl(key)).toBeGreaterThan(25);
    expect(await redis().ttl(key)).toBeLessThanOrEqual(30);
    await redis().hset(
      key,
      second.userId,
      JSON.stringify({ name: second.userName, at: Date.now() - 30_001 }),
    );
    expect(valueOf(await tellPresence(chain.operator, id))).toEqual({ openBy: [] });
  });
});

describe('what a reviewer draws and plays', () => {
  it('is what was submitted, for both sides and nobody else', async () => {
    const chain = await makeChain(world.db);
    const stranger = await makeChain(world.db);
    const { id, deliverableId } = await makeSubmitted(world.db, chain, {
      figures: figures({ maxDbtp: 0.2 }),
    });
    const { series_key, storage_key } = await world
      .db('deliverables as d')
      .join('measurements as m', 'm.deliverable_id', 'd.id')
      .where('d.id', deliverableId)
      .first('m.series_key', 'd.storage_key');
    const series = {
      stepSeconds: 0.01 as const,
      energy: new Float64Array(400).fill(0.01),
      truePeak: new Float32Array(400).fill(1.02),
      channelCount: 1,
      channelEnergy: new Float32Array(40).fill(0.01),
    };
    await putObject(series_key, encodeSeries(series));
    await putObject(storage_key, Buffer.from('RIFF'));
    for (const scope of [chain.mixer, chain.operator]) {
      const passage = passageSchema.parse(valueOf(await getSubmissionPassage(scope, id)));
      expect(passage.shortTermLufs).toHaveLength(40);
      expect(passage.excursions[0]).toMatchObject({ number: 1, ruleId: 'true-peak', startSeconds: 0 });
      const { url } = valueOf(await getSubmissionAudio(scope, id));
      expect(await (await fetch(url)).text()).toBe('RIFF');
    }
    for (const scope of [stranger.mixer, stranger.operator]) {
      expect(codeOf(await getSubmissionPassage(scope, id))).toBe('not_found');
      expect(codeOf(await getSubmissionAudio(scope, id))).toBe('not_found');
    }
    expect(codeOf(await getSubmissionPassage(chain.operator, randomUUID()))).toBe('not_found');
  });
});
