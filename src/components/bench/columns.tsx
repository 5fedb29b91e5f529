import type { ColumnDef } from '@tanstack/react-table';
import { RuleCell } from '@/components/deliverables/columns.tsx';
import { Figure } from '@/components/look/Figure.tsx';
import { outcomeTone, VerdictMark } from '@/components/look/VerdictMark.tsx';
import { ProgressBar } from '@/components/upload/ProgressBar.tsx';
import { formatBytes, formatDuration, formatRate } from '@/domain/figures-text.ts';
import type { BenchItem } from './bench-queue.ts';
import type { Held } from './bench-verdicts.ts';
import { HandedOver, type Handover } from './HandedOver.tsx';

export interface BenchRow {
  id: string;
  item: BenchItem;
  /** Against the chosen specs, worst first; empty while there are no figures. */
  held: Held[];
  handover: Handover | null;
}

export interface RowActs {
  onStop: (id: string) => void;
  onAgain: (id: string) => void;
}

export const quiet = 'text-teal underline underline-offset-4';

/** 'WAV, 48 kHz, 24 bit, stereo'. */
export const formatText = (item: BenchItem): string => {
  const format = item.result?.measured.measurement.format;
  if (!format) return formatBytes(item.file.size);
  const depth = format.bitDepth === null ? '' : `, ${format.bitDepth} bit`;
  const preview = item.result?.preview ? ', preview' : '';
  return `${format.container}, ${formatRate(format.sampleRateHz)}${depth}, ${format.layout}${preview}`;
};

function progressText({ state, secondsDone, secondsTotal }: BenchItem): string {
  if (state === 'waiting') return 'Waiting';
  if (state === 'decoding') return 'The browser decodes it';
  return `Measuring ${formatDuration(secondsDone)}${secondsTotal ? ` of ${formatDuration(secondsTotal)}` : ''}`;
}

function Standing({ row: { item, held } }: { row: BenchRow }) {
  switch (item.state) {
    case 'measured':
      return <VerdictMark outcome={held[0]?.verdict.outcome ?? 'not_judged'} />;
    case 'unreadable':
      return <span className="font-semibold whitespace-nowrap text-hull">No figures</span>;
    case 'stopped':
      return <span className="text-muted">Stopped</span>;
    default:
      return (
        <span className="grid min-w-36 gap-1">
          <span className="num text-[12.5px] text-muted">{progressText(item)}</span>
          {item.state === 'measuring' && (
            <ProgressBar
              done={item.secondsDone}
              all={item.secondsTotal ?? 0}
              label={`${item.file.name}, measured`}
            />
          )}
        </span>
      );
  }
}

/** The worst rule and its margin, or why there are no figures. */
function Nearest({ row: { item, held } }: { row: BenchRow }) {
  if (item.message)
    return (
      <span className="block max-w-md py-1 text-[12.5px] leading-tight whitespace-normal text-hull">
        {item.message}
      </span>
    );
  if (held.length === 0) return null;
  const { outcome, nearestText } = held[0].verdict;
  return (
    <span className={`line-clamp-2 max-w-52 leading-tight md:whitespace-normal ${outcomeTone(outcome)}`}>
      {nearestText}
    </span>
  );
}

const figures = ({ item }: BenchRow) => item.result?.measured.measurement.figures;

const specColumn: ColumnDef<BenchRow, unknown> = {
  id: 'spec',
  header: 'Spec of',
  meta: { from: 'lg' },
  cell: ({ row: { original: row } }) =>
    row.held[0] && (
      <span className="line-clamp-2 max-w-48 leading-tight whitespace-normal text-muted">
        {row.held[0].spec.name}
        {row.held.length > 1 && <span className="text-[12.5px]"> +{row.held.length - 1}</span>}
      </span>
    ),
};

interface Shown {
  /** The verdict is the worst of several specs, so the row says of which. */
  several: boolean;
  /** Files can be handed over to the service, which is told in the last column. */
  sends: boolean;
}

export const benchColumns = (
  { onStop, onAgain }: RowActs,
  { several, sends }: Shown,
): ColumnDef<BenchRow, unknown>[] => [
  { id: 'verdict', header: 'Verdict', cell: ({ row: { original: row } }) => <Standing row={row} /> },
  {
    id: 'file',
    header: 'File',
    cell: ({ row: { original: row } }) => (
      <>
        <span
          className="num block text-[12.5px] break-all md:max-w-64 md:truncate"
          title={row.item.file.name}
        >
          {row.item.file.name}
        </span>
        {/* In a hand the two share a column. */}
        <span className="block pb-1 sm:hidden">
          <Nearest row={row} />
        </span>
      </>
    ),
  },
  {
    id: 'format',
    header: 'Format',
    meta: { from: 'xl' },
    cell: ({ row: { original: row } }) => (
      <span className="whitespace-nowrap text-muted">{formatText(row.item)}</span>
    ),
  },
  {
    id: 'length',
    header: 'Length',
    meta: { figure: true, from: 'lg' },
    cell: ({ row: { original: row } }) =>
      row.item.result && (
        <span className="num">
          {formatDuration(row.item.result.measured.measurement.format.durationSeconds)}
        </span>
      ),
  },
  {
    id: 'integrated',
    header: 'Integrated',
    meta: { figure: true, from: 'md' },
    cell: ({ row: { original: row } }) =>
      figures(row) && <Figure value={figures(row)?.loudness.integratedLufs} unit="LUFS" />,
  },
  {
    id: 'integrated-line',
    header: () => <span className="sr-only">Integrated, load line</span>,
    meta: { from: 'md' },
    cell: ({ row: { original: row } }) => (
      <RuleCell verdict={row.held[0]?.verdict ?? null} metric="integratedLufs" />
    ),
  },
  {
    id: 'peak',
    header: 'True peak',
    meta: { figure: true, from: 'md' },
    cell: ({ row: { original: row } }) =>
      figures(row) && <Figure value={figures(row)?.truePeak.maxDbtp} unit="dBTP" />,
  },
  {
    id: 'peak-line',
    header: () => <span className="sr-only">True peak, load line</span>,
    meta: { from: 'lg' },
    cell: ({ row: { original: row } }) => (
      <RuleCell verdict={row.held[0]?.verdict ?? null} metric="truePeakDbtp" />
    ),
  },
  {
    id: 'range',
    header: 'Range',
    meta: { figure: true, from: 'xl' },
    cell: ({ row: { original: row } }) =>
      figures(row) && <Figure value={figures(row)?.loudness.rangeLu} unit="LU" />,
  },
  {
    id: 'nearest',
    header: 'Nearest limit',
    meta: { from: 'sm' },
    cell: ({ row: { original: row } }) => <Nearest row={row} />,
  },
  ...(several ? [specColumn] : []),
  {
    id: 'acts',
    header: () => (sends ? 'At the service' : <span className="sr-only">Acts</span>),
    cell: ({ row: { original: row } }) => {
      const { id, file, state } = row.item;
      if (row.handover) return <HandedOver handover={row.handover} />;
      if (state === 'waiting' || state === 'measuring' || state === 'decoding')
        return (
          <button type="button" className={quiet} onClick={() => onStop(id)} aria-label={`Stop ${file.name}`}>
            Stop
          </button>
        );
      return (
        (state === 'stopped' || state === 'unreadable') && (
          <button
            type="button"
            className={quiet}
            onClick={() => onAgain(id)}
            aria-label={`Measure ${file.name} again`}
          >
            Again
          </button>
        )
      );
    },
  },
];
