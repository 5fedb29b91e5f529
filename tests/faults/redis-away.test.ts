import { createHash } from 'node:crypto';
import { createServer, connect, type AddressInfo, type Server, type Socket } from 'node:net';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { db } from '../../src/server/db/connection.ts';
import { hasLiveJob, measuringQueue } from '../../src/server/queue/measuring-queue.ts';
import type { MemberScope } from '../../src/server/scope.ts';
import { sweep } from '../../src/server/services/sweeping.ts';
import { completeUpload, createUploads, recordPart, signParts } from '../../src/server/services/uploads.ts';
import { makePerson, openServiceWorld } from '../server/service-world.ts';

/** A door before Redis that can be shut. */
async function doorBefore(url: URL) {
  const sockets = new Set<Socket>();
  let shut = false;
  const server: Server = createServer((near) => {
    if (shut) return void near.destroy();
    const far = connect(Number(url.port), url.hostname);
    for (const [socket, other] of [
      [near, far],
      [far, near],
    ] as const) {
      sockets.add(socket);
      socket.pipe(other);
      socket.on('error', () => other.destroy());
      socket.on('close', () => {
        sockets.delete(socket);
        other.destroy();
      });
    }
  });
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
  return {
    url: `redis://127.0.0.1:${(server.address() as AddressInfo).port}`,
    shut() {
      shut = true;
      for (const socket of sockets) socket.destroy();
    },
    open: () => (shut = false),
    close: () =>
      new Promise<void>(
        (resolve) => (server.close(() => resolve()), sockets.forEach((socket) => socket.destroy())),
      ),
  };
}

let world: Awaited<ReturnType<typeof openServiceWorld>>;
let door: Awaited<ReturnType<typeof doorBefore>>;
let engineer: MemberScope;
beforeAll(async () => {
  door = await doorBefore(new URL(process.env.TEST_REDIS_URL ?? ''));
  world = await openServiceWorld(8, { REDIS_URL: `${door.url}/8` });
  engineer = await makePerson();
});
afterAll(async () => {
  await world.close();
  await door.close();
});

const stands = (id: string) => hasLiveJob(id).catch(() => false);
const bytes = new Uint8Array(1000).fill(7);

describe('with Redis away', () => {
  it('an upload still arrives, and is on the queue once Redis is back', async () => {
    const begun = await createUploads(engineer, [
      { fileName: 'spot07.wav', byteSize: bytes.length, lastModifiedMs: 1, details: {} },
    ]);
    if (!begun.ok || !begun.value.items[0].ok) throw new Error('no upload');
    const id = begun.value.items[0].value.deliverableId;
    const signed = await signParts(engineer, id, [1]);
    if (!signed.ok) throw new Error('not signed');
    const put = await fetch(signed.value.items[0].url, { method: 'PUT', body: bytes });
    await recordPart(engineer, id, {
      number: 1,
      etag: put.headers.get('etag') ?? '',
      byteSize: bytes.length,
    });

    door.shut();
    const arrived = await completeUpload(engineer, id, createHash('sha256').update(bytes).digest('hex'));
    expect(arrived).toMatchObject({ ok: true });
    expect((await db()('deliverables').where({ id }).first()).state).toBe('waiting');
    expect(await sweep()).toMatchObject({ enqueued: 0 });

    door.open();
    // The connection comes back by itself, after a pause of its own choosing. Whether the sweep finds the row or the enqueue
    // that was given up on still gets through: one job stands in the end.
    do await sweep();
    while (!(await stands(id)));
    expect(await measuringQueue().getJobCountByTypes('waiting', 'delayed', 'active')).toBe(1);
  }, 30_000);
});
