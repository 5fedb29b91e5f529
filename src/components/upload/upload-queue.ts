import type { Upload } from '@/domain/api/deliverables.ts';
import { formatBytes } from '@/domain/figures-text.ts';
import { isUnderWay, partRange, rateOf, type Sample, type UploadItem } from './upload-item.ts';
import type { NewFile, UploadTransport } from './upload-transport.ts';

const partsAtOnce = 4;
const signedAtOnce = 8;
const attempts = 6;
const rateWindowMs = 8000;
const tellEveryMs = 200;

interface Entry {
  item: UploadItem;
  source: NewFile;
  upload: Upload | null;
  done: Set<number>;
  /** Parts on their way, with the bytes of each that left. */
  going: Map<number, number>;
  urls: Map<number, string>;
  signing: Promise<void> | null;
  hash: Promise<string> | null;
  /** Ends whatever this entry has on its way. */
  stop: AbortController;
}

export interface Totals {
  bytes: number;
  bytesSent: number;
  bytesPerSecond: number | null;
  underWay: number;
}

/**
 * Sends many files in parts straight to storage: a few parts at once over all files, files in their order. Nothing of it
 * needs a browser. What a person sees of it is `items()`, told through `subscribe`.
 */
export class UploadQueue {
  private entries: Entry[] = [];
  private snapshot: readonly UploadItem[] = [];
  private readonly listeners = new Set<() => void>();
  private hashing: Promise<unknown> = Promise.resolve();
  private samples: Sample[] = [];
  private movedBytes = 0;
  private toldAtMs = 0;
  private count = 0;

  constructor(private readonly transport: UploadTransport) {}

  subscribe = (listener: () => void): (() => void) => {
    this.listeners.add(listener);
    return () => void this.listeners.delete(listener);
  };
  items = (): readonly UploadItem[] => this.snapshot;

  totals(): Totals {
    const counted = this.entries.map(({ item }) => item).filter(({ state }) => state !== 'refused');
    return {
      bytes: counted.reduce((sum, { byteSize }) => sum + byteSize, 0),
      bytesSent: counted.reduce((sum, { bytesSent }) => sum + bytesSent, 0),
      bytesPerSecond: rateOf(this.samples),
      underWay: counted.filter(isUnderWay).length,
    };
  }

  /** Takes files and begins to send; settles when the server has answered for all of them. */
  async add(files: NewFile[]): Promise<void> {
    const entries = files.map((source): Entry => {
      const { name, size } = source.file;
      const key = `upload-${++this.count}`;
      const item: UploadItem = {
        key,
        fileName: name,
        byteSize: size,
        state: 'waiting',
        bytesSent: 0,
        bytesHashed: 0,
        deliverableId: null,
        resumedBytes: 0,
        message: null,
        alreadyDelivered: null,
      };
      return {
        item,
        source,
        upload: null,
        done: new Set(),
        going: new Map(),
        urls: new Map(),
        signing: null,
        hash: null,
        stop: new AbortController(),
      };
    });
    this.entries.push(...entries);
    this.tell();
    await this.begin(entries);
  }

  pause(key: string): void {
    const entry = this.find(key);
    if (!entry || entry.item.state !== 'sending') return;
    this.halt(entry);
    this.change(entry, { state: 'paused' });
    this.pump();
  }

  /** Goes on with what was paused or failed. After a failure the server says anew which parts it has. */
  async resume(key: string): Promise<void> {
    const entry = this.find(key);
    if (!entry) return;
    entry.stop = new AbortController();
    if (entry.item.state === 'paused') {
      this.change(entry, { state: 'sending' });
      this.readThrough(entry);
      this.pump();
    } else if (entry.item.state === 'failed') {
      this.change(entry, { state: 'waiting', message: null });
      await this.begin([entry]);
    }
  }

  pauseAll(): void {
    for (const { item } of this.entries) this.pause(item.key);
  }
  async resumeAll(): Promise<void> {
    await Promise.all(
      this.snapshot.filter(({ state }) => state === 'paused').map(({ key }) => this.resume(key)),
    );
  }

  /** Gives a file up and forgets it; what storage has of it is dropped. Rejects when the server could not be told. */
  async cancel(key: string): Promise<void> {
    const entry = this.find(key);
    if (!entry || entry.item.state === 'sent' || entry.item.state === 'joining') return;
    this.halt(entry);
    this.entries = this.entries.filter((one) => one !== entry);
    this.tell();
    this.pump();
    if (entry.upload) await this.transport.abort(entry.upload.deliverableId);
  }

