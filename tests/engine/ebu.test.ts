import { afterAll, describe, expect, it } from 'vitest';
import { ebuSignals, type EbuSignal } from '../signals/ebu-signals.ts';
import { measurePlanar } from '../signals/meter-planar.ts';

/** Largest deviation of each case over the rates that were run, printed with PLIMSOLL_TABLE=1. */
const deviations = new Map<string, number>();
afterAll(() => {
  if (process.env.PLIMSOLL_TABLE)
    console.table([...deviations].map(([signal, deviation]) => ({ signal, deviation })));
});

function read({ figure, make }: EbuSignal, rate: number): number | null {
  const { loudness, truePeak } = measurePlanar(make(rate), rate).figures;
  return {
    integrated: loudness.integratedLufs,
    shortTermMax: loudness.shortTermMaxLufs,
    momentaryMax: loudness.momentaryMaxLufs,
    range: loudness.rangeLu,
    truePeak: truePeak.maxDbtp,
  }[figure];
}

function check(signal: EbuSignal, rate: number): void {
  const value = read(signal, rate);
  expect(value).not.toBeNull();
  const deviation = (value ?? NaN) - signal.expected;
  const name = signal.id.replace(/\..*/, '');
  if (Math.abs(deviation) > Math.abs(deviations.get(name) ?? 0))
    deviations.set(name, Math.round(deviation * 1000) / 1000);
  expect(deviation).toBeLessThanOrEqual(signal.plus);
  expect(deviation).toBeGreaterThanOrEqual(-signal.minus);
}

// Source of every expectation: EBU Tech 3341 (2023) Table 1, EBU Tech 3342 (2023) Table 1; the case is the test's name.
describe.each([48_000, 44_100, 96_000])('EBU minimum requirements at %i Hz', (rate) => {
  it.each(ebuSignals.map((signal) => [signal.id, signal] as const))(
    'reads %s within its tolerance',
    (_id, signal) => check(signal, rate),
  );
});

describe.each([88_200, 192_000])('EBU minimum requirements at %i Hz, one of each kind', (rate) => {
  const kinds = [
    '3341-1 integrated',
    '3341-6',
    '3341-9',
    '3341-12',
    '3341-15',
    '3341-17',
    '3341-19',
    '3341-20',
    '3342-1',
  ];
  it.each(
    ebuSignals.filter((signal) => kinds.includes(signal.id)).map((signal) => [signal.id, signal] as const),
  )('reads %s within its tolerance', (_id, signal) => check(signal, rate));
});
