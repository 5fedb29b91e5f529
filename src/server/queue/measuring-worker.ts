/** Takes jobs off the measuring queue. What a job means is the service's business; how it is tried again is decided here. */
import { UnrecoverableError, WaitingError, Worker } from 'bullmq';
import { log } from '../log.ts';
import { blockingRedis } from '../redis.ts';
import type { MeasuringEnd } from './measuring-contract.ts';
import { measuringJobSchema, measuringQueueName } from './measuring-queue.ts';

export interface MeasuringWorkerOptions {
  /** Files measured at once. */
  concurrency: number;
  /** How long a dead worker's job stays its own, ms. Renewed at half of it. */
  lockMilliseconds: number;
}

export interface MeasuringWorker {
  ready: Promise<unknown>;
  /** Takes nothing new, lets what runs end within `graceMilliseconds`, hands the rest back to the queue. */
  close(graceMilliseconds: number): Promise<void>;
}

/** `run` measures one deliverable to its end; it throws to have it tried again later. */
export function startMeasuringWorker(
  run: (deliverableId: string, signal: AbortSignal) => Promise<MeasuringEnd>,
  { concurrency, lockMilliseconds }: MeasuringWorkerOptions,
): MeasuringWorker {
  const stop = new AbortController();
  const connection = blockingRedis('measuring');
  const worker = new Worker(
    measuringQueueName,
    async (job, token) => {
      const parsed = measuringJobSchema.safeParse(job.data);
      if (!parsed.success)
        throw new UnrecoverableError(`This job names no deliverable: ${parsed.error.message}`);
      const end = await run(parsed.data.deliverableId, stop.signal);
      if (end.kind === 'unreadable') throw new UnrecoverableError(end.reason);
      if (end.kind === 'handed-back') {
        await job.moveToWait(token);
        throw new WaitingError();
      }
      return end.kind;
    },
    {
      connection,
      concurrency,
      lockDuration: lockMilliseconds,
      stalledInterval: Math.ceil(lockMilliseconds / 2),
      // Deaths are counted in PostgreSQL (three); the queue must not give up on a job before that.
      maxStalledCount: 10,
    },
  );
  worker.on('failed', (job, error) => {
    const final = error instanceof UnrecoverableError;
    log[final ? 'info' : 'warn'](
      { job: job?.id, attempt: job?.attemptsMade, err: error.message, final },
      'measuring ended without figures',
    );
  });
  worker.on('stalled', (jobId) => log.warn({ job: jobId }, 'a job lost its worker and is given to another'));
  worker.on('error', (error) => log.warn({ err: error.message }, 'measuring worker'));

  return {
    ready: worker.waitUntilReady(),
    async close(graceMilliseconds) {
      const timer = setTimeout(() => stop.abort(), graceMilliseconds);
      await worker.close();
      clearTimeout(timer);
      connection.disconnect();
    },
  };
}
