import { useMutation } from '@tanstack/react-query';
import { useState } from 'react';
import { api } from '@/components/live/api.ts';
import { Dialog } from '@/components/look/Dialog.tsx';
import { Field } from '@/components/look/Field.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import {
  patchDeliverablesResultSchema,
  type DeliverableDetails,
  type DeliverableRow,
} from '@/domain/api/deliverables.ts';
import { contentKindNames, contentKinds, type ContentKind } from '@/domain/vocabulary.ts';
import { rowName } from './columns.tsx';

interface Props {
  rows: DeliverableRow[];
  channels: { id: string; name: string }[];
  onClose: () => void;
  onDone: (sentence: string) => void;
}

/** Sets programme, episode, kind and channels of one deliverable or many; what is left open stays as it is in each. */
export function DetailsDialog({ rows, channels, onClose, onDone }: Props) {
  const same = <T,>(read: (row: DeliverableRow) => T): T | undefined =>
    rows.every((row) => JSON.stringify(read(row)) === JSON.stringify(read(rows[0])))
      ? read(rows[0])
      : undefined;
  const [programme, setProgramme] = useState(same((row) => row.programmeTitle) ?? '');
  const [episode, setEpisode] = useState(same((row) => row.episodeLabel) ?? '');
  const [kind, setKind] = useState<ContentKind | ''>(same((row) => row.contentKind) ?? '');
  const [setsChannels, setSetsChannels] = useState(rows.length === 1);
  const [picked, setPicked] = useState<Set<string>>(
    new Set(same((row) => row.channels.map((c) => c.channelId).sort()) ?? []),
  );
  const details: DeliverableDetails = {
    ...(programme.trim() && { programmeTitle: programme.trim() }),
    ...(episode.trim() && { episodeLabel: episode.trim() }),
    ...(kind && { contentKind: kind }),
    ...(setsChannels && { channelIds: [...picked] }),
  };
  const saving = useMutation({
    mutationFn: () =>
      api.send(
        'PATCH',
        '/api/v1/deliverables',
        { items: rows.map((row) => ({ id: row.id, ...details })) },
        patchDeliverablesResultSchema,
      ),
    onSuccess: ({ items }) => {
      if (items.every((item) => item.ok))
        onDone(rows.length === 1 ? 'Details are set.' : `Details of ${rows.length} files are set.`);
    },
  });
  const refused = saving.data?.items.flatMap((item) => (item.ok ? [] : [item])) ?? [];
  return (
    <Dialog
      title={rows.length === 1 ? `Details of ${rowName(rows[0])}` : `Details of ${rows.length} files`}
      onClose={onClose}
    >
      <form
        className="grid gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          saving.mutate();
        }}
      >
        <Field label="Programme" hint={rows.length > 1 ? 'Left empty, each keeps its own.' : undefined}>
          {(ids) => (
            <input
              {...ids}
              className="field"
              value={programme}
              maxLength={200}
              onChange={(event) => setProgramme(event.target.value)}
            />
          )}
        </Field>
        <Field label="Episode">
          {(ids) => (
            <input
              {...ids}
              className="field"
              value={episode}
              maxLength={80}
              onChange={(event) => setEpisode(event.target.value)}
            />
          )}
        </Field>
        <Field label="Kind of content">
          {(ids) => (
            <select
              {...ids}
              className="field"
              value={kind}
              onChange={(event) => setKind(event.target.value as ContentKind | '')}
            >
              <option value="">as it is</option>
              {contentKinds.map((one) => (
                <option key={one} value={one}>
                  {contentKindNames[one]}
                </option>
              ))}
            </select>
          )}
        </Field>
        <fieldset className="grid gap-1">
          <legend className="text-[13px] font-medium">Channels</legend>
          {rows.length > 1 && (
            <label className="flex items-center gap-2 text-muted">
              <input type="checkbox" checked={setsChannels} onChange={() => setSetsChannels(!setsChannels)} />{' '}
              set the channels of all of them
            </label>
          )}
          {setsChannels &&
            channels.map((channel) => (
              <label key={channel.id} className="flex items-center gap-2">
                <input
                  type="checkbox"
                  checked={picked.has(channel.id)}
                  onChange={() =>
                    setPicked((before) => {
                      const next = new Set(before);
                      if (!next.delete(channel.id)) next.add(channel.id);
                      return next;
                    })
                  }
                />
                {channel.name}
              </label>
            ))}
        </fieldset>
        {saving.error && <Notice tone="refused">{saving.error.message}</Notice>}
        {refused.length > 0 && (
          <Notice tone="refused">
            {refused.map((item) => (
              <p key={item.id}>
                {rowName(rows.find((row) => row.id === item.id) ?? rows[0])}: {item.error.message}
              </p>
            ))}
          </Notice>
        )}
        <div className="flex justify-end gap-2">
          <button type="button" className="btn btn-quiet" onClick={onClose}>
            Cancel
          </button>
          <button type="submit" className="btn btn-main" disabled={saving.isPending}>
            {saving.isPending ? 'Saving…' : 'Set'}
          </button>
        </div>
      </form>
    </Dialog>
  );
}
