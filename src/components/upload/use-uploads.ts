import { useEffect, useRef, useState } from 'react';
import { api } from '@/components/live/api.ts';
import {
  createUploadsResultSchema,
  type DeliverableDetails,
  type Upload,
} from '@/domain/api/deliverables.ts';
import { browserClock, browserTransport } from './browser-transport.ts';
import { UploadQueue, type Sending } from './upload-queue.ts';

/** Why a picked file was not taken. */
export interface Refused {
  fileName: string;
  message: string;
}

/** Files of this page on their way to storage. */
export function useUploads(onTaken: (uploads: Upload[]) => void) {
  const [sendings, setSendings] = useState<Sending[]>([]);
  const [rate, setRate] = useState(0);
  const [refused, setRefused] = useState<Refused[]>([]);
  const queue = useRef<UploadQueue | null>(null);
  const frame = useRef(0);
  queue.current ??= new UploadQueue(browserTransport, browserClock, () => {
    // Progress comes many times a frame; the page is drawn once.
    if (frame.current) return;
    frame.current = requestAnimationFrame(() => {
      frame.current = 0;
      setSendings(queue.current?.list() ?? []);
      setRate(queue.current?.rate() ?? 0);
    });
  });
  useEffect(() => {
    const warn = (event: BeforeUnloadEvent) => {
      if (queue.current?.busy) event.preventDefault();
    };
    addEventListener('beforeunload', warn);
    return () => removeEventListener('beforeunload', warn);
  }, []);

  const add = async (files: File[], detailsOf: (fileName: string) => DeliverableDetails) => {
    if (files.length === 0) return;
    const asked = files.map((file) => ({
      fileName: file.name,
      byteSize: file.size,
      lastModifiedMs: file.lastModified,
      details: detailsOf(file.name),
    }));
    // The server takes 100 at a time.
    for (let at = 0; at < asked.length; at += 100) {
      const { items } = await api.send(
        'POST',
        '/api/v1/uploads',
        { files: asked.slice(at, at + 100) },
        createUploadsResultSchema,
      );
      const taken: Upload[] = [];
      items.forEach((item, i) => {
        const file = files[at + i];
        if (item.ok) {
          taken.push(item.value);
          queue.current?.add(file, item.value);
        } else setRefused((before) => [...before, { fileName: file.name, message: item.error.message }]);
      });
      onTaken(taken);
    }
  };
  return { sendings, rate, refused, setRefused, add, queue: queue.current };
}
