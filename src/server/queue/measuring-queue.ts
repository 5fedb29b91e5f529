/** The queue of files to measure. Jobs carry ids only; PostgreSQL says what is to be done (DEVELOPERS, decision 1). */
import { Queue, type JobsOptions } from 'bullmq';
import { z } from 'zod';
import { log } from '../log.ts';
import { redis } from '../redis.ts';

export const measuringQueueName = 'measuring';

export const measuringJobSchema = z.object({ deliverableId: z.uuid() });
export type MeasuringJob = z.infer<typeof measuringJobSchema>;

/**
 * Trouble of the surroundings is tried again after 2, 4, 8 … s, about four minutes in all; then the sweep begins anew.
 * An ended job leaves nothing behind, so that its id is free for the next one.
 */
const jobOptions: JobsOptions = {
  attempts: 8,
  backoff: { type: 'exponential', delay: 2_000, jitter: 0.2 },
  removeOnComplete: true,
  removeOnFail: true,
};

let queue: Queue<MeasuringJob> | undefined;

export function measuringQueue(): Queue<MeasuringJob> {
  if (!queue) {
    queue = new Queue<MeasuringJob>(measuringQueueName, {
      connection: redis(),
      defaultJobOptions: jobOptions,
    });
    // The connection's own listener has warned of these already.
    queue.on('error', (error) => log.debug({ err: error.message }, 'measuring queue'));
  }
  return queue;
}

/** One live job per deliverable: the id holds as long as the job lives. */
export const measuringJobId = (deliverableId: string) => `measure-${deliverableId}`;

const within = <T>(milliseconds: number, work: Promise<T>): Promise<T> => {
  let timer: NodeJS.Timeout;
  const late = new Promise<never>((_, reject) => {
    timer = setTimeout(() => reject(new Error(`no answer within ${milliseconds} ms`)), milliseconds);
  });
  return Promise.race([work, late]).finally(() => clearTimeout(timer));
};

/**
 * Puts a deliverable on the queue unless a live job stands for it. Never throws: with Redis away the answer is false, the
 * row stays 'waiting', and the sweep puts it on later.
 */
export async function enqueueMeasuring(deliverableId: string): Promise<boolean> {
  try {
    await within(
      3_000,
      measuringQueue().add('measure', { deliverableId }, { jobId: measuringJobId(deliverableId) }),
    );
    return true;
  } catch (error) {
    log.warn({ err: error, deliverableId }, 'could not enqueue; the sweep will');
    return false;
  }
}

/** Whether a job stands for the deliverable that somebody will take or has taken. Throws when Redis is away. */
export async function hasLiveJob(deliverableId: string): Promise<boolean> {
  const state = await within(3_000, measuringQueue().getJobState(measuringJobId(deliverableId)));
  return state !== 'unknown' && state !== 'completed' && state !== 'failed';
}

/** Removes an ended job that was kept all the same, since it would swallow the next one of its id. */
export async function removeEndedJob(deliverableId: string): Promise<void> {
  await within(3_000, measuringQueue().remove(measuringJobId(deliverableId)));
}

export async function closeMeasuringQueue(): Promise<void> {
  const open = queue;
  queue = undefined;
  await open?.close();
}
