// Entry point: takes files off the queue and has them measured, one per core, in processes of their own.
import { config } from '../src/server/config.ts';
import { closeDb } from '../src/server/db/connection.ts';
import { log } from '../src/server/log.ts';
import { measuringChildren } from '../src/server/queue/measuring-children.ts';
import { removeScratch, removeScratchOfTheDead } from '../src/server/queue/measuring-scratch.ts';
import { startMeasuringWorker } from '../src/server/queue/measuring-worker.ts';
import { closeRedis } from '../src/server/redis.ts';
import { measureDeliverable } from '../src/server/services/measuring.ts';

const graceMilliseconds = 8_000;

const removed = await removeScratchOfTheDead();
if (removed > 0) log.info({ removed }, 'removed scratch files of processes that were killed');

// The child lies beside this file, in the sources (.ts) as in the build (.mjs).
const ending = import.meta.url.endsWith('.ts') ? '.ts' : '.mjs';
const children = measuringChildren(new URL(`./measuring-child${ending}`, import.meta.url), {
  onEnded: (pid) =>
    void removeScratch(pid).catch((error: unknown) =>
      log.warn({ err: error, pid }, 'scratch files were left'),
    ),
});
const { MEASURE_CONCURRENCY, MEASURE_LOCK_MS } = config();
const worker = startMeasuringWorker((id, signal) => measureDeliverable(id, children.measure, signal), {
  concurrency: MEASURE_CONCURRENCY,
  lockMilliseconds: MEASURE_LOCK_MS,
});

let leaving = false;
async function leave(signal: string): Promise<void> {
  if (leaving) return;
  leaving = true;
  log.info({ signal }, 'measuring worker leaves');
  // With Redis away, leaving in order could take for ever; what is left undone is found by lock and sweep.
  setTimeout(() => process.exit(1), 2 * graceMilliseconds).unref();
  await worker.close(graceMilliseconds);
  children.close();
  await closeRedis();
  await closeDb();
  log.info('measuring worker has left');
  process.exit(0);
}
for (const signal of ['SIGTERM', 'SIGINT'] as const) process.on(signal, () => void leave(signal));

await worker.ready;
log.info({ concurrency: MEASURE_CONCURRENCY }, 'measuring worker ready');
