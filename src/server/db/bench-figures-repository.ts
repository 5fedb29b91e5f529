/** What a bench measured of a deliverable before it was sent. */
import { benchFiguresSchema, type BenchFigures } from '../../domain/bench-figures.ts';
import type { Scope } from '../scope.ts';
import type { Db } from './connection.ts';
import { within } from './within.ts';

/** Writes them down while the file is on its way; afterwards what was told stands. */
export async function setBenchFigures(
  db: Db,
  scope: Scope,
  deliverableId: string,
  figures: BenchFigures,
): Promise<void> {
  await db('deliverables')
    .where({ id: deliverableId, state: 'uploading' })
    .modify(within(scope, 'organisation_id'))
    .update({ bench_figures: JSON.stringify(figures) });
}

/** `null` where no bench measured it, or the scope has no such deliverable. */
export async function findBenchFigures(
  db: Db,
  scope: Scope,
  deliverableId: string,
): Promise<BenchFigures | null> {
  const row = await db('deliverables')
    .where('id', deliverableId)
    .modify(within(scope, 'organisation_id'))
    .first<{ bench_figures: unknown } | undefined>('bench_figures');
  return row?.bench_figures ? benchFiguresSchema.parse(row.bench_figures) : null;
}
