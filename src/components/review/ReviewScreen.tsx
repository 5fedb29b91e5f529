import { keepPreviousData, useInfiniteQuery, useQueryClient, type InfiniteData } from '@tanstack/react-query';
import { useEffect, useMemo, useState } from 'react';
import type { z } from 'zod';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { api } from '@/components/live/api.ts';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { Notice } from '@/components/look/Notice.tsx';
import { DataTable } from '@/components/table/DataTable.tsx';
import { FilterBar } from '@/components/table/FilterBar.tsx';
import { useAddressState } from '@/components/table/use-address-state.ts';
import { submissionListSchema, type SubmissionRow } from '@/domain/api/submissions.ts';
import { Answers } from './Answers.tsx';
import { submissionColumns } from './columns.tsx';
import { KeysDialog } from './KeysDialog.tsx';
import { RejectDialog } from './RejectDialog.tsx';
import {
  apiSearch,
  approvableTogether,
  countsText,
  decidable,
  pickedText,
  rowName,
  showNames,
  showOf,
  shows,
  whyNoDecision,
  withoutMe,
} from './review-list.ts';
import { SidePanel } from './SidePanel.tsx';
import { useDecisions, type Decision } from './use-decisions.ts';
import { WaiveDialog } from './WaiveDialog.tsx';

type List = z.output<typeof submissionListSchema>;
interface Props {
  initial: List;
  search: string;
  channels: { id: string; name: string }[];
  suppliers: { id: string; name: string }[];
  /** The organisation's side: its queue, or its own submissions. */
  isQueue: boolean;
  mayDecide: boolean;
  ownUserId: string;
  /** The server's clock when it drew the page, so that both draw the same. */
  now: string;
}

export default function ReviewScreen(props: Props) {
  return (
    <ApiProvider>
      <Screen {...props} />
    </ApiProvider>
  );
}

type Open =
  { kind: 'reject'; rows: SubmissionRow[] } | { kind: 'waive'; row: SubmissionRow } | { kind: 'keys' };

