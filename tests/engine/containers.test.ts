import { describe, expect, it } from 'vitest';
import wavefile from 'wavefile';
import { openNative } from '../../src/engine/containers/open.ts';
import { integrityCodes, type Finding } from '../../src/engine/figures.ts';
import { measure } from '../../src/engine/measure.ts';
import { UnreadableError, type ByteSource } from '../../src/engine/source.ts';

const sourceOf = (bytes: Uint8Array): ByteSource => ({
  size: bytes.length,
  read: (offset, length) => Promise.resolve(bytes.subarray(offset, offset + length)),
});
/** What is found in the tone itself is not meant here. */
const ofTheFile = (findings: Finding[]) =>
  findings.filter(({ code }) => (integrityCodes as readonly string[]).includes(code));
async function measured(bytes: Uint8Array) {
  const native = await openNative(sourceOf(bytes));
  if (!native) throw new Error('Not read natively');
  const [{ measurement }] = await measure(native);
  return { measurement: { ...measurement, findings: ofTheFile(measurement.findings) } };
}
const codes = async (bytes: Uint8Array) =>
  (await measured(bytes)).measurement.findings.map((finding) => finding.code);

const rate = 48_000;
const tone = Float64Array.from({ length: rate }, (_, n) => 0.5 * Math.sin((2 * Math.PI * 997 * n) / rate));

/** A second of tone as WAV by an independent writer. */
function wav(depth: string, audioChannels = 2): Uint8Array {
  const scale = depth.endsWith('f') || depth === '64' ? 1 : 2 ** (Number(depth) - 1) - 1;
  const samples = Array.from(tone, (x) =>
    scale === 1 ? x : Math.round(x * scale) + (depth === '8' ? 128 : 0),
  );
  const wave = new wavefile.WaveFile();
  wave.fromScratch(
    audioChannels,
    rate,
    depth,
    audioChannels === 1 ? samples : Array.from({ length: audioChannels }, () => samples),
  );
  return wave.toBuffer();
}

const text = (s: string) => Uint8Array.from(s, (c) => c.charCodeAt(0));
function number(value: number, bytes: number, littleEndian: boolean): Uint8Array {
  const out = new Uint8Array(bytes);
  for (let i = 0; i < bytes; i++) out[littleEndian ? i : bytes - 1 - i] = Math.floor(value / 256 ** i) % 256;
  return out;
}
const join = (...parts: Uint8Array[]) => Uint8Array.from(parts.flatMap((part) => [...part]));
const pcm16 = (littleEndian: boolean) => {
  const out = new DataView(new ArrayBuffer(tone.length * 2));
  tone.forEach((x, n) => out.setInt16(n * 2, Math.round(x * 32_767), littleEndian));
  return new Uint8Array(out.buffer);
};

/** RF64 or BW64 with its sizes in ds64, and an odd chunk before the data. */
function wide(id: 'RF64' | 'BW64'): Uint8Array {
  const data = pcm16(true);
  const fmt = join(
    text('fmt '),
    number(16, 4, true),
    number(1, 2, true),
    number(1, 2, true),
    number(rate, 4, true),
    number(rate * 2, 4, true),
    number(2, 2, true),
    number(16, 2, true),
  );
  const odd = join(text('junk'), number(3, 4, true), text('abc'), Uint8Array.of(0));
  const after = join(text('axml'), number(4, 4, true), text('<a/>'));
  const whole = 12 + 36 + fmt.length + odd.length + 8 + data.length + after.length;
  const ds64 = join(
    text('ds64'),
    number(28, 4, true),
    number(whole - 8, 8, true),
    number(data.length, 8, true),
    number(tone.length, 8, true),
    number(0, 4, true),
  );
  return join(
    text(id),
    number(0xffffffff, 4, true),
    text('WAVE'),
    ds64,
    odd,
    fmt,
    text('data'),
    number(0xffffffff, 4, true),
    data,
    after,
  );
}

