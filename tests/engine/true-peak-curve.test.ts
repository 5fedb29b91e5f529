/**
 * The worst reading of the true peak as it ships, over frequencies and phases. Each tone is faded by raised cosines, so that
 * its onset counts for nothing, and lasts two periods and more at its full level: its true peak is its amplitude.
 * PLIMSOLL_TABLE=1 prints the curve.
 */
import { afterAll, describe, expect, it } from 'vitest';
import { measurePlanar } from '../signals/meter-planar.ts';

const amplitude = 0.5;
const audioChannels = 8;
const fadeSeconds = 0.006;

/** Tones of one frequency as audio channels, the phase of each a share of a turn. */
function tones(hz: number, turns: readonly number[], rate: number): Float64Array[] {
  const fade = Math.round(fadeSeconds * rate);
  const length = 2 * fade + Math.ceil(Math.max(0.006, 2 / hz) * rate);
  const taper = Float64Array.from({ length }, (_, n) => {
    const t = Math.min(1, n / fade, (length - 1 - n) / fade);
    return amplitude * 0.5 * (1 - Math.cos(Math.PI * t));
  });
  return turns.map((turn) =>
    Float64Array.from(taper, (level, n) => level * Math.sin(2 * Math.PI * ((hz * n) / rate + turn))),
  );
}

/**
 * Frequencies of few samples a period, whose phase on the samples never wanders: each at every 1/32 of the phases that
 * differ. A sweep alone would hide what they read too low.
 */
function rational(highest: number, rate: number): { hz: number; turns: number[] }[] {
  const divisor = (a: number, b: number): number => (b === 0 ? a : divisor(b, a % b));
  return Array.from({ length: 11 }, (_, i) => i + 2).flatMap((q) =>
    Array.from({ length: Math.floor(q / 2) }, (_, i) => i + 1)
      .filter((p) => divisor(p, q) === 1 && (p / q) * rate <= highest)
      .map((p) => ({ hz: (p / q) * rate, turns: Array.from({ length: 32 }, (_, j) => j / 32 / q) })),
  );
}

/** 0.1 kHz to the highest, 33 of them. */
const swept = (highest: number) =>
  Array.from({ length: 33 }, (_, i) => ({
    hz: 100 + ((highest - 100) * i) / 32,
    turns: Array.from({ length: 16 }, (_, j) => j / 16),
  }));

const curve: Record<string, Record<string, string>> = {};
afterAll(() => {
  if (process.env.PLIMSOLL_TABLE) console.table(curve);
});
const edges = [5_000, 10_000, 15_000, 18_000, 20_000];

// MEASUREMENT: the worst error over 0-20 kHz and all phases is 0.1 dB or less (the project's own limit).
describe('the true peak as it ships', () => {
  it.each([32_000, 44_100, 48_000, 88_200, 96_000, 176_400, 192_000])(
    'reads tones up to 20 kHz (0.4535 of the rate at most) within 0.1 dB at %i Hz, at every phase',
    (rate) => {
      const highest = Math.min(20_000, 0.4535 * rate);
      const bands = edges.map((edge) => ({ edge, low: Infinity, high: -Infinity }));
      for (const { hz, turns } of [...rational(highest, rate), ...swept(highest)])
        for (let at = 0; at < turns.length; at += audioChannels) {
          const { perChannelDbtp } = measurePlanar(tones(hz, turns.slice(at, at + audioChannels), rate), rate)
            .figures.truePeak;
          const band = bands.find(({ edge }) => hz <= edge + 1e-6);
          for (const read of perChannelDbtp) {
            const off = (read ?? -Infinity) - 20 * Math.log10(amplitude);
            if (band) band.low = Math.min(band.low, off);
            if (band) band.high = Math.max(band.high, off);
            expect(Math.abs(off), `${hz} Hz`).toBeLessThanOrEqual(0.1);
          }
        }
      const shown = (x: number) => (x < 0 ? '−' : '+') + Math.abs(x).toFixed(3);
      curve[`${rate / 1000} kHz`] = Object.fromEntries(
        bands
          .filter(({ low }) => low < Infinity)
          .map(({ edge, low, high }) => [`to ${edge / 1000} kHz`, `${shown(low)} / ${shown(high)}`]),
      );
    },
  );
});
