/**
 * A pipe that a child process writes samples to, emptied by a thread of its own: Node's streams cost as much as decoding
 * does, and reads that block this thread would keep it from everything else. The thread's buffers also let the decoder run
 * on while a block is measured.
 */
import { execFile, spawn } from 'node:child_process';
import { closeSync, openSync } from 'node:fs';
import { rm } from 'node:fs/promises';
import { join } from 'node:path';
import { promisify } from 'node:util';
import { Worker } from 'node:worker_threads';
import { z } from 'zod';

const run = promisify(execFile);

const slots = 4;
const slotBytes = 256 * 1024;

/** The most that Linux lets a user's pipe hold (fs.pipe-max-size); a pipe is made with a sixteenth. */
const pipeBytes = 1024 ** 2;
/** F_SETPIPE_SZ, which Node has not; perl is in every Debian. */
const widen = `fcntl(STDOUT, 1031, ${pipeBytes}) or exit 1`;
/**
 * Rest after a read, in which a decoder fills less than a wide pipe: whoever always waits for the next bytes is woken by
 * each write, and waking costs the writer a fifth of its speed (measured here).
 */
const napMilliseconds = 1;

/** Per slot 1 while its bytes are being used, then one number that grows with each read. */
const heardAt = slots;
const stateNumbers = slots + 1;

/** Fills one slot after another, whole but for the last. A text, since no bundle and no test runner need find it so. */
const reader = `
  const { parentPort, workerData: { fd, slots, size, memory, state, heardAt, nap } } = require('node:worker_threads');
  const { readSync } = require('node:fs');
  const bytes = new Uint8Array(memory);
  const words = new Int32Array(state);
  for (let slot = 0, ended = false; !ended; slot = (slot + 1) % slots) {
    Atomics.wait(words, slot, 1);
    let held = 0;
    while (held < size) {
      const got = readSync(fd, bytes, slot * size + held, size - held, null);
      const heard = Atomics.add(words, heardAt, 1) + 1;
      if (got === 0) { ended = true; break; }
      const isDrained = got < size - held;
      held += got;
      if (nap > 0 && isDrained) Atomics.wait(words, heardAt, heard, nap);
    }
    Atomics.store(words, slot, 1);
    parentPort.postMessage({ slot, held, ended });
  }
`;
const filledSchema = z.object({ slot: z.number().int(), held: z.number().int(), ended: z.boolean() });
type Filled = z.infer<typeof filledSchema>;

export class SamplePipe {
  readonly #memory: Uint8Array;
  readonly #words: Int32Array;
  readonly #thread: Worker;
  readonly #filled: Filled[] = [];
  #wake: (() => void) | null = null;
  #failure: Error | null = null;
  #inUse: number | null = null;
  #ended = false;

  private constructor(
    private readonly readFd: number,
    /** For the child's standard output; to be closed here once the child has it. */
    readonly writeFd: number,
    private readonly size: number,
    isWide: boolean,
  ) {
    const memory = new SharedArrayBuffer(slots * size);
    const state = new SharedArrayBuffer(4 * stateNumbers);
    this.#memory = new Uint8Array(memory);
    this.#words = new Int32Array(state);
    const workerData = { fd: readFd, slots, size, memory, state, heardAt, nap: isWide ? napMilliseconds : 0 };
    this.#thread = new Worker(reader, { eval: true, execArgv: [], env: {}, workerData });
    this.#thread.on('message', (raw) => {
      this.#filled.push(filledSchema.parse(raw));
      this.#wake?.();
    });
    this.#thread.on('error', (error: Error) => {
      this.#failure = error;
      this.#wake?.();
    });
  }

  /** `folder`: private; the pipe has a name in it for a moment. `frameBytes`: blocks hold whole frames. Throws the system's errors. */
  static async open(folder: string, frameBytes: number): Promise<SamplePipe> {
    const path = join(folder, 'samples');
    await run('mkfifo', ['-m', '600', path]);
    try {
      // Open both ways, so that neither end waits for the other.
      const both = openSync(path, 'r+');
      const [readFd, writeFd] = [openSync(path, 'r'), openSync(path, 'w')];
      closeSync(both);
      const size = Math.max(1, Math.floor(slotBytes / frameBytes)) * frameBytes;
      return new SamplePipe(readFd, writeFd, size, await isWidened(writeFd));
    } finally {
      await rm(path);
    }
  }

  closeWriter(): void {
    closeSync(this.writeFd);
  }

  /** Grows with whatever comes. */
  get heard(): number {
    return Atomics.load(this.#words, heardAt);
  }

  /** The next bytes, good until the next call; `null` once every writer has closed or died. Throws the system's errors. */
  async next(): Promise<Uint8Array | null> {
    if (this.#inUse !== null) {
      Atomics.store(this.#words, this.#inUse, 0);
      Atomics.notify(this.#words, this.#inUse);
      this.#inUse = null;
    }
    if (this.#ended) return null;
    while (this.#filled.length === 0) {
      if (this.#failure) throw this.#failure;
      await new Promise<void>((resolve) => (this.#wake = resolve));
      this.#wake = null;
    }
    const { slot, held, ended } = this.#filled.shift() as Filled;
    this.#inUse = slot;
    this.#ended = ended;
    return this.#memory.subarray(slot * this.size, slot * this.size + held);
  }

  /** To be called when every writer is dead or about to be: only then does a read that waits come back. */
  async close(): Promise<void> {
    await this.#thread.terminate();
    closeSync(this.readFd);
  }
}

/** Whether the pipe could be made to hold more; it serves as it is, only slower, where it could not. */
const isWidened = (writeFd: number): Promise<boolean> =>
  new Promise((resolve) => {
    const perl = spawn('perl', ['-e', widen], { stdio: ['ignore', writeFd, 'ignore'] });
    perl.once('error', () => resolve(false));
    perl.once('close', (code) => resolve(code === 0));
  });
