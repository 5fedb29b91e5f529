import { describe, expect, it } from 'vitest';
import { openNative } from '../../../src/engine/containers/open.ts';
import type { Speaker } from '../../../src/engine/layouts.ts';
import { measure } from '../../../src/engine/measure.ts';
import { wholeFile } from '../../../src/engine/plan.ts';
import { noise, wavOf, type ExtraChunk } from '../../signals/wav.ts';

const rate = 48_000;
const sine = (hz: number, gain: number, seconds: number) =>
  Float64Array.from(
    { length: Math.round(seconds * rate) },
    (_, n) => gain * Math.sin((2 * Math.PI * hz * n) / rate),
  );
const joined = (...parts: Float64Array[]) => Float64Array.from(parts.flatMap((part) => [...part]));
const silence = (seconds: number) => new Float64Array(Math.round(seconds * rate));

async function facts(
  planar: Float64Array[],
  {
    speakers,
    bits = 24,
    extra,
  }: { speakers?: Speaker[]; bits?: 16 | 24 | 'float'; extra?: ExtraChunk[] } = {},
) {
  const bytes = wavOf(planar, rate, bits, null, extra);
  const source = await openNative({
    size: bytes.length,
    read: (offset, length) => Promise.resolve(bytes.subarray(offset, offset + length)),
  });
  if (!source) throw new Error('Not read natively');
  const presentations = speakers && [{ name: 'it', audioChannels: speakers.map((_, i) => i), speakers }];
  const [{ measurement }] = await measure(source, {
    plan: { ...wholeFile, presentations: presentations ?? null },
  });
  const { signal } = measurement.figures;
  if (!signal) throw new Error('No facts of the signal');
  return { signal, findings: measurement.findings, codes: measurement.findings.map(({ code }) => code) };
}
/** Two audio channels of plain noise with a part in common, in which nothing is to be found. */
function clean(seconds: number): Float64Array[] {
  const length = Math.round(seconds * rate);
  const common = noise(9, length, 0.1);
  return [1, 2].map((seed) => noise(seed, length, 0.15).map((x, i) => x + common[i]));
}

