// Sends the outbox's mails. A process of its own; more than one may run.
import { closeDb } from '../src/server/db/connection.ts';
import { log } from '../src/server/log.ts';
import { startMailer } from '../src/server/mail/mailer.ts';

const mailer = startMailer();
log.info('mail worker ready');

let closing = false;
for (const signal of ['SIGTERM', 'SIGINT'] as const) {
  process.on(signal, () => {
    if (closing) return;
    closing = true;
    mailer
      .close()
      .then(closeDb)
      .then(
        () => process.exit(0),
        (error: unknown) => {
          log.error({ err: error }, 'mail worker did not close well');
          process.exit(1);
        },
      );
  });
}
