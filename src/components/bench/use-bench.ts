import { useEffect, useState, useSyncExternalStore } from 'react';
import { BenchQueue, type BenchItem } from './bench-queue.ts';
import { BrowserCrew } from './browser-crew.ts';

const none: readonly BenchItem[] = [];

/** The page's one bench. Closing the page while files are measured is warned of: their figures would be lost. */
export function useBench(): { queue: BenchQueue; items: readonly BenchItem[] } {
  const [{ queue, crew }] = useState(() => {
    const made = new BrowserCrew();
    return { queue: new BenchQueue(made), crew: made };
  });
  const items = useSyncExternalStore(queue.subscribe, queue.items, () => none);
  useEffect(() => {
    // All that measuring needs is fetched before the first file, so that nothing is asked of the network while one is measured.
    crew.warm();
    void import('chartjs-plugin-zoom');
    void document.fonts.load('1em "Sometype Mono Variable"');
  }, [crew]);
  const busy = items.some(
    ({ state }) => state === 'waiting' || state === 'decoding' || state === 'measuring',
  );
  useEffect(() => {
    if (!busy) return;
    const warn = (event: BeforeUnloadEvent) => event.preventDefault();
    addEventListener('beforeunload', warn);
    return () => removeEventListener('beforeunload', warn);
  }, [busy]);
  return { queue, items };
}
