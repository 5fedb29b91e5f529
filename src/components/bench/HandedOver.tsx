import { VerdictMark } from '@/components/look/VerdictMark.tsx';
import { ProgressBar } from '@/components/upload/ProgressBar.tsx';
import type { UploadItem } from '@/components/upload/upload-item.ts';
import type { DeliverableRow } from '@/domain/api/deliverables.ts';
import { formatBytes, formatDuration } from '@/domain/figures-text.ts';

/** A bench file that is handed over to the service: how far its bytes are, then what the service says. */
export interface Handover {
  upload: UploadItem;
  row: DeliverableRow | null;
  progress: { secondsDone: number; secondsTotal: number | null } | null;
  /** The service could not be asked: why. */
  trouble: string | null;
  onPause: () => void;
  onResume: () => void;
}

const quiet = 'text-teal underline underline-offset-4';

export function HandedOver({
  handover: { upload, row, progress, trouble, onPause, onResume },
}: {
  handover: Handover;
}) {
  const { state, bytesSent, byteSize, fileName, message } = upload;
  if (state === 'sent') return <AtTheService row={row} progress={progress} trouble={trouble} />;
  const words = {
    waiting: 'Waiting to be sent',
    paused: 'Paused, sent',
    failed: 'Stopped, sent',
    refused: 'Not sent',
  };
  return (
    <div className="grid min-w-44 gap-1 py-1 text-[12.5px] whitespace-normal">
      <span className="flex flex-wrap items-baseline gap-x-3">
        <span className="num">
          {state in words ? words[state as keyof typeof words] : 'Sent'}
          {state !== 'waiting' &&
            state !== 'refused' &&
            ` ${formatBytes(bytesSent)} of ${formatBytes(byteSize)}`}
        </span>
        {state === 'sending' && (
          <button type="button" className={quiet} onClick={onPause} aria-label={`Pause ${fileName}`}>
            Pause
          </button>
        )}
        {(state === 'paused' || state === 'failed') && (
          <button type="button" className={quiet} onClick={onResume} aria-label={`Go on with ${fileName}`}>
            Go on
          </button>
        )}
      </span>
      {state !== 'refused' && <ProgressBar done={bytesSent} all={byteSize} label={`${fileName}, sent`} />}
      {message && (
        <span role="alert" className="text-hull">
          {message}
        </span>
      )}
    </div>
  );
}

function AtTheService({ row, progress, trouble }: Pick<Handover, 'row' | 'progress' | 'trouble'>) {
  if (!row)
    return (
      <span className="block max-w-44 text-[12.5px] whitespace-normal text-muted">{trouble ?? 'Sent'}</span>
    );
  const report = (words: string) => (
    <a href={`/deliverables/${row.id}`} className={quiet}>
      {words}
    </a>
  );
  if (row.state === 'unreadable')
    return (
      <span className="grid gap-0.5 py-1 text-[12.5px] whitespace-normal">
        <span className="text-hull">{row.reason}</span>
        {report('Report')}
      </span>
    );
  if (row.state !== 'measured')
    return (
      <span className="num text-[12.5px] text-muted">
        {progress
          ? `The service measures ${formatDuration(progress.secondsDone)}${progress.secondsTotal ? ` of ${formatDuration(progress.secondsTotal)}` : ''}`
          : 'Sent; waits for the service'}
      </span>
    );
  return (
    <span className="grid justify-items-start gap-0.5 py-1 text-[12.5px]">
      {row.outcome ? (
        <span className="flex items-center gap-2">
          <VerdictMark outcome={row.outcome} />
          <span className="whitespace-nowrap text-muted">{row.channels[0]?.channelName}</span>
        </span>
      ) : (
        <span className="text-muted">measured by the service</span>
      )}
      {report('Report')}
    </span>
  );
}
