import { useEffect, useState, useSyncExternalStore } from 'react';
import { browserTransport } from './browser-transport.ts';
import { isUnderWay, type UploadItem } from './upload-item.ts';
import { UploadQueue } from './upload-queue.ts';

const none: readonly UploadItem[] = [];

/** The page's one upload queue and what it tells. Closing the page while bytes go is warned of. */
export function useUploads(): { queue: UploadQueue; items: readonly UploadItem[] } {
  const [queue] = useState(() => new UploadQueue(browserTransport));
  const items = useSyncExternalStore(queue.subscribe, queue.items, () => none);
  const busy = items.some(isUnderWay);
  useEffect(() => {
    if (!busy) return;
    const warn = (event: BeforeUnloadEvent) => event.preventDefault();
    addEventListener('beforeunload', warn);
    return () => removeEventListener('beforeunload', warn);
  }, [busy]);
  return { queue, items };
}
