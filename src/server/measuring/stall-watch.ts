/** Ends a process that gives nothing for too long, also while this thread is blocked reading from it. */
import { Worker } from 'node:worker_threads';

/** Runs in the watching thread: it needs nothing but Node, and a bundle need not find it. */
const watcher = `
  const { workerData: { pid, state, seconds } } = require('node:worker_threads');
  const words = new Int32Array(state);
  let seen = -1, since = Date.now();
  setInterval(() => {
    const now = Atomics.load(words, 0);
    if (now !== seen) { seen = now; since = Date.now(); }
    else if (Date.now() - since > seconds * 1000) {
      Atomics.store(words, 1, 1);
      try { process.kill(pid, 'SIGKILL'); } catch {}
      process.exit();
    }
  }, Math.min(1000, seconds * 250));
`;

export class StallWatch {
  readonly #words: Int32Array;
  readonly #worker: Worker;

  constructor(pid: number, seconds: number) {
    const state = new SharedArrayBuffer(8);
    this.#words = new Int32Array(state);
    this.#worker = new Worker(watcher, { eval: true, workerData: { pid, state, seconds } });
    this.#worker.unref();
  }

  /** A sign of life. */
  touch(): void {
    Atomics.add(this.#words, 0, 1);
  }

  /** Whether the process was ended for giving nothing. */
  get stalled(): boolean {
    return Atomics.load(this.#words, 1) === 1;
  }

  async end(): Promise<void> {
    await this.#worker.terminate();
  }
}
