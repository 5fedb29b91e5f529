/** Whether this process reaches what it cannot do without. Says which, and nothing more: anybody may ask. */
import { db } from '../db/connection.ts';
import { log } from '../log.ts';
import { redis } from '../redis.ts';

export interface Health {
  ok: boolean;
  database: boolean;
  redis: boolean;
}

async function answers(name: string, ask: () => Promise<unknown>): Promise<boolean> {
  let timer: NodeJS.Timeout | undefined;
  const late = new Promise<never>((_, reject) => {
    timer = setTimeout(() => reject(new Error(`${name} did not answer within 3 s`)), 3000);
  });
  try {
    await Promise.race([ask(), late]);
    return true;
  } catch (error) {
    log.warn({ err: error }, `health: ${name} does not answer`);
    return false;
  } finally {
    clearTimeout(timer);
  }
}

export async function readHealth(): Promise<Health> {
  const [database, cache] = await Promise.all([
    answers('database', () => db().raw('SELECT 1')),
    answers('redis', () => redis().ping()),
  ]);
  return { ok: database && cache, database, redis: cache };
}
