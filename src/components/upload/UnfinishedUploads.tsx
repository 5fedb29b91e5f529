import type { Upload } from '@/domain/api/deliverables.ts';
import { formatBytes } from '@/domain/figures-text.ts';

/** Uploads of earlier that broke off: picking the same file goes on, only missing parts are sent. */
export function UnfinishedUploads({
  uploads,
  onForget,
}: {
  uploads: Upload[];
  onForget: (id: string) => Promise<void>;
}) {
  if (uploads.length === 0) return null;
  return (
    <section className="sheet mt-4 p-4">
      <h2 className="text-[13px] font-semibold">Not finished</h2>
      <p className="mb-2 text-muted">Choose the same file again: only what is missing is sent.</p>
      <ul className="grid gap-1">
        {uploads.map((upload) => (
          <li key={upload.deliverableId} className="flex flex-wrap items-baseline gap-3">
            <span className="num break-all">{upload.fileName}</span>
            <span className="text-muted">
              {formatBytes(Math.min(upload.byteSize, upload.partsDone.length * upload.partBytes))} of{' '}
              {formatBytes(upload.byteSize)} are there
            </span>
            <button
              type="button"
              className="text-teal underline underline-offset-4"
              onClick={() => void onForget(upload.deliverableId)}
            >
              Give up
            </button>
          </li>
        ))}
      </ul>
    </section>
  );
}
