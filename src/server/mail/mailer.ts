/** The loop of the mail worker: woken by PostgreSQL's notice, or every two seconds for what falls due by time. */
import nodemailer from 'nodemailer';
import pg from 'pg';
import { config } from '../config.ts';
import { log } from '../log.ts';
import { sendNextMail } from './delivery.ts';
import { mailTopic } from './outbox.ts';

const pollMs = 2000;

export interface Mailer {
  /** Lets the mail at hand end, then closes all connections. */
  close(): Promise<void>;
}

/** Starts sending. Database or mail server being away is logged and outlived. */
export function startMailer(): Mailer {
  const transport = nodemailer.createTransport({
    url: config().SMTP_URL,
    connectionTimeout: 10_000,
    greetingTimeout: 10_000,
    socketTimeout: 30_000,
  });
  let closing = false;
  let wake: () => void = () => undefined;
  let listener: pg.Client | undefined;

  async function listen(): Promise<void> {
    if (listener || closing) return;
    const client = new pg.Client({ connectionString: config().DATABASE_URL });
    listener = client;
    const lose = () => {
      if (listener === client) listener = undefined;
    };
    client.on('notification', () => wake());
    client.on('error', lose);
    client.on('end', lose);
    try {
      await client.connect();
      await client.query(`LISTEN ${mailTopic}`);
    } catch (error) {
      // Without the notice the loop still looks every two seconds, and tries to listen again.
      lose();
      log.warn({ err: error }, 'mail worker does not hear of new mail yet');
    }
  }

  const rest = () =>
    new Promise<void>((resolve) => {
      const timer = setTimeout(resolve, pollMs);
      wake = () => {
        clearTimeout(timer);
        resolve();
      };
    });

  async function run(): Promise<void> {
    while (!closing) {
      try {
        await listen();
        let outcome = await sendNextMail(transport);
        while (outcome !== 'none' && !closing) outcome = await sendNextMail(transport);
      } catch (error) {
        log.error({ err: error }, 'mail worker: the outbox could not be read');
      }
      if (!closing) await rest();
    }
  }

  const running = run();
  return {
    async close() {
      closing = true;
      wake();
      await running;
      await listener?.end();
      transport.close();
    },
  };
}
