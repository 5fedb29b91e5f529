import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  formatBytes,
  formatDuration,
  formatLevel,
  formatLimit,
  formatRate,
  formatTimecode,
  roundHalfAway,
} from '../../src/domain/figures-text.ts';

describe('rounding', () => {
  it.each([
    [-23.05, 1, -23.1],
    [-22.95, 1, -23],
    [-22.94, 1, -22.9],
    [0.15, 1, 0.2],
    [-0.15, 1, -0.2],
    [1.005, 2, 1.01],
    [-0.04, 1, 0],
    [2.5, 0, 3],
    [-2.5, 0, -3],
  ])('takes %d to %d decimals half away from zero: %d', (value, decimals, expected) => {
    expect(roundHalfAway(value, decimals)).toBe(expected);
  });

  it('is the same on both sides of zero, moves by half a step at most, and keeps order', () => {
    const level = fc.double({ min: -200, max: 200, noNaN: true });
    fc.assert(
      fc.property(level, level, (a, b) => {
        expect(roundHalfAway(-a, 1)).toBe(-roundHalfAway(a, 1) + 0);
        expect(Math.abs(roundHalfAway(a, 1) - a)).toBeLessThanOrEqual(0.05 + 1e-9);
        expect(
          Math.sign(roundHalfAway(a, 1) - roundHalfAway(b, 1)) * Math.sign(a - b),
        ).toBeGreaterThanOrEqual(0);
      }),
    );
  });
});

describe('figures in words', () => {
  it('write a true minus and one decimal, and name what has no value', () => {
    expect(formatLevel(-23)).toBe('\u221223.0');
    expect(formatLevel(0.04)).toBe('0.0');
    expect(formatLevel(-0.04)).toBe('0.0');
    expect(formatLevel(null)).toBe('no value');
    expect(formatLevel(-22.956, 2)).toBe('\u221222.96');
  });

  it('write a limit with the decimals that it was given', () => {
    expect(formatLimit(-1)).toBe('\u22121.0');
    expect(formatLimit(-15.8)).toBe('\u221215.8');
    expect(formatLimit(0.25)).toBe('0.25');
  });

  it.each([
    [30, '0:30'],
    [59.6, '1:00'],
    [3130, '52:10'],
    [3730, '1:02:10'],
  ])('write %d s as %s', (seconds, text) => {
    expect(formatDuration(seconds)).toBe(text);
  });

  it.each([
    [0, '00:00:00.000'],
    [1.2345, '00:00:01.235'],
    [59.9996, '00:01:00.000'],
    [3723.5, '01:02:03.500'],
    [-1, '00:00:00.000'],
  ])('write %d s as the timecode %s', (seconds, text) => {
    expect(formatTimecode(seconds)).toBe(text);
  });

  it('write a timecode that reads back to the millisecond', () => {
    fc.assert(
      fc.property(fc.integer({ min: 0, max: 86_400_000 }), (ms) => {
        const [h, m, s] = formatTimecode(ms / 1000).split(':');
        expect(Math.round((Number(h) * 3600 + Number(m) * 60 + Number(s)) * 1000)).toBe(ms);
      }),
    );
  });

  it('write rates and sizes', () => {
    expect([formatRate(48_000), formatRate(44_100)]).toEqual(['48 kHz', '44.1 kHz']);
    expect([999, 8_600_000, 1_200_000_000, 123_456].map(formatBytes)).toEqual([
      '999 B',
      '8.6 MB',
      '1.2 GB',
      '123 kB',
    ]);
  });
});
