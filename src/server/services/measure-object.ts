/** Measures one stored object, or the several of a set: bytes in ranges, hash taken on the way, series put back. Knows no database. */
import { engineVersion } from '../../engine/figures.ts';
import { encodeSeries } from '../../engine/series.ts';
import { measure, type Measured, type MeasureOptions } from '../../engine/measure.ts';
import { joinMono } from '../../engine/containers/mono-set.ts';
import { openNative } from '../../engine/containers/open.ts';
import { UnreadableError, type ByteSource, type SampleSource } from '../../engine/source.ts';
import { measureSource } from '../measuring/measure-source.ts';
import type { MeasuringOutcome, MeasuringTask } from '../queue/measuring-contract.ts';
import type { Progress } from '../queue/progress.ts';
import { HashingSource, hashOfParts } from '../storage/hashing-source.ts';
import {
  headObject,
  ObjectMissing,
  objectSource,
  putObject,
  seriesKey,
  StorageTrouble,
} from '../storage/storage.ts';
import { planHash } from './plan-identity.ts';

const hashMismatch = {
  code: 'hash-mismatch',
  message:
    'The file that lies in storage is not the one that was sent: its SHA-256 differs. It was not measured. Upload it again.',
};
const missing = { code: 'missing', message: 'Storage does not hold this file any more. Upload it again.' };

/** Remembers trouble of storage, which a decoder between may wrap or take for the file's own. */
class WatchedSource implements ByteSource {
  readonly size: number;
  trouble: StorageTrouble | ObjectMissing | null = null;

  constructor(
    private readonly source: ByteSource,
    private readonly onRead: () => void,
  ) {
    this.size = source.size;
  }

  async read(offset: number, length: number): Promise<Uint8Array> {
    try {
      const bytes = await this.source.read(offset, length);
      this.onRead();
      return bytes;
    } catch (error) {
      if (error instanceof StorageTrouble || error instanceof ObjectMissing) this.trouble = error;
      throw error;
    }
  }
}

interface Options {
  onProgress: (progress: Progress) => void;
  /** A sign of life. */
  onRead: () => void;
  signal: AbortSignal;
  /** Where files that are not read natively are staged for the decoder. */
  scratchDir: string;
}

/**
 * Ends in an outcome and never throws: 'file' with a code and a sentence, 'surroundings' for storage, scratch space and
 * an abort, 'surprise' for what nobody foresaw.
 */
export async function measureObject(task: MeasuringTask, options: Options): Promise<MeasuringOutcome> {
  const began = performance.now();
  const opened: WatchedSource[] = [];
  const trouble = () => opened.find((source) => source.trouble)?.trouble;
  try {
    const files = task.parts ?? [task];
    const sources: HashingSource[] = [];
    for (const { storageKey } of files) {
      const head = await headObject(storageKey);
      if (!head) return { kind: 'file', ...missing, sha256: null };
      const watched = new WatchedSource(
        objectSource(storageKey, head.byteSize, options.signal),
        options.onRead,
      );
      opened.push(watched);
      sources.push(new HashingSource(watched));
    }
    const read = await readAll(task, sources, options);
    const failed = trouble();
    if (failed) throw failed;
    const hashes: string[] = [];
    for (const source of sources) hashes.push(await source.sha256());
    const sha256 = task.parts ? hashOfParts(hashes) : hashes[0];
    const other = files.some((file, i) => file.sha256Declared !== null && file.sha256Declared !== hashes[i]);
    if (other || sha256 === null) return { kind: 'file', ...hashMismatch, sha256 };
    if (!read.ok) return { kind: 'file', code: read.code, message: read.message, sha256 };
    const parametersHash = planHash(task.plan);
    const presentations = [];
    for (const [i, { presentation, measurement, series }] of read.measured.entries()) {
      const key = seriesKey(task.organisationId, task.deliverableId, engineVersion, parametersHash, i + 1);
      await putObject(key, encodeSeries(series));
      presentations.push({ presentation, ...measurement, seriesKey: key });
    }
    return {
      kind: 'measured',
      presentations,
      engineVersion,
      parametersHash,
      sha256,
      measuringSeconds: (performance.now() - began) / 1000,
    };
  } catch (error) {
    return troubleOf(trouble() ?? error, options.signal);
  }
}

/** The engine's answer; a file that it cannot read is an answer too, so that the hash is looked at all the same. */
async function readAll(
  task: MeasuringTask,
  sources: readonly ByteSource[],
  { onProgress, signal, scratchDir }: Options,
): Promise<{ ok: true; measured: Measured[] } | { ok: false; code: string; message: string }> {
  try {
    const how: MeasureOptions = {
      plan: task.plan,
      onProgress: (secondsDone, secondsTotal) => onProgress({ secondsDone, secondsTotal }),
      signal,
    };
    const measured = task.parts
      ? await measure(await openSet(task.parts, sources), how)
      : await measureSource(sources[0], task.fileName, { ...how, scratchDir });
    return { ok: true, measured };
  } catch (error) {
    if (error instanceof UnreadableError && !signal.aborted)
      return { ok: false, code: error.code, message: error.message };
    throw error;
  }
}

/** The files of a set as one source. Only files that are read natively: nobody delivers a set in coded ones. */
async function openSet(
  parts: NonNullable<MeasuringTask['parts']>,
  sources: readonly ByteSource[],
): Promise<SampleSource> {
  const opened: SampleSource[] = [];
  for (const [i, { fileName }] of parts.entries()) {
    const source = await openNative(sources[i]);
    if (!source)
      throw new UnreadableError(
        'not-audio',
        `${fileName} is no WAV or AIFF, which the files of a set must be. Discard the set, and deliver that file in another form.`,
      );
    opened.push(source);
  }
  return joinMono(
    opened,
    parts.map(({ speaker }) => speaker),
  );
}

function troubleOf(error: unknown, signal: AbortSignal): MeasuringOutcome {
  const message = error instanceof Error ? (error.stack ?? error.message) : String(error);
  if (signal.aborted) return { kind: 'surroundings', message: 'stopped before the end' };
  if (error instanceof ObjectMissing) return { kind: 'file', ...missing, sha256: null };
  // 'syscall' marks the system's own errors: scratch space full, ffmpeg not there.
  if (error instanceof StorageTrouble || (error instanceof Error && 'syscall' in error))
    return { kind: 'surroundings', message };
  return { kind: 'surprise', message };
}