  /** Forgets a row that needs nothing more. */
  forget(key: string): void {
    this.entries = this.entries.filter(
      ({ item }) => item.key !== key || !['sent', 'refused'].includes(item.state),
    );
    this.tell();
  }

  private find(key: string): Entry | undefined {
    return this.entries.find(({ item }) => item.key === key);
  }

  private async begin(entries: Entry[]): Promise<void> {
    // The contract takes a hundred files in one request.
    for (let from = 0; from < entries.length; from += 100) {
      const some = entries.slice(from, from + 100);
      try {
        const answers = await this.transport.begin(some.map(({ source }) => source));
        some.forEach((entry, i) => {
          const answer = answers.find(({ id }) => id === String(i));
          if (!answer) this.fail(entry, new Error('The server did not answer for this file. Try again.'));
          else if (answer.ok) this.begun(entry, answer.value);
          else if (answer.error.code === 'unavailable') this.fail(entry, new Error(answer.error.message));
          else this.change(entry, { state: 'refused', message: answer.error.message });
        });
      } catch (error) {
        for (const entry of some) this.fail(entry, error);
      }
    }
    this.pump();
  }

  private begun(entry: Entry, upload: Upload): void {
    if (!this.entries.includes(entry)) {
      // Cancelled before the server answered: nothing may be left lying there.
      void this.transport.abort(upload.deliverableId).catch(() => undefined);
      return;
    }
    entry.upload = upload;
    entry.done = new Set(upload.partsDone);
    entry.urls.clear();
    const resumedBytes = upload.resumed ? this.arrived(entry) : 0;
    this.change(entry, {
      state: 'sending',
      deliverableId: upload.deliverableId,
      resumedBytes,
      bytesSent: this.arrived(entry),
    });
    this.readThrough(entry);
  }

  /** Reads the file once for its checksum; one file at a time, so that the disk serves one reader beside the parts. */
  private readThrough(entry: Entry): void {
    if (entry.hash) return;
    const { signal } = entry.stop;
    const hash = this.hashing.then(() => {
      signal.throwIfAborted();
      return this.transport.hash(
        entry.source.file,
        (bytes) => this.change(entry, { bytesHashed: bytes }, 'progress'),
        signal,
      );
    });
    this.hashing = hash.catch(() => undefined);
    entry.hash = hash;
    hash.catch((error: unknown) => {
      entry.hash = null;
      if (signal.aborted) return;
      const why = error instanceof Error && error.message ? ` (${error.message})` : '';
      this.fail(
        entry,
        new Error(
          `The file could not be read to its end${why}. Has it been changed, moved, or its drive removed? What arrived is kept; pick the file again.`,
        ),
      );
    });
  }

  private arrived({ upload, done }: Entry): number {
    if (!upload) return 0;
    return [...done].reduce((sum, number) => {
      const [from, to] = partRange(upload, number);
      return sum + to - from;
    }, 0);
  }

  private nextPart(entry: Entry): number | null {
    if (!entry.upload || entry.item.state !== 'sending') return null;
    for (let number = 1; number <= entry.upload.partCount; number++)
      if (!entry.done.has(number) && !entry.going.has(number)) return number;
    return null;
  }

  /** Fills the free places with the next parts, files in their order. */
  private pump(): void {
    let busy = this.entries.reduce((sum, { going }) => sum + going.size, 0);
    for (const entry of this.entries) {
      for (
        let number = this.nextPart(entry);
        number !== null && busy < partsAtOnce;
        number = this.nextPart(entry)
      ) {
        entry.going.set(number, 0);
        busy++;
        void this.sendPart(entry, number, entry.stop.signal);
      }
      const { upload, item } = entry;
      if (upload && item.state === 'sending' && entry.done.size === upload.partCount) void this.join(entry);
    }
  }

  private async sendPart(entry: Entry, number: number, signal: AbortSignal): Promise<void> {
    const { upload } = entry;
    if (!upload) return;
    const [from, to] = partRange(upload, number);
    try {
      for (let attempt = 1; ; attempt++) {
        try {
          const url = await this.urlOf(entry, number);
          signal.throwIfAborted();
          const part = entry.source.file.slice(from, to);
          const etag = await this.transport.put(
            url,
            part,
            (bytes) => this.moved(entry, number, bytes),
            signal,
          );
          signal.throwIfAborted();
          await this.transport.record(upload.deliverableId, { number, etag, byteSize: to - from });
          break;
        } catch (error) {
          if (signal.aborted) return;
          // The address may have run out; the next attempt asks for a fresh one.
          entry.urls.delete(number);
          this.moved(entry, number, 0);
          if (attempt === attempts || this.transport.isFinal(error)) throw error;
          await this.transport.wait(1000 * 2 ** (attempt - 1), signal);
        }
      }
      if (signal.aborted) return;
      this.moved(entry, number, to - from);
      entry.going.delete(number);
      entry.done.add(number);
      this.change(entry, { bytesSent: this.sentOf(entry) });
    } catch (error) {
      if (signal.aborted) return;
      this.fail(entry, error);
    }
    this.pump();
  }

