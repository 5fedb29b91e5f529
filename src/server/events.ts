/** Live events: published through Redis by any process, read by the web server's event stream. */
import type { Redis } from 'ioredis';
import type { LiveEvent } from '../domain/api/people.ts';
import { log } from './log.ts';

export const eventsTopic = (organisationId: string) => `events:${organisationId}`;

/**
 * Tells every open browser of the organisations. Never throws: losing an event is harmless, since pages read the truth
 * again on reconnect, and what happened has been committed already.
 */
export async function publishEvent(
  redis: Redis,
  organisationIds: readonly string[],
  event: LiveEvent,
): Promise<void> {
  const text = JSON.stringify(event);
  try {
    await Promise.all([...new Set(organisationIds)].map((id) => redis.publish(eventsTopic(id), text)));
  } catch (error) {
    log.warn({ err: error, kind: event.kind }, 'an event was not published');
  }
}
