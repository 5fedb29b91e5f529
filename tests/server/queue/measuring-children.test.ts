import { afterEach, describe, expect, it } from 'vitest';
import { measuringChildren, type MeasuringChildren } from '../../../src/server/queue/measuring-children.ts';
import type { Progress } from '../../../src/server/queue/progress.ts';
import { wholeFile } from '../../../src/engine/plan.ts';

let children: MeasuringChildren;
afterEach(() => {
  children.close();
  delete process.env.ODD_CHILD;
});

const open = (silenceMilliseconds?: number) =>
  (children = measuringChildren(new URL('./odd-child.mjs', import.meta.url), { silenceMilliseconds }));
const task = (fileName: string) => ({
  deliverableId: '00000000-0000-4000-8000-000000000001',
  organisationId: '00000000-0000-4000-8000-000000000002',
  storageKey: 'originals/1',
  fileName,
  byteSize: 1,
  sha256Declared: null,
  plan: wholeFile,
  parts: null,
});
const measure = (fileName: string, signal = new AbortController().signal, told: Progress[] = []) =>
  children.measure(task(fileName), { onProgress: (progress) => void told.push(progress), signal });

describe('a process that measures', () => {
  it('tells progress and the outcome, and takes the next file after it', async () => {
    open();
    const told: Progress[] = [];
    const first = await measure('answers', undefined, told);
    expect(told).toEqual([{ secondsDone: 1, secondsTotal: null }]);
    expect(first).toMatchObject({ kind: 'file', code: 'not-audio' });
    expect(await measure('answers')).toEqual(first);
  });

  it('is a death of its own when it dies, and the file beside it goes on', async () => {
    open();
    const [dead, gone, well] = await Promise.allSettled([
      measure('dies'),
      measure('leaves'),
      measure('answers'),
    ]);
    expect(dead).toMatchObject({ status: 'rejected', reason: { message: 'ended with SIGKILL' } });
    expect(gone).toMatchObject({ status: 'rejected', reason: { message: 'ended with status 7' } });
    expect(well.status).toBe('fulfilled');
    expect(await measure('answers')).toMatchObject({ kind: 'file' });
  });

  it('is ended when it gives no sign of life', async () => {
    open(300);
    await expect(measure('hangs')).rejects.toThrow('no sign of life');
  });

  it('is ended when it says what nobody understands', async () => {
    open();
    await expect(measure('babbles')).rejects.toThrow('nobody understands');
  });

  it('is ended when the worker has to leave, which is no death', async () => {
    open();
    const stop = new AbortController();
    const running = measure('hangs', stop.signal);
    stop.abort();
    expect(await running).toMatchObject({ kind: 'surroundings' });
    expect(await measure('answers', stop.signal)).toMatchObject({ kind: 'surroundings' });
  });

  it('is trouble of the surroundings when it does not even start, so that a broken build condemns no file', async () => {
    process.env.ODD_CHILD = 'broken';
    open();
    expect(await measure('answers')).toMatchObject({
      kind: 'surroundings',
      message: expect.stringMatching(/did not start: ended with status 3/),
    });
  });
});
