/** Finds what fell between: rows that no job stands for, uploads that nobody goes on with, versions that came into force. */
import { db, inTransaction } from '../db/connection.ts';
import { listIdsInState, takeFromTheDead } from '../db/deliverable-writes-repository.ts';
import { findOpenUploadsBefore } from '../db/uploads-repository.ts';
import { log } from '../log.ts';
import { enqueueMeasuring, hasLiveJob, removeEndedJob } from '../queue/measuring-queue.ts';
import { done } from '../refusals.ts';
import { systemScope } from '../scope.ts';
import { judgeDeliverables } from './judging.ts';
import { abortUpload } from './uploads.ts';

const scope = systemScope('sweep');
const pageSize = 200;
const uploadDays = 7;

export interface Swept {
  enqueued: number;
  takenBack: number;
  uploadsEnded: number;
  rejudged: number;
}

/** One round. Each part is tried though another failed; what failed is logged, left out of the count, and tried next time. */
export async function sweep(now = new Date()): Promise<Swept> {
  const swept: Swept = { enqueued: 0, takenBack: 0, uploadsEnded: 0, rejudged: 0 };
  const part = async (name: keyof Swept, work: () => Promise<number>) => {
    try {
      swept[name] = await work();
    } catch (error) {
      log.warn({ err: error, part: name }, 'a part of the sweep failed');
    }
  };
  // Taken back first, so that the same round enqueues them.
  await part('takenBack', takeBack);
  await part('enqueued', enqueueWaiting);
  await part('uploadsEnded', () => endOldUploads(now));
  await part('rejudged', rejudge);
  return swept;
}

async function eachInState(
  state: 'waiting' | 'measuring',
  work: (id: string) => Promise<boolean>,
): Promise<number> {
  let count = 0;
  for (let after: string | null = null; ;) {
    const ids = await listIdsInState(db(), scope, state, after, pageSize);
    for (const id of ids) if (await work(id)) count += 1;
    if (ids.length < pageSize) return count;
    after = ids[ids.length - 1];
  }
}

/** 'measuring' without a job: its worker died and Redis forgot it. */
const takeBack = () =>
  eachInState('measuring', async (id) => !(await hasLiveJob(id)) && (await takeFromTheDead(db(), scope, id)));

const enqueueWaiting = () =>
  eachInState('waiting', async (id) => {
    if (await hasLiveJob(id)) return false;
    await removeEndedJob(id);
    return enqueueMeasuring(id);
  });

async function endOldUploads(now: Date): Promise<number> {
  const before = new Date(now.getTime() - uploadDays * 24 * 60 * 60 * 1000);
  const uploads = await findOpenUploadsBefore(db(), scope, before);
  for (const { deliverableId } of uploads) await abortUpload(scope, deliverableId);
  return uploads.length;
}

/** Versions and assignments come into force by the clock; verdicts of what is not submitted follow. */
async function rejudge(): Promise<number> {
  const answer = await inTransaction(async (trx) => done(await judgeDeliverables(trx, scope, {})));
  return answer.ok ? answer.value.rejudged : 0;
}
