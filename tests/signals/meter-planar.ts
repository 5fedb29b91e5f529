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
  const view = new DataView(out.buffer);
  const full = 2 ** (8 * bytes - 1);
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
