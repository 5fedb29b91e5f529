/** The page that the browser's row runs in: the bench's own workers, fed from a file that was picked. */
import type { WorkerAnswer, WorkerAsk } from '../../src/components/bench/measure-worker.ts';

export interface Together {
  /** From the first question to the last answer. */
  seconds: number;
  integratedLufs: (number | null)[];
  durationSeconds: number[];
}

declare global {
  interface Window {
    measureTogether: (count: number) => Promise<Together>;
  }
}

const idle: Worker[] = [];

function ask(worker: Worker, file: File): Promise<Extract<WorkerAnswer, { kind: 'measured' }>> {
  return new Promise((resolve, reject) => {
    worker.onerror = (event) => reject(new Error(`The worker failed: ${event.message}`));
    worker.onmessage = ({ data }: MessageEvent<WorkerAnswer>) => {
      if (data.kind === 'progress') return;
      if (data.kind === 'measured') resolve(data);
      else reject(new Error(`The worker answered ${JSON.stringify(data)}`));
    };
    worker.postMessage({ kind: 'file', file } satisfies WorkerAsk);
  });
}

/** The picked file in so many workers at once, each reading it for itself. Workers stay for the next call. */
window.measureTogether = async (count) => {
  const file = document.querySelector('input')?.files?.[0];
  if (!file) throw new Error('No file was picked.');
  while (idle.length < count) idle.push(new Worker('/measure-worker.js', { type: 'module' }));
  const began = performance.now();
  const answers = await Promise.all(idle.slice(0, count).map((worker) => ask(worker, file)));
  const measurements = answers.map(({ measured }) => measured.measurement);
  return {
    seconds: (performance.now() - began) / 1000,
    integratedLufs: measurements.map(({ figures }) => figures.loudness.integratedLufs),
    durationSeconds: measurements.map(({ format }) => format.durationSeconds),
  };
};
