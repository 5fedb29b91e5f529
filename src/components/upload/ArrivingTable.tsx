import { outcomeTone, VerdictMark } from '@/components/look/VerdictMark.tsx';
import type { DeliverableRow } from '@/domain/api/deliverables.ts';
import { formatBytes, formatDuration } from '@/domain/figures-text.ts';
import { contentKindNames } from '@/domain/vocabulary.ts';
import type { Sending } from './upload-queue.ts';

interface Props {
  rows: DeliverableRow[];
  sendings: Sending[];
  measuring: Map<string, { secondsDone: number; secondsTotal: number | null }>;
  picked: ReadonlySet<string>;
  onPick: (picked: Set<string>) => void;
  onPause: (id: string) => void;
  onResume: (id: string) => void;
  onCancel: (id: string) => void;
}

/** Files on their way: sent, measured, judged; each row says where it stands. */
export function ArrivingTable({ rows, picked, onPick, ...rest }: Props) {
  const toggle = (id: string) => {
    const next = new Set(picked);
    if (!next.delete(id)) next.add(id);
    onPick(next);
  };
  return (
    <div className="overflow-x-auto">
      <table className="rows" aria-label="Files on their way">
        <thead>
          <tr>
            <th className="w-8">
              <input
                type="checkbox"
                aria-label="Pick all"
                checked={rows.length > 0 && rows.every((row) => picked.has(row.id))}
                onChange={(event) =>
                  onPick(event.target.checked ? new Set(rows.map((row) => row.id)) : new Set())
                }
              />
            </th>
            {['File', 'Programme, episode', 'Kind', 'For', 'Where it stands'].map((name) => (
              <th key={name} scope="col">
                {name}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {rows.map((row) => (
            <tr key={row.id}>
              <td>
                <input
                  type="checkbox"
                  aria-label={`Pick ${row.fileName}`}
                  checked={picked.has(row.id)}
                  onChange={() => toggle(row.id)}
                />
              </td>
              <td className="py-1.5!">
                <a href={`/deliverables/${row.id}`} className="num break-all no-underline hover:underline">
                  {row.fileName}
                </a>
                <span className="ml-2 text-[12.5px] whitespace-nowrap text-muted">
                  {formatBytes(row.byteSize)}
                </span>
              </td>
              <td>
                {row.programmeTitle ?? <span className="text-muted">not said</span>}{' '}
                <span className="text-muted">{row.episodeLabel}</span>
              </td>
              <td className="text-muted">{contentKindNames[row.contentKind]}</td>
              <td>
                {row.channels.length > 0 ? (
                  row.channels.map((channel) => channel.channelName).join(', ')
                ) : (
                  <span className="text-brass">no channel yet</span>
                )}
              </td>
              <td className="min-w-64 py-1.5!">
                <Standing row={row} {...rest} />
              </td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}

function Bar({ done, all, label }: { done: number; all: number; label: string }) {
  return (
    <progress className="h-1.5 w-full accent-teal" max={Math.max(1, all)} value={done} aria-label={label} />
  );
}

const quiet = 'text-teal underline underline-offset-4';

function Standing({
  row,
  sendings,
  measuring,
  onPause,
  onResume,
  onCancel,
}: Omit<Props, 'rows' | 'picked' | 'onPick'> & { row: DeliverableRow }) {
  const sending = sendings.find((one) => one.id === row.id);
  if (row.state === 'uploading' && sending) {
    const { state, sentBytes, byteSize, problem } = sending;
    return (
      <div className="grid gap-1">
        <div className="flex items-baseline gap-3 text-[12.5px]">
          <span className="num">
            {state === 'finishing'
              ? sending.hashedBytes < byteSize
                ? `Checking ${formatBytes(sending.hashedBytes)} of ${formatBytes(byteSize)}`
                : 'Joining'
              : `${formatBytes(sentBytes)} of ${formatBytes(byteSize)}`}
          </span>
          {state === 'sending' && (
            <button type="button" className={quiet} onClick={() => onPause(row.id)}>
              Pause
            </button>
          )}
          {(state === 'paused' || state === 'failed') && (
            <button type="button" className={quiet} onClick={() => onResume(row.id)}>
              Go on
            </button>
          )}
          {state !== 'finishing' && state !== 'done' && (
            <button type="button" className={quiet} onClick={() => onCancel(row.id)}>
              Cancel
            </button>
          )}
        </div>
        <Bar done={sentBytes} all={byteSize} label={`${row.fileName} sent`} />
        {problem && (
          <p role="alert" className="text-[12.5px] text-hull">
            {problem}
          </p>
        )}
      </div>
    );
  }
  if (row.state === 'unreadable') return <p className="text-[12.5px] text-hull">{row.reason}</p>;
  if (row.state !== 'measured') {
    const progress = measuring.get(row.id) ?? row.progress;
    if (!progress)
      return (
        <span className="text-[12.5px] text-muted">
          {row.state === 'uploading' ? 'Not sent' : 'Waiting to be measured'}
        </span>
      );
    return (
      <div className="grid gap-1">
        <span className="num text-[12.5px]">
          Measuring {formatDuration(progress.secondsDone)}
          {progress.secondsTotal && ` of ${formatDuration(progress.secondsTotal)}`}
        </span>
        {progress.secondsTotal && (
          <Bar done={progress.secondsDone} all={progress.secondsTotal} label={`${row.fileName} measured`} />
        )}
      </div>
    );
  }
  if (row.channels.length === 0)
    return (
      <span className="text-[12.5px] text-muted">
        Measured. Say what channel it is for to have it judged.
      </span>
    );
  return (
    <ul className="grid gap-0.5 text-[13px]">
      {row.channels.map((channel) => (
        <li key={channel.channelId} className="flex flex-wrap items-center gap-x-3">
          <a href={`/deliverables/${row.id}?channel=${channel.channelId}`} className="no-underline">
            <VerdictMark outcome={channel.verdict?.outcome ?? 'not_judged'} />
          </a>
          <span>{channel.channelName}</span>
          <span className={outcomeTone(channel.verdict?.outcome ?? 'not_judged')}>
            {channel.verdict?.nearestText ?? 'no spec in force'}
          </span>
        </li>
      ))}
    </ul>
  );
}
