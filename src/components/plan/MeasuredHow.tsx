import { useState } from 'react';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { PlanDialog, type Measured } from './PlanDialog.tsx';

interface Props {
  /** How it is measured, in words; stands without JavaScript. */
  words: string;
  /** `null` where it may not be changed: submitted, or not for this role. */
  measured: Measured | null;
}

/** The line of a report that says how it was measured, and leads to another way. */
export default function MeasuredHow({ words, measured }: Props) {
  const [open, setOpen] = useState(false);
  return (
    <ApiProvider>
      <div className="mt-2 flex flex-wrap items-baseline gap-x-4 gap-y-1 text-[13px]">
        <p className="text-muted">{words}</p>
        {measured && (
          <button
            type="button"
            className="text-teal underline underline-offset-4"
            onClick={() => setOpen(true)}
          >
            How it is measured
          </button>
        )}
      </div>
      {open && measured && <PlanDialog measured={measured} onClose={() => setOpen(false)} />}
    </ApiProvider>
  );
}
