import { describe, expect, it } from 'vitest';
import {
  channelSpecs,
  chosenSpecs,
  publishedSpecs,
  type BenchSpec,
} from '../../../src/components/bench/bench-specs.ts';
import { benchPassage, heldAgainst } from '../../../src/components/bench/bench-verdicts.ts';
import type { SpecRow } from '../../../src/domain/api/specs.ts';
import { specBodySchema } from '../../../src/domain/spec.ts';
import { plainBody, startingSpecs } from '../../../src/domain/starting-specs.ts';
import { measure } from '../../../src/engine/measure.ts';
import { DecodedSource } from '../../../src/components/bench/decoded-source.ts';

const row = (name: string, published: boolean, channels: string[]): SpecRow => ({
  id: name,
  name,
  organisation: { id: 'harrow', name: 'Harrow Sound Television' },
  hasDraft: false,
  usedBy: channels.map((channelName) => ({
    channelId: channelName,
    channelName,
    contentKind: 'long_form',
  })),
  current: published
    ? {
        id: `${name}-4`,
        number: 4,
        body: plainBody,
        changeNote: '',
        createdBy: null,
        updatedAt: '2026-12-01T00:00:00Z',
        publishedBy: null,
        publishedAt: '2026-12-01T00:00:00Z',
        inForceFrom: '2026-12-01T00:00:00Z',
      }
    : null,
});

describe('the specs of the bench', () => {
  it('are those in force, those that a channel uses before the others', () => {
    const specs = channelSpecs([
      row('Unused', true, []),
      row('Draft only', false, ['Harrow One']),
      row('Long form', true, ['Harrow One', 'Harrow Two']),
    ]);
    expect(specs.map(({ name }) => name)).toEqual(['Long form', 'Unused']);
    expect(specs[0]).toMatchObject({
      by: 'Harrow Sound Television, version 4',
      use: 'Harrow One, long form; Harrow Two, long form',
    });
  });

  it('are all published starting specs for a visitor', () => {
    expect(publishedSpecs.map(({ id }) => id)).toEqual(startingSpecs.map(({ id }) => id));
  });

  it('are chosen by the address, and the first where it names none that is known', () => {
    const ids = (asked: string | null) => chosenSpecs(publishedSpecs, asked).map(({ id }) => id);
    expect(ids('arib-tr-b32,ebu-r128-s1')).toEqual(['ebu-r128-s1', 'arib-tr-b32']);
    expect(ids('gone')).toEqual(['ebu-r128-produced']);
    expect(ids(null)).toEqual(['ebu-r128-produced']);
  });
});

describe('a measurement on the bench', () => {
  // 997 Hz at -23 dBFS in one audio channel: -26.0 LUFS as one, 3.01 LU more as two (BS.1770-5: -3.01 LUFS per channel at 0 dBFS).
  const amplitude = 10 ** (-23 / 20);
  const sine = Float32Array.from(
    { length: 48_000 * 5 },
    (_, i) => amplitude * Math.sin((2 * Math.PI * 997 * i) / 48_000),
  );
  const spec = (id: string, body: object): BenchSpec => ({
    id,
    name: id,
    by: '',
    use: '',
    published: false,
    body: specBodySchema.parse(body),
  });
  const rules = (atMost: number) => [
    { id: 'short-term', kind: 'limits', metric: 'shortTermMaxLufs', breach: 'reject', atLeast: null, atMost },
  ];
  const decoded = { container: 'WAV', codec: 'PCM', bitDepth: 24, sampleRateHz: 48_000, planar: [sine] };

  it('is held against several specs, the worst first', async () => {
    const [measured] = await measure(new DecodedSource(decoded));
    const [low, high] = [spec('low', { rules: rules(-30) }), spec('high', { rules: rules(-20) })];
    const held = heldAgainst(measured, [high, low]);
    expect(held.map(({ spec: { id }, verdict }) => [id, verdict.outcome])).toEqual([
      ['low', 'fail'],
      ['high', 'pass'],
    ]);
  });

  it('is drawn as the spec judges it: one audio channel as two stands 3.01 LU higher', async () => {
    const [measured] = await measure(new DecodedSource(decoded));
    const asOne = benchPassage(measured, spec('one', { rules: rules(-24.5) }));
    const asDual = benchPassage(measured, spec('two', { mono: 'asDual', rules: rules(-24.5) }));
    expect(asOne.shortTermLufs[40]).toBeCloseTo(-26, 1);
    expect((asDual.shortTermLufs[40] ?? 0) - (asOne.shortTermLufs[40] ?? 0)).toBeCloseTo(3.0103, 4);
    expect(asOne.excursions).toEqual([]);
    expect(asDual.excursions).toHaveLength(1);
  });
});
