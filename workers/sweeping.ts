// Entry point: every 15 seconds, what fell between is found and set going again.
import { config } from '../src/server/config.ts';
import { closeDb } from '../src/server/db/connection.ts';
import { log } from '../src/server/log.ts';
import { closeMeasuringQueue } from '../src/server/queue/measuring-queue.ts';
import { closeRedis } from '../src/server/redis.ts';
import { sweep } from '../src/server/services/sweeping.ts';

const everyMilliseconds = 15_000;

// A fault of the configuration ends this here, named, rather than every round.
config();

let wake = () => {};
let leaving = false;
for (const signal of ['SIGTERM', 'SIGINT'] as const)
  process.on(signal, () => {
    leaving = true;
    wake();
  });

log.info('sweeping worker ready');
while (!leaving) {
  const swept = await sweep();
  if (Object.values(swept).some((count) => count > 0)) log.info(swept, 'swept');
  if (leaving) break;
  await new Promise<void>((resolve) => {
    const timer = setTimeout(resolve, everyMilliseconds);
    wake = () => {
      clearTimeout(timer);
      resolve();
    };
  });
}
await closeMeasuringQueue();
await closeRedis();
await closeDb();
log.info('sweeping worker has left');
