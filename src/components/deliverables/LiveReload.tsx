import { useEffect, useState } from 'react';
import { api } from '@/components/live/api.ts';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { formatDuration } from '@/domain/figures-text.ts';
import { deliverableReportSchema, type DeliverableRow } from '@/domain/api/deliverables.ts';

/** An event that came between the drawing of the page and the opening of its stream is never told. */
const lookEveryMilliseconds = 3_000;

/** Beside a file on its way: where measuring stands; the page is read anew when it is done. */
export default function LiveReload({ id, initial }: { id: string; initial: DeliverableRow['progress'] }) {
  const [progress, setProgress] = useState(initial);
  useLiveEvents((event) => {
    if (
      event.kind === 'again' ||
      (event.kind === 'deliverable' && event.id === id && event.state !== 'measuring')
    )
      location.reload();
    else if (event.kind === 'deliverable' && event.id === id) setProgress(event.progress);
  });
  useEffect(() => {
    const timer = setInterval(() => {
      void api.get(`/api/v1/deliverables/${id}`, deliverableReportSchema).then(
        ({ state }) => {
          if (state === 'measured' || state === 'unreadable') location.reload();
        },
        // Cannot be read now: the next look, or an event, will.
        () => undefined,
      );
    }, lookEveryMilliseconds);
    return () => clearInterval(timer);
  }, [id]);
  if (!progress) return <p>Waiting to be measured. This page shows the figures as soon as they are there.</p>;
  return (
    <div className="grid max-w-md gap-2">
      <p className="num">
        Measuring: {formatDuration(progress.secondsDone)}
        {progress.secondsTotal && ` of ${formatDuration(progress.secondsTotal)} of programme`}
      </p>
      {progress.secondsTotal && (
        <progress
          className="h-1.5 w-full accent-teal"
          max={progress.secondsTotal}
          value={progress.secondsDone}
          aria-label="Programme measured"
        />
      )}
    </div>
  );
}
