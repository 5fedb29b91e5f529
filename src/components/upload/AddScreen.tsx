import { useQuery, useQueryClient } from '@tanstack/react-query';
import { useEffect, useRef, useState } from 'react';
import { DetailsDialog } from '@/components/deliverables/DetailsDialog.tsx';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { api } from '@/components/live/api.ts';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { Notice } from '@/components/look/Notice.tsx';
import { deliverableListSchema, uploadListSchema, type Upload } from '@/domain/api/deliverables.ts';
import { formatBytes, formatDuration } from '@/domain/figures-text.ts';
import { guessFromFileName } from '@/domain/file-name-guess.ts';
import { ArrivingTable } from './ArrivingTable.tsx';
import { UnfinishedUploads } from './UnfinishedUploads.tsx';
import { useUploads } from './use-uploads.ts';

interface Props {
  channels: { id: string; name: string }[];
  programmes: string[];
  unfinished: Upload[];
}

export default function AddScreen(props: Props) {
  return (
    <ApiProvider>
      <Screen {...props} />
    </ApiProvider>
  );
}

function Screen({ channels, programmes, unfinished }: Props) {
  const [mine, setMine] = useState<string[]>([]);
  const [picked, setPicked] = useState<Set<string>>(new Set());
  const [editing, setEditing] = useState(false);
  const [over, setOver] = useState(false);
  const [trouble, setTrouble] = useState<string | null>(null);
  const input = useRef<HTMLInputElement>(null);
  const client = useQueryClient();
  const refresh = () => void client.invalidateQueries({ queryKey: ['arriving'] });
  const { sendings, rate, refused, setRefused, add, queue } = useUploads((uploads) => {
    setMine((before) => [...new Set([...before, ...uploads.map((upload) => upload.deliverableId)])]);
    refresh();
  });
  const rows = useQuery({
    queryKey: ['arriving'],
    queryFn: ({ signal }) => api.get('/api/v1/deliverables?limit=200', deliverableListSchema, signal),
    enabled: mine.length > 0,
  });
  const open = useQuery({
    queryKey: ['unfinished'],
    queryFn: () => api.get('/api/v1/uploads', uploadListSchema),
    initialData: { items: unfinished },
  });
  const [measuring, setMeasuring] = useState<
    Map<string, { secondsDone: number; secondsTotal: number | null }>
  >(new Map());
  useLiveEvents((event) => {
    if (event.kind === 'deliverable' && event.state === 'measuring' && event.progress) {
      const { id, progress } = event;
      setMeasuring((before) => new Map(before).set(id, progress));
    }
    if (event.kind !== 'presence' && !(event.kind === 'deliverable' && event.progress)) refresh();
  });

  const take = async (files: File[]) => {
    setTrouble(null);
    try {
      await add(files, (fileName) => {
        const guess = guessFromFileName(fileName, programmes);
        // With one channel to deliver to there is nothing to choose.
        return {
          ...guess,
          versionLabel: guess.versionLabel ?? undefined,
          channelIds: channels.length === 1 ? [channels[0].id] : [],
        };
      });
    } catch (error) {
      setTrouble(error instanceof Error ? error.message : 'The files were not taken.');
    }
  };
  useEffect(() => {
    const hold = (event: DragEvent) => {
      if (!event.dataTransfer?.types.includes('Files')) return;
      event.preventDefault();
      setOver(event.type === 'dragover');
      if (event.type === 'drop') void take([...event.dataTransfer.files]);
    };
    const kinds = ['dragover', 'dragleave', 'drop'] as const;
    kinds.forEach((kind) => addEventListener(kind, hold));
    return () => kinds.forEach((kind) => removeEventListener(kind, hold));
  });

  const shown = (rows.data?.items ?? []).filter((row) => mine.includes(row.id));
  const bytes = sendings.reduce(
    (sum, one) => ({ sent: sum.sent + one.sentBytes, all: sum.all + one.byteSize }),
    { sent: 0, all: 0 },
  );
  const moving = sendings.some((one) => one.state === 'sending');
  const left = open.data.items.filter((upload) => !mine.includes(upload.deliverableId));
  const pickedRows = shown.filter((row) => picked.has(row.id));
  return (
    <>
      <h1>Add files</h1>
      <p className="mt-1 max-w-prose text-muted">
        Each file goes straight to storage, is measured, and is held against the delivery spec of every
        channel that it is for. Nobody outside your organisation sees it before you submit it.
      </p>
      <div
        className={`my-4 grid place-items-center gap-3 border border-dashed px-4 py-8 text-center ${over ? 'border-teal bg-pick' : 'border-muted'}`}
      >
        <p className="text-[16px]">Drop masters anywhere on this page, or</p>
        <button type="button" className="btn btn-main" onClick={() => input.current?.click()}>
          Choose files
        </button>
        <input
          ref={input}
          type="file"
          multiple
          className="sr-only"
          aria-label="Choose files"
          tabIndex={-1}
          onChange={(event) => {
            void take([...(event.target.files ?? [])]);
            event.target.value = '';
          }}
        />
        <p className="text-[12.5px] text-muted">
          WAV, RF64, BW64, AIFF, FLAC, MP3, AAC, MOV, MXF and more, up to 64 GiB a file
        </p>
      </div>
      {trouble && <Notice tone="refused">{trouble} Choose the files again.</Notice>}
      {refused.length > 0 && (
        <Notice tone="refused">
          {refused.map((one, i) => (
            <p key={i}>
              <span className="num">{one.fileName}</span>: {one.message}
            </p>
          ))}
          <button type="button" className="underline underline-offset-4" onClick={() => setRefused([])}>
            Understood
          </button>
        </Notice>
      )}
      <UnfinishedUploads
        uploads={left}
        onForget={async (id) => {
          await api.send('DELETE', `/api/v1/uploads/${id}`);
          await open.refetch();
        }}
      />
      {shown.length > 0 && (
        <section className="mt-5">
          <div className="mb-2 flex flex-wrap items-center justify-between gap-3">
            <p role="status" className="num text-[13px]">
              {bytes.sent < bytes.all
                ? `${formatBytes(bytes.sent)} of ${formatBytes(bytes.all)}${moving && rate > 0 ? `, ${formatBytes(rate)}/s, ${formatDuration((bytes.all - bytes.sent) / rate)} left` : ''}`
                : 'Everything is sent.'}
            </p>
            <button
              type="button"
              className="btn btn-quiet"
              disabled={pickedRows.length === 0}
              onClick={() => setEditing(true)}
            >
              {pickedRows.length > 0
                ? `Set details of ${pickedRows.length} picked`
                : 'Pick rows to set their details'}
            </button>
          </div>
          <ArrivingTable
            rows={shown}
            sendings={sendings}
            measuring={measuring}
            picked={picked}
            onPick={setPicked}
            onPause={(id) => queue?.pause(id)}
            onResume={(id) => queue?.resume(id)}
            onCancel={(id) => {
              queue?.remove(id);
              setMine((before) => before.filter((one) => one !== id));
              void api
                .send('DELETE', `/api/v1/uploads/${id}`)
                .catch((error: Error) => setTrouble(error.message));
            }}
          />
        </section>
      )}
      {editing && (
        <DetailsDialog
          rows={pickedRows}
          channels={channels}
          onClose={() => setEditing(false)}
          onDone={() => {
            setEditing(false);
            refresh();
          }}
        />
      )}
    </>
  );
}