function aiff(compression: 'none' | 'sowt'): Uint8Array {
  const data = pcm16(compression === 'sowt');
  // 48 000 as an 80-bit extended number.
  const extended = Uint8Array.of(0x40, 0x0e, 0xbb, 0x80, 0, 0, 0, 0, 0, 0);
  const common = join(
    number(1, 2, false),
    number(tone.length, 4, false),
    number(16, 2, false),
    extended,
    ...(compression === 'sowt' ? [text('sowt'), Uint8Array.of(0, 0)] : []),
  );
  const body = join(
    text(compression === 'sowt' ? 'AIFC' : 'AIFF'),
    text('COMM'),
    number(common.length, 4, false),
    common,
    text('SSND'),
    number(data.length + 8, 4, false),
    number(0, 8, false),
    data,
  );
  return join(text('FORM'), number(body.length, 4, false), body);
}

describe('WAV by an independent writer', () => {
  it.each([
    ['8', 8, 0.1],
    ['16', 16, 0.001],
    ['24', 24, 0.001],
    ['32', 32, 0.001],
    ['32f', 32, 0.001],
    ['64', 64, 0.001],
  ])('reads %s', async (depth, bits, tolerance) => {
    const { measurement } = await measured(wav(depth));
    expect(measurement.format).toMatchObject({
      container: 'WAV',
      sampleRateHz: rate,
      bitDepth: bits,
      channels: 2,
      layout: 'stereo',
      durationSeconds: 1,
    });
    expect(Math.abs((measurement.figures.samplePeak.maxDbfs ?? 0) + 6.0206)).toBeLessThan(tolerance * 10);
    expect(measurement.findings).toEqual([]);
  });

  it('assumes the usual order of six audio channels without a mask, and says so', async () => {
    expect(await codes(wav('16', 6))).toContain('layout-assumed');
  });
});

describe('other containers', () => {
  it.each(['RF64', 'BW64'] as const)('reads %s with its sizes from ds64', async (id) => {
    const { measurement } = await measured(wide(id));
    expect(measurement.format).toMatchObject({
      container: id,
      channels: 1,
      layout: 'mono',
      durationSeconds: 1,
    });
    expect(measurement.findings).toEqual([]);
  });

  it('gives one tone the same figures in WAV, RF64, AIFF and AIFF-C', async () => {
    const [a, b, c, d] = await Promise.all(
      [wide('RF64'), wide('BW64'), aiff('none'), aiff('sowt')].map(
        async (bytes) => (await measured(bytes)).measurement.figures,
      ),
    );
    expect(b).toEqual(a);
    expect(c).toEqual(a);
    expect(d).toEqual(a);
  });
});

