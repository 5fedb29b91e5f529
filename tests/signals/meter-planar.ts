/** Measures planar arrays through the meter's own face: interleaved into bytes of a chosen form. */
import type { Encoding } from '../../src/engine/containers/samples.ts';
import { layoutOfCount, type Speaker } from '../../src/engine/layouts.ts';
import { Meter, type MeterResult, type Twin } from '../../src/engine/meter.ts';
import type { StepObserver } from '../../src/engine/steps.ts';

export const float64: Encoding = { kind: 'float', bytes: 8, littleEndian: true };

/** Interleaved samples; integers are rounded and limited to their range, without dither. */
export function interleave(planar: readonly ArrayLike<number>[], encoding: Encoding): Uint8Array {
  const { kind, bytes, littleEndian: le } = encoding;
  const frames = planar[0].length;
  const out = new Uint8Array(frames * planar.length * bytes);
  const words = le && kind !== 'unsigned' ? wordsOf(out.buffer, kind, bytes) : null;
  const full = 2 ** (8 * bytes - 1);
  if (words) {
    const [scale, low, high] = kind === 'float' ? [1, -Infinity, Infinity] : [full, -full, full - 1];
    planar.forEach((samples, c) => {
      for (let i = 0, o = c; i < frames; i++, o += planar.length) {
        const x = samples[i] * scale;
        words[o] = kind === 'float' ? x : Math.max(low, Math.min(high, Math.round(x)));
      }
    });
    return out;
  }
  if (kind === 'integer' && bytes === 3 && le) {
    planar.forEach((samples, c) => {
      for (let i = 0, o = 3 * c; i < frames; i++, o += 3 * planar.length) {
        const code = Math.max(-full, Math.min(full - 1, Math.round(samples[i] * full)));
        out[o] = code;
        out[o + 1] = code >> 8;
        out[o + 2] = code >> 16;
      }
    });
    return out;
  }
  const view = new DataView(out.buffer);
  for (let i = 0, o = 0; i < frames; i++)
    for (let c = 0; c < planar.length; c++, o += bytes) {
      const x = planar[c][i];
      if (kind === 'float') {
        if (bytes === 4) view.setFloat32(o, x, le);
        else view.setFloat64(o, x, le);
        continue;
      }
      const code =
        Math.max(-full, Math.min(full - 1, Math.round(x * full))) + (kind === 'unsigned' ? full : 0);
      for (let b = 0; b < bytes; b++)
        out[o + (le ? b : bytes - 1 - b)] = Math.floor(code / 2 ** (8 * b)) & 255;
    }
  return out;
}

/** The same bytes as words of the machine, which are little-endian wherever this runs; there is none of 24 bit. */
function wordsOf(buffer: ArrayBuffer, kind: Encoding['kind'], bytes: number) {
  if (kind === 'float') return bytes === 4 ? new Float32Array(buffer) : new Float64Array(buffer);
  if (bytes === 2) return new Int16Array(buffer);
  return bytes === 4 ? new Int32Array(buffer) : null;
}

export interface PlanarOptions {
  encoding?: Encoding;
  speakers?: readonly Speaker[];
  /** Frames of each call; the rest comes in one. */
  split?: readonly number[];
  twin?: Twin;
  observers?: readonly StepObserver[];
}

export function measurePlanar(
  planar: readonly ArrayLike<number>[],
  sampleRateHz: number,
  {
    encoding = float64,
    speakers = layoutOfCount(planar.length).speakers,
    split = [],
    twin,
    observers,
  }: PlanarOptions = {},
): MeterResult {
  const meter = new Meter(
    {
      sampleRateHz,
      encoding,
      frameChannels: planar.length,
      audioChannels: planar.map((_, i) => i),
      speakers,
      observers,
    },
    twin,
  );
  const bytes = interleave(planar, encoding);
  const frameBytes = encoding.bytes * planar.length;
  const frames = planar[0].length;
  let at = 0;
  for (const wanted of [...split, frames]) {
    const count = Math.min(wanted, frames - at);
    meter.process(bytes.subarray(at * frameBytes, (at + count) * frameBytes), count);
    at += count;
  }
  return meter.result();
}
