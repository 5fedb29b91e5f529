import { useState } from 'react';
import { Dialog } from '@/components/look/Dialog.tsx';
import { VerdictMark } from '@/components/look/VerdictMark.tsx';
import { formatBytes } from '@/domain/figures-text.ts';
import type { BenchRow } from './columns.tsx';

interface Props {
  rows: readonly BenchRow[];
  channels: { id: string; name: string }[];
  onClose: () => void;
  onUpload: (channelIds: string[]) => void;
}

/** The last look before bytes leave the machine: which files, and for which channels. */
export function UploadDialog({ rows, channels, onClose, onUpload }: Props) {
  // With one channel to deliver to there is nothing to choose.
  const [chosen, setChosen] = useState<string[]>(channels.length === 1 ? [channels[0].id] : []);
  const bytes = rows.reduce((sum, { item }) => sum + item.file.size, 0);
  const toggle = (id: string) =>
    setChosen((before) => (before.includes(id) ? before.filter((one) => one !== id) : [...before, id]));
  return (
    <Dialog
      title={rows.length === 1 ? 'Upload this file' : `Upload these ${rows.length} files`}
      onClose={onClose}
    >
      <p>
        Now the files leave this machine: {formatBytes(bytes)} go to storage. The service measures them again,
        and its figures stand; where they differ from those of the bench, the report says so. Nobody outside
        your organisation sees them before you submit them.
      </p>
      <ul className="grid max-h-[30vh] gap-1 overflow-y-auto">
        {rows.map(({ id, item, held }) => (
          <li key={id} className="flex items-baseline gap-3">
            <span className="w-24 shrink-0">
              <VerdictMark outcome={held[0]?.verdict.outcome ?? 'not_judged'} />
            </span>
            <span className="num min-w-0 text-[12.5px] break-all">{item.file.name}</span>
          </li>
        ))}
      </ul>
      {channels.length > 0 ? (
        <fieldset className="flex flex-wrap items-center gap-x-5 gap-y-2">
          <legend className="mb-1.5 text-[13px] font-medium">They are for</legend>
          {channels.map(({ id, name }) => (
            <label key={id} className="flex items-center gap-2">
              <input type="checkbox" checked={chosen.includes(id)} onChange={() => toggle(id)} />
              {name}
            </label>
          ))}
        </fieldset>
      ) : (
        <p className="text-muted">
          No channel takes your deliveries yet. Files are measured all the same; ask the distributor for an
          agreement to have them judged.
        </p>
      )}
      <div className="flex justify-end gap-2">
        <button type="button" className="btn btn-quiet" onClick={onClose}>
          Cancel
        </button>
        <button type="button" className="btn btn-main" onClick={() => onUpload(chosen)}>
          {rows.length === 1 ? 'Upload it' : `Upload ${rows.length}`}
        </button>
      </div>
    </Dialog>
  );
}
