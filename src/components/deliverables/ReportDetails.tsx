import { useQuery } from '@tanstack/react-query';
import { useState } from 'react';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { api } from '@/components/live/api.ts';
import type { DeliverableRow } from '@/domain/api/deliverables.ts';
import { channelListSchema } from '@/domain/api/specs.ts';
import { DetailsDialog } from './DetailsDialog.tsx';

/** "Set details" on a report: programme, episode, kind, channels. */
export default function ReportDetails({ report }: { report: DeliverableRow }) {
  return (
    <ApiProvider>
      <Details report={report} />
    </ApiProvider>
  );
}

function Details({ report }: { report: DeliverableRow }) {
  const [open, setOpen] = useState(false);
  const channels = useQuery({
    queryKey: ['channels'],
    queryFn: () => api.get('/api/v1/channels', channelListSchema),
    enabled: open,
  });
  return (
    <>
      <button type="button" className="btn btn-quiet" onClick={() => setOpen(true)}>
        Set details
      </button>
      {open && channels.data && (
        <DetailsDialog
          rows={[report]}
          channels={channels.data.items.map(({ id, name }) => ({ id, name }))}
          onClose={() => setOpen(false)}
          onDone={() => location.reload()}
        />
      )}
    </>
  );
}
