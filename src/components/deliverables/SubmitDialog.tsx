import { useMutation } from '@tanstack/react-query';
import { useState } from 'react';
import { api } from '@/components/live/api.ts';
import { Dialog } from '@/components/look/Dialog.tsx';
import { Notice } from '@/components/look/Notice.tsx';
import { VerdictMark } from '@/components/look/VerdictMark.tsx';
import { createSubmissionsResultSchema } from '@/domain/api/submissions.ts';
import type { DeliverableRow } from '@/domain/api/deliverables.ts';
import { rowName } from './columns.tsx';

interface Props {
  rows: DeliverableRow[];
  onClose: () => void;
  onDone: (sentence: string) => void;
}

/** Puts deliverables to their channels: every pair is a line that can be left out; each is answered for itself. */
export function SubmitDialog({ rows, onClose, onDone }: Props) {
  const pairs = rows.flatMap((row) =>
    row.channels.map((channel) => ({
      id: `${row.id}/${channel.channelId}`,
      row,
      channel,
      open:
        channel.submission !== null &&
        ['awaiting_review', 'approved', 'approved_with_waiver'].includes(channel.submission.state),
    })),
  );
  const homeless = rows.filter((row) => row.channels.length === 0);
  const [left, setLeft] = useState<Set<string>>(
    new Set(pairs.filter((pair) => pair.open || !pair.channel.verdict).map((pair) => pair.id)),
  );
  const [airs, setAirs] = useState('');
  const chosen = pairs.filter((pair) => !left.has(pair.id));
  const sending = useMutation({
    mutationFn: () =>
      api.send(
        'POST',
        '/api/v1/submissions',
        {
          items: chosen.map(({ row, channel }) => ({
            deliverableId: row.id,
            channelId: channel.channelId,
            airAt: airs ? new Date(airs).toISOString() : null,
          })),
        },
        createSubmissionsResultSchema,
      ),
    onSuccess: ({ items }) => {
      const taken = items.filter((item) => item.ok).length;
      if (taken === items.length)
        onDone(taken === 1 ? 'Submitted; QC has been told.' : `${taken} submitted; QC has been told.`);
    },
  });
  const refused = sending.data?.items.flatMap((item) => (item.ok ? [] : [item])) ?? [];
  return (
    <Dialog title="Submit for review" onClose={onClose} wide>
      <p>
        A submission freezes the file, its measurement and the spec version together. From then on the
        distributor sees it; a failed verdict may be submitted, and will need a waiver.
      </p>
      {pairs.length === 0 && (
        <Notice tone="refused">None of these is for a channel yet. Set their channels first.</Notice>
      )}
      {pairs.length > 0 && homeless.length > 0 && (
        <p className="text-muted">Left out, being for no channel yet: {homeless.map(rowName).join(', ')}.</p>
      )}
      <ul className="grid max-h-[40vh] gap-1 overflow-y-auto">
        {pairs.map(({ id, row, channel, open }) => (
          <li key={id}>
            <label className="flex items-center gap-3 py-1">
              <input
                type="checkbox"
                checked={!left.has(id)}
                disabled={open || !channel.verdict}
                onChange={() =>
                  setLeft((before) => {
                    const next = new Set(before);
                    if (!next.delete(id)) next.add(id);
                    return next;
                  })
                }
              />
              <span className="w-24">
                {channel.verdict ? (
                  <VerdictMark outcome={channel.verdict.outcome} />
                ) : (
                  <VerdictMark outcome="not_judged" />
                )}
              </span>
              <span>
                {rowName(row)} <span className="text-muted">to {channel.channelName}</span>
                {open && <span className="text-muted">, submitted already</span>}
                {!channel.verdict && (
                  <span className="text-muted">, not judged: nothing to be held against</span>
                )}
              </span>
            </label>
          </li>
        ))}
      </ul>
      <label className="grid max-w-80 gap-1">
        <span className="text-[13px] font-medium">Airs (this computer's time), if known</span>
        <input
          type="datetime-local"
          className="field"
          value={airs}
          onChange={(event) => setAirs(event.target.value)}
        />
      </label>
      {sending.error && <Notice tone="refused">{sending.error.message} Nothing was submitted.</Notice>}
      {refused.length > 0 && (
        <Notice tone="refused">
          <p>{(sending.data?.items.length ?? 0) - refused.length} submitted; not these:</p>
          <ul className="list-inside list-disc">
            {refused.map((item) => (
              <li key={item.id}>
                {rowName(pairs.find((pair) => pair.id === item.id)?.row ?? rows[0])}: {item.error.message}
              </li>
            ))}
          </ul>
        </Notice>
      )}
      <div className="flex justify-end gap-2">
        <button
          type="button"
          className="btn btn-quiet"
          onClick={refused.length > 0 ? () => onDone('Some were submitted.') : onClose}
        >
          {refused.length > 0 ? 'Close' : 'Cancel'}
        </button>
        <button
          type="button"
          className="btn btn-main"
          disabled={chosen.length === 0 || sending.isPending}
          onClick={() => sending.mutate()}
        >
          {sending.isPending ? 'Submitting…' : `Submit ${chosen.length}`}
        </button>
      </div>
    </Dialog>
  );
}
