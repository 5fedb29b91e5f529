/** Files that the engine does not read itself, decoded by what the browser brings: whole, in memory, on the page's own thread. */
import { formatBytes, formatRate } from '@/domain/figures-text.ts';
import type { CodedHead } from './coded-head.ts';
import { BenchProblem } from './crew.ts';
import type { DecodedAudio } from './decoded-source.ts';

/** Bytes of decoded samples that a page may hold: an hour of stereo at 48 kHz, for which Chromium takes 3.4 GB while it decodes. */
export const mostDecodedBytes = 1.4e9;
/** Bytes of a coded file where nothing tells how long it is. */
export const mostUnknownBytes = 100e6;
const usualRateHz = 48_000;

const onward =
  'Upload it, and the service decodes and measures it; or export a WAV, which is read here at any length.';

/** Why the file will not be tried in this browser; `null` where it will. */
export function tooLarge(byteSize: number, head: CodedHead | null): string | null {
  const decoded =
    head?.durationSeconds && head.audioChannels
      ? head.durationSeconds * (head.sampleRateHz ?? usualRateHz) * head.audioChannels * 4
      : null;
  if (decoded !== null)
    return decoded > mostDecodedBytes
      ? `Decoded, this file takes about ${formatBytes(decoded)} of memory; a browser is trusted here with ${formatBytes(mostDecodedBytes)}. ${onward}`
      : null;
  return byteSize > mostUnknownBytes
    ? `How long this file is could not be made out, and at ${formatBytes(byteSize)} it may not fit into a browser's memory decoded; up to ${formatBytes(mostUnknownBytes)} are tried. ${onward}`
    : null;
}

/** The sentence that stands beside figures of a file that the browser decoded. */
export function previewSentence(head: CodedHead | null, decodedRateHz: number): string {
  const rate =
    head?.sampleRateHz === null || head === null
      ? ` Its own sample rate could not be made out, so the browser converted it to ${formatRate(decodedRateHz)}.`
      : head.sampleRateHz !== decodedRateHz
        ? ` The browser converted it from ${formatRate(head.sampleRateHz)} to ${formatRate(decodedRateHz)}.`
        : '';
  return `A preview: decoded by this browser.${rate} The delivery is measured again by the service.`;
}

/** Samples of the whole file. Rejects with a BenchProblem where this browser cannot, or must not, decode it. */
export async function decodeInBrowser(
  file: File,
  head: CodedHead | null,
  signal: AbortSignal,
): Promise<{ decoded: DecodedAudio; preview: string }> {
  const large = tooLarge(file.size, head);
  if (large) throw new BenchProblem(large, 'file');
  const context = contextAt(head?.sampleRateHz ?? usualRateHz);
  const bytes = await file.arrayBuffer().catch(() => {
    throw new BenchProblem(
      'The file could not be read. Is it a folder, or has it been changed, moved, or its drive removed? Put it on the bench again.',
      'surroundings',
    );
  });
  signal.throwIfAborted();
  const buffer = await context.decodeAudioData(bytes).catch(() => {
    throw new BenchProblem(cannot(head), 'file');
  });
  signal.throwIfAborted();
  const { container = 'coded', codec = 'coded', bitDepth = null } = head ?? {};
  const planar = Array.from({ length: buffer.numberOfChannels }, (_, i) => buffer.getChannelData(i));
  return {
    decoded: { container, codec, bitDepth, sampleRateHz: buffer.sampleRate, planar },
    preview: previewSentence(head, buffer.sampleRate),
  };
}

/** A context resamples what it decodes to its own rate: it is given the file's, where the browser takes that. */
function contextAt(sampleRateHz: number): OfflineAudioContext {
  try {
    return new OfflineAudioContext(1, 1, sampleRateHz);
  } catch {
    return new OfflineAudioContext(1, 1, usualRateHz);
  }
}

const cannot = (head: CodedHead | null) =>
  head
    ? `This browser cannot decode this ${head.container} file${head.codec === 'coded' || head.codec === head.container ? '' : ` (${head.codec})`}; it may also be damaged. ${onward}`
    : 'This is no audio file that can be read here: it has neither the head of a WAV, RF64, BW64 or AIFF file nor anything that this browser can decode. Nothing was measured.';
