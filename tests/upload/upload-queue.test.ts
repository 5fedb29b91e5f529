// The upload queue against a transport that is in the test's hands: no network, no clock, no waiting.
import { describe, expect, it } from 'vitest';
import type { Upload } from '../../src/domain/api/deliverables.ts';
import { progressText, rateOf, type SendableFile } from '../../src/components/upload/upload-item.ts';
import { UploadQueue } from '../../src/components/upload/upload-queue.ts';
import type { UploadTransport } from '../../src/components/upload/upload-transport.ts';

class Final extends Error {}
interface Put {
  url: string;
  part: Blob;
  progress: (bytes: number) => void;
  take: () => void;
  break: () => void;
  signal: AbortSignal;
}

function makeTransport({ partBytes = 10, done = [] as number[], resumed = false } = {}) {
  const log: string[] = [];
  const puts: Put[] = [];
  const waits: number[] = [];
  const clock = { ms: 0 };
  const faults = { record: null as Error | null, hash: null as Error | null, complete: [] as Error[] };
  let made = 0;
  const transport: UploadTransport = {
    begin: async (files) =>
      files.map(({ file }, i) => {
        if (file.size === 0)
          return {
            ok: false,
            id: String(i),
            error: { code: 'bad_input', message: `"${file.name}" is empty.` },
          };
        made++;
        log.push(`begin ${file.name}`);
        const value: Upload = {
          deliverableId: `00000000-0000-4000-8000-00000000000${made}`,
          fileName: file.name,
          byteSize: file.size,
          lastModifiedMs: file.lastModified,
          partBytes,
          partCount: Math.ceil(file.size / partBytes),
          partsDone: done,
          resumed,
          createdAt: '2026-12-01T10:00:00Z',
        };
        return { ok: true, id: String(i), value };
      }),
    sign: async (_id, numbers) => {
      log.push(`sign ${numbers.join(' ')}`);
      return new Map(numbers.map((number) => [number, `part/${number}`]));
    },
    put: (url, part, progress, signal) =>
      new Promise((resolve, reject) => {
        signal.addEventListener('abort', () => reject(new Error('stopped')));
        puts.push({
          url,
          part,
          progress,
          signal,
          take: () => resolve(`etag of ${url}`),
          break: () => reject(new Error('The connection to storage broke off.')),
        });
      }),
    record: async (_id, { number, etag, byteSize }) => {
      if (faults.record) throw faults.record;
      log.push(`record ${number} ${etag} ${byteSize}`);
    },
    complete: async (_id, sha256) => {
      const fault = faults.complete.shift();
      if (fault) throw fault;
      log.push(`complete ${sha256}`);
      return { deliverable: {} as never, alreadyDelivered: null };
    },
    abort: async (id) => void log.push(`abort ${id.slice(-1)}`),
    hash: async (file, onProgress) => {
      if (faults.hash) throw faults.hash;
      onProgress(file.size);
      return `hash of ${file.name}`;
    },
    isFinal: (error) => error instanceof Final,
    nowMs: () => clock.ms,
    wait: async (ms) => void waits.push(ms),
  };
  return { queue: new UploadQueue(transport), log, puts, waits, clock, faults };
}

const fileOf = (name: string, size: number): SendableFile => {
  const blob = new Blob([new Uint8Array(size)]);
  return { name, size, lastModified: 1, slice: (from, to) => blob.slice(from, to) };
};
const plain = (file: SendableFile) => [{ file, details: {} }];
/** Lets everything that is ready run: a turn of the loop, not a length of time. */
const settle = () => new Promise((resolve) => setImmediate(resolve));
const goingOf = (puts: Put[]) => puts.filter(({ signal }) => !signal.aborted).map(({ url }) => url);

