import { useEffect, useState } from 'react';
import { api } from '@/components/live/api.ts';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { presenceSchema, type SubmissionRow } from '@/domain/api/submissions.ts';
import { withoutMe } from './review-list.ts';

interface Props {
  id: string;
  version: number;
  decides: boolean;
  ownUserId: string;
  openBy: SubmissionRow['openBy'];
}

const presenceEveryMs = 15_000;

/** Who else has the report open, and that it has changed since it was drawn. What is being written is never thrown away. */
export default function LiveSubmission({ id, version, decides, ownUserId, openBy: initial }: Props) {
  const [openBy, setOpenBy] = useState(initial);
  const [changed, setChanged] = useState(false);
  useLiveEvents((event) => {
    if (event.kind === 'presence' && event.submissionId === id) setOpenBy(withoutMe(event.openBy, ownUserId));
    if (event.kind === 'submission' && event.id === id && event.version !== version) setChanged(true);
  });
  useEffect(() => {
    if (!decides) return;
    // Presence is a courtesy: while it cannot be told, deciding still answers a conflict.
    const tell = () =>
      void api
        .send('POST', `/api/v1/submissions/${id}/presence`, {}, presenceSchema)
        .then((answer) => setOpenBy(answer.openBy))
        .catch(() => undefined);
    tell();
    const timer = setInterval(tell, presenceEveryMs);
    return () => clearInterval(timer);
  }, [id, decides]);
  return (
    <div role="status" className="flex flex-wrap items-center gap-3">
      {decides && openBy.length > 0 && (
        <span className="text-teal">Open by {openBy.map(({ name }) => name).join(' and ')} too</span>
      )}
      {changed && (
        <span>
          This has changed since it was drawn. <a href={`/review/${id}`}>Show it as it is now</a>
        </span>
      )}
    </div>
  );
}
