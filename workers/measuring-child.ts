// The process that measures, one file at a time, told by workers/measuring.ts; it ends when that ends.
import { measureObject } from '../src/server/services/measure-object.ts';
import { makeScratch } from '../src/server/queue/measuring-scratch.ts';
import { toChildSchema, type FromChild } from '../src/server/queue/measuring-contract.ts';

const progressEveryMilliseconds = 250;
const aliveEveryMilliseconds = 5_000;

const scratchDir = await makeScratch();
// A message that cannot be sent means what 'disconnect' below means, only sooner.
const tell = (message: FromChild) =>
  void process.send?.(message, undefined, undefined, (error) => {
    if (error) process.exit(1);
  });

/** Runs `tellIt` at most once per interval. */
function throttled<T>(milliseconds: number, tellIt: (value: T) => void): (value: T) => void {
  let last = -Infinity;
  return (value) => {
    const now = performance.now();
    if (now - last < milliseconds) return;
    last = now;
    tellIt(value);
  };
}

// Without its worker nobody waits for the figures, and somebody else measures the file anew.
process.on('disconnect', () => process.exit(1));
// Ctrl-C reaches the whole group; the worker decides how its children end.
process.on('SIGINT', () => {});
process.on('SIGTERM', () => {});

process.on('message', (raw) => {
  const { task } = toChildSchema.parse(raw);
  // So that whoever looks at the machine sees which file it is busy with.
  process.title = `plimsoll measuring ${task.deliverableId}`;
  void measureObject(task, {
    onProgress: throttled(progressEveryMilliseconds, (progress) => tell({ kind: 'progress', progress })),
    onRead: throttled<void>(aliveEveryMilliseconds, () => tell({ kind: 'alive' })),
    // Nothing ends early in here: the worker kills the process instead, which frees everything.
    signal: new AbortController().signal,
    scratchDir,
  }).then((outcome) => {
    process.title = 'plimsoll measuring nothing';
    tell({ kind: 'outcome', outcome });
  });
});

tell({ kind: 'ready' });
