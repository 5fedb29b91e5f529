import { describe, expect, it } from 'vitest';
import { deliverables } from '../../../migrations/seeds/demo-programmes.ts';
import type { DemoFault } from '../../../migrations/seeds/faults.ts';
import { makeMaster } from '../../../migrations/seeds/master.ts';
import { openNative } from '../../../src/engine/containers/open.ts';
import type { FindingCode } from '../../../src/engine/figures.ts';
import { measure } from '../../../src/engine/measure.ts';

const expected: Record<DemoFault, FindingCode> = {
  'line-up-tone': 'line-up-tone',
  'drop-outs': 'drop-out',
  clipped: 'clipping',
  'dc-offset': 'dc-offset',
  'dual-mono': 'dual-mono',
  'out-of-phase': 'correlation',
  'lfe-swapped': 'suspect-order',
  'silent-right': 'silent-audio-channel',
  'band-limited': 'bandwidth',
  'long-silence': 'silence',
  'unused-bits': 'unused-bits',
  'declares-wrong': 'declared-differs',
};

async function findings(bytes: Uint8Array) {
  const source = await openNative({
    size: bytes.length,
    read: (offset, length) => Promise.resolve(bytes.subarray(offset, offset + length)),
  });
  if (!source) throw new Error('Not read natively');
  return (await measure(source))[0].measurement.findings;
}

describe('the demo’s faulty masters', () => {
  const faulty = deliverables.flatMap((demo, i) => (demo.fault ? [[demo.fault, demo, i] as const] : []));

  it('has one for every fault', () => {
    expect(faulty.map(([fault]) => fault).sort()).toEqual(Object.keys(expected).sort());
  });

  it.each(faulty)('is told of %s', async (fault, demo, seed) => {
    const told = await findings(makeMaster(demo, seed));
    expect(told.map(({ code }) => code)).toContain(expected[fault]);
  });

  it('has sound ones beside, in which only what the generator does is told', async () => {
    const sound = deliverables.findIndex(({ fileName }) => fileName.startsWith('tidewater_bakery_spot02'));
    const told = await findings(makeMaster(deliverables[sound], sound));
    expect(told.map(({ message }) => message)).toEqual([]);
  });
});
