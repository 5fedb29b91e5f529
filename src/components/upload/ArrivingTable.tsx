import { outcomeTone, VerdictMark } from '@/components/look/VerdictMark.tsx';
import type { DeliverableRow } from '@/domain/api/deliverables.ts';
import { formatBytes, formatDuration } from '@/domain/figures-text.ts';
import { contentKindNames } from '@/domain/vocabulary.ts';
import { ProgressBar } from './ProgressBar.tsx';
import { progressText, type UploadItem } from './upload-item.ts';

interface Props {
  items: readonly UploadItem[];
  /** The server's rows by deliverable. */
  rowOf: ReadonlyMap<string, DeliverableRow>;
  measuring: ReadonlyMap<string, { secondsDone: number; secondsTotal: number | null }>;
  /** Picked deliverables by id. */
  picked: ReadonlySet<string>;
  onPick: (picked: Set<string>) => void;
  onPause: (key: string) => void;
  onResume: (key: string) => void;
  onCancel: (key: string) => void;
  onForget: (key: string) => void;
}

const cell = 'py-1.5! max-md:block max-md:h-auto! max-md:border-0! max-md:py-1!';

/** Files on their way: sent, measured, judged; each row says where it stands. */
export function ArrivingTable({ items, rowOf, picked, onPick, ...rest }: Props) {
  const ids = items.flatMap(({ deliverableId }) =>
    deliverableId && rowOf.has(deliverableId) ? [deliverableId] : [],
  );
  const toggle = (id: string) => {
    const next = new Set(picked);
    if (!next.delete(id)) next.add(id);
    onPick(next);
  };
  return (
    <table className="rows" aria-label="Files on their way">
      <thead className="max-md:sr-only">
        <tr>
          <th className="w-8">
            <input
              type="checkbox"
              aria-label="Pick all"
              checked={ids.length > 0 && ids.every((id) => picked.has(id))}
              onChange={(event) => onPick(event.target.checked ? new Set(ids) : new Set())}
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
        {items.map((item) => {
          const row = item.deliverableId ? rowOf.get(item.deliverableId) : undefined;
          return (
            <tr key={item.key} className="max-md:block max-md:border-b max-md:border-hairline max-md:py-2">
              <td className={cell}>
                {row && (
                  <input
                    type="checkbox"
                    aria-label={`Pick ${row.fileName}`}
                    checked={picked.has(row.id)}
                    onChange={() => toggle(row.id)}
                  />
                )}
              </td>
              <td className={cell}>
                <span className="num break-all">{item.fileName}</span>
                <span className="ml-2 text-[12.5px] whitespace-nowrap text-muted">
                  {formatBytes(item.byteSize)}
                </span>
              </td>
              <td className={cell}>
                {row && (
                  <>
                    {row.programmeTitle ?? <span className="text-muted">no programme yet</span>}{' '}
                    <span className="text-muted">
                      {[row.episodeLabel, row.versionLabel].filter(Boolean).join(' · ')}
                    </span>
                  </>
                )}
              </td>
              <td className={`${cell} text-muted`}>{row && contentKindNames[row.contentKind]}</td>
              <td className={cell}>
                {row &&
                  (row.channels.length > 0 ? (
                    row.channels.map((channel) => channel.channelName).join(', ')
                  ) : (
                    <span className="text-brass">no channel yet</span>
                  ))}
              </td>
              <td className={`${cell} md:min-w-64`}>
                <Standing item={item} row={row} {...rest} />
              </td>
            </tr>
          );
        })}
      </tbody>
    </table>
  );
}

const quiet = 'text-teal underline underline-offset-4';

type StandingProps = Omit<Props, 'items' | 'rowOf' | 'picked' | 'onPick'> & {
  item: UploadItem;
  row: DeliverableRow | undefined;
};

