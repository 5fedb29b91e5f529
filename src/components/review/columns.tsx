import type { ColumnDef } from '@tanstack/react-table';
import { RuleCell } from '@/components/deliverables/columns.tsx';
import { Figure } from '@/components/look/Figure.tsx';
import { outcomeTone, VerdictMark } from '@/components/look/VerdictMark.tsx';
import type { SubmissionRow } from '@/domain/api/submissions.ts';
import { figureBeside } from '@/domain/presentations-verdict.ts';
import { submissionStateNames } from '@/domain/vocabulary.ts';
import { momentText, rowName } from './review-list.ts';

/** One line; what does not fit is in the title, and whole in the panel. */
const Short = ({ text, width }: { text: string; width: string }) => (
  <span className={`inline-block truncate align-middle ${width}`} title={text}>
    {text}
  </span>
);

/** Columns of the queue; the other side is the supplier for a distributor and the distributor for a supplier. */
export function submissionColumns(
  decides: boolean,
  showsState: boolean,
  now: Date,
): ColumnDef<SubmissionRow, unknown>[] {
  const columns: ColumnDef<SubmissionRow, unknown>[] = [
    {
      id: 'verdict',
      header: 'Verdict',
      cell: ({ row }) => <VerdictMark outcome={row.original.verdict.outcome} />,
    },
    {
      id: 'programme',
      header: 'Programme, episode',
      meta: { sort: 'programme' },
      cell: ({ row: { original: row } }) => (
        <span className="flex items-baseline gap-2">
          <a
            href={`/review/${row.id}`}
            tabIndex={-1}
            title={rowName(row)}
            className="no-underline hover:underline sm:max-w-56 sm:truncate"
          >
            {row.programmeTitle ? (
              <>
                {row.programmeTitle} <span className="text-muted">{row.episodeLabel}</span>
              </>
            ) : (
              <span className="num text-[12.5px] max-sm:break-all">{rowName(row)}</span>
            )}
          </a>
          {row.openBy.length > 0 && (
            <span
              className="text-[12px] whitespace-nowrap text-teal"
              title={`Open by ${row.openBy.map(({ name }) => name).join(', ')} too`}
            >
              {row.openBy.length === 1 ? row.openBy[0].name.split(' ')[0] : row.openBy.length} reads it
            </span>
          )}
        </span>
      ),
    },
    {
      id: 'other',
      header: decides ? 'Supplier' : 'Distributor',
      meta: { from: 'lg' },
      cell: ({ row: { original: row } }) => (
        <Short text={decides ? row.supplier.name : row.distributor.name} width="max-w-22" />
      ),
    },
    {
      id: 'channel',
      header: 'Channel',
      meta: { from: 'sm' },
      cell: ({ row }) => <Short text={row.original.channel.name} width="max-w-22" />,
    },
    {
      id: 'integrated',
      header: 'Integrated',
      meta: { figure: true, sort: 'integrated', from: 'md' },
      cell: ({ row: { original: row } }) => (
        <Figure value={figureBeside(row.verdict, 'integratedLufs', row.figures.loudness.integratedLufs)} />
      ),
    },
    {
      id: 'integrated-line',
      header: () => <span className="sr-only">Integrated, load line</span>,
      meta: { from: 'xl' },
      cell: ({ row }) => <RuleCell verdict={row.original.verdict} metric="integratedLufs" />,
    },
    {
      id: 'peak',
      header: 'True peak',
      meta: { figure: true, sort: 'truePeak', from: 'md' },
      cell: ({ row: { original: row } }) => (
        <Figure value={figureBeside(row.verdict, 'truePeakDbtp', row.figures.truePeak.maxDbtp)} />
      ),
    },
    {
      id: 'peak-line',
      header: () => <span className="sr-only">True peak, load line</span>,
      meta: { from: 'xl' },
      cell: ({ row }) => <RuleCell verdict={row.original.verdict} metric="truePeakDbtp" />,
    },
    {
      id: 'nearest',
      header: 'Nearest limit',
      cell: ({ row: { original: row } }) => (
        <span className={outcomeTone(row.verdict.outcome)}>
          <Short text={row.verdict.nearestText} width="max-sm:whitespace-normal! sm:max-w-44" />
        </span>
      ),
    },
    {
      id: 'airs',
      header: 'Airs',
      meta: { figure: true, sort: 'airs', from: 'sm' },
      cell: ({ row: { original: row } }) =>
        row.airAt ? (
          <span className="num text-[12px]">{momentText(row.airAt, row.channel.timeZone, now)}</span>
        ) : (
          <span className="text-[12.5px] text-muted">not said</span>
        ),
    },
  ];
  const state: ColumnDef<SubmissionRow, unknown> = {
    id: 'state',
    header: 'State',
    meta: { from: 'sm' },
    cell: ({ row }) => <span className="text-muted">{submissionStateNames[row.original.state]}</span>,
  };
  return showsState ? [...columns.slice(0, 2), state, ...columns.slice(2)] : columns;
}
