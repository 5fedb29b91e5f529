import { describe, expect, it } from 'vitest';
import {
  fileClock,
  plainClock,
  readTimeInFile,
  shortTimeInFile,
  timeInFile,
} from '../../src/domain/file-clock.ts';

const wave = { sampleRateHz: 48_000 };
const secondsOf = (...of: Parameters<typeof readTimeInFile>) => {
  const read = readTimeInFile(...of);
  return 'seconds' in read ? read.seconds : read.fault;
};

describe('the clock of a file', () => {
  it('counts from the timecode that the file tells', () => {
    const clock = fileClock(
      { ...wave, frameRate: '25', startTimecode: '10:00:00:00', startTimeReferenceSamples: 36_000 * 48_000 },
      '24',
    );
    expect(timeInFile(clock, 90.48)).toBe('10:01:30:12');
    expect(shortTimeInFile(clock, 90.48)).toBe('10:01:30');
    expect(secondsOf(clock, '10:01:30:12')).toBeCloseTo(90.48, 9);
    expect(secondsOf(clock, '10:01:30')).toBeCloseTo(90, 9);
  });

  it('counts by a chosen rate where the file tells none, from the start that it tells', () => {
    const clock = fileClock({ ...wave, startTimeReferenceSamples: 3600 * 48_000 }, '25');
    expect(timeInFile(clock, 1.04)).toBe('01:00:01:01');
    expect(timeInFile(fileClock({ ...wave, startTimeReferenceSamples: 3600 * 48_000 }, null), 1.04)).toBe(
      '01:00:01.040',
    );
  });

  it('keeps drop-frame numbers: ten minutes of 29.97 are 17 982 frames (SMPTE 12-1, from memory)', () => {
    const clock = fileClock(wave, '29.97 DF');
    expect(timeInFile(clock, (17_982 * 1001) / 30_000)).toBe('00:10:00;00');
    expect(secondsOf(clock, '00:10:00;00')).toBeCloseTo(599.9994, 9);
  });
});

describe('what a person types', () => {
  it.each([
    ['90.5', 90.5],
    ['90,5', 90.5],
    ['1:30', 90],
    ['00:01:30.25', 90.25],
    ['01:00:00', 3600],
    ['01:02:03.5', 3723.5],
    ['45.25', 45.25],
    ['00:00:00,040', 0.04],
  ])('reads %s without a rate as %d s', (typed, seconds) => {
    expect(secondsOf(plainClock, typed)).toBeCloseTo(seconds, 9);
  });

  it.each(['', '1:75', '99:00', 'soon', '-3', '1:2:3:4'])('refuses %j', (typed) =>
    expect(secondsOf(plainClock, typed)).toMatch(/hours, minutes and seconds/),
  );

  it('says what it cannot read, and what lies before the file', () => {
    const clock = fileClock({ ...wave, frameRate: '25', startTimecode: '10:00:00:00' }, null);
    expect(secondsOf(plainClock, 'noon')).toMatch(/hours, minutes and seconds/);
    expect(secondsOf(plainClock, '0:75')).toMatch(/hours, minutes and seconds/);
    expect(secondsOf(clock, '10:00:00:25')).toMatch(/25 frames/);
    expect(secondsOf(clock, '09:59:59:24')).toBe('The file begins at 10:00:00:00; that is after this time.');
  });

  it('comes back as it was shown, frame by frame', () => {
    for (const rate of ['23.976', '25', '29.97 DF', '59.94'] as const) {
      const clock = fileClock({ ...wave, startTimeReferenceSamples: 3600 * 48_000 }, rate);
      for (let seconds = 0; seconds < 125; seconds += 0.37) {
        const shown = timeInFile(clock, seconds);
        expect(timeInFile(clock, Number(secondsOf(clock, shown)))).toBe(shown);
      }
    }
  });
});
