/** One Redis subscriber for all event streams of a process. */
import type { Redis } from 'ioredis';
import { liveEventSchema, type LiveEvent } from '../domain/api/people.ts';
import { eventsTopic } from './events.ts';
import { log } from './log.ts';
import { blockingRedis } from './redis.ts';

interface Listener {
  onEvent: (event: LiveEvent) => void;
  /** Events may have been lost (Redis was away): what was read before may be stale. */
  onGap: () => void;
}

const listeners = new Map<string, Set<Listener>>();
let subscriber: Redis | undefined;

function connection(): Redis {
  if (subscriber) return subscriber;
  const redis = blockingRedis('events');
  let seenReady = false;
  redis.on('ready', () => {
    if (seenReady) for (const all of listeners.values()) for (const listener of [...all]) listener.onGap();
    seenReady = true;
  });
  redis.on('message', (topic: string, text: string) => {
    const parsed = liveEventSchema.safeParse(parseJson(text));
    if (!parsed.success) return log.warn({ topic, text }, 'an event that nobody understands');
    for (const listener of [...(listeners.get(topic) ?? [])]) listener.onEvent(parsed.data);
  });
  return (subscriber = redis);
}

function parseJson(text: string): unknown {
  try {
    return JSON.parse(text);
  } catch {
    return undefined; // refused by the schema, and logged there
  }
}

/** Listens to an organisation's events until the returned function is called. Resolves once Redis has confirmed. */
export function listenToEvents(
  organisationId: string,
  listener: Listener,
): { ready: Promise<void>; stop: () => void } {
  const topic = eventsTopic(organisationId);
  const all = listeners.get(topic) ?? new Set<Listener>();
  listeners.set(topic, all.add(listener));
  const redis = connection();
  const ready = redis.subscribe(topic).then(() => undefined);
  ready.catch((error: unknown) => log.warn({ err: error, topic }, 'could not listen to events'));
  const stop = () => {
    if (!all.delete(listener) || all.size > 0) return;
    listeners.delete(topic);
    redis
      .unsubscribe(topic)
      .catch((error: unknown) => log.warn({ err: error, topic }, 'could not stop listening'));
  };
  return { ready, stop };
}

/** Lets the subscriber go; streams that are open hear nothing more. */
export function closeEventsHub(): void {
  listeners.clear();
  subscriber?.disconnect();
  subscriber = undefined;
}
