import {
  flexRender,
  getCoreRowModel,
  useReactTable,
  type ColumnDef,
  type RowData,
} from '@tanstack/react-table';
import { useEffect, useRef, type KeyboardEvent, type ReactNode } from 'react';

declare module '@tanstack/react-table' {
  interface ColumnMeta<TData extends RowData, TValue> {
    /** Right-aligned, for figures. */
    figure?: boolean;
    /** The server's name of the sort that this column stands for. */
    sort?: string;
    /** Smallest width of the window at which the column is shown. */
    from?: 'sm' | 'md' | 'lg' | 'xl';
    /** Names the type parameters, which the library declares. */
    of?: (row: TData, value: TValue) => never;
  }
}

export type Density = 'dense' | 'comfortable';

interface Props<Row extends { id: string }> {
  label: string;
  rows: Row[];
  columns: ColumnDef<Row, unknown>[];
  /** The row in focus, by id; the screen keeps it in the address. */
  focused: string | null;
  onFocus: (id: string | null) => void;
  /** Picked rows by id. */
  picked: ReadonlySet<string>;
  onPick: (picked: Set<string>) => void;
  onOpen: (row: Row) => void;
  /** Further keys of the screen, for the row in focus. */
  onKey?: (key: string, row: Row) => void;
  sort: { name: string; order: 'asc' | 'desc' };
  onSort: (sort: { name: string; order: 'asc' | 'desc' }) => void;
  rowName: (row: Row) => string;
  empty: ReactNode;
  density?: Density;
}

const shownFrom = {
  sm: 'hidden sm:table-cell',
  md: 'hidden md:table-cell',
  lg: 'hidden lg:table-cell',
  xl: 'hidden xl:table-cell',
};

/**
 * The table of every list: up and down move, Space picks, Shift extends, Enter opens; the mouse does the same. What it shows is the
 * server's page; sorting asks the server.
 */
