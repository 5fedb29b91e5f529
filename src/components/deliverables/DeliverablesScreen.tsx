import {
  keepPreviousData,
  useInfiniteQuery,
  useQuery,
  useQueryClient,
  type InfiniteData,
} from '@tanstack/react-query';
import { useState } from 'react';
import type { z } from 'zod';
import { ApiProvider } from '@/components/live/ApiProvider.tsx';
import { api } from '@/components/live/api.ts';
import { useLiveEvents } from '@/components/live/use-live-events.ts';
import { Notice } from '@/components/look/Notice.tsx';
import { DataTable } from '@/components/table/DataTable.tsx';
import { FilterBar } from '@/components/table/FilterBar.tsx';
import { KeysHelp, listKeys } from '@/components/table/KeysHelp.tsx';
import { useAddressState } from '@/components/table/use-address-state.ts';
import { useDensity } from '@/components/table/use-density.ts';
import { deliverableListSchema, programmesSchema, type DeliverableRow } from '@/domain/api/deliverables.ts';
import {
  contentKindNames,
  contentKinds,
  submissionStateNames,
  submissionStates,
} from '@/domain/vocabulary.ts';
import { deliverableColumns, rowName } from './columns.tsx';
import { DetailsDialog } from './DetailsDialog.tsx';
import { SubmitDialog } from './SubmitDialog.tsx';

type List = z.output<typeof deliverableListSchema>;
interface Channel {
  id: string;
  name: string;
}
interface Props {
  initial: List;
  search: string;
  channels: Channel[];
  mayUpload: boolean;
}

const asked = ['q', 'programme', 'verdict', 'channel', 'state', 'kind', 'sort', 'order'];

export default function DeliverablesScreen(props: Props) {
  return (
    <ApiProvider>
      <Screen {...props} />
    </ApiProvider>
  );
}

