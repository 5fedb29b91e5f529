/**
 * Measures one deliverable: counts the start, has the file measured elsewhere, writes figures, verdicts and state in one
 * transaction. Rows say what is done; a second run of the same deliverable changes nothing.
 */
import { recordEvent } from '../db/audit-repository.ts';
import { db } from '../db/connection.ts';
import {
  beginMeasuring,
  findDeliverableCore,
  handBack,
  markMeasured,
  markUnreadable,
  type DeliverableCore,
} from '../db/deliverable-writes-repository.ts';
import { ensurePresentation, insertMeasurement } from '../db/measurements-repository.ts';
import { listSetParts } from '../db/mono-sets-repository.ts';
import { readPlan } from '../db/plans-repository.ts';
import { publishEvent } from '../events.ts';
import { log } from '../log.ts';
import {
  TryAgain,
  type MeasureElsewhere,
  type MeasuringEnd,
  type MeasuringOutcome,
} from '../queue/measuring-contract.ts';
import { clearProgress, setProgress, type Progress } from '../queue/progress.ts';
import { redis } from '../redis.ts';
import { systemScope } from '../scope.ts';
import { findingsWithBench } from './bench-comparison.ts';
import { judgeDeliverables } from './judging.ts';

/** A file that was begun this many times, and killed whoever measured it, is not begun again. */
export const mostStarts = 3;

const scope = systemScope('measuring');

/** Starts that ended in good order while the database was away: not deaths, and to be uncounted before the next one. */
const uncountLater = new Set<string>();

async function uncount(deliverableId: string): Promise<void> {
  uncountLater.add(deliverableId);
  await handBack(db(), scope, deliverableId);
  uncountLater.delete(deliverableId);
}

/**
 * Runs one measurement to its end and says which. Throws TryAgain when it is to be tried again, and whatever the
 * database throws when that is away; the row is then 'waiting' or 'measuring', and queue and sweep come back to it.
 */
export async function measureDeliverable(
  deliverableId: string,
  measureElsewhere: MeasureElsewhere,
  signal: AbortSignal,
): Promise<MeasuringEnd> {
  if (uncountLater.has(deliverableId)) await uncount(deliverableId);
  const deliverable = await beginMeasuring(db(), scope, deliverableId, mostStarts);
  if (!deliverable) return endWithoutStart(deliverableId);
  await tell(deliverable, 'measuring', null);

  const [plan, parts] = await Promise.all([
    readPlan(db(), scope, deliverable.planId),
    listSetParts(db(), scope, deliverableId),
  ]);
  let outcome: MeasuringOutcome;
  try {
    outcome = await measureElsewhere(
      {
        deliverableId,
        organisationId: deliverable.organisationId,
        storageKey: deliverable.storageKey,
        fileName: deliverable.fileName,
        byteSize: deliverable.byteSize,
        sha256Declared: deliverable.sha256Declared,
        plan,
        parts: parts.length > 0 ? parts : null,
      },
      { onProgress: (progress) => void tell(deliverable, 'measuring', progress), signal },
    );
  } catch (error) {
    outcome = { kind: 'surprise', message: error instanceof Error ? error.message : String(error) };
  }

  try {
    return await writeEnd(deliverable, outcome, signal);
  } catch (error) {
    if (!(error instanceof TryAgain)) await uncount(deliverableId);
    throw error;
  }
}

async function writeEnd(
  deliverable: DeliverableCore,
  outcome: MeasuringOutcome,
  signal: AbortSignal,
): Promise<MeasuringEnd> {
  const deliverableId = deliverable.id;
  if (outcome.kind === 'measured') return writeMeasured(deliverable, outcome);
  if (outcome.kind === 'file') return endUnreadable(deliverable, outcome, outcome.sha256);
  if (outcome.kind === 'surprise') {
    log.error({ deliverableId, start: deliverable.measureAttempts, why: outcome.message }, 'measuring died');
    if (deliverable.measureAttempts >= mostStarts) return endUnreadable(deliverable, killsItsWorker, null);
    throw new TryAgain(outcome.message);
  }
  await uncount(deliverableId);
  await tell(deliverable, 'waiting', null);
  if (signal.aborted) return { kind: 'handed-back' };
  throw new TryAgain(outcome.message);
}

const killsItsWorker = {
  code: 'kills-worker',
  message: `Measuring this file broke down ${mostStarts} times, so it is not tried again. Export it anew, in another format if you can, and upload that; if this stays, tell us the file's name.`,
};

/** Nothing was begun: it ended before, was discarded, or was begun too often by workers that died of it. */
async function endWithoutStart(deliverableId: string): Promise<MeasuringEnd> {
  const deliverable = await findDeliverableCore(db(), scope, deliverableId);
  const open = deliverable?.state === 'waiting' || deliverable?.state === 'measuring';
  if (!deliverable || !open || deliverable.measureAttempts < mostStarts) return { kind: 'nothing-to-do' };
  return endUnreadable(deliverable, killsItsWorker, null);
}

async function endUnreadable(
  deliverable: DeliverableCore,
  { code, message }: { code: string; message: string },
  sha256: string | null,
): Promise<MeasuringEnd> {
  await db().transaction(async (trx) => {
    if (!(await markUnreadable(trx, scope, deliverable, { code, message }, sha256))) return;
    await recordEvent(trx, scope, {
      organisationId: deliverable.organisationId,
      action: 'deliverable.unreadable',
      subjectKind: 'deliverable',
      subjectId: deliverable.id,
      detail: { fileName: deliverable.fileName, code },
    });
  });
  await tell(deliverable, 'unreadable', null);
  return { kind: 'unreadable', reason: message };
}

async function writeMeasured(
  deliverable: DeliverableCore,
  outcome: Extract<MeasuringOutcome, { kind: 'measured' }>,
): Promise<MeasuringEnd> {
  const { id: deliverableId, organisationId, planId } = deliverable;
  const { presentations, ...made } = outcome;
  await db().transaction(async (trx) => {
    for (const [i, { presentation, ...measured }] of presentations.entries()) {
      const presentationId = await ensurePresentation(trx, scope, {
        organisationId,
        deliverableId,
        planId,
        position: i + 1,
        presentation,
        layout: measured.format.layout,
      });
      // A bench measures whole files.
      const findings =
        planId === null
          ? await findingsWithBench(trx, scope, deliverableId, measured, outcome.engineVersion)
          : measured.findings;
      await insertMeasurement(trx, scope, {
        ...measured,
        ...made,
        findings,
        organisationId,
        deliverableId,
        presentationId,
      });
    }
    if (!(await markMeasured(trx, scope, deliverable, outcome.sha256))) return;
    await judgeDeliverables(trx, scope, { deliverableIds: [deliverableId] });
    await recordEvent(trx, scope, {
      organisationId,
      action: 'deliverable.measured',
      subjectKind: 'deliverable',
      subjectId: deliverableId,
      detail: { fileName: deliverable.fileName, engineVersion: outcome.engineVersion },
    });
  });
  await tell(deliverable, 'measured', null);
  return { kind: 'measured' };
}

/** Tells the organisation's pages where it stands. Losing this is harmless: the row says it too. */
async function tell(deliverable: DeliverableCore, state: string, progress: Progress | null): Promise<void> {
  try {
    if (progress) await setProgress(deliverable.id, progress);
    else await clearProgress(deliverable.id);
  } catch (error) {
    log.warn({ err: error, deliverableId: deliverable.id }, 'progress was not kept');
  }
  await publishEvent(redis(), [deliverable.organisationId], {
    kind: 'deliverable',
    id: deliverable.id,
    state,
    progress,
  });
}
