// The local stand-in for a mail server: keeps every mail as a file, and shows them on a page on loopback.
import { randomUUID } from 'node:crypto';
import { readdir, readFile, rename, writeFile } from 'node:fs/promises';
import { createServer } from 'node:http';
import { join } from 'node:path';
import { simpleParser } from 'mailparser';
import { SMTPServer } from 'smtp-server';

const [folder, smtpPort, pagePort] = process.argv.slice(2);

async function keep(stream) {
  const mail = await simpleParser(stream);
  const kept = {
    id: `${Date.now()}-${randomUUID().slice(0, 8)}`,
    messageId: mail.messageId ?? '',
    from: mail.from?.text ?? '',
    to: [mail.to]
      .flat()
      .map((address) => address?.text ?? '')
      .join(', '),
    subject: mail.subject ?? '',
    date: new Date().toISOString(),
    text: mail.text ?? '',
  };
  const file = join(folder, `${kept.id}.json`);
  await writeFile(`${file}.part`, JSON.stringify(kept, null, 1));
  await rename(`${file}.part`, file);
}

const smtp = new SMTPServer({
  authOptional: true,
  disabledCommands: ['STARTTLS', 'AUTH'],
  size: 10 * 1024 * 1024,
  logger: false,
  onData: (stream, _session, callback) => void keep(stream).then(() => callback(), callback),
});
smtp.on('error', (error) => console.error(error.message));
smtp.listen(Number(smtpPort), '127.0.0.1');

const escape = (text) => text.replace(/[&<>"']/g, (c) => `&#${c.charCodeAt(0)};`);
const linked = (text) => escape(text).replace(/https?:\/\/[^\s<]+/g, (url) => `<a href="${url}">${url}</a>`);
const page = (body) =>
  `<!doctype html><html lang="en"><meta charset="utf-8"><title>Local inbox</title><meta name="viewport" content="width=device-width"><style>body{font:16px/1.5 system-ui;max-width:46rem;margin:2rem auto;padding:0 1rem;color:#17233c;background:#f3efe6}pre{white-space:pre-wrap;background:#fbf8f1;padding:1rem;border:1px solid #d9d1c0}a{color:#1b6a66}li{margin:.4rem 0}</style>${body}`;

createServer(async (request, response) => {
  const id = /^\/([0-9]+-[0-9a-f]{8})$/.exec(request.url ?? '')?.[1];
  response.setHeader('content-type', 'text/html; charset=utf-8');
  response.setHeader('content-security-policy', "default-src 'none'; style-src 'unsafe-inline'");
  try {
    if (id) {
      const mail = JSON.parse(await readFile(join(folder, `${id}.json`), 'utf8'));
      response.end(
        page(
          `<p><a href="/">All mail</a></p><h1>${escape(mail.subject)}</h1><p>To ${escape(mail.to)}, ${escape(mail.date)}</p><pre>${linked(mail.text)}</pre>`,
        ),
      );
      return;
    }
    const names = (await readdir(folder))
      .filter((name) => name.endsWith('.json'))
      .sort()
      .reverse()
      .slice(0, 200);
    const mails = await Promise.all(
      names.map(async (name) => JSON.parse(await readFile(join(folder, name), 'utf8'))),
    );
    const items = mails.map(
      (mail) =>
        `<li><a href="/${mail.id}">${escape(mail.subject)}</a><br>to ${escape(mail.to)}, ${escape(mail.date)}</li>`,
    );
    response.end(
      page(
        `<h1>Local inbox</h1><p>Mail of the local demo. None of it has left this machine.</p><ul>${items.join('') || '<li>No mail yet.</li>'}</ul>`,
      ),
    );
  } catch (error) {
    response.statusCode = error?.code === 'ENOENT' ? 404 : 500;
    response.end(page('<h1>There is no such mail</h1>'));
  }
}).listen(Number(pagePort), '127.0.0.1');

for (const signal of ['SIGTERM', 'SIGINT']) process.on(signal, () => process.exit(0));
