import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  deliverableListSchema,
  deliverableQuerySchema,
  deliverableSorts,
} from '../../../src/domain/api/deliverables.ts';
import { writeCursor } from '../../../src/server/db/keyset.ts';
import { clearProgress, setProgress } from '../../../src/server/queue/progress.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import { listDeliverables, listProgrammes } from '../../../src/server/services/deliverables.ts';
import {
  figures,
  makeChain,
  makeChannel,
  makeDeliverable,
  makeMember,
  makeSubmission,
  makeVerdict,
  openWorld,
  stereoFormat,
  type World,
} from '../../factories/world.ts';
import { codeOf, refusalOf, valueOf } from '../answers.ts';

let world: World;
let chain: Awaited<ReturnType<typeof makeChain>>;
beforeAll(async () => {
  world = await openWorld();
  chain = await makeChain(world.db);
});
afterAll(() => world.close());

type Given = Partial<Record<keyof typeof deliverableQuerySchema.shape, string | number>>;
/** The list as the endpoint parses its query, through the schema of the answer. */
async function list(scope: MemberScope, given: Given = {}) {
  return deliverableListSchema.parse(
    valueOf(await listDeliverables(scope, deliverableQuerySchema.parse(given))),
  );
}
const names = async (scope: MemberScope, given: Given = {}) =>
  (await list(scope, given)).items.map((row) => row.fileName);

describe('a row of the list', () => {
  it('tells facts, figures, and how it stands with each channel, worst first', async () => {
    const { db } = world;
    const { mixer, channel, spec, distributor } = chain;
    const second = await makeChannel(db, distributor, { name: 'A channel before' });
    const made = await makeDeliverable(db, mixer, {
      fileName: 'tallow_104_mixst_v2.wav',
      programmeTitle: 'The Tallow Road',
      episodeLabel: '1.04',
      channelIds: [channel.id, second.id],
      figures: figures({ integratedLufs: -20.1 }),
    });
    const verdictId = await makeVerdict(db, mixer, made, spec.id, { outcome: 'fail', channelId: channel.id });
    const submissionId = await makeSubmission(db, mixer, made, {
      distributor,
      channel,
      specVersionId: spec.id,
      verdictId,
    });

    const { items, total } = await list(mixer, { q: 'tallow 1.04' });
    expect(total).toBe(1);
    expect(items).toHaveLength(1);
    expect(items[0]).toMatchObject({
      id: made.id,
      programmeTitle: 'The Tallow Road',
      episodeLabel: '1.04',
      state: 'measured',
      outcome: 'fail',
      progress: null,
      format: stereoFormat,
      figures: { loudness: { integratedLufs: -20.1 } },
    });
    expect(items[0].channels).toMatchObject([
      {
        channelId: channel.id,
        distributorName: distributor.name,
        verdictId,
        specVersionId: spec.id,
        specVersionNumber: 1,
        verdict: { outcome: 'fail' },
        submission: { id: submissionId, state: 'awaiting_review' },
      },
      { channelId: second.id, verdict: null, specName: null, submission: null },
    ]);
  });

  it('shows where measuring stands while it goes on', async () => {
    const { mixer } = chain;
    const { id } = await makeDeliverable(world.db, mixer, { fileName: 'under way.wav' });
    await world.db('deliverables').where({ id }).update({ state: 'measuring' });
    await setProgress(id, { secondsDone: 12, secondsTotal: 90 });
    expect((await list(mixer, { q: 'under way' })).items[0].progress).toEqual({
      secondsDone: 12,
      secondsTotal: 90,
    });
    await clearProgress(id);
    expect((await list(mixer, { q: 'under way' })).items[0].progress).toBeNull();
  });
});

