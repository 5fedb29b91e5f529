import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { publishSpecResultSchema, specDetailSchema, specListSchema } from '../../../src/domain/api/specs.ts';
import { specBodySchema } from '../../../src/domain/spec.ts';
import { db } from '../../../src/server/db/connection.ts';
import { judgeDeliverables } from '../../../src/server/services/judging.ts';
import { systemScope } from '../../../src/server/scope.ts';
import {
  createSpec,
  discardDraft,
  listSpecs,
  listStartingSpecs,
  publishSpec,
  readSpec,
  saveDraft,
} from '../../../src/server/services/specs.ts';
import { redis } from '../../../src/server/redis.ts';
import { eventsTopic } from '../../../src/server/events.ts';
import {
  figures,
  makeChain,
  makeDeliverable,
  makeMember,
  makeOrganisation,
  makeSpecVersion,
  openWorld,
  r128Body,
  type World,
} from '../../factories/world.ts';
import { codeOf, refusalOf, valueOf } from '../answers.ts';

let world: World;
beforeAll(async () => {
  world = await openWorld();
});
afterAll(() => world.close());

/** As `r128Body`, but aiming at -16. */
const louder = specBodySchema.parse({
  rules: [
    {
      id: 'integrated',
      kind: 'integrated',
      targetLufs: -16,
      toleranceAboveLu: 1,
      toleranceBelowLu: 1,
      breach: 'reject',
    },
  ],
});
const draft = (body = louder) => ({ body, changeNote: 'Louder' });
const hence = (days: number) => new Date(Date.now() + days * 24 * 3600_000).toISOString();

const verdictsOf = (deliverableId: string) =>
  world
    .db('deliverable_channels as dc')
    .join('verdicts as v', 'v.id', 'dc.verdict_id')
    .where('dc.deliverable_id', deliverableId)
    .select('v.outcome', 'v.spec_version_id');

describe('a spec', () => {
  it('is made with a draft from a starting spec, and is listed with it', async () => {
    const { specOwner } = await makeChain(world.db);
    const [starting] = valueOf(await listStartingSpecs(specOwner)).items;
    const made = specDetailSchema.parse(
      valueOf(await createSpec(specOwner, { name: 'Long form', startingSpecId: starting.id })),
    );
    expect(made).toMatchObject({ name: 'Long form', current: null, hasDraft: true, editable: true });
    expect(made.versions).toHaveLength(1);
    expect(made.versions[0]).toMatchObject({ number: null, body: starting.body });
    const { items } = specListSchema.parse(valueOf(await listSpecs(specOwner)));
    expect(items.map(({ id }) => id)).toContain(made.id);
  });

  it('is refused under a name that is taken, and from a starting spec that does not exist', async () => {
    const { specOwner } = await makeChain(world.db);
    valueOf(await createSpec(specOwner, { name: 'Twice' }));
    expect(refusalOf(await createSpec(specOwner, { name: 'Twice' }))).toMatchObject({
      code: 'conflict',
      fields: { name: expect.any(String) },
    });
    expect(codeOf(await createSpec(specOwner, { name: 'Other', startingSpecId: 'none' }))).toBe('bad_input');
  });

  it('takes the next number when published, from the moment asked', async () => {
    const { specOwner, spec, channel } = await makeChain(world.db);
    valueOf(await saveDraft(specOwner, spec.specId, draft()));
    const inForceFrom = hence(3);
    const result = publishSpecResultSchema.parse(
      valueOf(await publishSpec(specOwner, spec.specId, { inForceFrom })),
    );
    expect(result.spec.versions.map(({ number }) => number)).toEqual([2, 1]);
    expect(result.spec.versions[0]).toMatchObject({
      inForceFrom,
      changeNote: 'Louder',
      publishedBy: { id: specOwner.userId },
    });
    expect(result.spec.hasDraft).toBe(false);
    expect(result.spec.current?.number).toBe(1);
    expect(result.spec.usedBy).toEqual([
      { channelId: channel.id, channelName: channel.name, contentKind: 'long_form' },
    ]);
  });

  it('is not published without a draft, nor from a moment that has gone by', async () => {
    const { specOwner, spec } = await makeChain(world.db);
    expect(codeOf(await publishSpec(specOwner, spec.specId, { inForceFrom: null }))).toBe('conflict');
    valueOf(await saveDraft(specOwner, spec.specId, draft()));
    expect(codeOf(await publishSpec(specOwner, spec.specId, { inForceFrom: hence(-1) }))).toBe('bad_input');
    expect(valueOf(await readSpec(specOwner, spec.specId)).hasDraft).toBe(true);
  });

  it('keeps one draft, which can be discarded', async () => {
    const { specOwner, spec } = await makeChain(world.db);
    valueOf(await saveDraft(specOwner, spec.specId, draft()));
    const again = valueOf(await saveDraft(specOwner, spec.specId, { body: r128Body, changeNote: 'Back' }));
    expect(again.versions.filter(({ number }) => number === null)).toMatchObject([{ changeNote: 'Back' }]);
    expect(valueOf(await discardDraft(specOwner, spec.specId)).hasDraft).toBe(false);
    expect(codeOf(await discardDraft(specOwner, spec.specId))).toBe('conflict');
  });

  it('tells a writer that somebody saved the draft meanwhile, and keeps theirs', async () => {
    const { specOwner, distributor, spec } = await makeChain(world.db);
    const second = await makeMember(world.db, distributor, ['spec_owner'], { name: 'Second Writer' });
    const first = valueOf(await saveDraft(specOwner, spec.specId, { ...draft(), seenUpdatedAt: null }));
    const seenUpdatedAt = first.versions[0].updatedAt;
    valueOf(await saveDraft(second, spec.specId, { body: r128Body, changeNote: 'Mine', seenUpdatedAt }));
    const refusal = refusalOf(await saveDraft(specOwner, spec.specId, { ...draft(), seenUpdatedAt }));
    expect(refusal.code).toBe('conflict');
    expect(refusal.message).toContain('Second Writer');
    expect(codeOf(await publishSpec(specOwner, spec.specId, { inForceFrom: null, seenUpdatedAt }))).toBe(
      'conflict',
    );
    expect(valueOf(await readSpec(specOwner, spec.specId)).versions[0].changeNote).toBe('Mine');
  });

  it('gives two who publish at the same time one version and one refusal', async () => {
    const { specOwner, spec } = await makeChain(world.db);
    valueOf(await saveDraft(specOwner, spec.specId, draft()));
    const both = await Promise.all([
      publishSpec(specOwner, spec.specId, { inForceFrom: null }),
      publishSpec(specOwner, spec.specId, { inForceFrom: null }),
    ]);
    expect(both.map(codeOf).sort()).toEqual(['conflict', 'ok']);
    expect(valueOf(await readSpec(specOwner, spec.specId)).versions).toHaveLength(2);
  });
});

