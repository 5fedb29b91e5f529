/** The outbox: mails are rows in the transaction that they belong to; workers/mail.ts sends what is due. */
import { randomUUID } from 'node:crypto';
import { config } from '../config.ts';
import type { Db } from '../db/connection.ts';
import type { MailKind, MailModels } from './models.ts';
import { writeMail } from './templates.ts';

export type { MailKind, MailModels } from './models.ts';

/** PostgreSQL notifies this topic on commit, so that the mail worker need not wait for its next look. */
export const mailTopic = 'mail_queued';

type NewMail = {
  [K in MailKind]: {
    organisationId: string | null;
    kind: K;
    to: string;
    model: MailModels[K];
    submissionId?: string;
    sendAfter?: Date;
  };
}[MailKind];

/** Domain of the sender, for Message-IDs. */
const senderDomain = () => /@([a-z0-9.-]+)>?\s*$/i.exec(config().MAIL_FROM)?.[1] ?? 'plimsoll.example';

/** Puts a mail into the outbox in the caller's transaction; its Message-ID stays the same however often it is tried. */
export async function queueMail(db: Db, mail: NewMail): Promise<void> {
  const id = randomUUID();
  // The union ties kind and model together; the compiler cannot follow that through a call.
  const words = writeMail(mail.kind, mail.model as never, new URL(config().APP_ORIGIN).origin);
  await db('mail_outbox').insert({
    id,
    organisation_id: mail.organisationId,
    kind: mail.kind,
    to_address: mail.to,
    subject: words.subject,
    text_body: words.text,
    html_body: words.html,
    message_id: `<${id}@${senderDomain()}>`,
    submission_id: mail.submissionId ?? null,
    ...(mail.sendAfter ? { send_after: mail.sendAfter } : {}),
  });
  await db.raw('SELECT pg_notify(?, ?)', [mailTopic, '']);
}

/** Cancels what has not gone yet about a submission (a decision was taken back); returns how many. */
export async function cancelMailAbout(
  db: Db,
  submissionId: string,
  kinds: readonly MailKind[],
): Promise<number> {
  return db('mail_outbox')
    .where({ submission_id: submissionId, state: 'queued' })
    .whereIn('kind', kinds as MailKind[])
    .update({ state: 'cancelled' });
}
