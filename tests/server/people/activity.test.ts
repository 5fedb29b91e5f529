import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { db } from '../../../src/server/db/connection.ts';
import { recordEvent } from '../../../src/server/db/audit-repository.ts';
import { listActivity } from '../../../src/server/services/activity.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import { makeMember, makeOrganisation, openWorld, type World } from '../../factories/world.ts';

let world: World;
beforeAll(async () => {
  world = await openWorld();
});
afterAll(() => world.close());

async function pair(): Promise<{ mixer: MemberScope; operator: MemberScope }> {
  return {
    mixer: await makeMember(world.db, await makeOrganisation(world.db, 'supplier'), ['mix_engineer'], {
      name: 'Maren Oduya',
    }),
    operator: await makeMember(world.db, await makeOrganisation(world.db, 'distributor'), ['qc_operator'], {
      name: 'Odile Strand',
    }),
  };
}

const decided = (by: MemberScope, supplierId: string, detail: Record<string, unknown>) =>
  recordEvent(db(), by, {
    organisationId: by.organisationId,
    counterpartId: supplierId,
    action: 'submission.rejected',
    subjectKind: 'submission',
    subjectId: '7c0f3f0e-5a4b-4f4e-9a53-0d4b8d7a1111',
    detail,
  });

async function sentences(scope: MemberScope, asked: { q?: string; cursor?: string; limit?: number } = {}) {
  const answer = await listActivity(scope, { limit: 50, ...asked });
  if (!answer.ok) throw new Error(answer.refusal.message);
  return {
    said: answer.value.items.map((item) => item.sentence),
    nextCursor: answer.value.nextCursor,
    items: answer.value.items,
  };
}

describe('activity', () => {
  it('reads as sentences, with who did it, to both sides of a submission and to nobody else', async () => {
    const { mixer, operator } = await pair();
    const stranger = (await pair()).mixer;
    const detail = {
      programmeTitle: 'The Tallow Road',
      episodeLabel: '1.04',
      channelName: 'Harrow One',
      reason: 'true peak',
    };
    await decided(operator, mixer.organisationId, detail);
    const sentence = 'rejected The Tallow Road 1.04 for Harrow One: true peak';
    for (const side of [mixer, operator]) {
      const { items } = await sentences(side);
      expect(items).toMatchObject([
        {
          sentence,
          actor: { id: operator.userId, name: 'Odile Strand' },
          organisationName: operator.organisationName,
        },
      ]);
    }
    expect((await sentences(stranger)).said).toEqual([]);
  });

  it('comes newest first and in pages that newer events do not shift', async () => {
    const { mixer, operator } = await pair();
    for (let i = 1; i <= 5; i += 1)
      await decided(operator, mixer.organisationId, { fileName: `mix_${i}.wav` });
    const first = await sentences(operator, { limit: 2 });
    expect(first.said).toEqual(['rejected mix_5.wav', 'rejected mix_4.wav']);
    await decided(operator, mixer.organisationId, { fileName: 'mix_6.wav' });
    const second = await sentences(operator, { limit: 2, cursor: first.nextCursor ?? '' });
    expect(second.said).toEqual(['rejected mix_3.wav', 'rejected mix_2.wav']);
    const last = await sentences(operator, { limit: 2, cursor: second.nextCursor ?? '' });
    expect(last).toMatchObject({ said: ['rejected mix_1.wav'], nextCursor: null });
  });

  it('is found by words of the person, of what was done, and of what it was done to; signs stand for themselves', async () => {
    const { mixer, operator } = await pair();
    await decided(operator, mixer.organisationId, { fileName: 'quay_100%.wav' });
    await decided(operator, mixer.organisationId, { fileName: 'harbour_1000.wav' });
    expect((await sentences(mixer, { q: 'odile' })).said).toHaveLength(2);
    expect((await sentences(mixer, { q: 'submission rejected' })).said).toHaveLength(2);
    expect((await sentences(mixer, { q: 'QUAY' })).said).toEqual(['rejected quay_100%.wav']);
    expect((await sentences(mixer, { q: '100%' })).said).toEqual(['rejected quay_100%.wav']);
    expect((await sentences(mixer, { q: 'nothing like it' })).said).toEqual([]);
  });

  it('refuses a cursor that it did not give', async () => {
    const { mixer } = await pair();
    expect(await listActivity(mixer, { limit: 10, cursor: "1' OR 1=1" })).toMatchObject({
      refusal: { code: 'bad_input' },
    });
  });

  it('says in plain words what has no sentence of its own', async () => {
    const { operator } = await pair();
    await recordEvent(db(), operator, {
      organisationId: operator.organisationId,
      action: 'spec.looked_at',
      subjectKind: 'spec',
      subjectId: 'x',
      detail: { name: 'Long form' },
    });
    expect((await sentences(operator)).said).toEqual(['spec looked at: Long form']);
  });

  it('is never changed or deleted by the application', async () => {
    const { operator } = await pair();
    await decided(operator, operator.organisationId, {});
    await expect(db()('audit_events').update({ action: 'nothing' })).rejects.toThrow(/permission denied/);
    await expect(db()('audit_events').delete()).rejects.toThrow(/permission denied/);
    await expect(world.db('audit_events').delete()).rejects.toThrow(/never changed or deleted/);
  });
});