describe('a published version', () => {
  it('cannot be changed or deleted, neither by the application nor by the owner of the database', async () => {
    const { spec } = await makeChain(world.db);
    const refused = /spec_versions rows are never changed or deleted/;
    for (const connection of [db(), world.db]) {
      const version = () => connection('spec_versions').where('id', spec.id);
      await expect(version().update({ body: JSON.stringify(louder) })).rejects.toThrow(refused);
      await expect(version().update({ in_force_from: new Date() })).rejects.toThrow(refused);
      await expect(version().delete()).rejects.toThrow(refused);
    }
  });

  it('judges kept measurements anew at once, and says how many outcomes changed', async () => {
    const chain = await makeChain(world.db);
    const { specOwner, spec, channel, mixer } = chain;
    const channelIds = [channel.id];
    const quiet = await makeDeliverable(world.db, mixer, { channelIds });
    const loud = await makeDeliverable(world.db, mixer, {
      channelIds,
      figures: figures({ integratedLufs: -16 }),
    });
    const shortForm = await makeDeliverable(world.db, mixer, { channelIds, contentKind: 'short_form' });
    await judgeDeliverables(db(), systemScope('test'), { channelIds });
    expect(await verdictsOf(quiet.id)).toMatchObject([{ outcome: 'pass', spec_version_id: spec.id }]);
    expect(await verdictsOf(loud.id)).toMatchObject([{ outcome: 'fail', spec_version_id: spec.id }]);

    const peakOnly = specBodySchema.parse({ rules: [r128Body.rules[1]] });
    valueOf(await saveDraft(specOwner, spec.specId, draft(peakOnly)));
    const result = valueOf(await publishSpec(specOwner, spec.specId, { inForceFrom: null }));
    expect(result).toMatchObject({ rejudged: 2, changed: 1 });
    const versionId = result.spec.current?.id;
    expect(result.spec.current?.number).toBe(2);
    expect(await verdictsOf(quiet.id)).toEqual([{ outcome: 'pass', spec_version_id: versionId }]);
    expect(await verdictsOf(loud.id)).toEqual([{ outcome: 'pass', spec_version_id: versionId }]);
    expect(await verdictsOf(shortForm.id)).toEqual([]);
    // Nothing was measured again, and what was judged before is kept.
    expect(await world.db('measurements').where('deliverable_id', loud.id)).toHaveLength(1);
    expect(await world.db('verdicts').where('measurement_id', loud.measurementId)).toHaveLength(2);
  });

  it('that is in force later changes no verdict yet', async () => {
    const { specOwner, spec, channel, mixer } = await makeChain(world.db);
    const mix = await makeDeliverable(world.db, mixer, { channelIds: [channel.id] });
    await judgeDeliverables(db(), systemScope('test'), { channelIds: [channel.id] });
    valueOf(await saveDraft(specOwner, spec.specId, draft()));
    const result = valueOf(await publishSpec(specOwner, spec.specId, { inForceFrom: hence(1) }));
    expect(result).toMatchObject({ rejudged: 0, changed: 0 });
    expect(await verdictsOf(mix.id)).toEqual([{ outcome: 'pass', spec_version_id: spec.id }]);
  });

  it('is written into the activity, and told live to the suppliers under it and to nobody else', async () => {
    const { specOwner, spec, distributor, supplier } = await makeChain(world.db);
    const bystander = await makeOrganisation(world.db, 'supplier');
    valueOf(await saveDraft(specOwner, spec.specId, draft()));
    const listener = redis().duplicate();
    const heard: string[] = [];
    listener.on('message', (topic: string) => heard.push(topic));
    await listener.subscribe(...[distributor.id, supplier.id, bystander.id].map(eventsTopic));
    valueOf(await publishSpec(specOwner, spec.specId, { inForceFrom: null }));
    // What was published before on the same connection is delivered before the answer to a later command.
    await listener.unsubscribe();
    await listener.quit();
    expect(heard.sort()).toEqual([distributor.id, supplier.id].map(eventsTopic).sort());
    const [event] = await world
      .db('audit_events')
      .where({ subject_id: spec.specId, action: 'spec.published' });
    expect(event).toMatchObject({ organisation_id: distributor.id, actor_id: specOwner.userId });
    expect(event.detail).toMatchObject({ number: 2, rejudged: 0, changed: 0 });
  });
});