function Screen({ initial, search, channels, suppliers, isQueue, mayDecide, ownUserId, now }: Props) {
  const [params, change] = useAddressState(search);
  const [picked, setPicked] = useState<Set<string>>(new Set());
  const [dialog, setDialog] = useState<Open | null>(null);
  const [said, setSaid] = useState<string | null>(null);
  const client = useQueryClient();
  const { answers, putAway, decide, takeBack, busy, trouble } = useDecisions();
  const show = showOf(params, isQueue);
  const query = apiSearch(params, isQueue).toString();
  const key = ['submissions', 'list', query];
  const list = useInfiniteQuery({
    queryKey: key,
    queryFn: ({ pageParam, signal }) =>
      api.get(
        `/api/v1/submissions?${query}${pageParam ? `&cursor=${encodeURIComponent(pageParam)}` : ''}`,
        submissionListSchema,
        signal,
      ),
    initialPageParam: '',
    getNextPageParam: (page: List) => page.nextCursor ?? undefined,
    initialData:
      query === apiSearch(new URLSearchParams(search), isQueue).toString()
        ? { pages: [initial], pageParams: [''] }
        : undefined,
    placeholderData: keepPreviousData,
  });
  const rows = list.data?.pages.flatMap((page) => page.items) ?? [];
  const head = list.data?.pages[0];
  const focused = rows.find((row) => row.id === params.get('row')) ?? null;
  const pickedRows = rows.filter((row) => picked.has(row.id));
  const passing = approvableTogether(pickedRows);
  const rejectable = decidable(pickedRows);
  const columns = useMemo(
    () => submissionColumns(isQueue, show !== 'awaiting', new Date(now)),
    [isQueue, show, now],
  );

  useLiveEvents((event) => {
    if (event.kind === 'presence')
      client.setQueryData(key, (data: InfiniteData<List> | undefined) =>
        withPresence(data, event.submissionId, withoutMe(event.openBy, ownUserId)),
      );
    else if (event.kind === 'submission' || event.kind === 'again')
      void client.invalidateQueries({ queryKey: ['submissions'] });
  });
  useEffect(() => {
    const ask = (event: KeyboardEvent) => {
      const typing =
        event.target instanceof Element && event.target.closest('input, select, textarea, [role="dialog"]');
      if (event.key === '?' && !typing) setDialog({ kind: 'keys' });
    };
    addEventListener('keydown', ask);
    return () => removeEventListener('keydown', ask);
  }, []);

  const settle = (decided: SubmissionRow[], decisionOf: (row: SubmissionRow) => Decision) => {
    const ids = new Set(decided.map(({ id }) => id));
    setDialog(null);
    setSaid(null);
    setPicked(new Set([...picked].filter((id) => !ids.has(id))));
    // The next row that stays takes the place of the one that goes.
    if (focused && ids.has(focused.id) && show === 'awaiting') {
      const at = rows.indexOf(focused);
      const next =
        rows.slice(at + 1).find(({ id }) => !ids.has(id)) ??
        rows.slice(0, at).findLast(({ id }) => !ids.has(id));
      change({ row: next?.id ?? null });
    }
    decide(decided, decisionOf);
  };
  const approve = (some: SubmissionRow[]) =>
    settle(some, ({ id, version }) => ({ id, version, decision: 'approve' }));
  const onKey = (pressed: string, row: SubmissionRow) => {
    if (!mayDecide || busy || !['a', 'r', 'w'].includes(pressed)) return;
    const fails = row.verdict.outcome === 'fail';
    const no = whyNoDecision(row);
    if (no) setSaid(`${rowName(row)}: ${no}`);
    else if (pressed === 'r') setDialog({ kind: 'reject', rows: [row] });
    else if (pressed === 'a' && !fails) approve([row]);
    else if (pressed === 'w' && fails) setDialog({ kind: 'waive', row });
    else
      setSaid(
        fails
          ? `${rowName(row)} fails, so it is not approved as it is: w waives what fails with a reason, r rejects it.`
          : `No rule of ${rowName(row)} fails, so there is nothing to waive: a approves it.`,
      );
  };
  const choice = (value: string, label: string) => ({ value, label });

  return (
    <>
      <div className="flex flex-wrap items-center justify-between gap-3">
        <div className="flex flex-wrap items-baseline gap-x-4">
          <h1>{isQueue ? 'Review' : 'Submissions'}</h1>
          {head && <span className="text-muted">{countsText(head.counts)}</span>}
        </div>
        {mayDecide && pickedRows.length > 0 && (
          <div className="flex flex-wrap items-center gap-2">
            <span className="text-[12.5px] text-muted">{pickedText(pickedRows)}</span>
            <button
              type="button"
              className="btn"
              disabled={busy || rejectable.length === 0}
              onClick={() => setDialog({ kind: 'reject', rows: rejectable })}
            >
              Reject {rejectable.length}…
            </button>
            <button
              type="button"
              className="btn btn-main"
              disabled={busy || passing.length === 0}
              onClick={() => approve(passing)}
            >
              Approve {passing.length} that pass{passing.length === 1 && 'es'}
            </button>
          </div>
        )}
      </div>
      <div role="group" aria-label="Which are shown" className="mt-3 flex flex-wrap gap-1">
        {shows.map((one) => (
          <button
            key={one}
            type="button"
            aria-pressed={show === one}
            className="btn btn-quiet aria-pressed:border-ink aria-pressed:bg-pick aria-pressed:font-semibold"
            onClick={() => {
              setPicked(new Set());
              change({ show: one === (isQueue ? 'awaiting' : 'all') ? null : one, row: null });
            }}
          >
            {showNames[one]}
          </button>
        ))}
      </div>
      <FilterBar
        params={params}
        change={change}
        placeholder="Programme, episode or file"
        choices={[
          {
            name: 'verdict',
            label: 'Verdict',
            options: [choice('fail', 'Fail'), choice('advisory', 'Advisory'), choice('pass', 'Pass')],
          },
          { name: 'channel', label: 'Channel', options: channels.map(({ id, name }) => choice(id, name)) },
          ...(suppliers.length > 0
            ? [
                {
                  name: 'supplier',
                  label: 'Supplier',
                  options: suppliers.map(({ id, name }) => choice(id, name)),
                },
              ]
            : []),
        ]}
      />
      <Answers answers={answers} busy={busy} onTakeBack={takeBack} onPutAway={putAway} />
      {said && (
        <div className="mb-3">
          <Notice>{said}</Notice>
        </div>
      )}
      {(trouble ?? list.error) && (
        <div className="mb-3">
          <Notice tone="refused">
            {trouble
              ? `${trouble} What was answered before stands; the rest awaits a decision still.`
              : list.error?.message}
          </Notice>
        </div>
      )}
      <div className="grid grid-cols-[minmax(0,1fr)] gap-5 lg:grid-cols-[minmax(0,1fr)_320px]">
        <div className="overflow-x-auto text-[13px] [&_td]:px-1.5! [&_th]:px-1.5!">
          <DataTable
            label={isQueue ? 'Review queue' : 'Submissions'}
            rows={rows}
            columns={columns}
            focused={params.get('row')}
            onFocus={(id) => change({ row: id })}
            picked={picked}
            onPick={setPicked}
            onOpen={(row) => location.assign(`/review/${row.id}`)}
            onKey={onKey}
            sort={{
              name: params.get('sort') ?? 'airs',
              order: params.get('order') === 'desc' ? 'desc' : 'asc',
            }}
            onSort={(sort) => change({ sort: sort.name, order: sort.order })}
            rowName={(row) => `${rowName(row)} to ${row.channel.name}`}
            empty={
              <Empty
                narrowed={['q', 'verdict', 'channel', 'supplier'].some((name) => params.get(name))}
                isQueue={isQueue}
              />
            }
          />
          {list.hasNextPage && (
            <button
              type="button"
              className="btn btn-quiet mt-4"
              disabled={list.isFetchingNextPage}
              onClick={() => void list.fetchNextPage()}
            >
              {list.isFetchingNextPage ? 'Reading…' : `Show more (${rows.length} of ${head?.total})`}
            </button>
          )}
        </div>
        <div className="hidden content-start lg:block">
          {focused ? (
            <SidePanel
              row={focused}
              decides={mayDecide}
              busy={busy}
              onApprove={() => approve([focused])}
              onReject={() => setDialog({ kind: 'reject', rows: [focused] })}
              onWaive={() => setDialog({ kind: 'waive', row: focused })}
            />
          ) : (
            rows.length > 0 && (
              <p className="border border-dashed border-hairline p-4 text-muted">
                Move to a row to see its worst rule, hear it{mayDecide ? ' and decide on it' : ''} here.{' '}
                <kbd>?</kbd> shows the keys.
              </p>
            )
          )}
        </div>
      </div>
      {dialog?.kind === 'reject' && (
        <RejectDialog
          rows={dialog.rows}
          onClose={() => setDialog(null)}
          onDecide={(of) => settle(dialog.rows, of)}
        />
      )}
      {dialog?.kind === 'waive' && (
        <WaiveDialog
          row={dialog.row}
          onClose={() => setDialog(null)}
          onDecide={(of) => settle([dialog.row], of)}
        />
      )}
      {dialog?.kind === 'keys' && <KeysDialog mayDecide={mayDecide} onClose={() => setDialog(null)} />}
    </>
  );
}

function withPresence(
  data: InfiniteData<List> | undefined,
  id: string,
  openBy: SubmissionRow['openBy'],
): InfiniteData<List> | undefined {
  return (
    data && {
      ...data,
      pages: data.pages.map((page) => ({
        ...page,
        items: page.items.map((row) => (row.id === id ? { ...row, openBy } : row)),
      })),
    }
  );
}

function Empty({ narrowed, isQueue }: { narrowed: boolean; isQueue: boolean }) {
  if (narrowed) return <p>No submission fits these filters.</p>;
  if (isQueue) return <p>Nothing awaits a decision. What suppliers submit appears here by itself.</p>;
  return (
    <div className="grid max-w-xl gap-3">
      <p className="text-[16px] font-semibold">Nothing submitted yet</p>
      <p>Submit a measured deliverable to a channel, and its review can be followed here.</p>
      <p>
        <a href="/deliverables" className="btn btn-main no-underline">
          Go to the deliverables
        </a>
      </p>
    </div>
  );
}