describe('headers that lie', () => {
  const good = wav('16');
  const at = 40; // the data chunk's size of a plain 16-bit WAV

  it('tells a file that is cut short, and measures what is there', async () => {
    const { measurement } = await measured(good.slice(0, 44 + rate * 2));
    expect(measurement.figures.measuredSeconds).toBe(0.5);
    expect(measurement.findings.map((finding) => finding.code)).toEqual(['truncated']);
    expect(measurement.findings[0].message).toContain('0.500 s are there');
  });

  it.each([0, 0xffffffff])('measures all that is there where the data size says %i', async (size) => {
    const lying = good.slice();
    new DataView(lying.buffer).setUint32(at, size, true);
    const { measurement } = await measured(lying);
    expect(measurement.figures.measuredSeconds).toBe(1);
    expect(measurement.findings.map((finding) => finding.code)).toEqual(['size-lies']);
  });

  it('ends what is not audio, empty or without samples as unreadable with a sentence', async () => {
    await expect(openNative(sourceOf(new Uint8Array(0)))).rejects.toThrow('The file is empty.');
    await expect(openNative(sourceOf(good.slice(0, 44)))).rejects.toThrow(/not one sample/);
    await expect(openNative(sourceOf(good.slice(0, 30)))).rejects.toThrow(UnreadableError);
    expect(await openNative(sourceOf(text('no audio at all')))).toBeNull();
  });

  it('counts samples that are no numbers as silence, and says so', async () => {
    const wild = wav('32f', 1);
    const view = new DataView(wild.buffer, wild.byteOffset);
    const data = wild.length - rate * 4;
    for (const [n, x] of [NaN, Infinity, -Infinity].entries())
      view.setFloat32(data + (1000 + n) * 4, x, true);
    const { measurement } = await measured(wild);
    expect(measurement.findings[0]).toMatchObject({ code: 'not-a-number', atSeconds: 1000 / rate });
    expect(measurement.figures.samplePeak.maxDbfs).toBeCloseTo(-6.02, 1);
  });

  /** A file of 8 GiB, of which only the head is there; it counts what is asked of it. */
  function vast(head: Uint8Array, filler: (offset: number, length: number) => Uint8Array) {
    const asked = { bytes: 0 };
    const source: ByteSource = {
      size: 8 * 2 ** 30,
      read(offset, length) {
        asked.bytes += length;
        const there = head.subarray(Math.min(offset, head.length), offset + length);
        return Promise.resolve(join(there, filler(offset + there.length, length - there.length)));
      },
    };
    return { source, asked };
  }
  const zeros = (_: number, length: number) => new Uint8Array(length);

  it.each([
    ['bext', 'RIFF', 'WAVE'],
    ['iXML', 'RIFF', 'WAVE'],
    ['fmt ', 'RIFF', 'WAVE'],
    ['ds64', 'RF64', 'WAVE'],
    ['COMM', 'FORM', 'AIFF'],
    ['CHAN', 'FORM', 'AIFF'],
  ])('reads under 400 KiB of a %s chunk that claims 4 GB', async (id, outer, inner) => {
    const little = outer !== 'FORM';
    const claim = number(0xfffffff0, 4, little);
    const head = join(text(outer), number(0xfffffff0, 4, little), text(inner), text(id), claim);
    const { source, asked } = vast(head, zeros);
    // Of nothing but zeros no programme is made: it is refused, or left to the decoder.
    const ended = await openNative(source).catch((error: unknown) => error);
    if (ended !== null) expect(ended).toBeInstanceOf(UnreadableError);
    expect(asked.bytes).toBeLessThan(400 * 1024);
  });

  it('comes to an end in chunks without end', async () => {
    const empty = join(text('junk'), number(0, 4, true));
    const { source, asked } = vast(join(text('RIFF'), number(0, 4, true), text('WAVE')), (offset, length) =>
      Uint8Array.from({ length }, (_, i) => empty[(offset - 12 + i) % 8]),
    );
    await expect(openNative(source)).rejects.toThrow(/no format chunk/);
    expect(asked.bytes).toBeLessThan(300 * 1024);
  });

  it('neither crashes nor hangs on 600 mutated headers, nor measures less than was promised without a finding', async () => {
    let state = 3342;
    const roll = (below: number) => {
      state = (Math.imul(state, 1_664_525) + 1_013_904_223) >>> 0;
      return state % below;
    };
    const seeds = [wav('16'), wav('24', 6), wide('RF64'), aiff('none'), aiff('sowt')].map((bytes) =>
      bytes.slice(0, 6000),
    );
    for (let i = 0; i < 600; i++) {
      const bytes = seeds[i % seeds.length].slice(0, 100 + roll(5900));
      for (let k = 0; k <= roll(4); k++) bytes[roll(Math.min(96, bytes.length))] = roll(256);
      try {
        const native = await openNative(sourceOf(bytes));
        if (!native) continue;
        const [{ measurement }] = await measure(native);
        // Every seed's header promises a second and an eighth at most is there: whatever was changed, something must be told.
        expect(ofTheFile(measurement.findings).length, `mutation ${i}`).toBeGreaterThan(0);
      } catch (error) {
        if (!(error instanceof UnreadableError)) throw error;
        expect(error.message).toMatch(/\.$/);
      }
    }
  });
});
