import type { ColumnDef } from '@tanstack/react-table';
import { Figure } from '@/components/look/Figure.tsx';
import { LoadLine } from '@/components/look/LoadLine.tsx';
import { outcomeTone, VerdictMark } from '@/components/look/VerdictMark.tsx';
import type { DeliverableRow } from '@/domain/api/deliverables.ts';
import { formatDuration } from '@/domain/figures-text.ts';
import { figureBeside } from '@/domain/presentations-verdict.ts';
import type { VerdictBody } from '@/domain/verdict.ts';
import { submissionStateNames } from '@/domain/vocabulary.ts';

/** Measuring in words: programme time done, of all. */
function progressText({ state, progress }: DeliverableRow): string {
  if (state === 'uploading') return 'Uploading';
  if (state === 'waiting') return 'Waiting to be measured';
  if (!progress) return 'Measuring';
  const done = formatDuration(progress.secondsDone);
  return `Measuring ${done}${progress.secondsTotal ? ` of ${formatDuration(progress.secondsTotal)}` : ''}`;
}

function VerdictCell({ row }: { row: DeliverableRow }) {
  if (row.state === 'unreadable') return <span className="font-semibold text-hull">Unreadable</span>;
  if (row.state !== 'measured')
    return <span className="num text-[12.5px] text-muted">{progressText(row)}</span>;
  if (row.outcome === null) return <VerdictMark outcome="not_judged" />;
  return <VerdictMark outcome={row.outcome} />;
}

/** A metric's load line for one verdict, in a table cell; nothing where the spec has no such rule. */
export function RuleCell({ verdict, metric }: { verdict: VerdictBody | null; metric: string }) {
  const rule = verdict?.rules.find((one) => one.metric === metric);
  if (!rule) return null;
  return (
    <LoadLine
      metric={metric}
      value={rule.judged}
      atLeast={rule.atLeast}
      atMost={rule.atMost}
      outcome={rule.outcome}
      size="cell"
      width={metric === 'integratedLufs' ? 84 : 64}
      label={`${rule.name} ${rule.judgedText} ${rule.unit}, ${rule.marginText}`}
    />
  );
}

const worst = (row: DeliverableRow) => row.channels[0]?.verdict ?? null;
export const rowName = (row: DeliverableRow) =>
  [row.programmeTitle, row.episodeLabel, row.versionLabel].filter(Boolean).join(' ') || row.fileName;

/** The state of the submission that matters most just now, or that there is none. */
function stateText(row: DeliverableRow): string {
  const states = row.channels.flatMap((channel) => (channel.submission ? [channel.submission.state] : []));
  if (states.length === 0) return 'Not submitted';
  const first = (
    ['rejected', 'awaiting_review', 'approved_with_waiver', 'approved', 'replaced', 'withdrawn'] as const
  ).find((state) => states.includes(state));
  const others = row.channels.length - 1;
  return `${submissionStateNames[first ?? states[0]]}${others > 0 && states.length < row.channels.length ? ` (${states.length} of ${row.channels.length})` : ''}`;
}

export const deliverableColumns: ColumnDef<DeliverableRow, unknown>[] = [
  { id: 'verdict', header: 'Verdict', cell: ({ row }) => <VerdictCell row={row.original} /> },
  {
    id: 'programme',
    header: 'Programme',
    meta: { sort: 'programme' },
    cell: ({ row: { original: row } }) => (
      <a href={`/deliverables/${row.id}`} className="no-underline hover:underline" tabIndex={-1}>
        {row.programmeTitle ?? (
          <span className="num block text-[12.5px] break-all md:max-w-44 md:truncate" title={row.fileName}>
            {row.fileName}
          </span>
        )}
        <span className="text-muted sm:hidden"> {row.episodeLabel}</span>
      </a>
    ),
  },
  {
    id: 'episode',
    header: 'Episode and version',
    meta: { from: 'sm' },
    cell: ({ row: { original: row } }) => (
      <span className="text-muted">{[row.episodeLabel, row.versionLabel].filter(Boolean).join(' · ')}</span>
    ),
  },
  {
    id: 'length',
    header: 'Length',
    meta: { figure: true, sort: 'duration', from: 'lg' },
    cell: ({ row: { original: row } }) =>
      row.format && <span className="num">{formatDuration(row.format.durationSeconds)}</span>,
  },
  {
    id: 'layout',
    header: 'Layout',
    meta: { from: 'lg' },
    cell: ({ row: { original: row } }) => (
      <span className="inline-block first-letter:uppercase">{row.format?.layout}</span>
    ),
  },
  {
    id: 'integrated',
    header: 'Integrated',
    meta: { figure: true, sort: 'integrated', from: 'md' },
    cell: ({ row: { original: row } }) =>
      row.figures && (
        <Figure
          value={figureBeside(worst(row), 'integratedLufs', row.figures.loudness.integratedLufs)}
          unit="LUFS"
        />
      ),
  },
  {
    id: 'integrated-line',
    header: () => <span className="sr-only">Integrated, load line</span>,
    meta: { from: 'md' },
    cell: ({ row: { original: row } }) => <RuleCell verdict={worst(row)} metric="integratedLufs" />,
  },
  {
    id: 'peak',
    header: 'True peak',
    meta: { figure: true, sort: 'truePeak', from: 'md' },
    cell: ({ row: { original: row } }) =>
      row.figures && (
        <Figure value={figureBeside(worst(row), 'truePeakDbtp', row.figures.truePeak.maxDbtp)} unit="dBTP" />
      ),
  },
  {
    id: 'peak-line',
    header: () => <span className="sr-only">True peak, load line</span>,
    meta: { from: 'lg' },
    cell: ({ row: { original: row } }) => <RuleCell verdict={worst(row)} metric="truePeakDbtp" />,
  },
  {
    id: 'range',
    header: 'Range',
    meta: { figure: true, sort: 'range', from: 'xl' },
    cell: ({ row: { original: row } }) =>
      row.figures && (
        <Figure value={figureBeside(worst(row), 'rangeLu', row.figures.loudness.rangeLu)} unit="LU" />
      ),
  },
  {
    id: 'nearest',
    header: 'Nearest limit',
    cell: ({ row: { original: row } }) =>
      row.state === 'unreadable' ? (
        <span
          className="line-clamp-2 max-w-48 text-[12.5px] leading-tight text-hull md:whitespace-normal"
          title={row.reason ?? undefined}
        >
          {row.reason}
        </span>
      ) : row.outcome === null ? (
        row.state === 'measured' && (
          <span className="text-muted">
            {row.channels.length === 0 ? 'for no channel yet' : 'no spec in force'}
          </span>
        )
      ) : (
        <span
          className={`line-clamp-2 max-w-52 leading-tight md:whitespace-normal ${outcomeTone(row.outcome)}`}
        >
          {worst(row)?.nearestText}
        </span>
      ),
  },
  {
    id: 'spec',
    header: 'Spec of',
    meta: { from: 'lg' },
    cell: ({ row: { original: row } }) =>
      row.channels[0] && (
        <>
          {row.channels[0].channelName}
          {row.channels.length > 1 && (
            <span className="text-[12.5px] text-muted"> +{row.channels.length - 1}</span>
          )}
        </>
      ),
  },
  {
    id: 'state',
    header: 'State',
    meta: { from: 'xl' },
    cell: ({ row: { original: row } }) => (
      <span
        className={`block max-w-32 leading-tight whitespace-normal ${stateText(row) === 'Awaiting review' ? '' : 'text-muted'}`}
      >
        {stateText(row)}
      </span>
    ),
  },
];
