/** What the upload queue asks of the world around it. */
import type { z } from 'zod';
import type {
  completeUploadResultSchema,
  createUploadsResultSchema,
  DeliverableDetails,
} from '@/domain/api/deliverables.ts';
import type { BenchFigures } from '@/domain/bench-figures.ts';
import type { SendableFile } from './upload-item.ts';

export interface NewFile {
  file: SendableFile;
  details: DeliverableDetails;
  /** What the bench measured of it before it was sent. */
  benchFigures?: BenchFigures;
}

/** Everything that the queue does outside of itself. All may reject; `isFinal` says what must not be tried again. */
export interface UploadTransport {
  begin(files: NewFile[]): Promise<z.output<typeof createUploadsResultSchema>['items']>;
  sign(deliverableId: string, numbers: number[]): Promise<Map<number, string>>;
  /** Sends one part to storage; answers with its ETag. */
  put(url: string, part: Blob, onProgress: (bytes: number) => void, signal: AbortSignal): Promise<string>;
  record(deliverableId: string, part: { number: number; etag: string; byteSize: number }): Promise<void>;
  complete(deliverableId: string, sha256: string): Promise<z.output<typeof completeUploadResultSchema>>;
  abort(deliverableId: string): Promise<void>;
  hash(file: SendableFile, onProgress: (bytes: number) => void, signal: AbortSignal): Promise<string>;
  isFinal(error: unknown): boolean;
  nowMs(): number;
  wait(ms: number, signal: AbortSignal): Promise<void>;
}
