import { useQuery, useQueryClient } from '@tanstack/react-query';
import { useEffect, useState } from 'react';
import { api } from '@/components/live/api.ts';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { useUploads } from '@/components/upload/use-uploads.ts';
import { deliverableListSchema } from '@/domain/api/deliverables.ts';
import { benchFiguresOf } from '@/domain/bench-figures.ts';
import { guessFromFileName } from '@/domain/file-name-guess.ts';
import { engineVersion } from '@/engine/figures.ts';
import type { BenchItem } from './bench-queue.ts';
import type { Handover } from './HandedOver.tsx';

/** Hands bench files to the page's upload queue, and tells how each fares there and at the service. */
export function useHandover(programmes: string[]): {
  handOver: (items: readonly BenchItem[], channelIds: string[]) => void;
  of: (benchId: string) => Handover | null;
} {
  const { queue, items } = useUploads();
  const [keyOf, setKeyOf] = useState<ReadonlyMap<string, string>>(new Map());
  const [progress, setProgress] = useState<ReadonlyMap<string, NonNullable<Handover['progress']>>>(new Map());
  const client = useQueryClient();
  const refresh = () => void client.invalidateQueries({ queryKey: ['handed-over'] });
  const rows = useQuery({
    queryKey: ['handed-over'],
    queryFn: ({ signal }) => api.get('/api/v1/deliverables?limit=200', deliverableListSchema, signal),
    enabled: items.some(({ deliverableId }) => deliverableId !== null),
  });
  const arrivals = items.map(({ deliverableId, state }) => `${deliverableId}${state === 'sent'}`).join();
  useEffect(() => {
    if (arrivals !== '') refresh();
    // Read anew when a file begins or has arrived, and not with every byte.
  }, [arrivals]);
  useLiveEvents((event) => {
    if (event.kind === 'deliverable' && event.state === 'measuring' && event.progress) {
      const { id, progress: told } = event;
      setProgress((before) => new Map(before).set(id, told));
    } else if (event.kind !== 'presence' && items.length > 0) refresh();
  });

  return {
    handOver(files, channelIds) {
      const before = new Set(queue.items().map(({ key }) => key));
      void queue.add(
        files.map(({ file, result }) => {
          const { versionLabel, ...guess } = guessFromFileName(file.name, programmes);
          return {
            file,
            details: { ...guess, versionLabel: versionLabel ?? undefined, channelIds },
            benchFigures:
              result === null
                ? undefined
                : benchFiguresOf(
                    result.measured.measurement,
                    engineVersion,
                    result.preview === null ? 'engine' : 'browser',
                  ),
          };
        }),
      );
      // The queue takes files at once and in their order.
      const keys = queue
        .items()
        .map(({ key }) => key)
        .filter((key) => !before.has(key));
      setKeyOf((known) => new Map([...known, ...files.map(({ id }, i): [string, string] => [id, keys[i]])]));
    },
    of(benchId) {
      const upload = items.find(({ key }) => key === keyOf.get(benchId));
      if (!upload) return null;
      const row = rows.data?.items.find(({ id }) => id === upload.deliverableId) ?? null;
      return {
        upload,
        row,
        progress: (row && (progress.get(row.id) ?? row.progress)) ?? null,
        trouble: rows.error?.message ?? null,
        onPause: () => queue.pause(upload.key),
        onResume: () => void queue.resume(upload.key),
      };
    },
  };
}
