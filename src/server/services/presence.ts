/** Who has a submission open for deciding just now: in Redis for half a minute, told again while it stays open. */
import { z } from 'zod';
import { db } from '../db/connection.ts';
import { findSubmission, type PersonRef } from '../db/submissions-repository.ts';
import { publishEvent } from '../events.ts';
import { log } from '../log.ts';
import { redis } from '../redis.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { MemberScope, Scope } from '../scope.ts';

/** Seconds for which somebody counts as present after they last said so. */
export const presentForSeconds = 30;

const entrySchema = z.object({ name: z.string(), at: z.number() });
const presenceKey = (submissionId: string) => `presence:${submissionId}`;

/** Those of a hash who said so lately, by name; what cannot be read counts as nobody. */
function presentIn(hash: Record<string, string>, now: number): PersonRef[] {
  return Object.entries(hash)
    .flatMap(([id, text]) => {
      const entry = entrySchema.safeParse(JSON.parse(text));
      return entry.success && now - entry.data.at < presentForSeconds * 1000
        ? [{ id, name: entry.data.name }]
        : [];
    })
    .sort((a, b) => a.name.localeCompare(b.name, 'en'));
}

/**
 * Says that the person has the submission open, tells the distributor's pages, and answers who else has. Call again
 * within half a minute to stay. Only people of the submission's distributor; the supplier never sees who looks.
 */
export async function tellPresence(
  scope: MemberScope,
  submissionId: string,
): Promise<Answer<{ openBy: PersonRef[] }>> {
  const no = lacking(scope, 'submission:decide');
  if (no) return no;
  const submission = await findSubmission(db(), scope, submissionId);
  if (!submission) return refuse('not_found', 'There is no such submission.');
  if (submission.distributor.id !== scope.organisationId)
    return refuse('forbidden', `${submission.distributor.name} decides on this submission.`);
  const key = presenceKey(submissionId);
  const now = Date.now();
  let openBy: PersonRef[];
  try {
    const replies = await redis()
      .multi()
      .hset(key, scope.userId, JSON.stringify({ name: scope.userName, at: now }))
      .expire(key, presentForSeconds)
      .hgetall(key)
      .exec();
    const hash = z.record(z.string(), z.string()).parse(replies?.[2]?.[1] ?? {});
    openBy = presentIn(hash, now);
  } catch (error) {
    log.warn({ err: error, submissionId }, 'presence was not kept');
    return refuse(
      'unavailable',
      'Who else has this open cannot be told at the moment. Deciding works all the same.',
    );
  }
  await publishEvent(redis(), [scope.organisationId], { kind: 'presence', submissionId, openBy });
  return done({ openBy: openBy.filter((person) => person.id !== scope.userId) });
}

/** Who has these open, without the caller; by submission id. With Redis away nobody is told, and the log says so. */
export async function readPresence(
  scope: Scope,
  submissionIds: readonly string[],
): Promise<Map<string, PersonRef[]>> {
  const present = new Map<string, PersonRef[]>();
  if (submissionIds.length === 0) return present;
  const caller = scope.kind === 'member' ? scope.userId : null;
  try {
    const pipeline = redis().pipeline();
    for (const id of submissionIds) pipeline.hgetall(presenceKey(id));
    const replies = (await pipeline.exec()) ?? [];
    const now = Date.now();
    replies.forEach(([error, reply], i) => {
      if (error) throw error;
      const hash = z.record(z.string(), z.string()).parse(reply ?? {});
      present.set(
        submissionIds[i],
        presentIn(hash, now).filter((person) => person.id !== caller),
      );
    });
  } catch (error) {
    log.warn({ err: error }, 'presence could not be read');
  }
  return present;
}
