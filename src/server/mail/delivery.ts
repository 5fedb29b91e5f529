/** Sending what the outbox holds: at least once, each mail with the Message-ID that it was queued with. */
import type { Transporter } from 'nodemailer';
import { config } from '../config.ts';
import { db } from '../db/connection.ts';
import { lockDueMail, markSent, markUnsent } from '../db/outbox-repository.ts';
import { log } from '../log.ts';
import { systemScope } from '../scope.ts';

export const maximumAttempts = 8;
const scope = systemScope('sending mail');

/** Seconds until the next try after so many: 5 s, doubled each time, about eleven minutes over all eight. */
export const backoffSeconds = (attempts: number): number => 5 * 2 ** (attempts - 1);

/** SMTP answers of 5xx about the message or its recipient are final; everything else may pass. */
function isFinal(error: unknown): boolean {
  const code = error instanceof Error && 'responseCode' in error ? error.responseCode : undefined;
  return typeof code === 'number' && code >= 500 && code < 600;
}

/**
 * Sends one due mail, if there is one: 'sent', 'retry', 'failed', or 'none'. The row stays locked while the server is
 * asked, so that two workers never send it at once; dying in between sends it again later, under the same Message-ID.
 */
export async function sendNextMail(
  transport: Pick<Transporter, 'sendMail'>,
): Promise<'sent' | 'retry' | 'failed' | 'none'> {
  return db().transaction(async (trx) => {
    const mail = await lockDueMail(trx, scope);
    if (!mail) return 'none';
    try {
      await transport.sendMail({
        from: config().MAIL_FROM,
        to: { name: '', address: mail.to },
        subject: mail.subject,
        text: mail.text,
        html: mail.html,
        messageId: mail.messageId,
      });
    } catch (error) {
      const attempts = mail.attempts + 1;
      const final = isFinal(error) || attempts >= maximumAttempts;
      const message = error instanceof Error ? error.message : String(error);
      await markUnsent(trx, scope, mail, message, final ? null : backoffSeconds(attempts));
      log[final ? 'error' : 'warn'](
        { mail: mail.id, kind: mail.kind, attempts, err: message },
        'a mail was not sent',
      );
      return final ? 'failed' : 'retry';
    }
    await markSent(trx, scope, mail);
    log.info({ mail: mail.id, kind: mail.kind }, 'mail sent');
    return 'sent';
  });
}
