/** Reading an organisation's deliverables, saying what they are, and discarding them. */
import type { z } from 'zod';
import type {
  DeliverableReport,
  DeliverableRow,
  deliverableListSchema,
  deliverableQuerySchema,
  patchDeliverablesSchema,
  programmesSchema,
} from '../../domain/api/deliverables.ts';
import { deliverableStates, overallOutcomeSchema, submissionStates } from '../../domain/vocabulary.ts';
import { recordEvent } from '../db/audit-repository.ts';
import { db, inTransaction } from '../db/connection.ts';
import { findDeliverableCore, markDiscarded } from '../db/deliverable-writes-repository.ts';
import {
  countDeliverables,
  deliverableSortKeys,
  listDeliverables as listRecords,
  listStandings,
  readDeliverables,
  type DeliverableFilter,
  type DeliverableRecord,
} from '../db/deliverables-repository.ts';
import { listJudgedBodies } from '../db/judged-specs-repository.ts';
import { listSetParts, restoreParts } from '../db/mono-sets-repository.ts';
import { findKnownFile, listPlans, readPlan } from '../db/plans-repository.ts';
import { listPresentations, listPresentationVerdicts } from '../db/presentations-repository.ts';
import { listProgrammes as listProgrammeRecords } from '../db/programmes-repository.ts';
import { lockDeliverable, listSubmissionsOfDeliverable } from '../db/submission-making-repository.ts';
import { publishEvent } from '../events.ts';
import { log } from '../log.ts';
import { readProgress, type Progress } from '../queue/progress.ts';
import { redis } from '../redis.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { MemberScope, Scope } from '../scope.ts';
import { readBenchComparison } from './bench-comparison.ts';
import { setDeliverableDetails } from './deliverable-details.ts';
import { itemResult, type ItemResult } from './item-results.ts';
import { judgeDeliverables } from './judging.ts';
import { cursorOf, listedWords } from './list-filters.ts';
import { toMeasurementAnswer } from './measurement-answer.ts';

type Query = z.infer<typeof deliverableQuerySchema>;
type List = z.infer<typeof deliverableListSchema>;
type Patch = z.infer<typeof patchDeliverablesSchema>['items'][number];

const noDeliverable = refuse('not_found', 'There is no such deliverable.');
const verdictWords = [...overallOutcomeSchema.options, 'none'] as const;
const stateWords = [...deliverableStates, ...submissionStates] as const;
const isOneOf =
  <T extends string>(known: readonly T[]) =>
  (word: string): word is T =>
    (known as readonly string[]).includes(word);

/** The filter that a query asks for; words that mean nothing are refused by name. */
function filterOf(query: Query): Answer<DeliverableFilter> {
  const verdicts = listedWords(query.verdict, verdictWords, 'verdict');
  if (!verdicts.ok) return verdicts;
  const states = listedWords(query.state, stateWords, 'state');
  if (!states.ok) return states;
  return done({
    q: query.q?.trim() || undefined,
    programme: query.programme?.trim() || undefined,
    channelId: query.channel,
    kind: query.kind,
    outcomes: verdicts.value?.filter(isOneOf(overallOutcomeSchema.options)),
    notJudged: verdicts.value?.includes('none'),
    states: states.value?.filter(isOneOf(deliverableStates)),
    submissionStates: states.value?.filter(isOneOf(submissionStates)),
  });
}

/** A page of the organisation's deliverables, with how each stands and where measuring is. */
export async function listDeliverables(scope: Scope, query: Query): Promise<Answer<List>> {
  const no = lacking(scope, 'deliverable:read');
  if (no) return no;
  const filter = filterOf(query);
  if (!filter.ok) return filter;
  const { sort, order, limit } = query;
  const cursor = cursorOf(query, deliverableSortKeys[sort]);
  if (!cursor.ok) return cursor;
  const [{ records, nextCursor }, total] = await Promise.all([
    listRecords(db(), scope, filter.value, { sort, order, limit, cursor: cursor.value }),
    countDeliverables(db(), scope, filter.value),
  ]);
  return done({ items: await toRows(scope, records), nextCursor, total });
}

