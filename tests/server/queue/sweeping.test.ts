import { randomUUID } from 'node:crypto';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { specBodySchema } from '../../../src/domain/spec.ts';
import { db } from '../../../src/server/db/connection.ts';
import {
  enqueueMeasuring,
  hasLiveJob,
  measuringJobId,
  measuringQueue,
} from '../../../src/server/queue/measuring-queue.ts';
import { redis } from '../../../src/server/redis.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import { sweep } from '../../../src/server/services/sweeping.ts';
import { createUploads, listUploads } from '../../../src/server/services/uploads.ts';
import { makeAssignment, makeDeliverable, makeSpecVersion } from '../../factories/world.ts';
import { arrivedFile } from '../arrived-file.ts';
import { makeAgreedChannel, makePerson, openServiceWorld, organisationOf } from '../service-world.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let engineer: MemberScope;
beforeAll(async () => {
  world = await openServiceWorld(3);
  engineer = await makePerson();
});
afterAll(() => world.close());
beforeEach(async () => {
  await db()('deliverables').update({ discarded_at: db().fn.now() });
  await redis().flushdb();
});

const stateOf = async (id: string) => (await db()('deliverables').where({ id }).first()).state;
const file = () => arrivedFile(engineer, new Uint8Array([1, 2, 3]));

describe('the measuring queue', () => {
  it('holds one job per deliverable, however often it is put on', async () => {
    const id = randomUUID();
    expect(await Promise.all([1, 2, 3].map(() => enqueueMeasuring(id)))).toEqual([true, true, true]);
    expect(await measuringQueue().getJobCountByTypes('waiting', 'delayed', 'active')).toBe(1);
    expect(await hasLiveJob(id)).toBe(true);
    expect(await hasLiveJob(randomUUID())).toBe(false);
  });

  it('carries ids and nothing else', async () => {
    const id = randomUUID();
    await enqueueMeasuring(id);
    expect((await measuringQueue().getJob(measuringJobId(id)))?.data).toEqual({ deliverableId: id });
  });
});

describe('the sweep', () => {
  it('enqueues what waits without a job, such as after a lost enqueue or an emptied Redis', async () => {
    const [lost, standing] = [await file(), await file()];
    await enqueueMeasuring(standing);
    expect(await sweep()).toMatchObject({ enqueued: 1, takenBack: 0 });
    expect(await hasLiveJob(lost)).toBe(true);
    expect(await sweep()).toMatchObject({ enqueued: 0 });
    await redis().flushdb();
    expect(await sweep()).toMatchObject({ enqueued: 2 });
  });

  it('takes back what is called measuring while no job stands for it, and enqueues it in the same round', async () => {
    const id = await file();
    await db()('deliverables').where({ id }).update({ state: 'measuring', measure_attempts: 1 });
    expect(await sweep()).toMatchObject({ takenBack: 1, enqueued: 1 });
    expect(await stateOf(id)).toBe('waiting');
    expect((await db()('deliverables').where({ id }).first()).measure_attempts).toBe(1);
  });

  it('leaves alone what a job is measuring', async () => {
    const id = await file();
    await enqueueMeasuring(id);
    await db()('deliverables').where({ id }).update({ state: 'measuring' });
    expect(await sweep()).toMatchObject({ takenBack: 0 });
    expect(await stateOf(id)).toBe('measuring');
  });

  it('walks more rows than one page of them', async () => {
    const rows = Array.from({ length: 203 }, () => ({
      organisation_id: engineer.organisationId,
      uploaded_by: engineer.userId,
      file_name: 'spot.wav',
      byte_size: 10,
      storage_key: `test/${randomUUID()}`,
      state: 'waiting',
    }));
    await db()('deliverables').insert(rows);
    expect(await sweep()).toMatchObject({ enqueued: 203 });
  });

  it('judges anew what is measured when a version has come into force by the clock', async () => {
    const distributor = await makePerson(['spec_owner'], 'distributor');
    const organisation = organisationOf(distributor);
    const channelId = await makeAgreedChannel(distributor, engineer);
    const { specId, id: first } = await makeSpecVersion(db(), organisation);
    await makeAssignment(db(), organisation, { id: channelId }, specId);
    const measured = await makeDeliverable(db(), engineer, { channelIds: [channelId] });
    const standing = () =>
      db()('deliverable_channels as dc')
        .join('verdicts as v', 'v.id', 'dc.verdict_id')
        .where('dc.deliverable_id', measured.id)
        .first('v.spec_version_id', 'v.outcome');
    await sweep();
    expect((await standing()).spec_version_id).toBe(first);

    const strict = specBodySchema.parse({
      rules: [
        {
          id: 'true-peak',
          kind: 'limits',
          metric: 'truePeakDbtp',
          atLeast: null,
          atMost: -20,
          breach: 'reject',
        },
      ],
    });
    const planned = { specId, body: strict, inForceFrom: new Date(Date.now() + 3_600_000) };
    const { id: later } = await makeSpecVersion(db(), organisation, planned);
    expect(await sweep()).toMatchObject({ rejudged: 0 });
    expect((await standing()).spec_version_id).toBe(first);

    const { id: now } = await makeSpecVersion(db(), organisation, {
      ...planned,
      inForceFrom: new Date(Date.now() - 1000),
    });
    expect(await sweep()).toMatchObject({ rejudged: 1 });
    expect(await standing()).toEqual({ spec_version_id: now, outcome: 'fail' });
    expect(now).not.toBe(later);
    expect(await sweep()).toMatchObject({ rejudged: 0 });
  });

  it('gives up uploads that nobody went on with for seven days', async () => {
    const begun = await createUploads(engineer, [
      { fileName: 'old.wav', byteSize: 10, lastModifiedMs: 1, details: {} },
      { fileName: 'new.wav', byteSize: 10, lastModifiedMs: 2, details: {} },
    ]);
    if (!begun.ok || !begun.value.items[0].ok || !begun.value.items[1].ok) throw new Error('no uploads');
    const [old, young] = [begun.value.items[0].value.deliverableId, begun.value.items[1].value.deliverableId];
    await db()('uploads')
      .where({ deliverable_id: old })
      .update({ created_at: db().raw(`now() - interval '7 days 1 minute'`) });
    expect(await sweep()).toMatchObject({ uploadsEnded: 1 });
    const open = await listUploads(engineer);
    expect(open.ok && open.value.items.map((item) => item.deliverableId)).toEqual([young]);
    expect((await db()('deliverables').where({ id: old }).first()).discarded_at).not.toBeNull();
  });
});
