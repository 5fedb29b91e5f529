/** The activity screen: audit events as sentences, newest first. */
import type { z } from 'zod';
import { activityQuerySchema, type activityListSchema } from '../../domain/api/people.ts';
import { activitySentence } from '../../domain/activity-sentence.ts';
import { listEvents } from '../db/audit-repository.ts';
import { db } from '../db/connection.ts';
import { done, lacking, refuse, type Answer } from '../refusals.ts';
import type { MemberScope } from '../scope.ts';

type ActivityList = z.infer<typeof activityListSchema>;

/** The cursor is the id of the last event shown. */
export async function listActivity(
  scope: MemberScope,
  asked: z.infer<typeof activityQuerySchema>,
): Promise<Answer<ActivityList>> {
  const no = lacking(scope, 'activity:read');
  if (no) return no;
  if (asked.cursor !== undefined && !/^\d{1,15}$/.test(asked.cursor)) {
    return refuse('bad_input', 'This list does not go on from there. Start again from the top.', {
      cursor: 'unknown',
    });
  }
  const events = await listEvents(db(), scope, {
    beforeId: asked.cursor,
    limit: asked.limit + 1,
    q: asked.q?.trim() || undefined,
  });
  const shown = events.slice(0, asked.limit);
  return done({
    items: shown.map((event) => ({
      id: event.id,
      action: event.action,
      sentence: activitySentence(event.action, event.detail),
      actor: event.actor,
      organisationName: event.organisationName,
      subject: { kind: event.subjectKind, id: event.subjectId },
      createdAt: event.createdAt.toISOString(),
    })),
    nextCursor: events.length > asked.limit ? (shown.at(-1)?.id ?? null) : null,
  });
}
