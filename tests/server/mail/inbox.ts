/** A mail server for tests, on a port of its own, that keeps what it takes and can be told to refuse. */
import { once } from 'node:events';
import type { AddressInfo } from 'node:net';
import { simpleParser, type ParsedMail } from 'mailparser';
import { SMTPServer } from 'smtp-server';

export interface Inbox {
  url: string;
  port: number;
  mails: ParsedMail[];
  /** Answers the next recipients with this SMTP status, until told `null`. */
  refuseWith(status: number | null): void;
  /** Resolves once this many mails are there. */
  until(count: number): Promise<void>;
  close(): Promise<void>;
}

export async function openInbox(port = 0): Promise<Inbox> {
  const mails: ParsedMail[] = [];
  const waiting: { count: number; resolve: () => void }[] = [];
  let status: number | null = null;
  const server = new SMTPServer({
    authOptional: true,
    disabledCommands: ['STARTTLS', 'AUTH'],
    onRcptTo(_address, _session, callback) {
      callback(status === null ? null : Object.assign(new Error('not taken'), { responseCode: status }));
    },
    onData(stream, _session, callback) {
      simpleParser(stream).then((mail) => {
        mails.push(mail);
        for (const one of waiting.filter(({ count }) => mails.length >= count)) one.resolve();
        callback();
      }, callback);
    },
  });
  server.on('error', () => undefined); // A client that hangs up is the client's trouble.
  const listening = server.listen(port, '127.0.0.1');
  await once(listening, 'listening');
  const own = (listening.address() as AddressInfo).port;
  return {
    url: `smtp://127.0.0.1:${own}`,
    port: own,
    mails,
    refuseWith(next) {
      status = next;
    },
    until: (count) =>
      new Promise((resolve) => {
        if (mails.length >= count) resolve();
        else waiting.push({ count, resolve });
      }),
    close: () => new Promise((resolve) => server.close(() => resolve())),
  };
}