async function toRows(scope: Scope, records: readonly DeliverableRecord[]): Promise<DeliverableRow[]> {
  const ids = records.map((record) => record.id);
  const [standings, progress] = await Promise.all([
    listStandings(db(), scope, ids),
    progressOf(records.filter((record) => record.state === 'measuring').map((record) => record.id)),
  ]);
  return records.map((record) => ({
    id: record.id,
    fileName: record.fileName,
    byteSize: record.byteSize,
    state: record.state,
    reason: record.reason,
    programmeTitle: record.programmeTitle,
    episodeLabel: record.episodeLabel,
    versionLabel: record.versionLabel,
    contentKind: record.contentKind,
    format: record.measurement?.format ?? null,
    figures: record.measurement?.figures ?? null,
    channels: standings.get(record.id) ?? [],
    outcome: record.outcome,
    progress: progress.get(record.id) ?? null,
    createdAt: record.createdAt.toISOString(),
  }));
}

/** Where measuring stands. With Redis away the rows are shown without it. */
async function progressOf(ids: readonly string[]): Promise<Map<string, Progress>> {
  try {
    return await readProgress(ids);
  } catch (error) {
    log.warn({ err: error }, 'progress could not be read');
    return new Map();
  }
}

/** One deliverable as its list row shows it. */
export async function readDeliverableRow(scope: Scope, id: string): Promise<Answer<DeliverableRow>> {
  const no = lacking(scope, 'deliverable:read');
  if (no) return no;
  const [row] = await toRows(scope, await readDeliverables(db(), scope, [id]));
  return row ? done(row) : noDeliverable;
}

/** The row with its measurement and the bodies of the specs that judge it. */
export async function getDeliverableReport(scope: Scope, id: string): Promise<Answer<DeliverableReport>> {
  const no = lacking(scope, 'deliverable:read');
  if (no) return no;
  const records = await readDeliverables(db(), scope, [id]);
  const [row] = await toRows(scope, records);
  if (!row) return noDeliverable;
  const [{ measurement, sha256, uploadedBy, measuredAt, replaces, planId, frameRate }] = records;
  const versionIds = [...new Set(row.channels.flatMap((channel) => channel.specVersionId ?? []))];
  const [presentations, verdicts, plan, plans, known, parts] = await Promise.all([
    listPresentations(db(), scope, id),
    listPresentationVerdicts(db(), scope, id, versionIds),
    readPlan(db(), scope, planId),
    listPlans(db(), scope, id),
    findKnownFile(db(), scope, id),
    listSetParts(db(), scope, id),
  ]);
  return done({
    ...row,
    sha256,
    uploadedBy,
    measuredAt: measuredAt?.toISOString() ?? null,
    measurement: measurement && toMeasurementAnswer(measurement),
    presentations: presentations.map(({ measurement: measured, ...presentation }) => ({
      ...presentation,
      measurement: toMeasurementAnswer(measured),
      verdicts: verdicts
        .filter(({ position }) => position === presentation.position)
        .map(({ specVersionId, verdict }) => ({ specVersionId, verdict })),
    })),
    parts: parts.map(({ speaker, fileName, byteSize }) => ({ speaker, fileName, byteSize })),
    plan,
    frameRate,
    plans: plans.map((one) => ({ ...one, createdAt: one.createdAt.toISOString() })),
    file: known && {
      format: known.format,
      isOrderAssumed: known.findings.some(({ code }) => code === 'layout-assumed'),
      lineUpToneEndSeconds: known.isWhole ? lineUpToneEnd(known.findings) : null,
    },
    // A bench measures whole files.
    bench:
      measurement && planId === null
        ? await readBenchComparison(db(), scope, id, measurement.figures, measurement.engineVersion)
        : null,
    specs: measurement ? await listJudgedBodies(db(), scope, measurement.id, versionIds) : [],
    replaces,
  });
}