  /** The part's address; addresses are asked for a few parts at a time. */
  private async urlOf(entry: Entry, number: number): Promise<string> {
    const { upload } = entry;
    while (upload && !entry.urls.has(number)) {
      if (entry.signing) {
        await entry.signing;
        continue;
      }
      const wanted = [number];
      for (let next = number + 1; next <= upload.partCount && wanted.length < signedAtOnce; next++)
        if (!entry.done.has(next) && !entry.urls.has(next)) wanted.push(next);
      const asking = this.transport.sign(upload.deliverableId, wanted);
      entry.signing = asking.then(
        () => undefined,
        () => undefined,
      );
      try {
        for (const [n, url] of await asking) entry.urls.set(n, url);
        if (!entry.urls.has(number)) throw new Error('The server gave no address for a part.');
      } finally {
        entry.signing = null;
      }
    }
    return entry.urls.get(number) ?? '';
  }

  private async join(entry: Entry): Promise<void> {
    const { upload } = entry;
    if (!upload) return;
    this.change(entry, { state: 'joining' });
    try {
      const sha256 = await entry.hash;
      if (!sha256) return;
      const { alreadyDelivered } = await this.patiently(
        () => this.transport.complete(upload.deliverableId, sha256),
        entry,
      );
      this.change(entry, {
        state: 'sent',
        alreadyDelivered,
        message: alreadyDelivered
          ? `The same content was delivered before, as ${alreadyDelivered.fileName}. Both are kept; discard one if that was not meant.`
          : null,
      });
    } catch (error) {
      if (!entry.stop.signal.aborted) this.fail(entry, error);
    }
    this.pump();
  }

  /** Asks again after what may pass: a lost connection, a server that restarts. */
  private async patiently<T>(ask: () => Promise<T>, entry: Entry): Promise<T> {
    for (let attempt = 1; ; attempt++)
      try {
        return await ask();
      } catch (error) {
        if (attempt === attempts || this.transport.isFinal(error)) throw error;
        await this.transport.wait(1000 * 2 ** (attempt - 1), entry.stop.signal);
      }
  }

  private halt(entry: Entry): void {
    entry.stop.abort();
    entry.going.clear();
    entry.hash = null;
    this.change(entry, { bytesSent: this.sentOf(entry) }, 'progress');
  }

  private fail(entry: Entry, error: unknown): void {
    if (!this.entries.includes(entry) || entry.item.state === 'failed') return;
    this.halt(entry);
    const reason = error instanceof Error ? error.message : String(error);
    const kept = this.arrived(entry);
    const { byteSize } = entry.item;
    const keptText =
      kept > 0 && !/kept/.test(reason) ? ` ${formatBytes(kept)} of ${formatBytes(byteSize)} are kept.` : '';
    this.change(entry, { state: 'failed', bytesSent: kept, message: `${reason}${keptText}` });
  }

  private sentOf(entry: Entry): number {
    return this.arrived(entry) + [...entry.going.values()].reduce((sum, bytes) => sum + bytes, 0);
  }

  private moved(entry: Entry, number: number, bytes: number): void {
    const before = entry.going.get(number);
    if (before === undefined) return;
    entry.going.set(number, bytes);
    this.movedBytes += Math.max(0, bytes - before);
    const atMs = this.transport.nowMs();
    this.samples = [
      ...this.samples.filter((sample) => atMs - sample.atMs <= rateWindowMs),
      { atMs, bytes: this.movedBytes },
    ];
    this.change(entry, { bytesSent: this.sentOf(entry) }, 'progress');
  }

  private change(entry: Entry, changes: Partial<UploadItem>, kind: 'step' | 'progress' = 'step'): void {
    entry.item = { ...entry.item, ...changes };
    if (kind === 'progress' && this.transport.nowMs() - this.toldAtMs < tellEveryMs) return;
    this.tell();
  }

  private tell(): void {
    this.toldAtMs = this.transport.nowMs();
    this.snapshot = this.entries.map(({ item }) => item);
    for (const listener of this.listeners) listener();
  }
}
