import type { ColumnDef } from '@tanstack/react-table';
import { RuleCell } from '@/components/deliverables/columns.tsx';
import { Figure } from '@/components/look/Figure.tsx';
import { outcomeTone, VerdictMark } from '@/components/look/VerdictMark.tsx';
import type { SubmissionRow } from '@/domain/api/submissions.ts';
import { submissionStateNames } from '@/domain/vocabulary.ts';
import { momentText, rowName } from './review-list.ts';

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
        <a href={`/review/${row.id}`} tabIndex={-1} className="no-underline hover:underline">
          {row.programmeTitle ? (
            <>
              {row.programmeTitle} <span className="text-muted">{row.episodeLabel}</span>
            </>
          ) : (
            <span className="num text-[12.5px] break-all">{rowName(row)}</span>
          )}
        </a>
      ),
    },
    {
      id: 'other',
      header: decides ? 'Supplier' : 'Distributor',
      meta: { from: 'lg' },
      cell: ({ row: { original: row } }) => (decides ? row.supplier.name : row.distributor.name),
    },
    { id: 'channel', header: 'Channel', meta: { from: 'sm' }, cell: ({ row }) => row.original.channel.name },
    {
      id: 'integrated',
      header: 'Integrated',
      meta: { figure: true, sort: 'integrated', from: 'md' },
      cell: ({ row }) => <Figure value={row.original.figures.loudness.integratedLufs} unit="LUFS" />,
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
      cell: ({ row }) => <Figure value={row.original.figures.truePeak.maxDbtp} unit="dBTP" />,
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
        <span className={outcomeTone(row.verdict.outcome)}>{row.verdict.nearestText}</span>
      ),
    },
    {
      id: 'airs',
      header: 'Airs',
      meta: { figure: true, sort: 'airs', from: 'sm' },
      cell: ({ row: { original: row } }) =>
        row.airAt ? (
          <span className="num text-[12.5px]">{momentText(row.airAt, row.channel.timeZone, now)}</span>
        ) : (
          <span className="text-[12.5px] text-muted">not said</span>
        ),
    },
    {
      id: 'open-by',
      header: () => <span className="sr-only">Open by</span>,
      meta: { from: 'xl' },
      cell: ({ row: { original: row } }) =>
        row.openBy.length > 0 && (
          <span className="text-[12.5px] text-teal">
            open by {row.openBy.map(({ name }) => name).join(', ')}
          </span>
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
