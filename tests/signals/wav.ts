/** Small WAV files written by hand, so that tests may say every byte. */
import { float64, interleave } from './meter-planar.ts';
import type { Encoding } from '../../src/engine/containers/samples.ts';

/** Uniform noise, the same for the same seed. */
export function noise(seed: number, length: number, gain: number): Float64Array {
  let state = seed;
  return Float64Array.from({ length }, () => {
    state = (Math.imul(state, 1_664_525) + 1_013_904_223) >>> 0;
    return gain * (state / 2 ** 31 - 1);
  });
}

export interface ExtraChunk {
  id: string;
  body: Uint8Array;
}

/** PCM of 8, 16, 24 or 32 bit, or float (64 bit). With a mask the header is an extensible one. */
export function wavOf(
  planar: readonly ArrayLike<number>[],
  sampleRateHz: number,
  bits: 8 | 16 | 24 | 32 | 'float',
  mask: number | null = null,
  extra: readonly ExtraChunk[] = [],
): Uint8Array {
  const encoding: Encoding =
    bits === 'float'
      ? float64
      : { kind: bits === 8 ? 'unsigned' : 'integer', bytes: (bits / 8) as 1 | 2 | 3 | 4, littleEndian: true };
  const samples = interleave(planar, encoding);
  const formatBytes = mask === null ? 16 : 40;
  const padded = (length: number) => length + (length & 1);
  const extras = extra.reduce((sum, { body }) => sum + 8 + padded(body.length), 0);
  const out = new Uint8Array(12 + 8 + formatBytes + extras + 8 + padded(samples.length));
  const view = new DataView(out.buffer);
  let at = 0;
  const id = (text: string) => {
    for (const letter of text) out[at++] = letter.charCodeAt(0);
  };
  const u16 = (x: number) => view.setUint16((at += 2) - 2, x, true);
  const u32 = (x: number) => view.setUint32((at += 4) - 4, x, true);
  const tag = bits === 'float' ? 3 : 1;
  id('RIFF');
  u32(out.length - 8);
  id('WAVEfmt ');
  u32(formatBytes);
  u16(mask === null ? tag : 0xfffe);
  u16(planar.length);
  u32(sampleRateHz);
  u32(sampleRateHz * planar.length * encoding.bytes);
  u16(planar.length * encoding.bytes);
  u16(encoding.bytes * 8);
  if (mask !== null) {
    u16(22);
    u16(encoding.bytes * 8);
    u32(mask);
    // The sub-format's GUID: its tag, then the same bytes for all.
    u32(tag);
    for (const byte of [0, 0, 0x10, 0, 0x80, 0, 0, 0xaa, 0, 0x38, 0x9b, 0x71]) out[at++] = byte;
  }
  for (const { id: name, body } of extra) {
    id(name);
    u32(body.length);
    out.set(body, at);
    at += padded(body.length);
  }
  id('data');
  u32(samples.length);
  out.set(samples, at);
  return out;
}
