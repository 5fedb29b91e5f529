/**
 * Child processes that measure, one file each at a time. A process and not a thread, so that a file which kills whoever
 * measures it takes neither the queue's worker nor the file beside it along.
 */
import { fork, type ChildProcess } from 'node:child_process';
import { fileURLToPath } from 'node:url';
import { log } from '../log.ts';
import {
  fromChildSchema,
  type MeasureElsewhere,
  type MeasuringOutcome,
  type ToChild,
} from './measuring-contract.ts';

/** Neither progress nor a read for this long: it hangs. */
const longestSilenceMilliseconds = 5 * 60_000;
/** Heap of a child, MiB; audio buffers lie outside of it. */
const heapMebibytes = 1024;

export interface MeasuringChildren {
  measure: MeasureElsewhere;
  /** Ends the children that wait; the ones at work end with their `signal`. */
  close(): void;
}

/**
 * `childFile` is the entry point that measures; it is run by the same Node with the same flags. A child that ends before
 * it has loaded is trouble of the surroundings (a broken build), one that ends later died of its file. `onEnded` clears up
 * after a process, however it ended.
 */
export function measuringChildren(
  childFile: URL,
  { silenceMilliseconds = longestSilenceMilliseconds, onEnded = (_pid: number) => {} } = {},
): MeasuringChildren {
  const loaded = new WeakSet<ChildProcess>();
  const idle: ChildProcess[] = [];
  let closed = false;

  const start = () => {
    const child = fork(fileURLToPath(childFile), [], {
      execArgv: [...process.execArgv, `--max-old-space-size=${heapMebibytes}`],
      serialization: 'json',
    });
    // 'close' and not 'exit': that one is listened to by whoever waits for an outcome.
    child.on('close', () => {
      if (child.pid !== undefined) onEnded(child.pid);
    });
    return child;
  };

  const measure: MeasureElsewhere = (task, { onProgress, signal }) =>
    new Promise<MeasuringOutcome>((resolve, reject) => {
      if (signal.aborted) return resolve({ kind: 'surroundings', message: 'stopped before it began' });
      const child = idle.pop() ?? start();
      child.removeAllListeners('error');
      let silence: NodeJS.Timeout | undefined;
      const end = (how: () => void) => {
        clearTimeout(silence);
        signal.removeEventListener('abort', onAbort);
        for (const event of ['message', 'error', 'exit']) child.removeAllListeners(event);
        child.on('error', (error) =>
          log.warn({ err: error }, 'a measuring child that nobody waits for failed'),
        );
        how();
      };
      const die = (why: string) =>
        end(() => {
          child.kill('SIGKILL');
          if (loaded.has(child)) reject(new Error(why));
          else resolve({ kind: 'surroundings', message: `a measuring process did not start: ${why}` });
        });
      const onAbort = () =>
        end(() => {
          child.kill('SIGKILL');
          resolve({ kind: 'surroundings', message: 'stopped before the end' });
        });
      const heard = () => {
        clearTimeout(silence);
        // What has not loaded yet has no file to hang on.
        const most = loaded.has(child) ? silenceMilliseconds : longestSilenceMilliseconds;
        silence = setTimeout(() => die(`gave no sign of life for ${most / 1000} s`), most);
      };

      child.on('message', (raw) => {
        const parsed = fromChildSchema.safeParse(raw);
        if (!parsed.success) return die(`said what nobody understands: ${parsed.error.message}`);
        const message = parsed.data;
        if (message.kind === 'ready') loaded.add(child);
        heard();
        if (message.kind === 'progress') onProgress(message.progress);
        if (message.kind === 'outcome')
          end(() => {
            release(child);
            resolve(message.outcome);
          });
      });
      child.on('error', (error) => die(error.message));
      child.on('exit', (code, killedBy) => die(`ended with ${killedBy ?? `status ${code}`}`));
      signal.addEventListener('abort', onAbort);
      heard();
      const order: ToChild = { kind: 'measure', task };
      child.send(order, (error) => {
        if (error) die(error.message);
      });
    });

  function release(child: ChildProcess): void {
    if (closed || !child.connected) return void child.kill('SIGKILL');
    child.on('exit', () => {
      const at = idle.indexOf(child);
      if (at >= 0) idle.splice(at, 1);
    });
    idle.push(child);
  }

  return {
    measure,
    close() {
      closed = true;
      for (const child of idle.splice(0)) child.kill('SIGKILL');
    },
  };
}
