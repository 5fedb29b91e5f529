import { randomUUID } from 'node:crypto';
import { afterAll, afterEach, beforeAll, describe, expect, it } from 'vitest';
import { QueueEvents } from 'bullmq';
import { db } from '../../../src/server/db/connection.ts';
import type { MeasureElsewhere, MeasuringEnd } from '../../../src/server/queue/measuring-contract.ts';
import {
  enqueueMeasuring,
  hasLiveJob,
  measuringJobId,
  measuringQueue,
  measuringQueueName,
} from '../../../src/server/queue/measuring-queue.ts';
import { startMeasuringWorker, type MeasuringWorker } from '../../../src/server/queue/measuring-worker.ts';
import { blockingRedis } from '../../../src/server/redis.ts';
import type { MemberScope } from '../../../src/server/scope.ts';
import { measureDeliverable } from '../../../src/server/services/measuring.ts';
import { arrivedFile } from '../arrived-file.ts';
import { makePerson, openServiceWorld } from '../service-world.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let engineer: MemberScope;
let told: QueueEvents;
let workers: MeasuringWorker[] = [];
beforeAll(async () => {
  world = await openServiceWorld(7);
  engineer = await makePerson();
  told = new QueueEvents(measuringQueueName, { connection: blockingRedis('test') });
  await told.waitUntilReady();
});
afterEach(async () => {
  await Promise.all(workers.map((worker) => worker.close(0)));
  workers = [];
});
afterAll(async () => {
  await told.close();
  await world.close();
});

const work = (run: (id: string, signal: AbortSignal) => Promise<MeasuringEnd>) => {
  const worker = startMeasuringWorker(run, { concurrency: 1, lockMilliseconds: 5_000 });
  workers.push(worker);
  return worker;
};
/** The next such event of this job; other tests' jobs may still be telling theirs. */
const tells = (event: 'completed' | 'failed', jobId: string) =>
  new Promise<{ failedReason?: string }>((resolve) => {
    const listen = (what: { jobId: string; failedReason?: string }) => {
      if (what.jobId !== jobId) return;
      told.off(event, listen);
      resolve(what);
    };
    told.on(event, listen);
  });
const row = (id: string) => db()('deliverables').where({ id }).first();
const retriedImpatiently = (id: string) =>
  measuringQueue().add(
    'measure',
    { deliverableId: id },
    { jobId: measuringJobId(id), attempts: 4, backoff: { type: 'fixed', delay: 10 } },
  );

describe("the queue's worker", () => {
  it('hands a running measurement back when it has to leave, and the next worker takes it', async () => {
    const id = await arrivedFile(engineer, new Uint8Array([1]));
    let begun = () => {};
    const isBegun = new Promise<void>((resolve) => (begun = resolve));
    const untilStopped: MeasureElsewhere = (_task, { signal }) =>
      new Promise((resolve) => {
        signal.addEventListener('abort', () => resolve({ kind: 'surroundings', message: 'stopped' }));
        begun();
      });
    const leaving = work((deliverableId, signal) => measureDeliverable(deliverableId, untilStopped, signal));
    await enqueueMeasuring(id);
    await isBegun;
    expect((await row(id)).state).toBe('measuring');
    await leaving.close(0);
    expect(await row(id)).toMatchObject({ state: 'waiting', measure_attempts: 0 });
    expect(await hasLiveJob(id)).toBe(true);

    const taken = new Promise<string>((resolve) =>
      work(async (deliverableId) => (resolve(deliverableId), { kind: 'measured' })),
    );
    expect(await taken).toBe(id);
  });

  it('tries again after trouble of the surroundings', async () => {
    const id = randomUUID();
    let runs = 0;
    work(async () => {
      runs += 1;
      if (runs < 3) throw new Error('storage is away');
      return { kind: 'measured' };
    });
    const done = tells('completed', measuringJobId(id));
    await retriedImpatiently(id);
    await done;
    expect(runs).toBe(3);
  });

  it('does not try again after trouble of the file, and frees its id', async () => {
    const id = randomUUID();
    let runs = 0;
    work(async () => {
      runs += 1;
      return { kind: 'unreadable', reason: 'This is no audio.' };
    });
    const failed = tells('failed', measuringJobId(id));
    await retriedImpatiently(id);
    expect((await failed).failedReason).toBe('This is no audio.');
    expect(runs).toBe(1);
  });

  it('refuses a job that names no deliverable', async () => {
    let runs = 0;
    work(async () => {
      runs += 1;
      return { kind: 'measured' };
    });
    const failed = tells('failed', 'measure-odd');
    await measuringQueue().add(
      'measure',
      { deliverableId: '../../etc' },
      { jobId: 'measure-odd', attempts: 4 },
    );
    expect((await failed).failedReason).toMatch(/names no deliverable/);
    expect(runs).toBe(0);
  });
});
