import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { db } from '../../../src/server/db/connection.ts';
import { queueMail } from '../../../src/server/mail/outbox.ts';
import { openWorld, type World } from '../../factories/world.ts';
import { openInbox, type Inbox } from './inbox.ts';

let world: World;
let inbox: Inbox;

beforeAll(async () => {
  inbox = await openInbox();
  world = await openWorld({ SMTP_URL: inbox.url });
});
afterAll(async () => {
  await world.close();
  await inbox.close();
});

const queue = (to: string) =>
  queueMail(db(), {
    organisationId: null,
    kind: 'password_reset',
    to,
    model: { name: 'M', token: 'T'.repeat(43), expiresAt: new Date() },
  });

describe('the mail worker', () => {
  it('sends what waits and what comes, and leaves well on SIGTERM', async () => {
    await queue('before@people.example');
    const worker = spawn(process.execPath, ['--import', 'tsx', 'workers/mail.ts'], {
      env: { ...process.env, LOG_LEVEL: 'warn' },
      stdio: ['ignore', 'inherit', 'inherit'],
    });
    const ended = once(worker, 'exit');
    const early = ended.then(([code]) => Promise.reject(new Error(`the worker ended early with ${code}`)));
    await Promise.race([inbox.until(1), early]);
    await queue('after@people.example');
    await Promise.race([inbox.until(2), early]);
    expect(inbox.mails.map((mail) => [mail.to].flat()[0]?.text)).toEqual([
      'before@people.example',
      'after@people.example',
    ]);
    worker.kill('SIGTERM');
    await early.catch(() => undefined);
    expect(await ended).toEqual([0, null]);
  });
});
