// Indexes for what is asked by deliverable, by chain and by subject: the newest submission of a deliverable to a channel,
// earlier deliveries of an episode, what replaced a submission, the last act on one, and mails about one.
import type { Knex } from 'knex';

const indexes = {
  submissions_deliverable_channel_idx: 'submissions (deliverable_id, channel_id, submitted_at DESC, id)',
  submissions_replaces_idx: 'submissions (replaces_id) WHERE replaces_id IS NOT NULL',
  deliverables_episode_idx: 'deliverables (episode_id) WHERE episode_id IS NOT NULL',
  audit_events_submission_idx: `audit_events (subject_id, id DESC) WHERE subject_kind = 'submission'`,
  mail_outbox_submission_idx: 'mail_outbox (submission_id) WHERE submission_id IS NOT NULL',
};

export async function up(knex: Knex): Promise<void> {
  for (const [name, on] of Object.entries(indexes)) await knex.raw(`CREATE INDEX ${name} ON ${on}`);
}

export async function down(knex: Knex): Promise<void> {
  for (const name of Object.keys(indexes)) await knex.raw(`DROP INDEX ${name}`);
}
