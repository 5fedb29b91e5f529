import { describe, expect, it } from 'vitest';
import { judge } from '../../src/domain/judge.ts';
import { permittedText } from '../../src/domain/rule-words.ts';
import { specBodySchema } from '../../src/domain/spec.ts';
import { findStartingSpec, startingSpecs } from '../../src/domain/starting-specs.ts';
import { figures, stereoFormat } from '../factories/world.ts';

const permitted = (id: string) => {
  const body = findStartingSpec(id)?.body;
  if (!body) throw new Error(`no starting spec ${id}`);
  return body.rules.map((rule) => `${permittedText(rule, body.unit)} (${rule.measurementTolerance})`);
};
const outcomeAt = (id: string, integratedLufs: number, maxDbtp: number) => {
  const body = findStartingSpec(id)?.body;
  if (!body) throw new Error(`no starting spec ${id}`);
  const { outcome, rules } = judge(
    { format: stereoFormat, figures: figures({ integratedLufs, maxDbtp }), findings: [] },
    body,
  );
  return `${outcome}${rules.some((rule) => rule.neededTolerance) ? ', by tolerance' : ''}`;
};

describe('starting specs', () => {
  it('each name their document, edition and the caution', () => {
    for (const { body, contentKinds } of startingSpecs) {
      expect(specBodySchema.parse(body)).toEqual(body);
      expect(body.source?.document).toBeTruthy();
      expect(body.source?.edition).toBeTruthy();
      expect(body.source?.note).toContain('Check against the receiving party\u2019s own document.');
      expect(contentKinds.length).toBeGreaterThan(0);
    }
    expect(new Set(startingSpecs.map(({ id }) => id)).size).toBe(startingSpecs.length);
  });

  it.each([
    // EBU R 128 V5 h, i, m.
    ['ebu-r128-produced', ['\u221223.0 \u00b1 0.0 LUFS (0.2)', 'at most \u22121.0 dBTP (0.3)']],
    ['ebu-r128-not-practical', ['\u221223.0 \u00b1 1.0 LUFS (0.2)', 'at most \u22121.0 dBTP (0.3)']],
    // EBU R 128 s1 V3.
    [
      'ebu-r128-s1',
      ['\u221223.0 \u00b1 0.0 LUFS (0.2)', 'at most \u221218.0 LUFS (0.2)', 'at most \u22121.0 dBTP (0.3)'],
    ],
    // EBU R 128 s2 V3: -20.0 to -16.0 LUFS; true peak by R 128 m.
    ['ebu-r128-s2', ['\u221218.0 \u00b1 2.0 LUFS (0)', 'at most \u22121.0 dBTP (0)']],
    // ATSC A/85:2013, secondary sources.
    ['atsc-a85-short-form', ['\u221224.0 \u00b1 0.0 LKFS (2)', 'at most \u22122.0 dBTP (0)']],
    // AES TD1008, secondary sources.
    ['aes-td1008-assorted', ['at most \u221216.0 LUFS (0)', 'at most \u22121.0 dBTP (0)']],
    ['aes-td1008-music', ['at most \u221215.8 LUFS (0)', 'at most \u22121.0 dBTP (0)']],
    // Free TV Australia OP-59, secondary sources.
    ['free-tv-op59', ['\u221224.0 \u00b1 1.0 LKFS (0)', 'at most \u22122.0 dBTP (0)']],
    // ARIB TR-B32, secondary sources; true peak by the table of ITU-R BS.2434.
    ['arib-tr-b32', ['\u221224.0 \u00b1 1.0 LKFS (0)', 'at most \u22121.0 dBTP (0)']],
  ])('%s permits what its document says', (id, texts) => {
    expect(permitted(id)).toEqual(texts);
  });

  it('passes R 128 on the target, by tolerance 0.2 LU from it, and fails beyond', () => {
    expect(outcomeAt('ebu-r128-produced', -23, -3)).toBe('pass');
    expect(outcomeAt('ebu-r128-produced', -22.8, -3)).toBe('pass, by tolerance');
    expect(outcomeAt('ebu-r128-produced', -22.7, -3)).toBe('fail');
    expect(outcomeAt('ebu-r128-produced', -23.3, -3)).toBe('fail');
    expect(outcomeAt('ebu-r128-produced', -23, -0.7)).toBe('pass, by tolerance');
    expect(outcomeAt('ebu-r128-produced', -23, -0.6)).toBe('fail');
  });
});
