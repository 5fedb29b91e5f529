/**
 * Every signal of EBU Tech 3341 (2023, Table 1) and Tech 3342 (2023, Table 1) that can be synthesised, at five rates and in
 * four depths, through the kernel. Integers are rounded, without dither. PLIMSOLL_TABLE=1 prints the largest deviations, and
 * then the signals of more than 30 s come in every depth above 48 kHz too; else there in 24 bit only, for their time.
 */
import { afterAll, describe, expect, it } from 'vitest';
import type { Encoding } from '../../src/engine/containers/samples.ts';
import type { Figures } from '../../src/engine/figures.ts';
import type { Twin } from '../../src/engine/meter.ts';
import { ebuSignals, type EbuSignal } from '../signals/ebu-signals.ts';
import { measurePlanar } from '../signals/meter-planar.ts';

const rates = [44_100, 48_000, 88_200, 96_000, 192_000];
const depths: Record<string, Encoding> = {
  '16 bit': { kind: 'integer', bytes: 2, littleEndian: true },
  '24 bit': { kind: 'integer', bytes: 3, littleEndian: true },
  '32 bit': { kind: 'integer', bytes: 4, littleEndian: true },
  float: { kind: 'float', bytes: 4, littleEndian: true },
};

/** Largest deviation so far, with its sign: by the documents' case, then by rate and by depth. */
const deviations = new Map<string, Record<string, number>>();
function note(id: string, column: string, deviation: number): void {
  const name = id.replace(/\..*/, '');
  const row = deviations.get(name) ?? {};
  deviations.set(name, row);
  if (Math.abs(deviation) >= Math.abs(row[column] ?? 0)) row[column] = Math.round(deviation * 1e4) / 1e4;
}
afterAll(() => {
  if (process.env.PLIMSOLL_TABLE) console.table(Object.fromEntries(deviations));
});

const valueOf = ({ loudness, truePeak }: Figures, figure: EbuSignal['figure']): number | null =>
  ({
    integrated: loudness.integratedLufs,
    shortTermMax: loudness.shortTermMaxLufs,
    momentaryMax: loudness.momentaryMaxLufs,
    range: loudness.rangeLu,
    truePeak: truePeak.maxDbtp,
  })[figure];

function check(signals: readonly EbuSignal[], rate: number, depth: string, twin: Twin): void {
  const planar = made(signals[0], rate);
  const { figures } = measurePlanar(planar, rate, { encoding: depths[depth], twin });
  for (const { id, figure, expected, plus, minus } of signals) {
    const value = valueOf(figures, figure);
    expect(value, `${id} in ${depth}`).not.toBeNull();
    const deviation = (value ?? NaN) - expected;
    if (twin === 'kernel') [`${rate / 1000} kHz`, depth].forEach((column) => note(id, column, deviation));
    expect(deviation, `${id} in ${depth}`).toBeLessThanOrEqual(plus);
    expect(deviation, `${id} in ${depth}`).toBeGreaterThanOrEqual(-minus);
  }
}

/** The one made last: the four depths of a signal are measured in a row. */
let last: { key: string; planar: Float64Array[] } | null = null;
function made({ id, make }: EbuSignal, rate: number): Float64Array[] {
  const key = `${id} ${rate}`;
  if (last?.key !== key) last = { key, planar: make(rate) };
  return last.planar;
}

/** Figures that are read from one signal stand together: '3341-1 integrated' and '3341-1 momentaryMax'. */
const bySignal = new Map<string, EbuSignal[]>();
for (const signal of ebuSignals) {
  const [name] = signal.id.split(' ');
  bySignal.set(name, [...(bySignal.get(name) ?? []), signal]);
}

// The source of each expectation is the test's name: the document's number and its case.
describe.each(rates)('EBU minimum requirements at %i Hz', (rate) => {
  it.each([...bySignal])('reads %s within its tolerance in the depths', (_name, signals) => {
    const isLong = made(signals[0], rate)[0].length > 30 * rate;
    const once = isLong && rate > 48_000 && !process.env.PLIMSOLL_TABLE;
    for (const depth of once ? ['24 bit'] : Object.keys(depths)) check(signals, rate, depth, 'kernel');
  });
});

describe('EBU minimum requirements by the scalar twin, one of each kind', () => {
  const kinds = ['3341-1', '3341-6', '3341-9', '3341-12', '3341-15', '3341-19', '3341-20', '3342-1'];
  it.each(kinds)('reads %s within its tolerance', (name) =>
    check(bySignal.get(name) ?? [], 48_000, '24 bit', 'scalar'),
  );
});
