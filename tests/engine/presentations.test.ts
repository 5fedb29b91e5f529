import { describe, expect, it } from 'vitest';
import { findMonoSets, joinMono } from '../../src/engine/containers/mono-set.ts';
import { openNative } from '../../src/engine/containers/open.ts';
import { measure } from '../../src/engine/measure.ts';
import { orderChoices, speakersOfNames, splitChoices } from '../../src/engine/presentations.ts';
import { wholeFile } from '../../src/engine/plan.ts';
import type { ByteSource, SampleSource } from '../../src/engine/source.ts';
import type { Speaker } from '../../src/engine/layouts.ts';
import { noise, wavOf } from '../signals/wav.ts';

const rate = 48_000;
const channels = (count: number, seconds = 4) =>
  Array.from({ length: count }, (_, c) => noise(c + 1, seconds * rate, 0.05 * (c + 1)));
const sourceOf = (bytes: Uint8Array): ByteSource => ({
  size: bytes.length,
  read: (offset, length) => Promise.resolve(bytes.subarray(offset, offset + length)),
});
async function open(bytes: Uint8Array): Promise<SampleSource> {
  const source = await openNative(sourceOf(bytes));
  if (!source) throw new Error('Not read natively');
  return source;
}
const loudness = async (source: SampleSource) => (await measure(source))[0].measurement.figures;

describe('presentations', () => {
  it('measures each of a split file as the same channels alone', async () => {
    const all = channels(8);
    const split = splitChoices(8).find(({ id }) => id === 'r123-8a');
    if (!split) throw new Error('EBU R 123 8a is missing');
    const source = await open(wavOf(all, rate, 24));
    const parts = await measure(source, { plan: { ...wholeFile, presentations: split.presentations } });
    const alone = [
      await loudness(await open(wavOf(all.slice(0, 2), rate, 24))),
      await loudness(await open(wavOf(all.slice(2), rate, 24, 0x3f))),
    ];
    expect(parts.map(({ presentation }) => presentation.name)).toEqual(['Stereo mix', '5.1 mix']);
    expect(parts.map(({ measurement }) => measurement.figures)).toEqual(alone);
    expect(parts.map(({ measurement }) => measurement.format.layout)).toEqual(['stereo', '5.1']);
  });

  it('reads film order as the same programme in the usual order', async () => {
    const [l, r, c, lfe, ls, rs] = channels(6);
    const film = orderChoices(6).find(({ id }) => id === 'order-5.1-film');
    if (!film) throw new Error('Film order is missing');
    const usual = await loudness(await open(wavOf([l, r, c, lfe, ls, rs], rate, 24, 0x3f)));
    const [{ measurement }] = await measure(await open(wavOf([l, c, r, ls, rs, lfe], rate, 24)), {
      plan: { ...wholeFile, presentations: film.presentations },
    });
    expect(measurement.figures.loudness.integratedLufs).toBeCloseTo(usual.loudness.integratedLufs ?? NaN, 9);
    expect(measurement.figures.downmix).toEqual(usual.downmix);
    // Nothing is assumed where a person has said it.
    expect(measurement.findings.map(({ code }) => code)).not.toContain('layout-assumed');
  });

  it('covers each audio channel once in every choice', () => {
    for (let count = 1; count <= 16; count++)
      for (const { presentations } of [...orderChoices(count), ...splitChoices(count)])
        expect(presentations.flatMap((p) => p.audioChannels)).toEqual(
          Array.from({ length: count }, (_, i) => i),
        );
  });

  it('reads loudspeakers from names of tracks, all or none', () => {
    expect(speakersOfNames(['Mix L', 'Mix R', 'Mix C', 'Mix LFE', 'Mix Ls', 'Mix Rs'])).toEqual([
      ...['L', 'R', 'C', 'LFE', 'Ls', 'Rs'],
    ]);
    expect(speakersOfNames(['Boom', 'Lav 1'])).toBeNull();
    expect(speakersOfNames(['L', 'L'])).toBeNull();
  });
});

describe('a measured window', () => {
  it('gives what the same stretch gives as a file of its own', async () => {
    const all = channels(2, 8);
    const cut = all.map((samples) => samples.subarray(2 * rate, 6 * rate));
    const window = { startSeconds: 2, endSeconds: 6 };
    const [{ measurement }] = await measure(await open(wavOf(all, rate, 24)), {
      plan: { ...wholeFile, window },
    });
    const { figures } = measurement;
    expect({ ...figures, windowStartSeconds: 0 }).toEqual(await loudness(await open(wavOf(cut, rate, 24))));
    expect(figures.windowStartSeconds).toBe(2);
    expect(measurement.format.durationSeconds).toBe(8);
  });

  it('says where it holds nothing', async () => {
    const window = { startSeconds: 9, endSeconds: null };
    const source = await open(wavOf(channels(2, 2), rate, 24));
    await expect(measure(source, { plan: { ...wholeFile, window } })).rejects.toThrow(
      /begins behind the end/,
    );
  });
});

