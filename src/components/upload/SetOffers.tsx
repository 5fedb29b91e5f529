import { useMutation } from '@tanstack/react-query';
import { api } from '@/components/live/api.ts';
import { Notice } from '@/components/look/Notice.tsx';
import { deliverableRowSchema } from '@/domain/api/deliverables.ts';
import { findMonoSets, type MonoSet } from '@/engine/containers/mono-set.ts';
import type { UploadItem } from './upload-item.ts';

interface Offered {
  name: string;
  item: UploadItem;
}
interface Props {
  items: readonly UploadItem[];
  /** The set is one deliverable now; its files' rows stand for nothing any more. */
  onTaken: (keys: string[]) => void;
}

/** Mono files that look like one programme, by their names, each with the offer to take them as one deliverable. */
export function SetOffers({ items, onTaken }: Props) {
  const sets = findMonoSets<Offered>(
    items.filter(({ state }) => state !== 'refused').map((item) => ({ name: item.fileName, item })),
  );
  const taking = useMutation({
    mutationFn: ({ name, parts }: MonoSet<Offered>) =>
      api.send(
        'POST',
        '/api/v1/deliverable-sets',
        {
          name,
          parts: parts.map(({ file, speaker }) => ({ deliverableId: file.item.deliverableId, speaker })),
        },
        deliverableRowSchema,
      ),
    onSuccess: (_row, { parts }) => onTaken(parts.map(({ file }) => file.item.key)),
  });
  return (
    <div className="mb-3 grid gap-2 empty:hidden">
      {taking.data && (
        <Notice>
          {taking.data.fileName} is one deliverable now.{' '}
          <a href={`/deliverables/${taking.data.id}`} className="text-teal underline underline-offset-4">
            Its report
          </a>
        </Notice>
      )}
      {taking.error && <Notice tone="refused">{taking.error.message} The files stand as they are.</Notice>}
      {sets.map((set) => {
        const missing = set.parts.filter(({ file }) => file.item.state !== 'sent').length;
        return (
          <div
            key={set.name}
            className="flex flex-wrap items-center justify-between gap-3 border-l-[3px] border-teal bg-pick px-3 py-2"
          >
            <p>
              {set.parts.length} files look like one programme: <span className="num">{set.name}</span>{' '}
              <span className="text-muted">({set.parts.map(({ speaker }) => speaker).join(' ')})</span>
            </p>
            <button
              type="button"
              className="btn btn-quiet"
              disabled={missing > 0 || taking.isPending}
              onClick={() => taking.mutate(set)}
            >
              {missing > 0 ? `Take as one: ${missing} not sent yet` : 'Take as one deliverable'}
            </button>
          </div>
        );
      })}
    </div>
  );
}
