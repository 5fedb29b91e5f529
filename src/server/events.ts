/** Live events: published through Redis by any process, read by the web server's event stream. */
import type { Redis } from 'ioredis';
import type { LiveEvent } from '../domain/api/people.ts';

export const eventsTopic = (organisationId: string) => `events:${organisationId}`;

/** Tells every open browser of the organisations. Losing one is harmless: pages read the truth again on reconnect. */
export async function publishEvent(redis: Redis, organisationIds: readonly string[], event: LiveEvent): Promise<void> {
  const text = JSON.stringify(event);
  await Promise.all([...new Set(organisationIds)].map((id) => redis.publish(eventsTopic(id), text)));
}
