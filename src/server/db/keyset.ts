/** Paging by the last row's key, not by counting rows: rows that come or go meanwhile shift nothing. */
import type { Knex } from 'knex';
import { z } from 'zod';
import type { Db } from './connection.ts';

/** What a list is ordered by: an SQL expression (ours, never the caller's), its type, and whether it can be null. */
export interface SortKey {
  expression: string;
  type: 'timestamptz' | 'text' | 'float8';
  nullable: boolean;
}

const cursorSchema = z.object({
  s: z.string(),
  o: z.enum(['asc', 'desc']),
  k: z.string().nullable(),
  id: z.uuid(),
});
export type Cursor = z.infer<typeof cursorSchema>;

/** An opaque text that names sort, order and the last row. */
export const writeCursor = (cursor: Cursor): string =>
  Buffer.from(JSON.stringify(cursor)).toString('base64url');

/** Keys as PostgreSQL writes them: what it could not read back is no cursor of ours. */
const readable: Record<SortKey['type'], (key: string) => boolean> = {
  timestamptz: (key) =>
    /^\d{4}-\d\d-\d\d \d\d:\d\d:\d\d(\.\d{1,6})?[+-]\d\d(:\d\d)?$/.test(key) &&
    !Number.isNaN(Date.parse(key)),
  text: (key) => !key.includes('\u0000'),
  float8: (key) => key.trim() !== '' && Number.isFinite(Number(key)),
};

/** The cursor that this text is, for this sort and order; `null` for any other text. */
export function readCursor(
  text: string,
  { sort, order, type }: { sort: string; order: 'asc' | 'desc'; type: SortKey['type'] },
): Cursor | null {
  let value: unknown;
  try {
    value = JSON.parse(Buffer.from(text, 'base64url').toString('utf8'));
  } catch {
    return null;
  }
  const parsed = cursorSchema.safeParse(value);
  if (!parsed.success || parsed.data.s !== sort || parsed.data.o !== order) return null;
  return parsed.data.k === null || readable[type](parsed.data.k) ? parsed.data : null;
}

/**
 * Orders a query by the key, nulls last either way, then by `idColumn`; begins after the cursor; takes one row more than
 * `limit`, so that the caller knows whether there is a next page. Selects the key as text under `sort_key`.
 */
export function pageByKey(
  db: Db,
  query: Knex.QueryBuilder,
  { expression, type, nullable }: SortKey,
  page: { order: 'asc' | 'desc'; limit: number; cursor: Cursor | null; idColumn: string },
): void {
  const { order, cursor, idColumn } = page;
  const beyond = order === 'asc' ? '>' : '<';
  query.select(db.raw(`(${expression})::text AS sort_key`));
  if (cursor && cursor.k === null) {
    query.whereRaw(`(${expression}) IS NULL AND ${idColumn} ${beyond} ?::uuid`, [cursor.id]);
  } else if (cursor) {
    const after = `((${expression}), ${idColumn}) ${beyond} (?::${type}, ?::uuid)`;
    query.whereRaw(nullable ? `(${after} OR (${expression}) IS NULL)` : after, [cursor.k, cursor.id]);
  }
  if (nullable) query.orderByRaw(`(${expression}) IS NULL`);
  query.orderByRaw(`(${expression}) ${order}, ${idColumn} ${order}`).limit(page.limit + 1);
}

/** Cuts the row too many, and the cursor of the next page where there was one. */
export function cutPage<R extends { id: string; sort_key: string | null }>(
  rows: R[],
  page: { sort: string; order: 'asc' | 'desc'; limit: number },
): { rows: R[]; nextCursor: string | null } {
  if (rows.length <= page.limit) return { rows, nextCursor: null };
  const kept = rows.slice(0, page.limit);
  const last = kept[kept.length - 1];
  return {
    rows: kept,
    nextCursor: writeCursor({ s: page.sort, o: page.order, k: last.sort_key, id: last.id }),
  };
}

/** A pattern for ILIKE that finds the text anywhere and takes none of it as a wildcard. */
export const containing = (text: string): string => `%${text.replace(/[\\%_]/g, '\\$&')}%`;

/**
 * SQL for a text key that orders numbers in it by value ('1.2' before '1.10'), in bytes order so that it is the same on
 * every machine. Numbers of up to eight digits.
 */
export const naturalKey = (expression: string): string =>
  `regexp_replace(regexp_replace(lower(${expression}), '(\\d+)', '0000000\\1', 'g'), '0*(\\d{8})', '\\1', 'g') COLLATE "C"`;
