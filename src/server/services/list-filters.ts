/** Words and cursors of list queries, refused by name where they mean nothing. */
import { readCursor, type Cursor, type SortKey } from '../db/keyset.ts';
import { done, refuse, type Answer } from '../refusals.ts';

/** The known words of a comma-separated list; undefined when it names none. */
export function listedWords<T extends string>(
  text: string | undefined,
  known: readonly T[],
  field: string,
): Answer<T[] | undefined> {
  const words =
    text
      ?.split(',')
      .map((word) => word.trim())
      .filter(Boolean) ?? [];
  const isKnown = (word: string): word is T => (known as readonly string[]).includes(word);
  const odd = words.find((word) => !isKnown(word));
  if (odd !== undefined) {
    const use = `Use ${known.slice(0, -1).join(', ')} or ${known[known.length - 1]}, with commas between.`;
    return refuse('bad_input', `'${odd}' is nothing to filter by. ${use}`, { [field]: use });
  }
  return done(words.length > 0 ? words.filter(isKnown) : undefined);
}

/** The cursor of a query, `null` for the first page; one of another sort or order is refused. */
export function cursorOf(
  query: { cursor?: string; sort: string; order: 'asc' | 'desc' },
  { type }: SortKey,
): Answer<Cursor | null> {
  if (!query.cursor) return done(null);
  const cursor = readCursor(query.cursor, { sort: query.sort, order: query.order, type });
  if (cursor) return done(cursor);
  return refuse('bad_input', 'This page belongs to another sort or order. Begin again at the first page.', {
    cursor: 'Leave it out for the first page.',
  });
}