function Screen({ initial, search, channels, mayUpload }: Props) {
  const [params, change] = useAddressState(search);
  const [picked, setPicked] = useState<Set<string>>(new Set());
  const [dialog, setDialog] = useState<'details' | 'submit' | null>(null);
  const [said, setSaid] = useState<string | null>(null);
  const [density, changeDensity] = useDensity();
  const client = useQueryClient();
  const programmes = useQuery({
    queryKey: ['programmes'],
    queryFn: ({ signal }) => api.get('/api/v1/programmes', programmesSchema, signal),
  });
  const query = new URLSearchParams(
    asked.flatMap((name) => (params.get(name) ? [[name, params.get(name) as string]] : [])),
  ).toString();
  const key = ['deliverables', query];
  const list = useInfiniteQuery({
    queryKey: key,
    queryFn: ({ pageParam, signal }) =>
      api.get(
        `/api/v1/deliverables?${query}${pageParam ? `&cursor=${encodeURIComponent(pageParam)}` : ''}`,
        deliverableListSchema,
        signal,
      ),
    initialPageParam: '',
    getNextPageParam: (page: List) => page.nextCursor ?? undefined,
    initialData:
      search === (params.size > 0 ? `?${params}` : '') ? { pages: [initial], pageParams: [''] } : undefined,
    placeholderData: keepPreviousData,
  });
  const rows = list.data?.pages.flatMap((page) => page.items) ?? [];
  const total = list.data?.pages[0]?.total;

  useLiveEvents((event) => {
    if (event.kind === 'deliverable' && event.state === 'measuring') {
      client.setQueryData(key, (data: InfiniteData<List> | undefined) =>
        withProgress(data, event.id, event.progress),
      );
      return;
    }
    if (event.kind !== 'presence') void client.invalidateQueries({ queryKey: ['deliverables'] });
  });
  const pickedRows = rows.filter((row) => picked.has(row.id));
  const done = (sentence: string) => {
    setDialog(null);
    setSaid(sentence);
    setPicked(new Set());
    void client.invalidateQueries({ queryKey: ['deliverables'] });
  };

  return (
    <>
      <div className="flex flex-wrap items-baseline justify-between gap-3">
        <div className="flex items-baseline gap-4">
          <h1>Deliverables</h1>
          {total !== undefined && (
            <span className="text-muted">{total === 1 ? '1 file' : `${total} files`}</span>
          )}
        </div>
        <div className="flex flex-wrap items-center gap-2">
          {mayUpload && picked.size > 0 && (
            <>
              <span className="text-[12.5px] text-muted">picked {picked.size}</span>
              <button type="button" className="btn btn-quiet" onClick={() => setDialog('details')}>
                Set details
              </button>
              <button type="button" className="btn" onClick={() => setDialog('submit')}>
                Submit
              </button>
            </>
          )}
          {mayUpload && (
            <a href="/deliverables/add" className="btn btn-main no-underline">
              Add files
            </a>
          )}
        </div>
      </div>
      <FilterBar
        params={params}
        change={change}
        placeholder="Programme, episode or file"
        choices={[
          {
            name: 'programme',
            label: 'Programme',
            options: programmeOptions(programmes.data?.items ?? [], params.get('programme')),
          },
          {
            name: 'verdict',
            label: 'Verdict',
            options: [
              ['fail', 'Fail'],
              ['advisory', 'Advisory'],
              ['pass', 'Pass'],
              ['none', 'Not judged'],
            ].map(([value, label]) => ({ value, label })),
          },
          {
            name: 'channel',
            label: 'Channel',
            options: channels.map((one) => ({ value: one.id, label: one.name })),
          },
          {
            name: 'kind',
            label: 'Kind',
            options: contentKinds.map((kind) => ({ value: kind, label: contentKindNames[kind] })),
          },
          {
            name: 'state',
            label: 'State',
            options: [
              { value: 'uploading,waiting,measuring', label: 'On its way' },
              { value: 'unreadable', label: 'Unreadable' },
              ...submissionStates.map((state) => ({ value: state, label: submissionStateNames[state] })),
            ],
          },
        ]}
      >
        <button type="button" className="mr-4 hover:text-ink" onClick={changeDensity}>
          {density === 'dense' ? 'Wider rows' : 'Closer rows'}
        </button>
        <KeysHelp keys={listKeys} />
      </FilterBar>
      {said && (
        <div className="mb-3">
          <Notice>{said}</Notice>
        </div>
      )}
      {list.error && (
        <div className="mb-3">
          <Notice tone="refused">{list.error.message} The list below is as it was last read.</Notice>
        </div>
      )}
      <div className="overflow-x-auto">
        <DataTable
          label="Deliverables"
          rows={rows}
          columns={deliverableColumns}
          focused={params.get('row')}
          onFocus={(id) => change({ row: id })}
          picked={picked}
          onPick={setPicked}
          onOpen={(row) => location.assign(`/deliverables/${row.id}`)}
          sort={{
            name: params.get('sort') ?? 'created',
            order: params.get('order') === 'asc' ? 'asc' : 'desc',
          }}
          onSort={(sort) => change({ sort: sort.name, order: sort.order })}
          rowName={rowName}
          density={density}
          empty={<Empty narrowed={query !== ''} mayUpload={mayUpload} />}
        />
      </div>
      {list.hasNextPage && (
        <button
          type="button"
          className="btn btn-quiet mt-4"
          disabled={list.isFetchingNextPage}
          onClick={() => void list.fetchNextPage()}
        >
          {list.isFetchingNextPage ? 'Reading…' : `Show more (${rows.length} of ${total})`}
        </button>
      )}
      {dialog === 'details' && (
        <DetailsDialog rows={pickedRows} channels={channels} onClose={() => setDialog(null)} onDone={done} />
      )}
      {dialog === 'submit' && (
        <SubmitDialog rows={pickedRows} onClose={() => setDialog(null)} onDone={done} />
      )}
    </>
  );
}

/** The one that the address names is offered before the list is there, and when it is not in it. */
function programmeOptions(programmes: { title: string }[], chosen: string | null) {
  const titles = programmes.map(({ title }) => title);
  if (chosen && !titles.includes(chosen)) titles.unshift(chosen);
  return titles.map((title) => ({ value: title, label: title }));
}

function withProgress(
  data: InfiniteData<List> | undefined,
  id: string,
  progress: DeliverableRow['progress'],
) {
  return (
    data && {
      ...data,
      pages: data.pages.map((page) => ({
        ...page,
        items: page.items.map((row) =>
          row.id === id ? { ...row, state: 'measuring' as const, progress } : row,
        ),
      })),
    }
  );
}

function Empty({ narrowed, mayUpload }: { narrowed: boolean; mayUpload: boolean }) {
  if (narrowed) return <p>No deliverable fits these filters.</p>;
  return (
    <div className="grid max-w-xl gap-3">
      <p className="text-[16px] font-semibold">No deliverables yet</p>
      <p>
        Add a finished mix: it is measured, and held against the delivery spec of every channel that it is
        for. Nobody else sees it before you submit it.
      </p>
      {mayUpload && (
        <p>
          <a href="/deliverables/add" className="btn btn-main no-underline">
            Add files
          </a>
        </p>
      )}
    </div>
  );
}
