/** What a coded file says of itself that ffprobe does not hand on: its true length, whether it has its end, whether it is locked. */
import { fourCc } from '../../engine/containers/chunks.ts';
import type { ByteSource } from '../../engine/source.ts';

export interface Hints {
  /** Length by the encoder's own count of frames; `null` where there is none. */
  countedSeconds: number | null;
  /** The container marks its end, and the mark is not there. */
  lacksEnd: boolean;
  /** Copy protection. */
  isLocked: boolean;
}

const nothing: Hints = { countedSeconds: null, lacksEnd: false, isLocked: false };
/** An ID3 tag with a cover picture may be some megabytes; the index of a long film too. */
const mostTagBytes = 32 * 1024 ** 2;
const mostIndexBytes = 64 * 1024 ** 2;
const mostBoxes = 1000;

/** Reads at most some small ranges and the index of an MP4. Throws the source's errors. */
export async function readHints(bytes: ByteSource): Promise<Hints> {
  const head = await bytes.read(0, 12);
  if (fourCc(head, 0) === 'OggS') return { ...nothing, lacksEnd: !(await endsAsOgg(bytes)) };
  if (fourCc(head, 4) === 'ftyp' || fourCc(head, 4) === 'moov')
    return { ...nothing, isLocked: await isLockedMp4(bytes) };
  return { ...nothing, countedSeconds: await countedMp3(bytes) };
}

/** RFC 3533, section 6: the last page of each logical stream has bit 2 of its type set. */
async function endsAsOgg(bytes: ByteSource): Promise<boolean> {
  // The largest page is 65,307 bytes, so the last one begins within as many of the end.
  const from = Math.max(0, bytes.size - 65_307);
  const tail = await bytes.read(from, 65_307);
  for (let at = tail.length - 27; at >= 0; at--)
    if (tail[at] === 0x4f && fourCc(tail, at) === 'OggS' && tail[at + 4] === 0) {
      if ((tail[at + 5] & 4) === 0) return false;
      const segments = tail.subarray(at + 27, at + 27 + tail[at + 26]);
      const length = 27 + tail[at + 26] + segments.reduce((sum, one) => sum + one, 0);
      return at + length <= tail.length;
    }
  return false;
}

/** ISO/IEC 14496-12: sample entry 'enca'; 'drms' of old music shops (from memory). */
async function isLockedMp4(bytes: ByteSource): Promise<boolean> {
  for (let at = 0, boxes = 0; at + 16 <= bytes.size && boxes < mostBoxes; boxes++) {
    const head = await bytes.read(at, 16);
    const view = new DataView(head.buffer, head.byteOffset, head.length);
    const short = view.getUint32(0);
    const length = short === 1 ? Number(view.getBigUint64(8)) : short === 0 ? bytes.size - at : short;
    if (length < 8) return false;
    if (fourCc(head, 4) === 'moov') {
      const index = await bytes.read(at, Math.min(length, mostIndexBytes));
      const text = Buffer.from(index.buffer, index.byteOffset, index.length);
      // version and flags, count, size, then the name of the first entry.
      for (let entry = text.indexOf('stsd'); entry >= 0; entry = text.indexOf('stsd', entry + 4))
        if (['enca', 'drms'].includes(text.toString('latin1', entry + 16, entry + 20))) return true;
      return false;
    }
    at += length;
  }
  return false;
}

/** The count of frames that encoders put into the first MPEG frame ('Xing', 'Info'; from memory), times their length. */
async function countedMp3(bytes: ByteSource): Promise<number | null> {
  const tag = await bytes.read(0, 10);
  const isTagged = tag.length === 10 && tag[0] === 0x49 && tag[1] === 0x44 && tag[2] === 0x33;
  // ID3v2.4, section 3.1: the size in four bytes of seven bits.
  const tagBytes = isTagged ? 10 + ((tag[6] << 21) | (tag[7] << 14) | (tag[8] << 7) | tag[9]) : 0;
  if (tagBytes > mostTagBytes) return null;
  const frame = await bytes.read(tagBytes, 64);
  if (frame.length < 64 || frame[0] !== 0xff || (frame[1] & 0xe6) !== 0xe2) return null;
  const version = (frame[1] >> 3) & 3; // 3: MPEG-1, 2: MPEG-2, 0: MPEG-2.5
  const rateCode = (frame[2] >> 2) & 3;
  if (version === 1 || rateCode === 3) return null;
  const rate = [44_100, 48_000, 32_000][rateCode] / { 3: 1, 2: 2, 0: 4 }[version as 0 | 2 | 3];
  const isMono = frame[3] >> 6 === 3;
  // The tag stands behind the side information, whose length hangs on version and mode.
  const at = 4 + (version === 3 ? (isMono ? 17 : 32) : isMono ? 9 : 17);
  const view = new DataView(frame.buffer, frame.byteOffset, frame.length);
  if (!['Xing', 'Info'].includes(fourCc(frame, at)) || (view.getUint32(at + 4) & 1) === 0) return null;
  return (view.getUint32(at + 8) * (version === 3 ? 1152 : 576)) / rate;
}
