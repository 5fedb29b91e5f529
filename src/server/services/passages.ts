/** What a report plays and draws: loudness over time from the kept series, and the address of the original. */
import { findExcursions } from '../../domain/excursions.ts';
import type { Passage } from '../../domain/api/deliverables.ts';
import { passageOf, roundedCurves } from '../../domain/passage.ts';
import type { SpecBody } from '../../domain/spec.ts';
import { decodeSeries } from '../../engine/series.ts';
import { db } from '../db/connection.ts';
import { readDeliverables, type MeasurementRecord } from '../db/deliverables-repository.ts';
import { listJudgedBodies } from '../db/judged-specs-repository.ts';
import { listSetParts } from '../db/mono-sets-repository.ts';
import { listFrozenPresentations, listPresentations } from '../db/presentations-repository.ts';
import { findSubmissionFreeze } from '../db/submission-details-repository.ts';
import { log } from '../log.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { Scope } from '../scope.ts';
import { getObject, ObjectMissing, presignedGet, StorageTrouble } from '../storage/storage.ts';

const noDeliverable = refuse('not_found', 'There is no such deliverable.');
const noSubmission = refuse('not_found', 'There is no such submission.');
const isSet = refuse(
  'conflict',
  'This is a set of mono files, which a browser cannot play as one. Its curve and figures stand.',
);
const noPresentation = (count: number) =>
  refuse(
    'not_found',
    `It has ${count === 1 ? 'one presentation' : `${count} presentations`}, and not one at this place.`,
  );
const notArrived = refuse(
  'conflict',
  'This file is still being uploaded. It can be played once it has arrived whole.',
);

/**
 * Loudness over time of a deliverable's presentation at this place. Excursions are those beyond the limits of `specVersionId`, which must be one that
 * the deliverable was judged by; without it there are none.
 */
export async function getDeliverablePassage(
  scope: Scope,
  id: string,
  specVersionId?: string,
  position = 1,
): Promise<Answer<Passage>> {
  const no = lacking(scope, 'deliverable:read');
  if (no) return no;
  const [deliverable] = await readDeliverables(db(), scope, [id]);
  if (!deliverable) return noDeliverable;
  const presentations = await listPresentations(db(), scope, id);
  if (presentations.length > 0 && position > presentations.length)
    return noPresentation(presentations.length);
  const measurement = presentations.find((one) => one.position === position)?.measurement;
  if (!measurement)
    return refuse('conflict', deliverable.reason ?? 'It is not measured yet, so there is nothing to draw.');
  if (!specVersionId) return passageUnder(measurement, null);
  const [spec] = await listJudgedBodies(db(), scope, measurement.id, [specVersionId]);
  if (!spec) return refuse('not_found', 'This deliverable was not judged by that spec version.');
  return passageUnder(measurement, spec.body);
}

/** Loudness over time of what was submitted, with excursions beyond the spec version that the submission froze. */
export async function getSubmissionPassage(scope: Scope, id: string, position = 1): Promise<Answer<Passage>> {
  const no = lacking(scope, 'submission:read');
  if (no) return no;
  const [frozen, presentations] = await Promise.all([
    findSubmissionFreeze(db(), scope, id),
    listFrozenPresentations(db(), scope, id),
  ]);
  if (!frozen) return noSubmission;
  const presentation = presentations.find((one) => one.position === position);
  return presentation
    ? passageUnder(presentation.measurement, frozen.specBody)
    : noPresentation(presentations.length);
}

async function passageUnder(measurement: MeasurementRecord, body: SpecBody | null): Promise<Answer<Passage>> {
  let bytes: Uint8Array;
  try {
    bytes = await getObject(measurement.seriesKey);
  } catch (error) {
    if (error instanceof ObjectMissing) {
      log.error({ err: error, measurementId: measurement.id }, 'a measurement has lost its series');
      return refuse(
        'gone',
        'The curve of this measurement is not in storage any more. Its figures and verdicts stand.',
      );
    }
    if (!(error instanceof StorageTrouble)) throw error;
    log.warn({ err: error }, 'storage is away');
    return refuse(
      'unavailable',
      'Storage does not answer at the moment. The figures stand; try the curve again in a minute.',
    );
  }
  // One audio channel that the spec judges as two is drawn as it is judged.
  const isMono = measurement.figures.truePeak.perChannelDbtp.length === 1;
  const weight = body?.mono === 'asDual' && isMono ? 2 : 1;
  const curves = passageOf(decodeSeries(bytes), { weight });
  const excursions = body ? findExcursions({ ...curves, excursions: [] }, body) : [];
  const { windowStartSeconds } = measurement.figures;
  return done({ windowStartSeconds, ...roundedCurves(curves), excursions });
}

/** The address, good for some hours, from which the browser plays the original. */
export async function getDeliverableAudio(scope: Scope, id: string): Promise<Answer<{ url: string }>> {
  const no = lacking(scope, 'deliverable:read');
  if (no) return no;
  const [deliverable] = await readDeliverables(db(), scope, [id]);
  if (!deliverable) return noDeliverable;
  if (deliverable.state === 'uploading') return notArrived;
  if ((await listSetParts(db(), scope, id)).length > 0) return isSet;
  return done({ url: await presignedGet(deliverable.storageKey, deliverable.fileName) });
}

/** The same for what was submitted, for both sides of the submission. */
export async function getSubmissionAudio(scope: Scope, id: string): Promise<Answer<{ url: string }>> {
  const no = lacking(scope, 'submission:read');
  if (no) return no;
  const frozen = await findSubmissionFreeze(db(), scope, id);
  if (frozen?.isSet) return isSet;
  return frozen ? done({ url: await presignedGet(frozen.storageKey, frozen.fileName) }) : noSubmission;
}
