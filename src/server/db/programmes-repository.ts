/** Programmes and their episodes, as the organisation named them. */
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { naturalKey } from './keyset.ts';
import { within } from './within.ts';

export interface ProgrammeRecord {
  id: string;
  title: string;
  /** Labels, numbers in them by value. */
  episodes: string[];
}

/** Every programme of the organisation by title. */
export async function listProgrammes(db: Db, scope: Scope): Promise<ProgrammeRecord[]> {
  const rows: ProgrammeRecord[] = await db('programmes as p')
    .modify(within(scope, 'p.organisation_id'))
    .orderByRaw(`${naturalKey('p.title')}, p.id`)
    .select(
      'p.id',
      'p.title',
      db.raw(
        `ARRAY(SELECT e.label FROM episodes e WHERE e.programme_id = p.id ORDER BY ${naturalKey('e.label')}, e.id) AS episodes`,
      ),
    );
  return rows.map(({ id, title, episodes }) => ({ id, title, episodes }));
}
