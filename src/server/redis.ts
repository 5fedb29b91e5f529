/** Connections to Redis, one per purpose and process. */
import { Redis } from 'ioredis';
import { config } from './config.ts';
import { log } from './log.ts';

function connect(name: string, maxRetriesPerRequest: number | null): Redis {
  const redis = new Redis(config().REDIS_URL, { maxRetriesPerRequest, connectionName: name });
  redis.on('error', (error: Error) => log.warn({ redis: name, err: error.message }, 'redis connection'));
  return redis;
}

let shared: Redis | undefined;
/** For commands and publishing; a command fails after one retry when Redis is gone. */
export const redis = (): Redis => (shared ??= connect('shared', 1));

/** A connection of its own for a queue worker or a subscriber, which waits as long as Redis is away. */
export const blockingRedis = (name: string): Redis => connect(name, null);

export async function closeRedis(): Promise<void> {
  const open = shared;
  shared = undefined;
  await open?.quit();
}
