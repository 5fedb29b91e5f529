/** Holds kept measurements against the spec versions in force. Nothing is measured here. */
import { judge } from '../../domain/judge.ts';
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
 * Judges every standing in the filter that is not under the version now in force, within the caller's transaction. Safe to
 * repeat: what is up to date is left alone. Called after a measurement, on publishing and assigning, and by the sweep.
 */
export async function judgeDeliverables(trx: Db, scope: Scope, filter: JudgingFilter): Promise<Rejudged> {
  const stale = await listStaleStandings(trx, scope, filter);
  let changed = 0;
  for (const standing of stale) {
    const { deliverableId, channelId, organisationId, measurementId, specVersionId, specBody } = standing;
    const verdict = specBody && judge(standing.measurement, specBody);
    const verdictId =
      verdict && specVersionId
        ? await ensureVerdict(trx, scope, { organisationId, measurementId, specVersionId, verdict })
        : null;
    await setStandingVerdict(trx, scope, { deliverableId, channelId, verdictId });
    if ((verdict?.outcome ?? null) !== standing.outcome) changed++;
  }
  return { rejudged: stale.length, changed };
}
