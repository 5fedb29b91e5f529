import { afterAll, afterEach, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { db } from '../../src/server/db/connection.ts';
import { enqueueMeasuring, measuringJobId, measuringQueue } from '../../src/server/queue/measuring-queue.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import { getObject } from '../../src/server/storage/storage.ts';
import { arrivedFile } from '../server/arrived-file.ts';
import { makePerson, openServiceWorld } from '../server/service-world.ts';
import { gateBefore, type StorageGate } from '../server/storage-gate.ts';
import { sineWave } from '../server/wave-file.ts';
import {
  listenTo,
  measuringProcess,
  startWorker,
  type EventLog,
  type WorkerProcess,
} from './measuring-processes.ts';

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let gate: StorageGate;
let engineer: MemberScope;
let events: EventLog;
let workers: WorkerProcess[] = [];
beforeAll(async () => {
  gate = await gateBefore(process.env.TEST_S3_ENDPOINT);
  world = await openServiceWorld(6, { S3_ENDPOINT: gate.url });
});
afterAll(async () => {
  await world.close();
  await gate.close();
});
beforeEach(async () => {
  engineer = await makePerson();
  events = await listenTo(engineer.organisationId);
});
afterEach(async () => {
  gate.mend();
  gate.release();
  for (const worker of workers) worker.kill('SIGKILL');
  await Promise.all(workers.map((worker) => worker.ended));
  workers = [];
  events.close();
});

// 9.2 MB: three pieces as storage is read, so that the third can be held back while the first two are measured.
const wave = sineWave(48);
const heldFrom = 8 * 1024 ** 2;
const long = 60_000;

const row = (id: string) => db()('deliverables').where({ id }).first();
const measurements = (id: string) => db()('measurements').where({ deliverable_id: id });
const worker = async () => {
  const started = await startWorker();
  workers.push(started);
  return started;
};
const begins = (id: string) =>
  events.next((event) => event.id === id && event.state === 'measuring' && event.progress === null);
const isUnderWay = (id: string) =>
  events.next((event) => event.id === id && (event.progress?.secondsDone ?? 0) > 0);
const reaches = (id: string, state: string) =>
  events.next((event) => event.id === id && event.state === state);
/** With pauses short enough for a test; growing ones are the queue's default. */
const enqueueImpatiently = (id: string) =>
  measuringQueue().add(
    'measure',
    { deliverableId: id },
    { jobId: measuringJobId(id), attempts: 8, backoff: { type: 'fixed', delay: 50 } },
  );

describe('kill -9 of a worker in mid-measurement', () => {
  it(
    'loses nothing and doubles nothing',
    async () => {
      const id = await arrivedFile(engineer, wave);
      gate.holdReads(id, heldFrom);
      const first = await worker();
      await enqueueMeasuring(id);
      await isUnderWay(id);
      first.kill('SIGKILL');
      expect(await first.ended).toBe('SIGKILL');
      expect(await row(id)).toMatchObject({ state: 'measuring', measure_attempts: 1 });
      expect(await measurements(id)).toHaveLength(0);

      gate.release();
      await worker();
      await reaches(id, 'measured');
      expect(await row(id)).toMatchObject({ state: 'measured', measure_attempts: 2, reason: null });
      const made = await measurements(id);
      expect(made).toHaveLength(1);
      expect(made[0].format.durationSeconds).toBeCloseTo(48, 6);
      expect((await getObject(made[0].series_key)).length).toBeGreaterThan(0);
      expect(
        await db()('audit_events').where({ subject_id: id, action: 'deliverable.measured' }),
      ).toHaveLength(1);
      expect(measuringProcess(id)).toBeUndefined();
    },
    long,
  );
});

describe('a file that kills whoever measures it', () => {
  it(
    'ends as unreadable after three deaths, and the file beside it is measured at its first start',
    async () => {
      const [poison, neighbour] = [await arrivedFile(engineer, wave), await arrivedFile(engineer, wave)];
      gate.holdReads('', heldFrom);
      await worker();
      await enqueueImpatiently(neighbour);
      await isUnderWay(neighbour);
      await enqueueImpatiently(poison);
      for (let death = 1; death <= 3; death++) {
        await begins(poison);
        await isUnderWay(poison);
        expect(await row(poison)).toMatchObject({ state: 'measuring', measure_attempts: death });
        process.kill(measuringProcess(poison) ?? -1, 'SIGKILL');
      }
      await reaches(poison, 'unreadable');
      expect(await row(poison)).toMatchObject({
        reason_code: 'kills-worker',
        reason: expect.stringMatching(/broke down 3 times/),
      });
      expect(await measurements(poison)).toHaveLength(0);

      gate.release();
      await reaches(neighbour, 'measured');
      expect(await row(neighbour)).toMatchObject({ measure_attempts: 1 });
      expect(await measurements(neighbour)).toHaveLength(1);
    },
    long,
  );
});

describe('storage away in mid-measurement', () => {
  it(
    'is waited for, and the file is measured when it is back',
    async () => {
      const id = await arrivedFile(engineer, wave);
      gate.holdReads(id, heldFrom);
      await worker();
      await enqueueImpatiently(id);
      await isUnderWay(id);
      gate.cut();
      await reaches(id, 'waiting');
      gate.release();
      gate.mend();
      await reaches(id, 'measured');
      expect(await row(id)).toMatchObject({ state: 'measured', measure_attempts: 1 });
      expect(await measurements(id)).toHaveLength(1);
    },
    long,
  );
});

describe('SIGTERM of a worker in mid-measurement', () => {
  it(
    'lets the measurement end, then the worker leaves in good order',
    async () => {
      const id = await arrivedFile(engineer, wave);
      gate.holdReads(id, heldFrom);
      const leaving = await worker();
      await enqueueMeasuring(id);
      await isUnderWay(id);
      leaving.kill('SIGTERM');
      gate.release();
      expect(await leaving.ended).toBe(0);
      expect((await row(id)).state).toBe('measured');
      expect(await measurements(id)).toHaveLength(1);
    },
    long,
  );
});
