/** Times of a file as its people write them: timecode where a frame rate is known, else hours, minutes, seconds. */
import type { AudioFormat } from '../engine/figures.ts';
import {
  formatTimecode as formatFrames,
  framesOfSeconds,
  parseTimecode,
  secondsOfFrames,
  type FrameRateName,
} from '../engine/timecode.ts';
import { formatDuration, formatTimecode } from './figures-text.ts';

export interface FileClock {
  rate: FrameRateName | null;
  /** Of the file's first sample: frames from midnight where the rate is known, else seconds. */
  start: number;
}

export const plainClock: FileClock = { rate: null, start: 0 };

/** The file's own rate goes before a chosen one; a start that it tells counts under either. */
export function fileClock(
  format: Pick<AudioFormat, 'sampleRateHz' | 'startTimeReferenceSamples' | 'startTimecode' | 'frameRate'>,
  chosenRate: FrameRateName | null,
): FileClock {
  const rate = format.frameRate ?? chosenRate;
  const told = (format.startTimeReferenceSamples ?? 0) / format.sampleRateHz;
  if (rate === null) return { rate, start: told };
  const timecode =
    format.frameRate && format.startTimecode ? parseTimecode(format.startTimecode, rate) : null;
  return { rate, start: timecode && 'frames' in timecode ? timecode.frames : framesOfSeconds(told, rate) };
}

/** '10:00:01:12' or '00:00:01.500' of a moment, in seconds from the file's first sample. */
export const timeInFile = ({ rate, start }: FileClock, seconds: number): string =>
  rate === null
    ? formatTimecode(start + seconds)
    : formatFrames(start + framesOfSeconds(seconds, rate), rate);

/** The same without its last part, for an axis: '10:00:01', '1:30'. */
export const shortTimeInFile = (clock: FileClock, seconds: number): string =>
  clock.rate === null
    ? formatDuration(clock.start + seconds)
    : timeInFile(clock, seconds).replace(/[:;]\d\d$/, '');

/** Seconds from midnight, or from what the clock counts from, to the file's first sample. */
export const startSeconds = ({ rate, start }: FileClock): number =>
  rate === null ? start : secondsOfFrames(start, rate);

/**
 * Reads what a person typed to seconds from the file's first sample: timecode where a rate is known ('10:00:01:12'), a clock
 * time ('10:00:01.5', '1:30'), or plain seconds of the file ('90.5'). A sentence where it is none of these.
 */
export function readTimeInFile(clock: FileClock, text: string): { seconds: number } | { fault: string } {
  const typed = text.trim().replace(',', '.');
  const { rate, start } = clock;
  if (/^\d{1,6}(\.\d{1,6})?$/.test(typed)) return { seconds: Number(typed) };
  let seconds: number;
  const timecode = /^\d{1,2}:\d{2}:\d{2}$/.test(typed) ? `${typed}:00` : typed;
  if (rate !== null && /^\d{1,2}:\d{2}:\d{2}[:;.]\d{2}$/.test(timecode)) {
    const read = parseTimecode(timecode, rate);
    if ('fault' in read) return read;
    seconds = secondsOfFrames(read.frames - start, rate);
  } else {
    const parts = /^(?:(\d{1,2}):)?(\d{1,2}):(\d{2}(?:\.\d{1,6})?)$/.exec(typed);
    const [hours, minutes, rest] = (parts?.slice(1) ?? []).map((part) => Number(part ?? 0));
    if (!parts || minutes > 59 || rest >= 60)
      return {
        fault: rate
          ? 'Write a timecode as hours, minutes, seconds and frames (10:00:00:00), or seconds from the start of the file.'
          : 'Write a time as hours, minutes and seconds (00:01:30.000), or seconds from the start of the file.',
      };
    seconds = hours * 3600 + minutes * 60 + rest - startSeconds(clock);
  }
  if (seconds < -1e-9)
    return { fault: `The file begins at ${timeInFile(clock, 0)}; that is after this time.` };
  return { seconds: Math.max(0, seconds) };
}
