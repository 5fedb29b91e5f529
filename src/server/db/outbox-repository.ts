/** The outbox as the mail worker sees it. */
import type { SystemScope } from '../scope.ts';
import type { Db } from './connection.ts';

export interface OutboxMail {
  id: string;
  kind: string;
  to: string;
  subject: string;
  text: string;
  html: string;
  messageId: string;
  /** Tries before this one. */
  attempts: number;
}

interface OutboxRow {
  id: string;
  kind: string;
  to_address: string;
  subject: string;
  text_body: string;
  html_body: string;
  message_id: string;
  attempts: number;
}

/** Takes the oldest due mail for the transaction at hand; another worker passes it over meanwhile. */
export async function lockDueMail(trx: Db, _scope: SystemScope): Promise<OutboxMail | null> {
  const row: OutboxRow | undefined = await trx('mail_outbox')
    .where('state', 'queued')
    .whereRaw('send_after <= now()')
    .orderBy('send_after')
    .limit(1)
    .forUpdate()
    .skipLocked()
    .first();
  if (!row) return null;
  return {
    id: row.id,
    kind: row.kind,
    to: row.to_address,
    subject: row.subject,
    text: row.text_body,
    html: row.html_body,
    messageId: row.message_id,
    attempts: row.attempts,
  };
}

/** Sent. What carried a one-time link is wiped: the link must not outlive its mail in our tables. */
export async function markSent(trx: Db, _scope: SystemScope, mail: OutboxMail): Promise<void> {
  const carriesLink = mail.kind === 'invitation' || mail.kind === 'password_reset';
  await trx('mail_outbox')
    .where('id', mail.id)
    .update({
      state: 'sent',
      attempts: mail.attempts + 1,
      sent_at: trx.fn.now(),
      last_error: null,
      ...(carriesLink ? { text_body: '', html_body: '' } : {}),
    });
}

/** Not sent: again after `retrySeconds`, or never (`null`). */
export async function markUnsent(
  trx: Db,
  _scope: SystemScope,
  mail: OutboxMail,
  error: string,
  retrySeconds: number | null,
): Promise<void> {
  await trx('mail_outbox')
    .where('id', mail.id)
    .update({
      state: retrySeconds === null ? 'failed' : 'queued',
      attempts: mail.attempts + 1,
      last_error: error.slice(0, 1000),
      send_after: trx.raw("now() + ? * interval '1 second'", [retrySeconds ?? 0]),
    });
}
