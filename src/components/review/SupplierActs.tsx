import { useState } from 'react';
import { api } from '@/components/live/api.ts';
import { submissionRowSchema } from '@/domain/api/submissions.ts';

/** The supplier's own act on what awaits review. */
export default function SupplierActs({ id }: { id: string }) {
  const [trouble, setTrouble] = useState<string | null>(null);
  const [busy, setBusy] = useState(false);
  const withdraw = async () => {
    setBusy(true);
    try {
      await api.send('POST', `/api/v1/submissions/${id}/withdraw`, {}, submissionRowSchema);
      location.reload();
    } catch (error) {
      setTrouble(error instanceof Error ? error.message : String(error));
      setBusy(false);
    }
  };
  return (
    <div className="flex flex-wrap items-center gap-3">
      {trouble && (
        <span role="alert" className="text-hull">
          {trouble}
        </span>
      )}
      <button type="button" className="btn btn-quiet" disabled={busy} onClick={() => void withdraw()}>
        Withdraw
      </button>
    </div>
  );
}