describe('the upload queue', () => {
  it('sends every byte once, in parts, and completes with the checksum', async () => {
    const { queue, puts, log } = makeTransport();
    await queue.add(plain(fileOf('gales_211.wav', 25)));
    await settle();
    expect(puts.map(({ part }) => part.size)).toEqual([10, 10, 5]);
    puts.forEach((put) => put.take());
    await settle();
    expect(queue.items()[0]).toMatchObject({ state: 'sent', bytesSent: 25, bytesHashed: 25 });
    expect(log).toContain('record 3 etag of part/3 5');
    expect(log.at(-1)).toBe('complete hash of gales_211.wav');
  });

  it('has four parts on their way over all files, and takes the files in their order', async () => {
    const { queue, puts } = makeTransport();
    await queue.add([...plain(fileOf('a.wav', 30)), ...plain(fileOf('b.wav', 30))]);
    await settle();
    expect(puts).toHaveLength(4);
    puts[0].take();
    await settle();
    expect(puts).toHaveLength(5);
    expect(queue.items().map(({ state }) => state)).toEqual(['sending', 'sending']);
  });

  it('sends only what is missing of an upload that was broken off', async () => {
    const { queue, puts } = makeTransport({ done: [1, 3], resumed: true });
    await queue.add(plain(fileOf('a.wav', 30)));
    await settle();
    expect(puts.map(({ url }) => url)).toEqual(['part/2']);
    expect(queue.items()[0]).toMatchObject({ resumedBytes: 20, bytesSent: 20 });
  });

  it('completes at once when all parts are there already', async () => {
    const { queue, puts } = makeTransport({ done: [1, 2, 3], resumed: true });
    await queue.add(plain(fileOf('a.wav', 30)));
    await settle();
    expect(puts).toHaveLength(0);
    expect(queue.items()[0].state).toBe('sent');
  });

  it('tries a broken part again, after longer waits, with a fresh address', async () => {
    const { queue, puts, waits, log } = makeTransport();
    await queue.add(plain(fileOf('a.wav', 10)));
    await settle();
    puts[0].break();
    await settle();
    puts[1].break();
    await settle();
    expect(waits).toEqual([1000, 2000]);
    expect(log.filter((line) => line.startsWith('sign'))).toHaveLength(3);
    puts[2].take();
    await settle();
    expect(queue.items()[0].state).toBe('sent');
  });

  it('says what broke and what is kept after the last attempt, and goes on from there', async () => {
    const { queue, puts } = makeTransport();
    await queue.add(plain(fileOf('a.wav', 20)));
    await settle();
    puts[0].take();
    puts[1].break();
    await settle();
    for (let attempt = 2; attempt <= 6; attempt++) {
      puts.at(-1)?.break();
      await settle();
    }
    expect(queue.items()[0]).toMatchObject({
      state: 'failed',
      bytesSent: 10,
      message: 'The connection to storage broke off. 10 B of 20 B are kept.',
    });
    await queue.resume('upload-1');
    await settle();
    expect(queue.items()[0]).toMatchObject({ state: 'sending', message: null });
  });

  it('does not try again what the server refuses for good', async () => {
    const { queue, puts, waits, faults } = makeTransport();
    faults.record = new Final('This upload was given up. Pick the file again to begin anew.');
    await queue.add(plain(fileOf('a.wav', 10)));
    await settle();
    puts[0].take();
    await settle();
    expect(waits).toEqual([]);
    expect(queue.items()[0]).toMatchObject({ state: 'failed', message: faults.record.message });
  });

  it('stops what is on its way when paused, keeps what arrived, and sends the rest when resumed', async () => {
    const { queue, puts } = makeTransport();
    await queue.add(plain(fileOf('a.wav', 30)));
    await settle();
    puts[0].take();
    await settle();
    puts[1].progress(7);
    queue.pause('upload-1');
    await settle();
    expect(goingOf(puts)).toEqual([]);
    expect(queue.items()[0]).toMatchObject({ state: 'paused', bytesSent: 10 });
    await queue.resume('upload-1');
    await settle();
    expect(goingOf(puts)).toEqual(['part/2', 'part/3']);
    puts.slice(3).forEach((put) => put.take());
    await settle();
    expect(queue.items()[0]).toMatchObject({ state: 'sent', bytesSent: 30 });
  });

  it('gives the places of a paused file to the next one', async () => {
    const { queue, puts } = makeTransport();
    await queue.add([...plain(fileOf('a.wav', 40)), ...plain(fileOf('b.wav', 10))]);
    await settle();
    expect(puts).toHaveLength(4);
    queue.pause('upload-1');
    await settle();
    expect(goingOf(puts)).toEqual(['part/1']);
  });

  it('gives a cancelled file up at the server and forgets it', async () => {
    const { queue, log, puts } = makeTransport();
    await queue.add(plain(fileOf('a.wav', 30)));
    await settle();
    await queue.cancel('upload-1');
    expect(goingOf(puts)).toEqual([]);
    expect(queue.items()).toEqual([]);
    expect(log.at(-1)).toBe('abort 1');
  });

  it('refuses one file with the server’s sentence and sends the others', async () => {
    const { queue, puts } = makeTransport();
    await queue.add([...plain(fileOf('empty.wav', 0)), ...plain(fileOf('a.wav', 10))]);
    await settle();
    expect(queue.items()[0]).toMatchObject({ state: 'refused', message: '"empty.wav" is empty.' });
    expect(puts).toHaveLength(1);
  });

  it('fails a file that cannot be read to its end, and says so', async () => {
    const { queue, faults } = makeTransport();
    faults.hash = new Error('NotReadableError');
    await queue.add(plain(fileOf('a.wav', 10)));
    await settle();
    expect(queue.items()[0].state).toBe('failed');
    expect(queue.items()[0].message).toContain('could not be read to its end (NotReadableError)');
  });

  it('asks for the completion again when its answer is lost', async () => {
    const { queue, puts, faults, waits } = makeTransport();
    faults.complete = [new Error('offline')];
    await queue.add(plain(fileOf('a.wav', 10)));
    await settle();
    puts[0].take();
    await settle();
    expect(waits).toEqual([1000]);
    expect(queue.items()[0].state).toBe('sent');
  });

  it('counts totals and the rate of the last seconds', async () => {
    const { queue, puts, clock } = makeTransport({ partBytes: 1000 });
    await queue.add(plain(fileOf('a.wav', 4000)));
    await settle();
    puts[0].progress(0);
    clock.ms = 2000;
    puts[0].progress(500);
    puts[1].progress(500);
    expect(queue.totals()).toEqual({ bytes: 4000, bytesSent: 1000, bytesPerSecond: 500, underWay: 1 });
  });
});

describe('progress in words', () => {
  it('names bytes, rate and time left, and no rate before one is known', () => {
    expect(progressText(24e6, 96e6, 6e6)).toBe('24.0 MB of 96.0 MB, 6.0 MB/s, 0:12 left');
    expect(progressText(0, 96e6, null)).toBe('0 B of 96.0 MB');
    expect(
      rateOf([
        { atMs: 0, bytes: 0 },
        { atMs: 100, bytes: 50 },
      ]),
    ).toBeNull();
  });
});
