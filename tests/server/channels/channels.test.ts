import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { channelListSchema, createAssignmentResultSchema } from '../../../src/domain/api/specs.ts';
import { specBodySchema } from '../../../src/domain/spec.ts';
import {
  assignSpec,
  changeChannel,
  createChannel,
  endAgreementWith,
  listChannels,
  listSuppliers,
  makeAgreement,
  readChannel,
  takeBackAssignment,
} from '../../../src/server/services/channels.ts';
import {
  makeAssignment,
  makeChain,
  makeDeliverable,
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

const hence = (days: number) => new Date(Date.now() + days * 24 * 3600_000);
const strict = specBodySchema.parse({ rules: [{ ...r128Body.rules[1], atMost: -9 }] });
const television = { kind: 'television' as const, timeZone: 'Europe/London' };

describe('a channel', () => {
  it('is made, renamed and listed; its name is its own within the organisation', async () => {
    const { specOwner, channel } = await makeChain(world.db);
    const made = valueOf(await createChannel(specOwner, { name: 'Two', ...television }));
    expect(made).toMatchObject({ name: 'Two', assignments: [], agreements: [], editable: true });
    expect(codeOf(await createChannel(specOwner, { name: 'Two', ...television }))).toBe('conflict');
    expect(refusalOf(await changeChannel(specOwner, channel.id, { name: 'Two' })).fields).toHaveProperty(
      'name',
    );
    const changed = valueOf(
      await changeChannel(specOwner, channel.id, { name: 'One', timeZone: 'Asia/Tokyo' }),
    );
    expect(changed).toMatchObject({ name: 'One', kind: 'television', timeZone: 'Asia/Tokyo' });
    const { items } = channelListSchema.parse(valueOf(await listChannels(specOwner)));
    expect(items.map(({ name }) => name)).toEqual(['One', 'Two']);
  });

  it('is assigned a spec at once: kept measurements are judged anew', async () => {
    const { specOwner, distributor, channel, mixer, spec } = await makeChain(world.db);
    const mix = await makeDeliverable(world.db, mixer, { channelIds: [channel.id] });
    const other = await makeSpecVersion(world.db, distributor, { body: strict });
    const asked = { contentKind: 'long_form' as const, specId: other.specId, inForceFrom: null };
    const result = createAssignmentResultSchema.parse(
      valueOf(await assignSpec(specOwner, channel.id, asked)),
    );
    expect(result).toMatchObject({ rejudged: 1, changed: 1 });
    expect(result.channel.assignments.map(({ specId, standing }) => [specId, standing])).toEqual([
      [other.specId, 'now'],
      [spec.specId, 'past'],
    ]);
    const [standing] = await world
      .db('deliverable_channels as dc')
      .join('verdicts as v', 'v.id', 'dc.verdict_id')
      .where('dc.deliverable_id', mix.id)
      .select('v.*');
    expect(standing).toMatchObject({ outcome: 'fail', spec_version_id: other.id });
  });

  it('is assigned a spec from a date, which can be taken back until it comes', async () => {
    const { specOwner, distributor, channel, spec } = await makeChain(world.db);
    const other = await makeSpecVersion(world.db, distributor);
    const asked = {
      contentKind: 'long_form' as const,
      specId: other.specId,
      inForceFrom: hence(2).toISOString(),
    };
    const { channel: row } = valueOf(await assignSpec(specOwner, channel.id, asked));
    expect(row.assignments.map(({ standing }) => standing)).toEqual(['planned', 'now']);
    expect(codeOf(await assignSpec(specOwner, channel.id, asked))).toBe('conflict');
    const [planned, now] = row.assignments;
    const left = valueOf(await takeBackAssignment(specOwner, channel.id, planned.id));
    expect(left.assignments).toMatchObject([{ specId: spec.specId, standing: 'now' }]);
    expect(codeOf(await takeBackAssignment(specOwner, channel.id, now.id))).toBe('conflict');
    expect(codeOf(await takeBackAssignment(specOwner, channel.id, planned.id))).toBe('not_found');
  });

  it('is not assigned what would judge nothing, what is not its organisation\u2019s, or what lies in the past', async () => {
    const { specOwner, distributor, channel, spec } = await makeChain(world.db);
    const only = await makeSpecVersion(world.db, distributor, { draft: true });
    const later = await makeSpecVersion(world.db, distributor, { inForceFrom: hence(5) });
    const foreign = (await makeChain(world.db)).spec;
    const assign = async (specId: string, inForceFrom: Date | null = null) =>
      codeOf(
        await assignSpec(specOwner, channel.id, {
          contentKind: 'trailer',
          specId,
          inForceFrom: inForceFrom && inForceFrom.toISOString(),
        }),
      );
    expect(await assign(only.specId)).toBe('conflict');
    expect(await assign(later.specId, hence(4))).toBe('conflict');
    expect(await assign(foreign.specId)).toBe('bad_input');
    expect(await assign(spec.specId, hence(-1))).toBe('bad_input');
    expect(await assign(later.specId, hence(6))).toBe('ok');
  });
});

describe('an agreement', () => {
  it('lets a supplier see the channel, until it is ended', async () => {
    const { specOwner, channel } = await makeChain(world.db);
    const newcomer = await makeChain(world.db);
    expect(codeOf(await readChannel(newcomer.mixer, channel.id))).toBe('not_found');
    const made = valueOf(await makeAgreement(specOwner, channel.id, newcomer.supplier.id));
    const agreement = made.agreements.find(({ supplier }) => supplier.id === newcomer.supplier.id);
    expect(agreement).toBeDefined();
    expect(codeOf(await makeAgreement(specOwner, channel.id, newcomer.supplier.id))).toBe('conflict');
    expect(codeOf(await readChannel(newcomer.mixer, channel.id))).toBe('ok');
    valueOf(await endAgreementWith(specOwner, channel.id, agreement?.id ?? ''));
    expect(codeOf(await readChannel(newcomer.mixer, channel.id))).toBe('not_found');
    expect(codeOf(await endAgreementWith(specOwner, channel.id, agreement?.id ?? ''))).toBe('not_found');
    // Made anew after it ended, and both readable in the activity by the supplier too.
    valueOf(await makeAgreement(specOwner, channel.id, newcomer.supplier.id));
    const events = await world
      .db('audit_events')
      .where({ subject_id: channel.id, counterpart_id: newcomer.supplier.id })
      .orderBy('id');
    expect(events.map(({ action }) => action)).toEqual([
      'agreement.made',
      'agreement.ended',
      'agreement.made',
    ]);
  });

  it('is made with suppliers only, whom a spec owner can list', async () => {
    const { specOwner, channel, supplier } = await makeChain(world.db);
    const station = await makeOrganisation(world.db, 'distributor');
    expect(codeOf(await makeAgreement(specOwner, channel.id, station.id))).toBe('bad_input');
    const ids = valueOf(await listSuppliers(specOwner)).items.map(({ id }) => id);
    expect(ids).toContain(supplier.id);
    expect(ids).not.toContain(station.id);
  });
});

describe('who sees and changes channels', () => {
  it('a supplier reads its channels without learning of other suppliers', async () => {
    const { specOwner, mixer, channel } = await makeChain(world.db);
    const rival = await makeOrganisation(world.db, 'supplier');
    valueOf(await makeAgreement(specOwner, channel.id, rival.id));
    const seen = valueOf(await readChannel(mixer, channel.id));
    expect(seen).toMatchObject({ agreements: [], editable: false });
    expect(JSON.stringify(valueOf(await listChannels(mixer)))).not.toContain(rival.id);
    expect(codeOf(await listSuppliers(mixer))).toBe('forbidden');
  });

  it('an operator and a supplier change nothing', async () => {
    const { operator, mixer, channel, spec } = await makeChain(world.db);
    for (const scope of [operator, mixer]) {
      const answers = [
        await createChannel(scope, { name: 'Mine', ...television }),
        await changeChannel(scope, channel.id, { name: 'Mine' }),
        await assignSpec(scope, channel.id, {
          contentKind: 'trailer',
          specId: spec.specId,
          inForceFrom: null,
        }),
        await makeAgreement(scope, channel.id, mixer.organisationId),
      ];
      expect(answers.map(codeOf)).toEqual(Array(4).fill('forbidden'));
    }
  });

  it('another distributor finds nothing to read or to change', async () => {
    const { channel, distributor, supplier, spec, specOwner } = await makeChain(world.db);
    const planned = await makeAssignment(world.db, distributor, channel, spec.specId, {
      inForceFrom: hence(3),
    });
    const [agreement] = valueOf(await readChannel(specOwner, channel.id)).agreements;
    const { specOwner: stranger, spec: own, channel: ownChannel } = await makeChain(world.db);
    const asked = { contentKind: 'trailer' as const, specId: own.specId, inForceFrom: null };
    const answers = [
      await readChannel(stranger, channel.id),
      await changeChannel(stranger, channel.id, { name: 'Taken over' }),
      await assignSpec(stranger, channel.id, asked),
      await takeBackAssignment(stranger, channel.id, planned),
      await takeBackAssignment(stranger, ownChannel.id, planned),
      await makeAgreement(stranger, channel.id, supplier.id),
      await endAgreementWith(stranger, channel.id, agreement.id),
      await endAgreementWith(stranger, ownChannel.id, agreement.id),
      await readChannel(stranger, randomUUID()),
    ];
    expect(answers.map(codeOf)).toEqual(Array(9).fill('not_found'));
    const left = valueOf(await readChannel(specOwner, channel.id));
    expect(left.name).toBe(channel.name);
    expect(left.assignments).toHaveLength(2);
    expect(left.agreements).toHaveLength(1);
  });
});
