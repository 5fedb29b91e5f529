/** Holds the service's measurement of a whole file against what the bench said of it before it was sent. */
import { compareWithBench, measuredDifferently, type BenchComparison } from '../../domain/bench-figures.ts';
import type { Measurement } from '../../engine/figures.ts';
import { findBenchFigures } from '../db/bench-figures-repository.ts';
import type { Db } from '../db/connection.ts';
import type { Scope } from '../scope.ts';

/** The measurement's findings, with 'measured-differently' among them where the bench had other figures. */
export async function findingsWithBench(
  trx: Db,
  scope: Scope,
  deliverableId: string,
  { figures, findings }: Measurement,
  engineVersion: string,
): Promise<Measurement['findings']> {
  const bench = await findBenchFigures(trx, scope, deliverableId);
  const finding = bench && measuredDifferently(bench, figures, engineVersion);
  return finding ? [...findings, finding] : findings;
}

/** How the two compare, for the report; `null` where no bench measured it. */
export async function readBenchComparison(
  at: Db,
  scope: Scope,
  deliverableId: string,
  figures: Parameters<typeof compareWithBench>[1],
  engineVersion: string,
): Promise<BenchComparison | null> {
  const bench = await findBenchFigures(at, scope, deliverableId);
  return bench && compareWithBench(bench, figures, engineVersion);
}
