import { describe, expect, it } from 'vitest';
import {
  formatTimecode,
  frameRateNames,
  frameRateOf,
  framesOfDay,
  framesOfSeconds,
  parseTimecode,
  secondsOfFrames,
} from '../../src/engine/timecode.ts';

describe('timecode', () => {
  it.each(['29.97 DF', '59.94 DF'] as const)('goes round for every frame of a day at %s', (rate) => {
    for (let frame = 0; frame < framesOfDay(rate); frame++) {
      const text = formatTimecode(frame, rate);
      const read = parseTimecode(text, rate);
      if (!('frames' in read) || read.frames !== frame)
        expect(`${text}: ${JSON.stringify(read)}`).toBe(frame);
    }
  });

  it.each(frameRateNames)(
    'begins anew after the last frame of a day at %s, and finds each second',
    (rate) => {
      const day = framesOfDay(rate);
      expect(formatTimecode(day, rate)).toBe(formatTimecode(0, rate));
      expect(formatTimecode(day - 1, rate)).toMatch(/^23:59:59/);
      for (let frame = 0; frame < day; frame += 9973)
        expect(framesOfSeconds(secondsOfFrames(frame, rate), rate)).toBe(frame);
    },
  );

  // SMPTE 12-1, from memory: an hour of drop-frame timecode lasts 107,892 frames, 3599.9964 s.
  it('keeps an hour of drop-frame within 4 ms of an hour', () => {
    const read = parseTimecode('01:00:00;00', '29.97 DF');
    expect(read).toEqual({ frames: 107_892 });
    expect(secondsOfFrames(107_892, '29.97 DF')).toBeCloseTo(3599.9964, 4);
    expect(formatTimecode(1800, '29.97 DF')).toBe('00:01:00;02');
    expect(formatTimecode(17_982, '29.97 DF')).toBe('00:10:00;00');
  });

  it.each([
    ['00:01:00;00', '29.97 DF', /does not exist in drop-frame/],
    ['00:00:00:25', '25', /25 frames here/],
    ['24:00:00:00', '25', /no time of a day/],
    // Another moment than a reader of ';' means.
    ['01:00:00;00', '29.97', /drops no numbers/],
    ['10 o’clock', '25', /Write a timecode/],
  ] as const)('refuses %s at %s in a sentence', (text, rate, sentence) => {
    expect(parseTimecode(text, rate)).toEqual({ fault: expect.stringMatching(sentence) as string });
  });

  it('knows a rate from its fraction', () => {
    expect(frameRateOf(24_000 / 1001, false)).toBe('23.976');
    expect(frameRateOf(30_000 / 1001, true)).toBe('29.97 DF');
    expect(frameRateOf(29.97, false)).toBe('29.97');
    expect(frameRateOf(12.5, false)).toBeNull();
  });
});
