import { useQuery, useQueryClient } from '@tanstack/react-query';
import { useEffect, useRef, useState } from 'react';
import { DetailsDialog } from '@/components/deliverables/DetailsDialog.tsx';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { api } from '@/components/live/api.ts';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { Notice } from '@/components/look/Notice.tsx';
import { deliverableListSchema, uploadListSchema, type Upload } from '@/domain/api/deliverables.ts';
import { guessFromFileName } from '@/domain/file-name-guess.ts';
import { findMonoSets } from '@/engine/containers/mono-set.ts';
import { ArrivingTable } from './ArrivingTable.tsx';
import { ProgressBar } from './ProgressBar.tsx';
import { SetOffers } from './SetOffers.tsx';
import { UnfinishedUploads } from './UnfinishedUploads.tsx';
import { progressText } from './upload-item.ts';
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
  // With one channel to deliver to there is nothing to choose.
  const [forChannels, setForChannels] = useState<Set<string>>(
    () => new Set(channels.length === 1 ? [channels[0].id] : []),
  );
  const [picked, setPicked] = useState<Set<string>>(new Set());
  const [editing, setEditing] = useState(false);
  const [over, setOver] = useState(false);
  const [trouble, setTrouble] = useState<string | null>(null);
  const input = useRef<HTMLInputElement>(null);
  const client = useQueryClient();
  const refresh = () => void client.invalidateQueries({ queryKey: ['arriving'] });
  const { queue, items } = useUploads();
  const mine = items.flatMap(({ deliverableId }) => deliverableId ?? []);
  const totals = queue.totals();
  const arrivals = items.map(({ deliverableId, state }) => `${deliverableId}${state === 'sent'}`).join();
  useEffect(() => {
    if (mine.length > 0) refresh();
    // Read anew when a file begins or has arrived, and not with every byte.
  }, [arrivals]);
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

  const take = (files: File[]) => {
    // What tells the files of a set apart is no part of the programme's name.
    const setNames = new Map(
      findMonoSets(files).flatMap(({ name, parts }) => parts.map((part) => [part.file, name])),
    );
    void queue.add(
      files.map((file) => {
        const { versionLabel, ...guess } = guessFromFileName(setNames.get(file) ?? file.name, programmes);
        return {
          file,
          details: {
            ...guess,
            versionLabel: versionLabel ?? undefined,
            channelIds: [...forChannels],
          },
        };
      }),
    );
  };
  useEffect(() => {
    const hold = (event: DragEvent) => {
      if (!event.dataTransfer?.types.includes('Files')) return;
      event.preventDefault();
      setOver(event.type === 'dragover');
      if (event.type === 'drop') take([...event.dataTransfer.files]);
    };
    const kinds = ['dragover', 'dragleave', 'drop'] as const;
    kinds.forEach((kind) => addEventListener(kind, hold));
    return () => kinds.forEach((kind) => removeEventListener(kind, hold));
  });

  const rowOf = new Map((rows.data?.items ?? []).map((row) => [row.id, row]));
  const left = open.data.items.filter((upload) => !mine.includes(upload.deliverableId));
  const pickedRows = [...picked].flatMap((id) => rowOf.get(id) ?? []);
  const sending = items.some(({ state }) => state === 'sending');
  return (
    <>
      <h1>Add files</h1>
      <p className="mt-1 max-w-prose text-muted">
        Each file goes straight to storage, is measured, and is held against the delivery spec of every
        channel that it is for. Nobody outside your organisation sees it before you submit it.
      </p>
      {channels.length > 0 ? (
        <fieldset className="mt-4 flex flex-wrap items-center gap-x-5 gap-y-2">
          <legend className="float-left mr-4 font-medium">The next files are for</legend>
          {channels.map((channel) => (
            <label key={channel.id} className="flex items-center gap-2">
              <input
                type="checkbox"
                checked={forChannels.has(channel.id)}
                onChange={() => setForChannels((before) => toggled(before, channel.id))}
              />
              {channel.name}
            </label>
          ))}
        </fieldset>
      ) : (
        <div className="mt-4">
          <Notice>
            No channel takes your deliveries yet. Files are measured all the same; ask the distributor for an
            agreement to have them judged.
          </Notice>
        </div>
      )}
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
          aria-label="Files to add"
          tabIndex={-1}
          onChange={(event) => {
            take([...(event.target.files ?? [])]);
            event.target.value = '';
          }}
        />
        <p className="text-[12.5px] text-muted">
          WAV, RF64, BW64, AIFF, FLAC, MP3, AAC, MOV, MXF and more, up to 64 GiB a file
        </p>
      </div>
      {trouble && <Notice tone="refused">{trouble}</Notice>}
      <UnfinishedUploads
        uploads={left}
        onForget={async (id) => {
          await api
            .send('DELETE', `/api/v1/uploads/${id}`)
            .catch((error: Error) => setTrouble(error.message));
          await open.refetch();
        }}
      />
      <SetOffers
        items={items}
        onTaken={(keys) => {
          keys.forEach((key) => queue.forget(key));
          setPicked(new Set());
          refresh();
        }}
      />
      {items.length > 0 && (
        <section className="mt-5">
          <div className="mb-2 flex flex-wrap items-center justify-between gap-3">
            <div className="grid w-full max-w-md gap-1 sm:w-auto sm:grow">
              <p className={totals.bytesSent < totals.bytes ? 'num text-[13px]' : ''}>
                {totals.bytesSent < totals.bytes
                  ? progressText(totals.bytesSent, totals.bytes, totals.bytesPerSecond)
                  : 'Everything is sent.'}
              </p>
              {totals.bytesSent < totals.bytes && (
                <ProgressBar done={totals.bytesSent} all={totals.bytes} label="All files, sent" />
              )}
            </div>
            <div className="flex flex-wrap gap-2">
              {sending && (
                <button type="button" className="btn btn-quiet" onClick={() => queue.pauseAll()}>
                  Pause all
                </button>
              )}
              {items.some(({ state }) => state === 'paused') && (
                <button type="button" className="btn btn-quiet" onClick={() => void queue.resumeAll()}>
                  Go on with all
                </button>
              )}
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
          </div>
          <ArrivingTable
            items={items}
            rowOf={rowOf}
            measuring={measuring}
            picked={picked}
            onPick={setPicked}
            onPause={(key) => queue.pause(key)}
            onResume={(key) => void queue.resume(key)}
            onCancel={(key) => {
              queue
                .cancel(key)
                .catch((error: Error) =>
                  setTrouble(
                    `${error.message} The upload stands among those not finished; give it up there.`,
                  ),
                );
              void open.refetch();
            }}
            onForget={(key) => queue.forget(key)}
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

function toggled<T>(before: ReadonlySet<T>, one: T): Set<T> {
  const next = new Set(before);
  if (!next.delete(one)) next.add(one);
  return next;
}
