/** How a file is cut into parts for a multipart upload, and which file names are taken. */
import { maximumFileBytes } from './api/deliverables.ts';

/** Limits of Amazon S3 multipart uploads ("Amazon S3 multipart upload limits"): 10,000 parts; 5 MiB is the least, we use 8. */
const leastPartBytes = 8 * 1024 ** 2;
const mostParts = 10_000;

export interface UploadPlan {
  partBytes: number;
  partCount: number;
}

/** Whole MiB per part, 8 at least, and 10,000 parts at most, for 1 byte to 64 GiB. Throws RangeError outside of that. */
export function planUpload(byteSize: number): UploadPlan {
  if (!Number.isSafeInteger(byteSize) || byteSize < 1 || byteSize > maximumFileBytes)
    throw new RangeError(`No upload plan for ${byteSize} bytes`);
  const mebibyte = 1024 ** 2;
  const partBytes = Math.max(leastPartBytes, Math.ceil(byteSize / mostParts / mebibyte) * mebibyte);
  return { partBytes, partCount: Math.ceil(byteSize / partBytes) };
}

/** Bytes that part `number` (from 1) of this file has to have; the last part is the rest. */
export function partSize(byteSize: number, plan: UploadPlan, number: number): number {
  return number < plan.partCount ? plan.partBytes : byteSize - (plan.partCount - 1) * plan.partBytes;
}

/** Why a file cannot be taken, as one sentence that says what to do; `null` when it can. */
export function whyNotUploadable(fileName: string, byteSize: number): string | null {
  const name = fileName.trim();
  if (name === '') return 'The file has no name. Name it after the programme and try again.';
  if (name.length > 255)
    return `The file name has ${name.length} characters; 255 are the most. Shorten it and try again.`;

  if (/[\u0000-\u001f\u007f\u202a-\u202e\u2066-\u2069]/.test(name))
    return 'The file name holds control characters that nobody can see. Rename the file and try again.';
  if (/[/\\]/.test(name)) return 'The file name holds a slash. Give the name alone, without folders.';
  if (/^\.+$/.test(name) || name.startsWith('.'))
    return `"${name}" begins with a dot: that is a hidden file of the system, not a master. Pick the audio file itself.`;
  if (byteSize === 0) return `"${name}" is empty (0 bytes). Export it again and check that the export ended.`;
  if (byteSize > maximumFileBytes)
    return `"${name}" has ${(byteSize / 1024 ** 3).toFixed(1)} GiB; 64 GiB are the most for one file. Deliver it in parts.`;
  return null;
}
