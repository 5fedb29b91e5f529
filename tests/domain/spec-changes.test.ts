import { describe, expect, it } from 'vitest';
import { specChanges } from '../../src/domain/spec-changes.ts';
import { specBodySchema } from '../../src/domain/spec.ts';
import { r128Body } from '../factories/world.ts';

describe('what changed between two versions', () => {
  it('is nothing between the same', () => {
    expect(specChanges(r128Body, r128Body)).toEqual([]);
  });

  it('is told by setting and by rule: new, changed, gone', () => {
    const [integrated, peak] = r128Body.rules;
    const after = specBodySchema.parse({
      ...r128Body,
      rounding: 'unrounded',
      rules: [
        integrated,
        { ...peak, atMost: -2, breach: 'advise', measurementTolerance: 0.3 },
        { id: 'rate', kind: 'oneOf', fact: 'sampleRateHz', allowed: ['48000'], breach: 'reject' },
      ],
    });
    expect(specChanges(r128Body, after)).toEqual([
      { name: 'Judged on', was: 'the figure as shown', is: 'the full figure' },
      {
        name: 'Maximum true peak',
        was: 'at most \u22121.0 dBTP, reject',
        is: 'at most \u22122.0 dBTP, advise, measurement tolerance 0.3',
      },
      { name: 'Sample rate', was: null, is: '48 kHz, reject' },
      { name: 'Loudness range', was: 'at most 18.0 LU, advise', is: null },
    ]);
  });
});
