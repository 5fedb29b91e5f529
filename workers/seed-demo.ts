// Fills the demo in when the database is empty, or goes on with one that was broken off; leaves any other data alone.
import { closeDb, db } from '../src/server/db/connection.ts';
import { closeMeasuringQueue } from '../src/server/queue/measuring-queue.ts';
import { closeRedis } from '../src/server/redis.ts';
import { plantDeliverables } from '../migrations/seeds/plant-deliverables.ts';
import { plantWorld, worldStands } from '../migrations/seeds/plant-world.ts';

const say = (text: string) => console.log(text);
const stands = await worldStands(db());
if (stands === 'empty') {
  await plantWorld(db());
  say('Planted the demo’s organisations, people, channels and specs.');
}
if (stands === 'other') say('This database holds other data; no demo was filled in.');
else if (!process.argv.includes('--world-only')) await plantDeliverables(db(), say);
await closeMeasuringQueue();
await closeRedis();
await closeDb();
