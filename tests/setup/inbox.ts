/** A mail server that writes what it takes into a folder: the whole message as .eml, what a test asks for as .json. */
import { once } from 'node:events';
import { mkdir, writeFile } from 'node:fs/promises';
import type { AddressInfo } from 'node:net';
import { join } from 'node:path';
import { buffer } from 'node:stream/consumers';
import { simpleParser } from 'mailparser';
import { SMTPServer } from 'smtp-server';

export async function startInbox(
  folder: string,
): Promise<{ url: string; folder: string; close(): Promise<void> }> {
  await mkdir(folder, { recursive: true });
  let count = 0;
  async function keep(raw: Buffer): Promise<void> {
    const name = String((count += 1)).padStart(5, '0');
    const mail = await simpleParser(raw);
    const to = [mail.to ?? []].flat().flatMap((list) => list.value.map(({ address }) => address));
    await writeFile(join(folder, `${name}.eml`), raw);
    const { subject, text, html, messageId } = mail;
    await writeFile(
      join(folder, `${name}.json`),
      JSON.stringify({ to, subject, text, html, messageId }, null, 1),
    );
  }
  const server = new SMTPServer({
    authOptional: true,
    disabledCommands: ['STARTTLS', 'AUTH'],
    onData(stream, _session, callback) {
      buffer(stream)
        .then(keep)
        .then(() => callback(), callback);
    },
  });
  server.on('error', () => undefined); // A client that hangs up is the client's trouble.
  const listening = server.listen(0, '127.0.0.1');
  await once(listening, 'listening');
  const { port } = listening.address() as AddressInfo;
  return {
    url: `smtp://127.0.0.1:${port}`,
    folder,
    close: () => new Promise((resolve) => server.close(() => resolve())),
  };
}
