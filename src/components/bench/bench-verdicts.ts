/** What the bench makes of a measurement: verdicts and the passage, each worked out once. */
import type { Passage } from '@/domain/api/deliverables.ts';
import { findExcursions } from '@/domain/excursions.ts';
import { judge } from '@/domain/judge.ts';
import { passageOf } from '@/domain/passage.ts';
import type { VerdictBody } from '@/domain/verdict.ts';
import type { Measured } from '@/engine/measure.ts';
import type { BenchSpec } from './bench-specs.ts';

const verdicts = new WeakMap<Measured, Map<BenchSpec, VerdictBody>>();

export function verdictOf(measured: Measured, spec: BenchSpec): VerdictBody {
  const known = verdicts.get(measured) ?? new Map<BenchSpec, VerdictBody>();
  verdicts.set(measured, known);
  const verdict = known.get(spec) ?? judge(measured.measurement, spec.body);
  known.set(spec, verdict);
  return verdict;
}

export interface Held {
  spec: BenchSpec;
  verdict: VerdictBody;
}

const worstFirst = { fail: 0, advisory: 1, pass: 2 };

/** Held against each of these specs, worst first; of equals the one named first. */
export const heldAgainst = (measured: Measured, specs: readonly BenchSpec[]): Held[] =>
  specs
    .map((spec) => ({ spec, verdict: verdictOf(measured, spec) }))
    .sort((a, b) => worstFirst[a.verdict.outcome] - worstFirst[b.verdict.outcome]);

/** Loudness over time, with what is beyond the spec's limits; one audio channel that it judges as two is drawn so. */
export function benchPassage({ measurement, series }: Measured, { body }: BenchSpec): Passage {
  const weight = body.mono === 'asDual' && measurement.format.channels === 1 ? 2 : 1;
  const curves = { ...passageOf(series, { weight }), excursions: [] };
  return { ...curves, excursions: findExcursions(curves, body) };
}