describe('a set of mono files', () => {
  it('is found by its names, whatever parts them', () => {
    const files = [
      'Reel 1.L.wav',
      'Reel 1.R.wav',
      'Reel 1.C.wav',
      'Reel 2_l.wav',
      'Reel 2_r.wav',
      'Trailer.wav',
    ];
    const sets = findMonoSets(files.map((name) => ({ name })));
    expect(sets.map(({ name, parts }) => [name, parts.map(({ speaker }) => speaker)])).toEqual([
      ['Reel 1', ['L', 'R', 'C']],
      ['Reel 2', ['L', 'R']],
    ]);
  });

  it('measures as one file of the same channels', async () => {
    const speakers: Speaker[] = ['L', 'R', 'C', 'LFE', 'Ls', 'Rs'];
    const all = channels(6);
    const parts = await Promise.all(all.map((samples) => open(wavOf([samples], rate, 24))));
    const one = await loudness(await open(wavOf(all, rate, 24, 0x3f)));
    const joined = await loudness(joinMono(parts, speakers));
    expect(joined.loudness).toEqual(one.loudness);
    expect(joined.truePeak.perChannelDbtp).toEqual(one.truePeak.perChannelDbtp);
  });

  it('keeps full scale and the bits in use as they are, whatever the encoding', async () => {
    const clipped = noise(3, rate, 1.5).map((x) => Math.max(-1, Math.min(1 - 2 ** -15, x)));
    for (const bits of [8, 16, 24, 32] as const) {
      const sides = [clipped, clipped.toReversed()];
      const parts = await Promise.all(sides.map((side) => open(wavOf([side], rate, bits))));
      const joined = await loudness(joinMono(parts, ['L', 'R']));
      expect(joined, `${bits} bit`).toEqual(await loudness(await open(wavOf(sides, rate, bits))));
    }
    const parts = [await open(wavOf([clipped], rate, 16)), await open(wavOf([clipped], rate, 'float'))];
    const { encoding } = joinMono(parts, ['L', 'R']);
    expect(encoding).toEqual({ kind: 'float', bytes: 8, littleEndian: true });
  });

  it('takes a programme’s window of every part, and says nothing for all that one part says of itself', async () => {
    const all = channels(2, 3);
    const declared = new Uint8Array(602);
    new DataView(declared.buffer).setUint16(346, 2, true);
    new DataView(declared.buffer).setInt16(412, -2300, true);
    const bext = [{ id: 'bext', body: declared }];
    const parts = await Promise.all(all.map((samples) => open(wavOf([samples], rate, 24, null, bext))));
    expect(parts[0].format.declaredLoudness?.integratedLufs).toBe(-23);
    const plan = { ...wholeFile, window: { startSeconds: 1, endSeconds: 2.5 } };
    const [{ measurement }] = await measure(joinMono(parts, ['L', 'R']), { plan });
    const [one] = await measure(await open(wavOf(all, rate, 24)), { plan });
    expect(measurement.figures).toEqual(one.measurement.figures);
    expect(measurement.format).not.toHaveProperty('declaredLoudness');
    expect(measurement.format.startTimeReferenceSamples).toBe(0);
  });

  it('fills the end of a short part of 8 bit with silence and not with full scale', async () => {
    const parts = [
      await open(wavOf([noise(1, 2 * rate, 0.1)], rate, 8)),
      await open(wavOf([new Float64Array(rate)], rate, 8)),
    ];
    const { samplePeak } = await loudness(joinMono(parts, ['L', 'R']));
    expect(samplePeak.perChannelDbfs[1]).toBeNull();
  });

  it('tells of parts that end early, and refuses rates that differ', async () => {
    const [long, short] = [noise(1, 2 * rate, 0.1), noise(2, rate, 0.1)];
    const uneven = joinMono(
      [await open(wavOf([long], rate, 24)), await open(wavOf([short], rate, 24))],
      ['L', 'R'],
    );
    const [{ measurement }] = await measure(uneven);
    expect(measurement.findings[0].message).toContain('differ in length, by 1.000 s');
    expect(measurement.figures.measuredSeconds).toBe(2);
    const other = await open(wavOf([short], 44_100, 24));
    expect(() => joinMono([other, uneven], ['L', 'R'])).toThrow(/different sample rates/);
  });
});
