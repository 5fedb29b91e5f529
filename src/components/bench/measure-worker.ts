/** Web Worker: measures one file at a time by the engine that the service runs. Nothing leaves it but what it answers. */
// Vite builds a worker without the site's alias, so what it is made of is imported by relative paths.
import { openNative } from '../../engine/containers/open.ts';
import { measure, type Measured } from '../../engine/measure.ts';
import { UnreadableError, type SampleSource } from '../../engine/source.ts';
import { DecodedSource, type DecodedAudio } from './decoded-source.ts';
import { fileBytes } from './file-bytes.ts';

export type WorkerAsk = { kind: 'file'; file: Blob } | { kind: 'decoded'; decoded: DecodedAudio };
export type WorkerAnswer =
  | { kind: 'progress'; secondsDone: number; secondsTotal: number | null }
  | { kind: 'measured'; measured: Measured; seconds: number }
  /** None of the containers that are read natively. */
  | { kind: 'not-native' }
  /** The file's own fault, in a sentence. */
  | { kind: 'unreadable'; message: string }
  | { kind: 'trouble'; message: string };

const answer = (message: WorkerAnswer, transfer: Transferable[] = []) => postMessage(message, { transfer });
const tellEveryMs = 100;

async function work(ask: WorkerAsk): Promise<void> {
  const began = performance.now();
  const source: SampleSource | null =
    ask.kind === 'file' ? await openNative(fileBytes(ask.file)) : new DecodedSource(ask.decoded);
  if (!source) return answer({ kind: 'not-native' });
  let told = began;
  const onProgress = (secondsDone: number, secondsTotal: number | null) => {
    const now = performance.now();
    if (now - told < tellEveryMs) return;
    told = now;
    answer({ kind: 'progress', secondsDone, secondsTotal });
  };
  const [measured] = await measure(source, { onProgress });
  const { energy, truePeak, channelEnergy } = measured.series;
  answer(
    { kind: 'measured', measured, seconds: (performance.now() - began) / 1000 },
    [energy.buffer, truePeak.buffer, channelEnergy.buffer].filter((one) => one instanceof ArrayBuffer),
  );
}

function troubleOf(error: unknown): WorkerAnswer {
  if (error instanceof UnreadableError) return { kind: 'unreadable', message: error.message };
  const why = error instanceof Error ? error.message : String(error);
  const changed =
    (error instanceof DOMException && ['NotReadableError', 'NotFoundError'].includes(error.name)) ||
    why.includes('became shorter');
  return {
    kind: 'trouble',
    message: changed
      ? 'The file could not be read to its end. Is it a folder, or has it been changed, moved, or its drive removed? Put it on the bench again.'
      : `Measuring broke down (${why}). The other files go on; put this one on the bench again.`,
  };
}

addEventListener('message', ({ data }: MessageEvent<WorkerAsk>) => {
  work(data).catch((error: unknown) => answer(troubleOf(error)));
});
