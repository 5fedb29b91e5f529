/** The forms that a sample is stored in. */

export interface Encoding {
  kind: 'integer' | 'unsigned' | 'float';
  /** Bytes of one sample as stored. */
  bytes: 1 | 2 | 3 | 4 | 8;
  littleEndian: boolean;
}

/** Reads one sample at a byte offset. Integers are scaled by their container's full scale, as left-justified samples are. */
export function sampleReader({
  kind,
  bytes,
  littleEndian: le,
}: Encoding): (view: DataView, offset: number) => number {
  if (kind === 'float') return bytes === 4 ? (v, o) => v.getFloat32(o, le) : (v, o) => v.getFloat64(o, le);
  if (kind === 'unsigned') return (v, o) => (v.getUint8(o) - 128) / 128;
  switch (bytes) {
    case 1:
      return (v, o) => v.getInt8(o) / 128;
    case 2:
      return (v, o) => v.getInt16(o, le) / 32_768;
    case 3:
      return le
        ? (v, o) => (v.getUint16(o, true) | (v.getInt8(o + 2) << 16)) / 8_388_608
        : (v, o) => ((v.getInt8(o) << 16) | v.getUint16(o + 1, false)) / 8_388_608;
    default:
      return (v, o) => v.getInt32(o, le) / 2_147_483_648;
  }
}