describe('who sees and changes specs', () => {
  it('a supplier reads the published versions that its channels are held to, never a draft', async () => {
    const { specOwner, mixer, spec } = await makeChain(world.db);
    valueOf(await saveDraft(specOwner, spec.specId, draft()));
    const seen = valueOf(await readSpec(mixer, spec.specId));
    expect(seen).toMatchObject({ hasDraft: false, editable: false });
    expect(seen.versions.map(({ number }) => number)).toEqual([1]);
    expect(valueOf(await listSpecs(mixer)).items).toMatchObject([{ id: spec.specId, hasDraft: false }]);
  });

  it('an operator of the distributor reads, and sees no draft', async () => {
    const { specOwner, operator, spec } = await makeChain(world.db);
    valueOf(await saveDraft(specOwner, spec.specId, draft()));
    expect(valueOf(await readSpec(operator, spec.specId))).toMatchObject({
      hasDraft: false,
      editable: false,
    });
    expect(codeOf(await saveDraft(operator, spec.specId, draft()))).toBe('forbidden');
    expect(codeOf(await publishSpec(operator, spec.specId, { inForceFrom: null }))).toBe('forbidden');
  });

  it('a spec of no agreed channel is not there for a supplier, nor once the agreement has ended', async () => {
    const { mixer, distributor, supplier, spec } = await makeChain(world.db);
    const other = await makeSpecVersion(world.db, distributor);
    expect(codeOf(await readSpec(mixer, other.specId))).toBe('not_found');
    await world.db('agreements').where('supplier_id', supplier.id).update({ ended_at: new Date() });
    expect(codeOf(await readSpec(mixer, spec.specId))).toBe('not_found');
    expect(valueOf(await listSpecs(mixer)).items).toEqual([]);
  });

  it('another distributor finds nothing to read or to change', async () => {
    const { spec, specOwner } = await makeChain(world.db);
    valueOf(await saveDraft(specOwner, spec.specId, draft()));
    const stranger = (await makeChain(world.db)).specOwner;
    const answers = [
      await readSpec(stranger, spec.specId),
      await saveDraft(stranger, spec.specId, draft()),
      await discardDraft(stranger, spec.specId),
      await publishSpec(stranger, spec.specId, { inForceFrom: null }),
      await readSpec(stranger, randomUUID()),
    ];
    expect(answers.map(codeOf)).toEqual(Array(5).fill('not_found'));
    expect(valueOf(await listSpecs(stranger)).items.map(({ id }) => id)).not.toContain(spec.specId);
    expect(valueOf(await readSpec(specOwner, spec.specId)).versions[0].changeNote).toBe('Louder');
  });
});