describe('whose deliverables they are', () => {
  it('shows nobody the deliverables of another organisation, and discarded ones to none', async () => {
    const other = await makeChain(world.db);
    await makeDeliverable(world.db, other.mixer, { fileName: 'theirs.wav' });
    const { id } = await makeDeliverable(world.db, other.mixer, { fileName: 'thrown away.wav' });
    await world.db('deliverables').where({ id }).update({ discarded_at: world.db.fn.now() });
    expect(await names(other.mixer)).toEqual(['theirs.wav']);
    expect(await names(chain.mixer, { q: 'theirs' })).toEqual([]);
  });

  it('refuses people whose role does not read deliverables', async () => {
    const query = deliverableQuerySchema.parse({});
    const supplierQc = await makeMember(world.db, chain.supplier, ['qc_operator']);
    for (const scope of [chain.operator, chain.specOwner, supplierQc])
      expect(codeOf(await listDeliverables(scope, query))).toBe('forbidden');
    const administrator = await makeMember(world.db, chain.supplier, ['administrator']);
    expect(codeOf(await listDeliverables(administrator, query))).toBe('ok');
  });
});

describe('filters', () => {
  let mixer: MemberScope;
  let channelId: string;
  let secondId: string;
  beforeAll(async () => {
    const { db } = world;
    const own = await makeChain(db);
    mixer = own.mixer;
    channelId = own.channel.id;
    secondId = (await makeChannel(db, own.distributor)).id;
    const make = async (
      fileName: string,
      outcome: 'pass' | 'advisory' | 'fail' | null,
      given: Parameters<typeof makeDeliverable>[2] = {},
    ) => {
      const made = await makeDeliverable(db, mixer, { fileName, channelIds: [channelId], ...given });
      if (!outcome) return;
      const verdictId = await makeVerdict(db, mixer, made, own.spec.id, { outcome, channelId });
      if (outcome === 'fail')
        await makeSubmission(
          db,
          mixer,
          made,
          { ...own, specVersionId: own.spec.id, verdictId },
          { state: 'rejected', decidedBy: own.operator.userId, reason: 'Too loud.' },
        );
    };
    await make('clean.wav', 'pass', { programmeTitle: 'Small Gales', contentKind: 'trailer' });
    await make('wide.wav', 'advisory', { channelIds: [channelId, secondId] });
    await make('100%_loud.wav', 'fail');
    await make('unjudged.wav', null);
  });

  it.each([
    [{ q: '100%' }, ['100%_loud.wav']],
    [{ q: '_' }, ['100%_loud.wav']],
    [{ q: 'GALES clean' }, ['clean.wav']],
    [{ programme: 'small gales' }, ['clean.wav']],
    [{ kind: 'trailer' }, ['clean.wav']],
    [{ verdict: 'pass' }, ['clean.wav']],
    [{ verdict: 'advisory,fail' }, ['100%_loud.wav', 'wide.wav']],
    [{ verdict: 'none' }, ['unjudged.wav']],
    [{ verdict: 'none,pass' }, ['clean.wav', 'unjudged.wav']],
    [{ state: 'rejected' }, ['100%_loud.wav']],
    [{ state: 'rejected,measured' }, ['100%_loud.wav', 'clean.wav', 'unjudged.wav', 'wide.wav']],
    [{ state: 'waiting' }, []],
  ] satisfies [Given, string[]][])('%j finds %j', async (given, expected) => {
    const { items, total } = await list(mixer, given);
    expect(items.map((row) => row.fileName).sort()).toEqual(expected);
    expect(total).toBe(expected.length);
  });

  it('asks for the verdict within the channel when a channel is given', async () => {
    expect(await names(mixer, { channel: secondId })).toEqual(['wide.wav']);
    expect(await names(mixer, { channel: secondId, verdict: 'advisory' })).toEqual([]);
    expect(await names(mixer, { channel: secondId, verdict: 'none' })).toEqual(['wide.wav']);
    expect(await names(mixer, { channel: channelId, verdict: 'advisory' })).toEqual(['wide.wav']);
  });

  it.each([
    { verdict: 'splendid' },
    { state: 'measured,asleep' },
    { cursor: 'not a cursor' },
    { cursor: writeCursor({ s: 'created', o: 'desc', k: 'tomorrow', id: randomUUID() }) },
    { cursor: writeCursor({ s: 'range', o: 'desc', k: '1', id: randomUUID() }) },
  ])('refuses %j with a sentence', async (given) => {
    const refusal = refusalOf(await listDeliverables(mixer, deliverableQuerySchema.parse(given)));
    expect(refusal.code).toBe('bad_input');
    expect(Object.keys(refusal.fields ?? {})).toEqual(Object.keys(given));
  });
});

