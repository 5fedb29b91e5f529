/** The event stream of one browser: what happens in the person's organisation, as server-sent events. */
import type { LiveEvent } from '../../domain/api/people.ts';
import type { Permission } from '../../domain/permissions.ts';
import { db } from '../db/connection.ts';
import { listOnTheirWay, readSessionStanding } from '../db/live-repository.ts';
import { listenToEvents } from '../events-hub.ts';
import { log } from '../log.ts';
import { readProgress } from '../queue/progress.ts';
import { done, refuse, type Answer } from '../refusals.ts';
import { mayDo, type MemberScope } from '../scope.ts';

const beatMilliseconds = 15_000;
const sessionCheckMilliseconds = 30_000;
/** Milliseconds that a browser waits before it connects again. */
const retryMilliseconds = 2_000;
/** A browser that has stopped reading is let go; it reads anew when it connects again. */
const mostUnread = 1_000;

/** Who may hear of what: nobody learns by an event what they may not read. */
const needs: Record<LiveEvent['kind'], Permission> = {
  deliverable: 'deliverable:read',
  submission: 'submission:read',
  presence: 'submission:read',
  specs: 'spec:read',
};

/**
 * Opens the stream: first where running measurements stand, then events as they come, a comment every 15 s. It ends when
 * the browser leaves, the session ends or changes its standing (checked every 30 s), or events may have been lost: the
 * browser connects again by itself and reads anew. Times can be given for tests.
 */
export async function openLiveStream(
  scope: MemberScope,
  leaves: AbortSignal,
  times = { beat: beatMilliseconds, sessionCheck: sessionCheckMilliseconds },
): Promise<Answer<ReadableStream<Uint8Array>>> {
  const standing = await readSessionStanding(db(), scope);
  if (standing === null) return refuse('unauthenticated', 'Sign in to go on.');

  const encoder = new TextEncoder();
  let close = () => {};
  const stream = new ReadableStream<Uint8Array>({
    start(controller) {
      let open = true;
      const write = (text: string) => {
        if (!open) return;
        if ((controller.desiredSize ?? 0) < -mostUnread) return close();
        controller.enqueue(encoder.encode(text));
      };
      const send = (event: LiveEvent) => {
        if (mayDo(scope, needs[event.kind])) write(`data: ${JSON.stringify(event)}\n\n`);
      };
      const listening = listenToEvents(scope.organisationId, { onEvent: send, onGap: () => close() });
      const beat = setInterval(() => write(': beat\n\n'), times.beat);
      const check = setInterval(
        () => void closeWhenSessionEnded(scope, standing, () => close()),
        times.sessionCheck,
      );
      close = () => {
        if (!open) return;
        open = false;
        clearInterval(beat);
        clearInterval(check);
        listening.stop();
        leaves.removeEventListener('abort', close);
        try {
          controller.close();
        } catch (error) {
          // Cancelled by its reader: closed already.
          log.debug({ err: error }, 'event stream was closed before');
        }
      };
      leaves.addEventListener('abort', close);
      if (leaves.aborted) return close();
      write(`retry: ${retryMilliseconds}\n\n`);
      // What happens between the look at the rows and the first event would be lost: listen first.
      void listening.ready
        .then(() => sendStanding(scope, send))
        .catch((error: unknown) => {
          log.warn({ err: error }, 'an event stream began without where things stand');
        });
    },
    cancel: () => close(),
  });
  return done(stream);
}

async function sendStanding(scope: MemberScope, send: (event: LiveEvent) => void): Promise<void> {
  if (!mayDo(scope, needs.deliverable)) return;
  const rows = await listOnTheirWay(db(), scope);
  const progress = await readProgress(rows.map(({ id }) => id));
  for (const { id, state } of rows)
    send({ kind: 'deliverable', id, state, progress: progress.get(id) ?? null });
}

async function closeWhenSessionEnded(scope: MemberScope, standing: string, close: () => void): Promise<void> {
  try {
    if ((await readSessionStanding(db(), scope)) !== standing) close();
  } catch (error) {
    log.warn({ err: error }, 'an event stream could not check its session; it ends');
    close();
  }
}
