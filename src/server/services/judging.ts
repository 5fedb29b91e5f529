/** Holds kept measurements against the spec versions in force. Nothing is measured here. */
import { judge } from '../../domain/judge.ts';
import { worstOf } from '../../domain/presentations-verdict.ts';
import type { OverallOutcome } from '../../domain/vocabulary.ts';
import type { Db } from '../db/connection.ts';
import {
  ensureVerdict,
  listStaleStandings,
  setStandingVerdict,
  type JudgingFilter,
} from '../db/verdicts-repository.ts';
import type { Scope } from '../scope.ts';

export interface Rejudged {
  /** Standings that were judged, and those of them whose outcome is another one now. */
  rejudged: number;
  changed: number;
}

/**
 * Judges every standing in the filter that is not under the version now in force, within the caller's transaction: each
 * presentation by itself, and the worst verdict stands for all. Safe to repeat: what is up to date is left alone. Called
 * after a measurement, on another plan, on publishing and assigning, and by the sweep.
 */
export async function judgeDeliverables(trx: Db, scope: Scope, filter: JudgingFilter): Promise<Rejudged> {
  const stale = await listStaleStandings(trx, scope, filter);
  let changed = 0;
  for (const standing of stale) {
    const { deliverableId, channelId, organisationId, measurements, specVersionId, specBody } = standing;
    const judged: { verdictId: string; outcome: OverallOutcome }[] = [];
    if (specBody && specVersionId)
      for (const measurement of measurements) {
        const verdict = judge(measurement, specBody);
        const of = { organisationId, measurementId: measurement.id, specVersionId, verdict };
        judged.push({ verdictId: await ensureVerdict(trx, scope, of), outcome: verdict.outcome });
      }
    const worst = worstOf(judged);
    await setStandingVerdict(trx, scope, { deliverableId, channelId, verdictId: worst?.verdictId ?? null });
    if ((worst?.outcome ?? null) !== standing.outcome) changed++;
  }
  return { rejudged: stale.length, changed };
}
