/**
 * The series as one binary object, little-endian:
 *
 *     0  8 bytes  'PLMSERIE'
 *     8  u32      layout of this object: 1
 *    12  u32      steps of 10 ms with an energy (E)
 *    16  u32      steps of 10 ms with a true peak (P)
 *    20  u32      audio channels (C)
 *    24  u32      steps of 100 ms per audio channel (H)
 *    28  u32      0
 *    32  f64 x E        weighted energy, mean square, all audio channels
 *        f32 x P        largest true peak over all audio channels, linear
 *        f32 x C x H    mean square of each audio channel, interleaved
 *
 * 8 h of 7.1.4 are 23 MB + 12 MB + 14 MB.
 */
import type { MeasurementSeries } from './figures.ts';

const magic = 'PLMSERIE';
const headBytes = 32;

export function encodeSeries(series: MeasurementSeries): Uint8Array {
  const { energy, truePeak, channelEnergy, channelCount } = series;
  const out = new Uint8Array(headBytes + energy.length * 8 + truePeak.length * 4 + channelEnergy.length * 4);
  const view = new DataView(out.buffer);
  for (let i = 0; i < 8; i++) out[i] = magic.charCodeAt(i);
  const counts = [
    1,
    energy.length,
    truePeak.length,
    channelCount,
    channelCount === 0 ? 0 : channelEnergy.length / channelCount,
  ];
  counts.forEach((count, i) => view.setUint32(8 + i * 4, count, true));
  let at = headBytes;
  for (const x of energy) view.setFloat64((at += 8) - 8, x, true);
  for (const x of truePeak) view.setFloat32((at += 4) - 4, x, true);
  for (const x of channelEnergy) view.setFloat32((at += 4) - 4, x, true);
  return out;
}

/** Throws an Error where the bytes are not such an object. */
export function decodeSeries(bytes: Uint8Array): MeasurementSeries {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  if (
    bytes.length < headBytes ||
    String.fromCharCode(...bytes.subarray(0, 8)) !== magic ||
    view.getUint32(8, true) !== 1
  )
    throw new Error('These bytes are not a series of a measurement.');
  const [energies, peaks, channelCount, hundreds] = [12, 16, 20, 24].map((offset) =>
    view.getUint32(offset, true),
  );
  if (bytes.length !== headBytes + energies * 8 + peaks * 4 + channelCount * hundreds * 4)
    throw new Error('The series of this measurement is cut short.');
  let at = headBytes;
  return {
    stepSeconds: 0.01,
    energy: Float64Array.from({ length: energies }, () => view.getFloat64((at += 8) - 8, true)),
    truePeak: Float32Array.from({ length: peaks }, () => view.getFloat32((at += 4) - 4, true)),
    channelCount,
    channelEnergy: Float32Array.from({ length: channelCount * hundreds }, () =>
      view.getFloat32((at += 4) - 4, true),
    ),
  };
}
