import { useEffect, useMemo, useRef, useState } from 'react';
import { Notice } from '@/components/look/Notice.tsx';
import { DataTable } from '@/components/table/DataTable.tsx';
import { KeysHelp, type Keys } from '@/components/table/KeysHelp.tsx';
import { useAddressState } from '@/components/table/use-address-state.ts';
import { ProgressBar } from '@/components/upload/ProgressBar.tsx';
import { isUnderWay } from '@/components/upload/upload-item.ts';
import { formatDuration } from '@/domain/figures-text.ts';
import { AgainstPicker } from './AgainstPicker.tsx';
import { BenchDetail } from './BenchDetail.tsx';
import type { BenchTotals } from './bench-queue.ts';
import { chosenSpecs, type BenchSpec } from './bench-specs.ts';
import { heldAgainst } from './bench-verdicts.ts';
import { benchColumns, type BenchRow } from './columns.tsx';
import { DropSlip } from './DropSlip.tsx';
import { SpecsAhead } from './SpecsAhead.tsx';
import type { Handover } from './HandedOver.tsx';
import { useBench } from './use-bench.ts';

interface Props {
  specs: readonly BenchSpec[];
  search: string;
  /** Where files can be handed over to the service: the act for those picked, and where each stands. */
  handover?: {
    offer: (rows: BenchRow[], whenTaken: () => void) => void;
    of: (id: string) => Handover | null;
  };
}

const keys: Keys = [
  ['↑ ↓', 'move from file to file; the one in hand is shown below'],
  ['Space', 'pick the file, or drop it'],
  ['Shift ↑ ↓', 'pick the files passed over'],
  ['Enter', 'go to what is shown of it'],
  ['Delete', 'take the file, or those picked, off the bench'],
  ['?', 'these keys'],
];

