/**
 * Timecode, exactly: frames are counted by whole numbers and rates are fractions, so that no time of a day drifts.
 * Drop-frame drops the numbers :00 and :01 (of 59.94: :00 to :03) of each minute but every tenth (SMPTE 12-1, from memory).
 */

export interface FrameRate {
  /** Frames a second as a fraction. */
  numerator: number;
  denominator: number;
  /** Frames that a second of timecode counts. */
  counted: number;
  /** Numbers that are dropped at the begin of a minute; 0: none. */
  dropped: number;
}

const rate = (numerator: number, denominator: number, dropped = 0): FrameRate => ({
  numerator,
  denominator,
  counted: Math.round(numerator / denominator),
  dropped,
});

export const frameRates = {
  '23.976': rate(24_000, 1001),
  '24': rate(24, 1),
  '25': rate(25, 1),
  '29.97': rate(30_000, 1001),
  '29.97 DF': rate(30_000, 1001, 2),
  '30': rate(30, 1),
  '47.952': rate(48_000, 1001),
  '48': rate(48, 1),
  '50': rate(50, 1),
  '59.94': rate(60_000, 1001),
  '59.94 DF': rate(60_000, 1001, 4),
  '60': rate(60, 1),
} as const satisfies Record<string, FrameRate>;
export type FrameRateName = keyof typeof frameRates;
export const frameRateNames = Object.keys(frameRates) as FrameRateName[];

/** The rate nearest to so many frames a second, within a thousandth of it; `null` where none is. */
export function frameRateOf(framesPerSecond: number, dropFrame: boolean): FrameRateName | null {
  const near = (name: FrameRateName) => {
    const { numerator, denominator, dropped } = frameRates[name];
    return (
      dropped > 0 === dropFrame && Math.abs(framesPerSecond * denominator - numerator) < numerator * 0.0005
    );
  };
  return frameRateNames.find(near) ?? (dropFrame ? frameRateOf(framesPerSecond, false) : null);
}

/** Frames from 00:00:00:00, of which a day has so many. */
export function framesOfDay(name: FrameRateName): number {
  const { counted, dropped } = frameRates[name];
  return 24 * 3600 * counted - dropped * (24 * 60 - 24 * 6);
}

/** Reads 'HH:MM:SS:FF' (before the frames ':' or '.'; ';' at drop-frame rates only) to frames from midnight; a sentence where it is none. */
export function parseTimecode(text: string, name: FrameRateName): { frames: number } | { fault: string } {
  const match = /^(\d{1,2}):(\d{2}):(\d{2})([:;.])(\d{2})$/.exec(text.trim());
  if (!match) return { fault: 'Write a timecode as hours, minutes, seconds and frames: 10:00:00:00.' };
  const [hours, minutes, seconds, frames] = [1, 2, 3, 5].map((part) => Number(match[part]));
  const { counted, dropped } = frameRates[name];
  // The same numbers would name another moment, 3.6 s apart after an hour.
  if (match[4] === ';' && dropped === 0)
    return {
      fault: `The ';' in ${text.trim()} says drop-frame timecode, and ${name} drops no numbers. Write ':', or choose a drop-frame rate.`,
    };
  if (hours > 23 || minutes > 59 || seconds > 59) return { fault: `${text.trim()} is no time of a day.` };
  if (frames >= counted)
    return { fault: `A second has ${counted} frames here, counted from 00 to ${counted - 1}.` };
  const minute = hours * 60 + minutes;
  if (dropped > 0 && seconds === 0 && frames < dropped && minutes % 10 !== 0)
    return { fault: `${text.trim()} does not exist in drop-frame timecode: that number is dropped.` };
  const numbered = (minute * 60 + seconds) * counted + frames;
  return { frames: numbered - dropped * (minute - Math.floor(minute / 10)) };
}

/** Frames from midnight as timecode, over a day's end from 00:00:00:00 again; ';' before the frames tells drop-frame. */
export function formatTimecode(frames: number, name: FrameRateName): string {
  const { counted, dropped } = frameRates[name];
  const day = framesOfDay(name);
  let number = ((frames % day) + day) % day;
  if (dropped > 0) {
    const perMinute = 60 * counted - dropped;
    const perTen = 10 * perMinute + dropped;
    const tens = Math.floor(number / perTen);
    const within = number % perTen;
    const minutes = within < 60 * counted ? 0 : 1 + Math.floor((within - 60 * counted) / perMinute);
    number += dropped * (9 * tens + minutes);
  }
  const two = (x: number) => String(x).padStart(2, '0');
  const seconds = Math.floor(number / counted);
  return `${two(Math.floor(seconds / 3600))}:${two(Math.floor(seconds / 60) % 60)}:${two(seconds % 60)}${dropped > 0 ? ';' : ':'}${two(number % counted)}`;
}

/** Seconds that so many frames last, and the frame that begins at or nearest to a second. */
export const secondsOfFrames = (frames: number, name: FrameRateName): number =>
  (frames * frameRates[name].denominator) / frameRates[name].numerator;
export const framesOfSeconds = (seconds: number, name: FrameRateName): number =>
  Math.round((seconds * frameRates[name].numerator) / frameRates[name].denominator);
