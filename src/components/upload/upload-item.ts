/** What the upload queue knows of one file, and how it says where it stands. */
import type { Upload } from '@/domain/api/deliverables.ts';
import { formatBytes, formatDuration } from '@/domain/figures-text.ts';

/** The part of a browser's File that sending needs. */
export interface SendableFile {
  readonly name: string;
  readonly size: number;
  readonly lastModified: number;
  slice(start: number, end: number): Blob;
}

/**
 * waiting: not begun; sending: parts go; paused: by the person; joining: all parts are there, the checksum is told;
 * sent: storage has it whole; failed: can be tried again with what is kept; refused: cannot, whatever is tried.
 */
export type UploadState = 'waiting' | 'sending' | 'paused' | 'joining' | 'sent' | 'failed' | 'refused';

export interface UploadItem {
  readonly key: string;
  readonly fileName: string;
  readonly byteSize: number;
  readonly state: UploadState;
  /** Bytes that storage has, and of parts on their way those that left. */
  readonly bytesSent: number;
  /** Bytes that the checksum has read. */
  readonly bytesHashed: number;
  readonly deliverableId: string | null;
  /** It goes on from an upload that was broken off; so many bytes were there already. */
  readonly resumedBytes: number;
  /** What went wrong, what is kept, what to do; or that the same content was delivered before. */
  readonly message: string | null;
  readonly alreadyDelivered: { id: string; fileName: string; createdAt: string } | null;
}

/** Bytes of part `number` (from 1) of an upload. */
export const partRange = (
  upload: Pick<Upload, 'partBytes' | 'byteSize'>,
  number: number,
): [number, number] => [
  (number - 1) * upload.partBytes,
  Math.min(number * upload.partBytes, upload.byteSize),
];

export interface Sample {
  atMs: number;
  bytes: number;
}

/** Bytes per second over the samples kept; `null` until half a second has been seen. */
export function rateOf(samples: readonly Sample[]): number | null {
  const first = samples[0];
  const last = samples[samples.length - 1];
  if (!first || !last || last.atMs - first.atMs < 500) return null;
  return Math.max(0, ((last.bytes - first.bytes) * 1000) / (last.atMs - first.atMs));
}

/** Work that is still going on and would be lost from sight if the page closed. */
export const isUnderWay = ({ state }: Pick<UploadItem, 'state'>): boolean =>
  state === 'waiting' || state === 'sending' || state === 'joining';

/** '24 MB of 96 MB', with rate and time left where they are known. */
export function progressText(done: number, total: number, bytesPerSecond: number | null): string {
  const parts = [`${formatBytes(done)} of ${formatBytes(total)}`];
  if (bytesPerSecond && bytesPerSecond > 0 && done < total)
    parts.push(`${formatBytes(bytesPerSecond)}/s`, `${formatDuration((total - done) / bytesPerSecond)} left`);
  return parts.join(', ');
}
