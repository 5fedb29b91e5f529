// @vitest-environment jsdom
import { cleanup, fireEvent, render, screen } from '@testing-library/react';
import type { ColumnDef } from '@tanstack/react-table';
import { useState } from 'react';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { DataTable } from '@/components/table/DataTable.tsx';
import { useAddressState } from '@/components/table/use-address-state.ts';

interface Row {
  id: string;
  name: string;
}
const rows: Row[] = ['Tallow', 'Gales', 'Bakery', 'Lantern'].map((name) => ({
  id: name.toLowerCase(),
  name,
}));
const columns: ColumnDef<Row, unknown>[] = [
  { id: 'name', header: 'Name', meta: { sort: 'name' }, cell: ({ row }) => row.original.name },
];
let opened: string[] = [];
let sorts: string[] = [];

function Screen() {
  const [focused, setFocused] = useState<string | null>(null);
  const [picked, setPicked] = useState<Set<string>>(new Set());
  const [sort, setSort] = useState<{ name: string; order: 'asc' | 'desc' }>({
    name: 'created',
    order: 'desc',
  });
  return (
    <>
      <output>{[...picked].sort().join(' ')}</output>
      <DataTable
        label="Programmes"
        rows={rows}
        columns={columns}
        focused={focused}
        onFocus={setFocused}
        picked={picked}
        onPick={setPicked}
        onOpen={(row) => opened.push(row.id)}
        sort={sort}
        onSort={(next) => {
          sorts.push(`${next.name} ${next.order}`);
          setSort(next);
        }}
        rowName={(row) => row.name}
        empty="Nothing"
      />
    </>
  );
}

beforeEach(() => {
  opened = [];
  sorts = [];
  render(<Screen />);
});
afterEach(cleanup);

const press = (key: string, more: object = {}) =>
  fireEvent.keyDown(document.activeElement ?? document.body, { key, ...more });
const inFocus = () => document.activeElement?.textContent;
const picked = () => document.querySelector('output')?.textContent;

describe('a list by keyboard', () => {
  it('begins with an arrow key before anything is in focus, and moves row by row', () => {
    press('ArrowDown');
    expect(inFocus()).toBe('Tallow');
    press('ArrowDown');
    press('ArrowDown');
    expect(inFocus()).toBe('Bakery');
    press('ArrowUp');
    expect(inFocus()).toBe('Gales');
  });

  it('stays on the last row at the end', () => {
    press('ArrowDown');
    press('End');
    press('ArrowDown');
    expect(inFocus()).toBe('Lantern');
  });

  it('picks and drops the row with Space, and opens it with Enter', () => {
    press('ArrowDown');
    press(' ');
    expect(picked()).toBe('tallow');
    press(' ');
    expect(picked()).toBe('');
    press('Enter');
    expect(opened).toEqual(['tallow']);
  });

  it('picks every row passed over with Shift', () => {
    press('ArrowDown');
    press('ArrowDown');
    press('ArrowDown', { shiftKey: true });
    press('ArrowDown', { shiftKey: true });
    expect(picked()).toBe('bakery gales lantern');
  });

  it('leaves keys to an input inside a row', () => {
    const box = screen.getByLabelText('Pick Gales');
    box.focus();
    press('Enter');
    expect(opened).toEqual([]);
  });

  it('has one stop for the Tab key, which follows the focus', () => {
    const stops = () => [...document.querySelectorAll('tbody tr')].map((row) => row.getAttribute('tabindex'));
    expect(stops()).toEqual(['0', '-1', '-1', '-1']);
    press('ArrowDown');
    press('ArrowDown');
    expect(stops()).toEqual(['-1', '0', '-1', '-1']);
  });
});

describe('a list by mouse', () => {
  it('picks all of the page by its head, and none again', () => {
    fireEvent.click(screen.getByLabelText('Pick all of this page'));
    expect(picked()).toBe('bakery gales lantern tallow');
    fireEvent.click(screen.getByLabelText('Pick none of this page'));
    expect(picked()).toBe('');
  });

  it('asks for the other order at the second click, and says which stands', () => {
    const head = screen.getByRole('columnheader', { name: /Name/ });
    expect(head.getAttribute('aria-sort')).toBeNull();
    fireEvent.click(screen.getByRole('button', { name: /Name/ }));
    expect(head.getAttribute('aria-sort')).toBe('descending');
    fireEvent.click(screen.getByRole('button', { name: /Name/ }));
    expect(head.getAttribute('aria-sort')).toBe('ascending');
    expect(sorts).toEqual(['name desc', 'name asc']);
  });
});

describe('the address as state', () => {
  function Address() {
    const [params, change] = useAddressState(location.search);
    return (
      <button type="button" onClick={() => change({ verdict: 'fail', q: null })}>
        {params.get('verdict') ?? 'any'}
      </button>
    );
  }

  it('holds what was chosen, drops what was cleared, and keeps the rest', () => {
    history.replaceState(null, '', '/list?q=gales&sort=range');
    render(<Address />);
    fireEvent.click(screen.getByRole('button', { name: 'any' }));
    expect(location.search).toBe('?sort=range&verdict=fail');
    expect(screen.getByRole('button', { name: 'fail' })).toBeTruthy();
  });
});