export function DataTable<Row extends { id: string }>(props: Props<Row>) {
  const { rows, columns, focused, onFocus, picked, onPick, onOpen, onKey, sort, onSort, rowName } = props;
  const table = useReactTable({
    data: rows,
    columns,
    getCoreRowModel: getCoreRowModel(),
    getRowId: (row) => row.id,
  });
  const body = useRef<HTMLTableSectionElement>(null);
  const anchor = useRef<number | null>(null);
  const at = rows.findIndex((row) => row.id === focused);

  const focusRow = (index: number) => {
    const row = rows[index];
    if (!row) return;
    onFocus(row.id);
    body.current?.querySelectorAll<HTMLElement>('tr')[index]?.focus();
  };
  // The list is the page's main control: arrows work before anything is in focus.
  useEffect(() => {
    const begin = (event: globalThis.KeyboardEvent) => {
      if (event.target !== document.body || (event.key !== 'ArrowDown' && event.key !== 'ArrowUp')) return;
      event.preventDefault();
      focusRow(
        Math.min(rows.length - 1, Math.max(0, at < 0 ? 0 : at + (event.key === 'ArrowDown' ? 1 : -1))),
      );
    };
    addEventListener('keydown', begin);
    return () => removeEventListener('keydown', begin);
  });
  const toggle = (id: string) => {
    const next = new Set(picked);
    if (!next.delete(id)) next.add(id);
    onPick(next);
  };
  const extend = (to: number) => {
    anchor.current ??= Math.max(at, 0);
    const [from, end] = [Math.min(anchor.current, to), Math.max(anchor.current, to)];
    onPick(new Set([...picked, ...rows.slice(from, end + 1).map((row) => row.id)]));
  };
  const onKeyDown = (event: KeyboardEvent, row: Row, index: number) => {
    if (event.target !== event.currentTarget || event.ctrlKey || event.metaKey || event.altKey) return;
    const step = event.key === 'ArrowDown' ? 1 : event.key === 'ArrowUp' ? -1 : 0;
    if (step !== 0) {
      event.preventDefault();
      if (event.shiftKey) extend(Math.min(rows.length - 1, Math.max(0, index + step)));
      else anchor.current = null;
      focusRow(index + step);
    } else if (event.key === ' ') {
      event.preventDefault();
      anchor.current = index;
      toggle(row.id);
    } else if (event.key === 'Enter') {
      event.preventDefault();
      onOpen(row);
    } else if (event.key === 'Home' || event.key === 'End') {
      event.preventDefault();
      focusRow(event.key === 'Home' ? 0 : rows.length - 1);
    } else onKey?.(event.key, row);
  };

  const all = rows.length > 0 && rows.every((row) => picked.has(row.id));
  return (
    <table className="rows" aria-label={props.label} data-density={props.density}>
      <thead>
        <tr>
          <th className="w-8">
            <input
              type="checkbox"
              aria-label={all ? 'Pick none of this page' : 'Pick all of this page'}
              checked={all}
              onChange={() => onPick(all ? new Set() : new Set(rows.map((row) => row.id)))}
            />
          </th>
          {table.getFlatHeaders().map((header) => {
            const meta = header.column.columnDef.meta;
            const name = meta?.sort;
            const sorted = name !== undefined && sort.name === name;
            const title = flexRender(header.column.columnDef.header, header.getContext());
            return (
              <th
                key={header.id}
                scope="col"
                className={`${meta?.figure ? 'n' : ''} ${meta?.from ? shownFrom[meta.from] : ''}`}
                aria-sort={sorted ? (sort.order === 'asc' ? 'ascending' : 'descending') : undefined}
              >
                {name === undefined ? (
                  title
                ) : (
                  <button
                    type="button"
                    className={sorted ? 'font-semibold text-ink' : 'hover:text-ink'}
                    onClick={() => onSort({ name, order: sorted && sort.order === 'desc' ? 'asc' : 'desc' })}
                  >
                    {title}
                    <span aria-hidden="true">{sorted ? (sort.order === 'asc' ? ' ↑' : ' ↓') : ''}</span>
                  </button>
                )}
              </th>
            );
          })}
        </tr>
      </thead>
      <tbody ref={body}>
        {table.getRowModel().rows.map((row, index) => {
          const inFocus = row.id === focused;
          return (
            <tr
              key={row.id}
              tabIndex={inFocus || (at < 0 && index === 0) ? 0 : -1}
              aria-selected={picked.has(row.id)}
              className={`cursor-default outline-offset-[-2px] ${inFocus ? 'bg-pick shadow-[inset_3px_0_0_var(--teal)]' : ''}`}
              onFocus={(event) => event.target === event.currentTarget && !inFocus && onFocus(row.id)}
              onKeyDown={(event) => onKeyDown(event, row.original, index)}
              onClick={(event) => {
                if (event.target instanceof Element && event.target.closest('a, button, input, label'))
                  return;
                if (event.shiftKey) extend(index);
                else anchor.current = index;
                focusRow(index);
              }}
              onDoubleClick={() => onOpen(row.original)}
            >
              <td>
                <input
                  type="checkbox"
                  aria-label={`Pick ${rowName(row.original)}`}
                  checked={picked.has(row.id)}
                  onChange={() => toggle(row.id)}
                />
              </td>
              {row.getVisibleCells().map((cell) => {
                const meta = cell.column.columnDef.meta;
                return (
                  <td
                    key={cell.id}
                    className={`${meta?.figure ? 'n' : ''} ${meta?.from ? shownFrom[meta.from] : ''}`}
                  >
                    {flexRender(cell.column.columnDef.cell, cell.getContext())}
                  </td>
                );
              })}
            </tr>
          );
        })}
        {rows.length === 0 && (
          <tr>
            <td colSpan={columns.length + 1} className="py-8! whitespace-normal!">
              {props.empty}
            </td>
          </tr>
        )}
      </tbody>
    </table>
  );
}
