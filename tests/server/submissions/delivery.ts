/** What the tests of submissions begin with: a deliverable that was judged, and one that was submitted. */
import type { Knex } from 'knex';
import type { Answer } from '../../../src/server/refusals.ts';
import type { SubmissionRow } from '../../../src/domain/api/submissions.ts';
import { createSubmissions } from '../../../src/server/services/submissions.ts';
import { figures, makeDeliverable, type makeChain, type MadeDeliverable } from '../../factories/world.ts';
import { firstOf, valueOf } from '../answers.ts';

export type Chain = Awaited<ReturnType<typeof makeChain>>;

export const passing = figures();
/** Too loud and over true peak for `r128Body`. */
export const failing = figures({ integratedLufs: -19.2, maxDbtp: 0.4 });

export async function submit(
  chain: Pick<Chain, 'mixer' | 'channel'>,
  deliverable: Pick<MadeDeliverable, 'id'>,
  airAt: string | null = null,
): Promise<Answer<SubmissionRow>> {
  return firstOf(
    await createSubmissions(chain.mixer, [
      { deliverableId: deliverable.id, channelId: chain.channel.id, airAt },
    ]),
  );
}

/** A deliverable of the chain's mix engineer, measured and put to the chain's channel. */
export async function makeSubmitted(
  db: Knex,
  chain: Chain,
  given: Parameters<typeof makeDeliverable>[2] & { airAt?: string } = {},
): Promise<SubmissionRow> {
  const { airAt, ...rest } = given;
  const deliverable = await makeDeliverable(db, chain.mixer, { channelIds: [chain.channel.id], ...rest });
  return valueOf(await submit(chain, deliverable, airAt ?? null));
}

export const actionsOn = (db: Knex, submissionId: string): Promise<string[]> =>
  db('audit_events')
    .where({ subject_kind: 'submission', subject_id: submissionId })
    .orderBy('id')
    .pluck('action');

export const mailsAbout = (db: Knex, submissionId: string) =>
  db('mail_outbox').where('submission_id', submissionId).orderBy('created_at').orderBy('to_address');
