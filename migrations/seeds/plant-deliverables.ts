/** Carries the demo's deliverables through the product's own services: uploaded, measured, submitted, decided. */
import { createHash } from 'node:crypto';
import type { Db } from '../../src/server/db/connection.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import type { Answer } from '../../src/server/refusals.ts';
import { decideSubmissions } from '../../src/server/services/decisions.ts';
import { createSubmissions } from '../../src/server/services/submissions.ts';
import { completeUpload, createUploads, recordPart, signParts } from '../../src/server/services/uploads.ts';
import { deliverables, type DemoDeliverable } from './demo-programmes.ts';
import { makeMaster } from './master.ts';
import { channelIds, scopeOf } from './plant-world.ts';

function taken<T>(answer: Answer<T>, what: string): T {
  if (!answer.ok) throw new Error(`${what}: ${answer.refusal.message}`);
  return answer.value;
}
function first<T>(
  items: readonly ({ ok: true; value: T } | { ok: false; error: { message: string } })[],
  what: string,
): T {
  const [item] = items;
  if (!item.ok) throw new Error(`${what}: ${item.error.message}`);
  return item.value;
}

/** When the demo's files were last changed: a fixed moment, so that a broken-off seed recognises its own uploads. */
const changedMs = Date.UTC(2026, 10, 2);

async function upload(
  scope: MemberScope,
  demo: DemoDeliverable,
  channels: Map<string, string>,
  seed: number,
): Promise<string> {
  const bytes = makeMaster(demo, seed);
  const details = {
    programmeTitle: demo.programme,
    episodeLabel: demo.episode,
    versionLabel: demo.version,
    contentKind: demo.kind,
    channelIds: demo.channels.map((key) => channels.get(key) ?? ''),
  };
  const created = taken(
    await createUploads(scope, [
      { fileName: demo.fileName, byteSize: bytes.length, lastModifiedMs: changedMs, details },
    ]),
    demo.fileName,
  );
  const { deliverableId: id, partBytes, partCount } = first(created.items, demo.fileName);
  const numbers = Array.from({ length: partCount }, (_, i) => i + 1);
  for (const { number, url } of taken(await signParts(scope, id, numbers), demo.fileName).items) {
    const part = bytes.slice((number - 1) * partBytes, number * partBytes);
    const put = await fetch(url, { method: 'PUT', body: part });
    const etag = put.headers.get('etag');
    if (!put.ok || !etag)
      throw new Error(`Storage answered ${put.status} to part ${number} of ${demo.fileName}`);
    taken(await recordPart(scope, id, { number, etag, byteSize: part.length }), demo.fileName);
  }
  taken(await completeUpload(scope, id, createHash('sha256').update(bytes).digest('hex')), demo.fileName);
  return id;
}

const pollMilliseconds = 250;
const patienceMilliseconds = 300_000;

async function untilMeasured(db: Db, id: string): Promise<'measured' | 'unreadable'> {
  const end = Date.now() + patienceMilliseconds;
  for (;;) {
    const row = await db('deliverables').where({ id }).first<{ state: string } | undefined>('state');
    if (row?.state === 'measured' || row?.state === 'unreadable') return row.state;
    if (Date.now() > end)
      throw new Error(
        `A demo deliverable is not measured after ${patienceMilliseconds / 1000} s; see the log of measuring.`,
      );
    await new Promise((resolve) => setTimeout(resolve, pollMilliseconds));
  }
}

async function carryOn(
  db: Db,
  scope: MemberScope,
  demo: DemoDeliverable,
  id: string,
  channels: Map<string, string>,
): Promise<void> {
  if (demo.then === 'keep') return;
  const channelId = channels.get(demo.channels[0]) ?? '';
  const airAt =
    demo.airsInHours === undefined ? null : new Date(Date.now() + demo.airsInHours * 3_600_000).toISOString();
  const submission = first(
    taken(await createSubmissions(scope, [{ deliverableId: id, channelId, airAt }]), demo.fileName).items,
    demo.fileName,
  );
  if (demo.then === 'submit') return;
  const qc = await scopeOf(
    db,
    demo.kind === 'podcast_episode' ? 'qc@larkfield.example' : 'qc@harrowsound.example',
  );
  const { id: submissionId, version } = submission;
  const failing = submission.verdict.rules
    .filter((rule) => rule.outcome === 'fail')
    .map((rule) => rule.ruleId);
  const { then } = demo;
  const decision =
    then === 'approve'
      ? { id: submissionId, version, decision: 'approve' as const }
      : 'reject' in then
        ? {
            id: submissionId,
            version,
            decision: 'reject' as const,
            reason: then.reject,
            failingRuleIds: failing,
          }
        : {
            id: submissionId,
            version,
            decision: 'approve_with_waiver' as const,
            waivers: failing.map((ruleId) => ({ ruleId, reason: then.waive })),
          };
  first(taken(await decideSubmissions(qc, [decision]), demo.fileName).items, demo.fileName);
}

/** Goes on where an earlier seed broke off. `say` gets a line per step worth telling. */
export async function plantDeliverables(db: Db, say: (text: string) => void): Promise<void> {
  const channels = await channelIds(db);
  const scopes = new Map<string, MemberScope>();
  for (const email of new Set(deliverables.map((demo) => demo.by)))
    scopes.set(email, await scopeOf(db, email));
  const planted: { demo: DemoDeliverable; scope: MemberScope; id: string }[] = [];
  for (const [i, demo] of deliverables.entries()) {
    const scope = scopes.get(demo.by);
    if (!scope) throw new Error(`The demo has no ${demo.by}`);
    const there = await db('deliverables')
      .where({ organisation_id: scope.organisationId, file_name: demo.fileName })
      .whereNot('state', 'uploading')
      .first<{ id: string } | undefined>('id');
    if (there) continue;
    planted.push({ demo, scope, id: await upload(scope, demo, channels, 1000 + i * 17) });
    say(`${i + 1} of ${deliverables.length} delivered: ${demo.fileName}`);
  }
  for (const { demo, scope, id } of planted)
    if ((await untilMeasured(db, id)) === 'measured') await carryOn(db, scope, demo, id, channels);
  if (planted.length > 0) say('The demo is whole: measured, judged, submitted and decided.');
}
