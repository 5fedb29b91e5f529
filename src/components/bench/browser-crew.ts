/** Measures in Web Workers, one file in each, as many as there are cores. */
import { decodeInBrowser } from './browser-decoder.ts';
import { readCodedHead } from './coded-head.ts';
import { BenchProblem, type BenchResult, type Crew, type CrewOptions } from './crew.ts';
import { fileBytes } from './file-bytes.ts';
import type { WorkerAnswer, WorkerAsk } from './measure-worker.ts';

const makeWorker = () => new Worker(new URL('./measure-worker.ts', import.meta.url), { type: 'module' });

const warmed = 4;

export class BrowserCrew implements Crew {
  // A browser that hides its cores has at least two.
  readonly size = typeof navigator === 'undefined' ? 1 : navigator.hardwareConcurrency || 2;
  private idle: Worker[] = [];
  /** One decoded file in memory at a time. */
  private decoding: Promise<unknown> = Promise.resolve();

  /** Starts workers ahead of the first files, so that nothing is fetched once there are some; further ones come from the browser's cache. */
  warm(): void {
    while (this.idle.length < Math.min(this.size, warmed)) this.idle.push(makeWorker());
  }

  async measure(file: File, options: CrewOptions): Promise<BenchResult> {
    const end = await this.ask({ kind: 'file', file }, [], options);
    if (end.kind === 'measured') return { ...end, preview: null };
    const turn = this.decoding.then(() => this.measureDecoded(file, options));
    this.decoding = turn.catch(() => {});
    return turn;
  }

  private async measureDecoded(file: File, options: CrewOptions): Promise<BenchResult> {
    options.signal.throwIfAborted();
    options.onDecoding();
    const head = await readCodedHead(fileBytes(file));
    const { decoded, preview } = await decodeInBrowser(file, head, options.signal);
    const transfer = decoded.planar.map(({ buffer }) => buffer);
    const end = await this.ask({ kind: 'decoded', decoded }, transfer, options);
    if (end.kind !== 'measured') throw new Error('Decoded samples were not taken for such');
    return { ...end, preview };
  }

  /** One question to one worker. An abort ends the worker: it is the only way that stops it at once. */
  private ask(
    question: WorkerAsk,
    transfer: Transferable[],
    { onProgress, signal }: CrewOptions,
  ): Promise<Extract<WorkerAnswer, { kind: 'measured' | 'not-native' }>> {
    return new Promise((resolve, reject) => {
      signal.throwIfAborted();
      const worker = this.idle.pop() ?? makeWorker();
      const release = (again: boolean) => {
        signal.removeEventListener('abort', stop);
        worker.onmessage = worker.onerror = null;
        if (again) this.idle.push(worker);
        else worker.terminate();
      };
      const stop = () => {
        release(false);
        reject(signal.reason as Error);
      };
      worker.onmessage = ({ data }: MessageEvent<WorkerAnswer>) => {
        if (data.kind === 'progress') return onProgress(data.secondsDone, data.secondsTotal);
        release(data.kind !== 'trouble');
        if (data.kind === 'measured' || data.kind === 'not-native') resolve(data);
        else reject(new BenchProblem(data.message, data.kind === 'unreadable' ? 'file' : 'surroundings'));
      };
      worker.onerror = (event) => {
        event.preventDefault();
        release(false);
        reject(
          new BenchProblem(
            'The part of this page that measures could not be started, or ran out of memory. Reload the page and put the file on the bench again.',
            'surroundings',
          ),
        );
      };
      signal.addEventListener('abort', stop);
      worker.postMessage(question, transfer);
    });
  }
}
