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
const silenceMilliseconds = 5 * 60_000;
/** Heap of a child, MiB; audio buffers lie outside of it. */
const heapMebibytes = 1024;

export interface MeasuringChildren {
  measure: MeasureElsewhere;
  /** Ends the children that wait; the ones at work end with their `signal`. */
  close(): void;
}

/** `childFile` is the entry point that measures; it is run by the same Node with the same flags. */
export function measuringChildren(childFile: URL): MeasuringChildren {
  const idle: ChildProcess[] = [];
  let closed = false;

  const start = () =>
    fork(fileURLToPath(childFile), [], {
      execArgv: [...process.execArgv, `--max-old-space-size=${heapMebibytes}`],
      serialization: 'json',
    });

  const measure: MeasureElsewhere = (task, { onProgress, signal }) =>
    new Promise<MeasuringOutcome>((resolve, reject) => {
      if (signal.aborted) return resolve({ kind: 'surroundings', message: 'stopped before it began' });
      const child = idle.pop() ?? start();
      let silence: NodeJS.Timeout | undefined;
      const end = (how: () => void) => {
        clearTimeout(silence);
        signal.removeEventListener('abort', onAbort);
        child.removeAllListeners();
        how();
      };
      const die = (why: string) =>
        end(() => {
          child.kill('SIGKILL');
          reject(new Error(why));
        });
      const onAbort = () =>
        end(() => {
          child.kill('SIGKILL');
          resolve({ kind: 'surroundings', message: 'stopped before the end' });
        });
      const heard = () => {
        clearTimeout(silence);
        silence = setTimeout(() => die('gave no sign of life for five minutes'), silenceMilliseconds);
      };

      child.on('message', (raw) => {
        const parsed = fromChildSchema.safeParse(raw);
        if (!parsed.success) return die(`said what nobody understands: ${parsed.error.message}`);
        heard();
        const message = parsed.data;
        if (message.kind === 'progress') onProgress(message.progress);
        if (message.kind === 'outcome')
          end(() => {
            release(child);
            resolve(message.outcome);
          });
      });
      child.on('error', (error) => die(error.message));
      child.on('exit', (code, killedBy) =>
        end(() => reject(new Error(`ended with ${killedBy ?? `status ${code}`}`))),
      );
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
    child.on('error', (error) => log.warn({ err: error }, 'a waiting measuring child failed'));
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