/** Files measured in this browser, held against specs; nothing leaves the machine. */
export function Bench({ specs, search, handover }: Props) {
  const [params, change] = useAddressState(search);
  const { queue, items } = useBench();
  const [focused, setFocused] = useState<string | null>(null);
  const [picked, setPicked] = useState<Set<string>>(new Set());
  const [said, setSaid] = useState<string | null>(null);
  const heading = useRef<HTMLHeadingElement>(null);
  const against = params.get('against');
  const chosen = useMemo(() => chosenSpecs(specs, against), [specs, against]);
  const several = chosen.length > 1;
  const sends = handover !== undefined;
  const columns = useMemo(() => {
    const acts = { onStop: (id: string) => queue.cancel(id), onAgain: (id: string) => queue.again(id) };
    return benchColumns(acts, { several, sends });
  }, [queue, several, sends]);

  const rows = items.map((item): BenchRow => ({
    id: item.id,
    item,
    held: item.result ? heldAgainst(item.result.measured, chosen) : [],
    handover: handover?.of(item.id) ?? null,
  }));
  // Before anything is in hand, what was measured first is shown.
  const shown = rows.find(({ id }) => id === focused) ?? rows.find(({ item }) => item.result !== null);
  const { result } = shown?.item ?? {};
  const spec =
    specs.find(({ id }) => id === params.get('spec')) ?? shown?.held[0]?.spec ?? chosen[0] ?? specs[0];

  const take = (files: File[]) => {
    const { leftOut } = queue.add(files);
    setSaid(
      leftOut === 0
        ? null
        : leftOut === 1
          ? 'One of these files lies on the bench already; it was left out.'
          : `${leftOut} of these files lie on the bench already; they were left out.`,
    );
  };
  const remove = (asked: ReadonlySet<string>) => {
    const going = rows.filter((row) => asked.has(row.id) && row.handover && isUnderWay(row.handover.upload));
    const ids = new Set([...asked].filter((id) => !going.some((row) => row.id === id)));
    setSaid(
      going.length === 0
        ? null
        : `Still on the way to storage, and left on the bench: ${going.map(({ item }) => item.file.name).join(', ')}.`,
    );
    queue.remove(ids);
    setPicked((before) => new Set([...before].filter((id) => !ids.has(id))));
    if (focused && ids.has(focused)) setFocused(null);
  };
  const pickedRows = rows.filter(({ id }) => picked.has(id));
  const unsent = (among: BenchRow[]) => among.filter((row) => row.handover === null);
  const sendable = unsent(
    pickedRows.length > 0 ? pickedRows : rows.filter(({ item }) => item.result !== null),
  );
  return (
    <>
      <DropSlip onFiles={take} low={items.length > 0} />
      {said && (
        <div className="mb-3">
          <Notice>{said}</Notice>
        </div>
      )}
      {items.length === 0 && <SpecsAhead specs={specs} />}
      {items.length > 0 && (
        <>
          <div className="mb-2 flex flex-wrap items-center gap-x-4 gap-y-2">
            <AgainstPicker
              specs={specs}
              chosen={chosen}
              onChoose={(ids) => change({ against: ids.join(','), spec: null })}
            />
            <InAll totals={queue.totals()} onStopAll={() => queue.cancelAll()} />
            <div className="ml-auto flex flex-wrap items-center gap-2">
              {picked.size > 0 && (
                <>
                  <span className="text-[12.5px] text-muted">picked {picked.size}</span>
                  <button type="button" className="btn btn-quiet" onClick={() => remove(picked)}>
                    Take off the bench
                  </button>
                </>
              )}
              {handover && sendable.length > 0 && (
                <button
                  type="button"
                  className="btn btn-main"
                  onClick={() => handover.offer(sendable, () => setPicked(new Set()))}
                >
                  {sendable.length === 1 ? 'Upload this' : `Upload these ${sendable.length}`}
                </button>
              )}
              <span className="hidden text-[12.5px] text-muted lg:inline">
                <KeysHelp keys={keys} />
              </span>
            </div>
          </div>
          <div className="overflow-x-auto">
            <DataTable
              label="Files on the bench"
              rows={rows}
              columns={columns}
              focused={shown?.id ?? focused}
              onFocus={setFocused}
              picked={picked}
              onPick={setPicked}
              onOpen={() => heading.current?.focus()}
              onKey={(key, row) => {
                if (key === 'Delete') remove(picked.has(row.id) ? picked : new Set([row.id]));
              }}
              sort={{ name: '', order: 'asc' }}
              onSort={() => {}}
              rowName={({ item }) => item.file.name}
              empty={null}
            />
          </div>
        </>
      )}
      {shown && result && (
        <BenchDetail
          item={{ ...shown.item, result }}
          specs={specs}
          spec={spec}
          onSpec={(id) => change({ spec: id })}
          heading={heading}
        />
      )}
    </>
  );
}

/** How far all of them are: by bytes, with the speed and the time left. */
function InAll({ totals, onStopAll }: { totals: BenchTotals; onStopAll: () => void }) {
  const { files, ended, done, timesRealTime, secondsLeft } = totals;
  // A screen reader hears the ends, not every step.
  const [heard, setHeard] = useState('');
  const over = ended === files;
  useEffect(() => {
    setHeard(over ? (files === 1 ? 'The file is measured.' : `All ${files} files are measured.`) : '');
  }, [over, files]);
  const words = [
    `${ended} of ${files} ${files === 1 ? 'file' : 'files'}`,
    timesRealTime !== null && `${Math.round(timesRealTime)} times real time`,
    secondsLeft !== null && `${formatDuration(secondsLeft)} left`,
  ].filter(Boolean);
  return (
    <>
      <span role="status" className="sr-only">
        {heard}
      </span>
      {!over && (
        <div className="flex min-w-0 flex-wrap items-center gap-x-4 gap-y-1">
          <div className="grid w-60 gap-1">
            <span className="num text-[12.5px] text-muted">{words.join(', ')}</span>
            <ProgressBar done={done} all={1} label="All files, measured" />
          </div>
          <button type="button" className="btn btn-quiet" onClick={onStopAll}>
            Stop all
          </button>
        </div>
      )}
    </>
  );
}