describe('sorting and paging', () => {
  let mixer: MemberScope;
  const levels = [-23, -23, -18.5, null, -30.25, null, -23, -9.1];
  const numbered = (given: Parameters<typeof makeDeliverable>[2], n: number) =>
    makeDeliverable(world.db, mixer, {
      fileName: `${n}.wav`,
      programmeTitle: n % 3 === 0 ? undefined : 'Salt & Signal',
      episodeLabel: n % 3 === 0 ? undefined : `${n * 4}`,
      ...given,
    });
  beforeAll(async () => {
    ({ mixer } = await makeChain(world.db));
    for (const [n, level] of levels.entries())
      await numbered(
        {
          figures: figures({ integratedLufs: level, maxDbtp: level, rangeLu: level }),
          format: { ...stereoFormat, durationSeconds: 20 + (n % 3) },
        },
        n,
      );
  });

  async function allPages(given: Given, between: () => Promise<unknown> = async () => {}) {
    const seen: string[] = [];
    let cursor: string | undefined;
    do {
      const page = await list(mixer, { ...given, limit: 3, ...(cursor && { cursor }) });
      seen.push(...page.items.map((row) => row.fileName));
      cursor = page.nextCursor ?? undefined;
      await between();
    } while (cursor);
    return seen;
  }

  it.each(
    deliverableSorts.flatMap((sort) => [
      { sort, order: 'asc' },
      { sort, order: 'desc' },
    ]),
  )('gives every row once and in the same order in pages as at once, by %j', async (given) => {
    const atOnce = await names(mixer, { ...given, limit: 200 });
    expect(atOnce).toHaveLength(levels.length);
    expect(await allPages(given)).toEqual(atOnce);
  });

  it('puts what has no value last either way', async () => {
    for (const order of ['asc', 'desc']) {
      const inOrder = (await list(mixer, { sort: 'integrated', order })).items.map(
        (row) => row.figures?.loudness.integratedLufs,
      );
      const values = levels
        .filter((level) => level !== null)
        .sort((a, b) => (order === 'asc' ? a - b : b - a));
      expect(inOrder).toEqual([...values, null, null]);
    }
  });

  it('orders episodes by number, not by letter', async () => {
    expect((await names(mixer, { sort: 'programme', order: 'asc' })).slice(0, 5)).toEqual([
      '1.wav',
      '2.wav',
      '4.wav',
      '5.wav',
      '7.wav',
    ]);
  });

  it('neither skips nor repeats a row when others arrive between two pages', async () => {
    let n = 100;
    const before = await names(mixer, { limit: 200 });
    const newest = await allPages({}, () => numbered({}, n++));
    expect(newest).toEqual(before);
    const loudest = await names(mixer, { sort: 'integrated', limit: 200 });
    const paged = await allPages({ sort: 'integrated' }, () =>
      numbered({ figures: figures({ integratedLufs: -1 }) }, n++),
    );
    expect(paged).toEqual(loudest);
  });
});

describe('programmes', () => {
  it('come by title with their episodes by number, of the own organisation only', async () => {
    const { mixer } = await makeChain(world.db);
    for (const [programmeTitle, episodeLabel] of [
      ['Third Lantern', '10'],
      ['Third Lantern', '9'],
      ['Salt & Signal', undefined],
    ] as const)
      await makeDeliverable(world.db, mixer, { programmeTitle, episodeLabel });
    expect(valueOf(await listProgrammes(mixer)).items).toMatchObject([
      { title: 'Salt & Signal', episodes: [] },
      { title: 'Third Lantern', episodes: ['9', '10'] },
    ]);
  });
});
