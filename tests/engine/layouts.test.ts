import { execFileSync } from 'node:child_process';
import { describe, expect, it } from 'vitest';
import { layoutOfChan } from '../../src/engine/containers/aiff-layout.ts';
import { openNative } from '../../src/engine/containers/open.ts';
import {
  fromSpeakers,
  layoutOfCount,
  layoutOfMask,
  speakers,
  weightOf,
  type Speaker,
} from '../../src/engine/layouts.ts';

const heights: readonly Speaker[] = ['Ltf', 'Rtf', 'Ltr', 'Rtr'];

describe('weights', () => {
  // ITU-R BS.1770-5, Annex 3, Table 4: 1.41 where |elevation| < 30 and 60 <= |azimuth| <= 120 degrees.
  it('are 1.41 at the sides only, 0 for the LFE, 1 for all else', () => {
    const sides = ['Ls', 'Rs', 'Lss', 'Rss'];
    for (const speaker of speakers)
      expect(weightOf(speaker), speaker).toBe(sides.includes(speaker) ? 1.41 : speaker === 'LFE' ? 0 : 1);
  });
});

describe('a WAVE mask', () => {
  // Bits from secondary sources; the two 5.0 and 5.1 pairings are both surrounds.
  it.each<[string, number, readonly Speaker[]]>([
    ['mono', 0x4, ['M']],
    ['stereo', 0x3, ['L', 'R']],
    ['3.0', 0x7, ['L', 'R', 'C']],
    ['5.0', 0x37, ['L', 'R', 'C', 'Ls', 'Rs']],
    ['5.0', 0x607, ['L', 'R', 'C', 'Ls', 'Rs']],
    ['5.1', 0x3f, ['L', 'R', 'C', 'LFE', 'Ls', 'Rs']],
    ['5.1', 0x60f, ['L', 'R', 'C', 'LFE', 'Ls', 'Rs']],
    ['7.1', 0x63f, ['L', 'R', 'C', 'LFE', 'Lrs', 'Rrs', 'Lss', 'Rss']],
    ['5.1.4', 0x2d03f, ['L', 'R', 'C', 'LFE', 'Ls', 'Rs', ...heights]],
    ['5.1.4', 0x2d60f, ['L', 'R', 'C', 'LFE', 'Ls', 'Rs', ...heights]],
    ['7.1.4', 0x2d63f, ['L', 'R', 'C', 'LFE', 'Lrs', 'Rrs', 'Lss', 'Rss', ...heights]],
  ])('tells %s by 0x%s', (name, mask, expected) => {
    expect(layoutOfMask(mask, expected.length)).toEqual({ name, speakers: expected, assumed: false });
  });

  it('says nothing where it counts other than the file', () => {
    expect(layoutOfMask(0x3f, 8)).toEqual(layoutOfCount(8));
    expect(layoutOfMask(0x3f, 8).assumed).toBe(true);
  });
});

it('names a layout in any order of its loudspeakers, and assumes none for a count that has no usual one', () => {
  expect(fromSpeakers(['L', 'C', 'R', 'Ls', 'Rs', 'LFE']).name).toBe('5.1');
  expect(fromSpeakers(['L', 'R', 'Cs']).name).toBe('3 channels');
  expect(layoutOfCount(7)).toEqual({
    name: '7 channels',
    speakers: Array(7).fill('unknown'),
    assumed: true,
  });
});

describe('the CHAN chunk of an AIFF', () => {
  // ffmpeg writes the chunk for more than two audio channels. (Under its 7.1 tag it keeps its own order; the tag's is taken.)
  it.each([
    ['3.0', '3.0'],
    ['5.0(side)', '5.0'],
    ['5.1', '5.1'],
    ['7.1', '7.1'],
  ])('tells what ffmpeg meant by %s', async (decoderName, name) => {
    const silence = `anullsrc=channel_layout=${decoderName}:sample_rate=48000`;
    const how = ['-v', 'error', '-f', 'lavfi', '-i', silence, '-t', '0.01', '-f', 'aiff', 'pipe:1'];
    const bytes = new Uint8Array(execFileSync('ffmpeg', how));
    const source = await openNative({
      size: bytes.length,
      read: (offset, length) => Promise.resolve(bytes.slice(offset, offset + length)),
    });
    expect(source?.layout).toMatchObject({ name, assumed: false });
    expect(source?.findings.map(({ code }) => code)).not.toContain('layout-assumed');
  });

  const chan = (tag: number, mask: number, labels: number[]) => {
    const view = new DataView(new ArrayBuffer(12 + labels.length * 20));
    view.setUint32(0, tag);
    view.setUint32(4, mask);
    view.setUint32(8, labels.length);
    labels.forEach((label, i) => view.setUint32(12 + i * 20, label));
    return new Uint8Array(view.buffer);
  };

  // Tags and labels from memory.
  it('tells film order by its tag, a mask, and a label each', () => {
    const film = ['L', 'C', 'R', 'Ls', 'Rs', 'LFE'];
    expect(layoutOfChan(chan((123 << 16) | 6, 0, []), 6)?.speakers).toEqual(film);
    expect(layoutOfChan(chan(0, 0, [1, 3, 2, 5, 6, 4]), 6)?.speakers).toEqual(film);
    expect(layoutOfChan(chan(0x10000, 0x60f, []), 6)).toEqual(layoutOfMask(0x60f, 6));
  });

  it('tells nothing where it is short, does not fit or names a loudspeaker twice', () => {
    expect(layoutOfChan(chan((121 << 16) | 6, 0, []), 8)).toBeNull();
    expect(layoutOfChan(chan(0x10000, 0x3f, []), 8)).toBeNull();
    expect(layoutOfChan(chan(0, 0, [1, 1]), 2)).toBeNull();
    expect(layoutOfChan(chan(0, 0, [1, 2, 3]).subarray(0, 40), 3)).toBeNull();
    expect(layoutOfChan(new Uint8Array(8), 2)).toBeNull();
  });
});