/** Bytes while it is sent, then programme time while it is measured, then the verdict of each channel. */
function Standing({ item, row, measuring, onForget, ...rest }: StandingProps) {
  if (item.state === 'refused')
    return (
      <div className="grid gap-1 text-[12.5px]">
        <p role="alert" className="text-hull">
          {item.message}
        </p>
        <button type="button" className={`${quiet} justify-self-start`} onClick={() => onForget(item.key)}>
          Take off the list
        </button>
      </div>
    );
  if (item.state !== 'sent') return <SendingCell item={item} {...rest} />;
  return (
    <div className="grid gap-1">
      {row ? <MeasuringCell row={row} measuring={measuring} /> : <span className="text-muted">Sent</span>}
      {item.message && <p className="text-[12.5px] text-brass">{item.message}</p>}
    </div>
  );
}

const stateWords = { waiting: 'Waiting', paused: 'Paused', failed: 'Stopped' } as const;

function SendingCell({
  item,
  onPause,
  onResume,
  onCancel,
}: Omit<StandingProps, 'row' | 'measuring' | 'onForget'>) {
  const { key, state, fileName, byteSize, bytesSent, bytesHashed, resumedBytes, message } = item;
  const checking = bytesSent === byteSize && bytesHashed < byteSize;
  return (
    <div className="grid gap-1 text-[12.5px]">
      <div className="flex flex-wrap items-baseline gap-x-3">
        <span className="num">
          {(state === 'waiting' || state === 'paused' || state === 'failed') && `${stateWords[state]}, `}
          {checking
            ? `reading for the checksum, ${formatBytes(bytesHashed)} of ${formatBytes(byteSize)}`
            : state === 'joining'
              ? 'joining the parts'
              : progressText(bytesSent, byteSize, null)}
        </span>
        {state === 'sending' && (
          <button type="button" className={quiet} onClick={() => onPause(key)}>
            Pause
          </button>
        )}
        {(state === 'paused' || state === 'failed') && (
          <button type="button" className={quiet} onClick={() => onResume(key)}>
            {state === 'paused' ? 'Go on' : 'Try again'}
          </button>
        )}
        {state !== 'joining' && (
          <button type="button" className={quiet} onClick={() => onCancel(key)}>
            Cancel
          </button>
        )}
      </div>
      <ProgressBar done={bytesSent} all={byteSize} label={`${fileName}, sent`} />
      {resumedBytes > 0 && state !== 'failed' && (
        <p className="text-muted">Goes on: {formatBytes(resumedBytes)} were there already.</p>
      )}
      {message && (
        <p role="alert" className="text-hull">
          {message}
        </p>
      )}
    </div>
  );
}

function MeasuringCell({ row, measuring }: { row: DeliverableRow; measuring: Props['measuring'] }) {
  if (row.state === 'unreadable') return <p className="text-[12.5px] text-hull">{row.reason}</p>;
  if (row.state !== 'measured') {
    const progress = measuring.get(row.id) ?? row.progress;
    if (!progress) return <span className="text-[12.5px] text-muted">Sent; waiting to be measured</span>;
    return (
      <div className="grid gap-1">
        <span className="num text-[12.5px]">
          Measuring {formatDuration(progress.secondsDone)}
          {progress.secondsTotal && ` of ${formatDuration(progress.secondsTotal)}`}
        </span>
        {progress.secondsTotal && (
          <ProgressBar
            done={progress.secondsDone}
            all={progress.secondsTotal}
            label={`${row.fileName} measured`}
          />
        )}
      </div>
    );
  }
  if (row.channels.length === 0)
    return (
      <span className="text-[12.5px] text-muted">
        <a href={`/deliverables/${row.id}`}>Measured</a>. Say what channel it is for to have it judged.
      </span>
    );
  return (
    <ul className="grid gap-0.5 text-[13px]">
      {row.channels.map((channel) => (
        <li key={channel.channelId} className="flex flex-wrap items-center gap-x-3">
          <VerdictMark outcome={channel.verdict?.outcome ?? 'not_judged'} />
          <a href={`/deliverables/${row.id}?channel=${channel.channelId}`} className={quiet}>
            Report for {channel.channelName}
          </a>
          <span className={outcomeTone(channel.verdict?.outcome ?? 'not_judged')}>
            {channel.verdict?.nearestText ?? 'no spec in force'}
          </span>
        </li>
      ))}
    </ul>
  );
}