describe('facts of the signal', () => {
  it('finds nothing in a clean programme', async () => {
    const { codes, signal } = await facts(clean(6));
    expect(codes).toEqual([]);
    expect(signal.bandwidthHz).toBeGreaterThan(23_000);
    // Equal parts in power of 0.1^2 in common and 0.15^2 apart: 1 / 3.25.
    expect(signal.stereo?.correlationLowest).toBeCloseTo(1 / 3.25, 1);
  });

  it('measures silence at the head, inside and at the tail, by each level', async () => {
    const part = noise(1, 2 * rate, 0.2);
    // Uniform noise of that gain has an RMS of 20 log10(0.002 / sqrt 3) = -58.7 dBFS: silence at -50, none at -60.
    const whisper = noise(3, 3 * rate, 0.002);
    const { signal, findings } = await facts([joined(silence(1.5), part, whisper, part, silence(2.5))]);
    const at = (level: number) => signal.silence.find(({ levelDbfs }) => levelDbfs === level);
    expect(at(-60)).toMatchObject({ headSeconds: 1.5, tailSeconds: 2.5, longestInsideSeconds: 0 });
    expect(at(-50)).toMatchObject({ headSeconds: 1.5, longestInsideSeconds: 3, longestInsideAtSeconds: 3.5 });
    expect(findings.filter(({ code }) => code === 'silence')).toMatchObject([
      { atSeconds: 8.5, lengthSeconds: 2.5 },
    ]);
  });

  it('finds a drop-out in one audio channel, and not the pause of a programme', async () => {
    const [left, right] = clean(5);
    right.fill(0, 2 * rate, 2 * rate + 480);
    right.fill(0, 4 * rate);
    const { signal, findings } = await facts([left, right]);
    expect(signal.dropOuts).toEqual({
      count: 1,
      listed: [{ audioChannel: 1, atSeconds: 2, lengthSeconds: 0.01 }],
    });
    expect(findings.find(({ code }) => code === 'drop-out')?.message).toContain('10.0 ms in R');
  });

  it('counts clipped runs, and flat tops where a clipped mix was turned down', async () => {
    const clipped = sine(997, 1.5, 3).map((x) => Math.max(-1, Math.min(1, x)));
    const loud = await facts([clipped], { bits: 'float' });
    expect(loud.codes).toContain('clipping');
    // Two tops each period, from where the first one begins.
    expect(Math.abs(loud.signal.clipping.count - 2 * 997 * 3)).toBeLessThan(4);
    const turnedDown = await facts([clipped.map((x) => x * 0.5)], { bits: 'float' });
    expect(turnedDown.signal.clipping.count).toBe(0);
    expect(turnedDown.codes).toContain('flat-top');
  });

  it('counts clipped runs by their length', async () => {
    const [samples] = clean(3);
    // Runs of 3, 4, 5, 12 and 60 samples, and two samples that make none.
    [2, 3, 4, 5, 12, 60].forEach((length, i) => samples.fill(1, (i + 1) * 10_000, (i + 1) * 10_000 + length));
    const { signal } = await facts([samples], { bits: 'float' });
    expect(signal.clipping).toMatchObject({
      count: 5,
      longestSamples: 60,
      atLeast: [
        { samples: 3, count: 5 },
        { samples: 5, count: 3 },
        { samples: 10, count: 2 },
        { samples: 20, count: 1 },
        { samples: 50, count: 1 },
      ],
    });
  });

  it('takes an end for no drop-out, though digital silence stands for a moment before faint noise', async () => {
    const [left] = clean(4);
    // Signal up to 1 ms into a step, zeros for 4 ms of it, then noise at -70 dBFS.
    const end = 2 * rate + 48;
    const faint = noise(5, left.length, 0.0003);
    left.forEach((_, i) => (left[i] = i < end ? left[i] : i < end + 192 ? 0 : faint[i]));
    expect((await facts([left])).signal.dropOuts.count).toBe(0);
    const [right] = clean(4);
    right.fill(0, end, end + 192);
    expect((await facts([right])).signal.dropOuts.count).toBe(1);
  });

  it('measures DC, balance and correlation', async () => {
    const offset = await facts(clean(4).map((samples) => samples.map((x) => x + 0.01)));
    expect(offset.signal.dcOffsetPercent[0]).toBeCloseTo(1, 1);
    expect(offset.codes).toEqual(['dc-offset', 'dc-offset']);
    const [left, right] = clean(4);
    const leaning = await facts([left, right.map((x) => x / 2)]);
    expect(leaning.signal.stereo?.balanceLu).toBeCloseTo(20 * Math.log10(2), 1);
    expect(leaning.codes).toEqual(['balance']);
    const inverted = await facts([left, left.map((x) => -x)]);
    expect(inverted.signal.stereo).toMatchObject({ belowZeroPercent: 100, dualMono: false });
    expect(inverted.signal.stereo?.correlationLowest).toBeCloseTo(-1, 6);
  });

  it('tells mono on two audio channels, and an audio channel that is silent while others play', async () => {
    const [one] = clean(4);
    expect((await facts([one, one])).codes).toEqual(['dual-mono']);
    const { signal, codes } = await facts([one, silence(4)]);
    expect(signal.silentAudioChannels).toEqual([1]);
    expect(codes).toContain('silent-audio-channel');
    expect((await facts([silence(4), silence(4)])).codes).toEqual(['silence']);
  });

  it('suspects an order in which the LFE plays the whole band', async () => {
    const speakers: Speaker[] = ['L', 'R', 'C', 'LFE', 'Ls', 'Rs'];
    const voices = (seed: number) => noise(seed, 4 * rate, 0.1);
    const swapped = await facts([1, 2, 3, 4, 5, 6].map(voices), { speakers });
    expect(swapped.signal.suspectOrder).toBe('lfe-full-band');
    const proper = await facts([voices(1), voices(2), voices(3), sine(60, 0.2, 4), voices(5), voices(6)], {
      speakers,
    });
    expect(proper.signal.suspectOrder).toBeNull();
    const film = await facts([voices(1), voices(2), silence(4), voices(4), voices(5), voices(6)], {
      speakers,
    });
    expect(film.signal.suspectOrder).toBe('centre-silent');
  });

  it('measures where the band ends', async () => {
    // Tones in every 100 Hz up to 11 kHz, at odd phases.
    const band = new Float64Array(4 * rate);
    for (let hz = 100; hz <= 11_000; hz += 100)
      band.forEach((_, n) => (band[n] += 0.005 * Math.sin((2 * Math.PI * hz * n) / rate + hz * hz)));
    const { signal, codes } = await facts([band], { bits: 'float' });
    expect(Math.abs((signal.bandwidthHz ?? 0) - 11_000)).toBeLessThan(350);
    expect(codes).toContain('bandwidth');
  });

  it('finds line-up tone: frequency, level, end, and which recommendation it keeps', async () => {
    const tone = sine(1000, 10 ** (-18 / 20), 10);
    const programme = joined(silence(2), tone, silence(1), noise(1, 5 * rate, 0.2));
    const { signal, findings } = await facts([programme, programme.map((x, i) => x + 1e-4 * (i % 2))]);
    expect(signal.lineUpTone?.hz).toBeCloseTo(1000, 0);
    expect(signal.lineUpTone?.levelDbfs).toBeCloseTo(-18, 1);
    expect(Math.abs((signal.lineUpTone?.startSeconds ?? 0) - 2)).toBeLessThan(0.11);
    expect(Math.abs((signal.lineUpTone?.endSeconds ?? 0) - 12)).toBeLessThan(0.11);
    expect(findings.find(({ code }) => code === 'line-up-tone')?.message).toContain(
      '1000 Hz at −18.0 dBFS (EBU R 68)',
    );
    expect((await facts(clean(6))).signal.lineUpTone).toBeNull();
  });

  it.each([50, 100, 440, 1000, 15_000])('finds a tone of %i Hz beside DC and noise', async (hz) => {
    const hiss = noise(4, 4 * rate, 0.0003);
    const tone = sine(hz, 10 ** (-20 / 20), 4).map((x, i) => x + 0.004 + hiss[i]);
    const { lineUpTone } = (await facts([tone])).signal;
    expect(Math.abs((lineUpTone?.hz ?? 0) - hz)).toBeLessThan(0.5);
    expect(lineUpTone?.levelDbfs).toBeCloseTo(-20, 1);
  });

  it.each([
    ['two low tones held together', [50, 120], 1],
    ['a held note with its harmonics', [80, 160, 240], 1],
    ['a tone that swells', [1000], 1.06],
  ])('takes %s for no line-up tone', async (_what, hertz, swell) => {
    const parts = hertz.map((hz) => sine(hz, 0.1, 4));
    const held = parts[0].map(
      (_x, i) => swell ** (Math.floor(i / 24_000) % 2) * parts.reduce((sum, part) => sum + part[i], 0),
    );
    expect((await facts([held])).signal.lineUpTone).toBeNull();
  });

  it('weighs the whole length of a programme in its spectrum', async () => {
    // Noise of the whole band for 10 s, then a minute without what lies above 5 kHz, 40 dB louder.
    const full = noise(6, 10 * rate, 0.002);
    const low = sine(1000, 0.2, 60).map((x, i) => x + 0.2 * Math.sin(i * 0.3) + 0.02 * Math.sin(i * 0.65));
    const { bandwidthHz } = (await facts([joined(full, low)], { bits: 'float' })).signal;
    // By ten windows a second of the head alone the noise would stand 60 dB under and less; by time it does not.
    expect(Math.abs((bandwidthHz ?? 0) - (0.65 * rate) / (2 * Math.PI))).toBeLessThan(300);
  });

  it('tells bits that are not in use', async () => {
    const coarse = clean(3).map((samples) => samples.map((x) => Math.round(x * 32_768) / 32_768));
    const { signal, codes } = await facts(coarse);
    expect(signal.effectiveBitDepth).toBe(16);
    expect(codes).toEqual(['unused-bits']);
    expect((await facts(coarse, { bits: 16 })).codes).toEqual([]);
  });

  it('tells where a file declares other loudness than it has', async () => {
    const body = new Uint8Array(602);
    const view = new DataView(body.buffer);
    view.setUint16(346, 2, true);
    [-2300, 0x7fff, -150, 0x7fff, 0x7fff].forEach((value, i) => view.setInt16(412 + 2 * i, value, true));
    const { findings } = await facts(clean(4), { extra: [{ id: 'bext', body }] });
    expect(findings).toMatchObject([
      {
        code: 'declared-differs',
        message: expect.stringContaining('integrated −23.0 LUFS, measured') as string,
      },
    ]);
  });
});