/** Where a line-up tone at the head ends, in seconds of the file. */
function lineUpToneEnd(findings: DeliverableReport['presentations'][number]['measurement']['findings']) {
  const tone = findings.find(({ code }) => code === 'line-up-tone');
  return tone?.atSeconds === undefined ? null : tone.atSeconds + (tone.lengthSeconds ?? 0);
}

/** Sets details of many deliverables and judges them anew; each stands or falls by itself. */
export async function patchDeliverables(
  scope: MemberScope,
  items: readonly Patch[],
): Promise<Answer<{ items: ItemResult<DeliverableRow>[] }>> {
  const no = lacking(scope, 'deliverable:upload');
  if (no) return no;
  const answers: Answer<null>[] = [];
  for (const { id, ...details } of items) {
    const answer = await inTransaction(async (trx) => {
      if (!(await lockDeliverable(trx, scope, id))) return noDeliverable;
      const set = await setDeliverableDetails(trx, scope, id, details);
      if (!set.ok) return set;
      await judgeDeliverables(trx, scope, { deliverableIds: [id] });
      const core = await findDeliverableCore(trx, scope, id);
      await recordEvent(trx, scope, {
        organisationId: scope.organisationId,
        action: 'deliverable.details_changed',
        subjectKind: 'deliverable',
        subjectId: id,
        detail: { fileName: core?.fileName, fields: Object.keys(details) },
      });
      return done(null);
    });
    answers.push(answer);
  }
  const changed = [...new Set(items.filter((_, i) => answers[i].ok).map(({ id }) => id))];
  const rows = changed.length > 0 ? await toRows(scope, await readDeliverables(db(), scope, changed)) : [];
  await Promise.all(
    rows.map(({ id, state, progress }) =>
      publishEvent(redis(), [scope.organisationId], { kind: 'deliverable', id, state, progress }),
    ),
  );
  return done({
    items: items.map(({ id }, i) => {
      const row = rows.find((one) => one.id === id);
      // Gone again in between: discarded by a colleague.
      return itemResult(id, !answers[i].ok ? answers[i] : row ? done(row) : noDeliverable);
    }),
  });
}

/** Takes a deliverable out of every list; the files of a set stand by themselves again. What was ever submitted stays, for the other side has seen it. */
export async function discardDeliverable(scope: MemberScope, id: string): Promise<Answer<{ id: string }>> {
  const no = lacking(scope, 'deliverable:upload');
  if (no) return no;
  const answer = await inTransaction(async (trx) => {
    const deliverable = await lockDeliverable(trx, scope, id);
    if (!deliverable) return noDeliverable;
    if (deliverable.state === 'uploading')
      return refuse('conflict', 'This file is still being uploaded. Give the upload up instead.');
    const [submitted] = await listSubmissionsOfDeliverable(trx, scope, id);
    if (submitted)
      return refuse(
        'conflict',
        `It was submitted to ${submitted.channelName}, so it stays where both sides can read it.`,
      );
    await markDiscarded(trx, scope, id);
    await restoreParts(trx, scope, id);
    await recordEvent(trx, scope, {
      organisationId: scope.organisationId,
      action: 'deliverable.discarded',
      subjectKind: 'deliverable',
      subjectId: id,
      detail: {
        fileName: deliverable.fileName,
        programmeTitle: deliverable.programmeTitle,
        episodeLabel: deliverable.episodeLabel,
      },
    });
    return done({ id });
  });
  if (answer.ok)
    await publishEvent(redis(), [scope.organisationId], {
      kind: 'deliverable',
      id,
      state: 'discarded',
      progress: null,
    });
  return answer;
}

/** Programmes of the organisation with their episodes, for fields that offer what exists. */
export async function listProgrammes(scope: Scope): Promise<Answer<z.infer<typeof programmesSchema>>> {
  const no = lacking(scope, 'deliverable:read');
  return no ?? done({ items: await listProgrammeRecords(db(), scope) });
}
