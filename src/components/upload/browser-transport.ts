/** The upload queue's way to the server, to storage and to the checksum, in a browser. */
import { api, ApiProblem } from '@/components/live/api.ts';
import {
  completeUploadResultSchema,
  createUploadsResultSchema,
  signPartsResultSchema,
} from '@/domain/api/deliverables.ts';
import type { HashAnswer } from './hash-worker.ts';
import type { UploadTransport } from './upload-transport.ts';

const uploadPath = (deliverableId: string, rest = '') => `/api/v1/uploads/${deliverableId}${rest}`;

/** Storage's refusals by status; what is not here is a lost connection or storage's own trouble. */
function storageSentence(status: number): string {
  if (status === 0) return 'The connection to storage broke off. Check the network, then try again.';
  if (status === 403) return 'Storage refused the part: its address had run out. Try again.';
  return `Storage answered ${status}. Try again in a minute.`;
}

/** XMLHttpRequest, because fetch tells nothing of what has left. */
function put(
  url: string,
  part: Blob,
  onProgress: (bytes: number) => void,
  signal: AbortSignal,
): Promise<string> {
  return new Promise((resolve, reject) => {
    const request = new XMLHttpRequest();
    const stop = () => request.abort();
    request.open('PUT', url);
    request.upload.onprogress = ({ loaded }) => onProgress(Math.min(loaded, part.size));
    request.onload = () => {
      const etag = request.getResponseHeader('ETag');
      if (request.status !== 200) reject(new Error(storageSentence(request.status)));
      else if (etag) resolve(etag);
      else
        reject(
          new Error(
            'Storage took the part and hid its receipt: its CORS rules must expose ETag. Tell your administrator.',
          ),
        );
    };
    request.onerror = () => reject(new Error(storageSentence(0)));
    request.onabort = () => reject(new DOMException('Stopped', 'AbortError'));
    request.onloadend = () => signal.removeEventListener('abort', stop);
    signal.addEventListener('abort', stop);
    request.send(part);
  });
}

function hash(file: Blob, onProgress: (bytes: number) => void, signal: AbortSignal): Promise<string> {
  return new Promise((resolve, reject) => {
    const worker = new Worker(new URL('./hash-worker.ts', import.meta.url), { type: 'module' });
    const end = (settle: () => void) => {
      worker.terminate();
      signal.removeEventListener('abort', stop);
      settle();
    };
    const stop = () => end(() => reject(new DOMException('Stopped', 'AbortError')));
    worker.onmessage = ({ data }: MessageEvent<HashAnswer>) => {
      if ('bytes' in data) onProgress(data.bytes);
      else if ('sha256' in data) end(() => resolve(data.sha256));
      else end(() => reject(new Error(data.error)));
    };
    worker.onerror = ({ message }) =>
      end(() => reject(new Error(message || 'the checksum could not be started')));
    signal.addEventListener('abort', stop);
    worker.postMessage(file);
  });
}

export const browserTransport: UploadTransport = {
  async begin(files) {
    const answer = await api.send(
      'POST',
      '/api/v1/uploads',
      {
        files: files.map(({ file, details, benchFigures }) => ({
          fileName: file.name,
          byteSize: file.size,
          lastModifiedMs: file.lastModified,
          details,
          benchFigures,
        })),
      },
      createUploadsResultSchema,
    );
    return answer.items;
  },
  async sign(deliverableId, numbers) {
    const { items } = await api.send(
      'POST',
      uploadPath(deliverableId, '/parts'),
      { numbers },
      signPartsResultSchema,
    );
    return new Map(items.map(({ number, url }) => [number, url]));
  },
  put,
  async record(deliverableId, part) {
    await api.send('PUT', uploadPath(deliverableId, '/parts'), part);
  },
  complete: (deliverableId, sha256) =>
    api.send('POST', uploadPath(deliverableId, '/complete'), { sha256 }, completeUploadResultSchema),
  async abort(deliverableId) {
    await api.send('DELETE', uploadPath(deliverableId));
  },
  hash: (file, onProgress, signal) =>
    file instanceof Blob
      ? hash(file, onProgress, signal)
      : Promise.reject(new Error('this is no file of the browser')),
  isFinal: (error) =>
    error instanceof ApiProblem && error.status > 0 && error.status < 500 && error.status !== 429,
  nowMs: () => performance.now(),
  wait: (ms, signal) =>
    new Promise((resolve, reject) => {
      const timer = setTimeout(resolve, ms);
      signal.addEventListener('abort', () => {
        clearTimeout(timer);
        reject(new DOMException('Stopped', 'AbortError'));
      });
    }),
};
