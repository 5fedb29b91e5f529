import { useEffect, useRef } from 'react';
import { liveEventSchema, type LiveEvent } from '@/domain/api/people.ts';

/** 'again': the stream was broken and is whole again; read anew what is shown. */
export type LiveHandler = (event: LiveEvent | { kind: 'again' }) => void;

const lockName = 'plimsoll-events';
const listeners = new Set<LiveHandler>();
let joined = false;

const tell = (event: LiveEvent | { kind: 'again' }) => listeners.forEach((listener) => listener(event));

function take(text: string): LiveEvent | null {
  try {
    return liveEventSchema.parse(JSON.parse(text));
  } catch {
    // A newer server may tell of what this page does not know.
    return null;
  }
}

/** Holds the browser's one stream and passes on what it brings. Never settles: the stream is held until the tab closes. */
function lead(channel: BroadcastChannel | null): Promise<void> {
  let broken = false;
  const pass = (event: LiveEvent | { kind: 'again' }) => {
    tell(event);
    channel?.postMessage(event);
  };
  const source = new EventSource('/api/v1/events');
  source.onmessage = ({ data }: MessageEvent<string>) => {
    const event = take(data);
    if (event) pass(event);
  };
  source.onerror = () => (broken = true);
  source.onopen = () => {
    if (broken) pass({ kind: 'again' });
    broken = false;
  };
  return new Promise(() => {});
}

/**
 * One stream per browser however many tabs, since HTTP/1.1 allows six connections: the tab that holds the lock reads it and
 * the others listen to that tab. When it closes, the next one takes over and all read anew.
 */
function join(): void {
  if (joined) return;
  joined = true;
  if (!('locks' in navigator) || !('BroadcastChannel' in window)) {
    void lead(null);
    return;
  }
  const channel = new BroadcastChannel(lockName);
  channel.onmessage = ({ data }: MessageEvent<LiveEvent | { kind: 'again' }>) => tell(data);
  let waited = true;
  void navigator.locks
    .request(lockName, { ifAvailable: true }, (lock) => {
      waited = lock === null;
      return lock ? lead(channel) : undefined;
    })
    .then(() =>
      navigator.locks.request(lockName, () => {
        // Between two leaders something may have gone by.
        if (waited) tell({ kind: 'again' });
        channel.postMessage({ kind: 'again' });
        return lead(channel);
      }),
    );
}

/** Calls `handler` for every live event while the component is shown. */
export function useLiveEvents(handler: LiveHandler): void {
  const latest = useRef(handler);
  useEffect(() => {
    latest.current = handler;
  });
  useEffect(() => {
    const listener: LiveHandler = (event) => latest.current(event);
    listeners.add(listener);
    join();
    return () => void listeners.delete(listener);
  }, []);
}
