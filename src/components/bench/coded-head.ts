/**
 * What the first bytes of a coded file tell: enough to have it decoded at its own sample rate, and to know beforehand
 * what it will take in memory. Files that lie only cost a wrong guess: the decoder says what is there.
 */
import type { ByteSource } from '@/engine/source.ts';
import { readMp4 } from './mp4-head.ts';

export interface CodedHead {
  container: string;
  codec: string;
  /** `null`: not told, or not found. */
  sampleRateHz: number | null;
  audioChannels: number | null;
  bitDepth: number | null;
  durationSeconds: number | null;
}

/** Reads past the end give 0, so that a cut head is a head that tells nothing. */
const at = (bytes: Uint8Array, offset: number) => bytes[offset] ?? 0;
const u32be = (b: Uint8Array, o: number) =>
  at(b, o) * 2 ** 24 + ((at(b, o + 1) << 16) | (at(b, o + 2) << 8) | at(b, o + 3));
const u32le = (b: Uint8Array, o: number) =>
  at(b, o + 3) * 2 ** 24 + ((at(b, o + 2) << 16) | (at(b, o + 1) << 8) | at(b, o));
const text = (b: Uint8Array, o: number, length: number) =>
  String.fromCharCode(...b.subarray(o, Math.min(b.length, o + length)));
const orNull = (value: number) => (value > 0 && Number.isFinite(value) ? value : null);

const headBytes = 8192;

/** The head of a file that is not read natively; `null` where the bytes are of no kind that is known here. */
export async function readCodedHead(bytes: ByteSource): Promise<CodedHead | null> {
  let start = 0;
  let head = await bytes.read(0, headBytes);
  if (text(head, 0, 3) === 'ID3') {
    // ID3v2: a length of four times seven bits, without its own ten bytes.
    start = 10 + ((at(head, 6) << 21) | (at(head, 7) << 14) | (at(head, 8) << 7) | at(head, 9));
    head = await bytes.read(start, headBytes);
  }
  if (text(head, 0, 4) === 'fLaC') return flac(head);
  if (text(head, 0, 4) === 'OggS') return ogg(head, bytes);
  if (text(head, 4, 4) === 'ftyp' || text(head, 4, 4) === 'moov') return readMp4(bytes);
  if (u32be(head, 0) === 0x1a45dfa3) return told('Matroska', 'coded');
  if (u32be(head, 0) === 0x060e2b34) return told('MXF', 'coded');
  if (at(head, 0) === 0xff && (at(head, 1) & 0xf6) === 0xf0) return adts(head);
  return mpegAudio(head, bytes.size - start);
}

const told = (container: string, codec: string): CodedHead => ({
  container,
  codec,
  sampleRateHz: null,
  audioChannels: null,
  bitDepth: null,
  durationSeconds: null,
});

/** STREAMINFO (RFC 9639, 8.2): rate in 20 bits, audio channels less one in 3, depth less one in 5, samples in 36. */
function flac(head: Uint8Array): CodedHead {
  const o = 8 + 10;
  const rate = (at(head, o) << 12) | (at(head, o + 1) << 4) | (at(head, o + 2) >> 4);
  const samples = (at(head, o + 3) & 15) * 2 ** 32 + u32be(head, o + 4);
  return {
    container: 'FLAC',
    codec: 'FLAC',
    sampleRateHz: orNull(rate),
    audioChannels: ((at(head, o + 2) >> 1) & 7) + 1,
    bitDepth: (((at(head, o + 2) & 1) << 4) | (at(head, o + 3) >> 4)) + 1,
    durationSeconds: orNull(samples / rate),
  };
}

/** The first page's packet: Vorbis I 4.2.2, or RFC 7845 5.1 (Opus plays at 48 kHz whatever it was made from). */
async function ogg(head: Uint8Array, bytes: ByteSource): Promise<CodedHead> {
  const packet = 27 + at(head, 26);
  const opus = text(head, packet, 8) === 'OpusHead';
  const vorbis = text(head, packet + 1, 6) === 'vorbis';
  if (!opus && !vorbis) return told('OGG', 'coded');
  const rate = opus ? 48_000 : u32le(head, packet + 12);
  return {
    container: 'OGG',
    codec: opus ? 'Opus' : 'Vorbis',
    sampleRateHz: orNull(rate),
    audioChannels: orNull(at(head, packet + (opus ? 9 : 11))),
    bitDepth: null,
    durationSeconds: orNull((await lastGranule(bytes)) / rate),
  };
}

/** Samples up to the end of the last page (RFC 3533); pages are at most 65,307 bytes. */
async function lastGranule(bytes: ByteSource): Promise<number> {
  const from = Math.max(0, bytes.size - 65_536);
  const tail = await bytes.read(from, 65_536);
  for (let o = tail.length - 14; o >= 0; o--)
    if (at(tail, o) === 0x4f && text(tail, o, 4) === 'OggS')
      return u32le(tail, o + 6) + u32le(tail, o + 10) * 2 ** 32;
  return 0;
}

const rates = [44_100, 48_000, 32_000];
// ISO/IEC 11172-3 and 13818-3, layer III, kbit/s (from memory; only the guess of the length stands on them).
const kilobits1 = [0, 32, 40, 48, 56, 64, 80, 96, 112, 128, 160, 192, 224, 256, 320];
const kilobits2 = [0, 8, 16, 24, 32, 40, 48, 56, 64, 80, 96, 112, 128, 144, 160];

/** A frame of layer III within the head, with the count of frames that encoders leave in the first one. */
function mpegAudio(head: Uint8Array, byteSize: number): CodedHead | null {
  for (let o = 0; o + 4 < Math.min(head.length, 4096); o++) {
    if (at(head, o) !== 0xff || (at(head, o + 1) & 0xe6) !== 0xe2) continue;
    const version = (at(head, o + 1) >> 3) & 3;
    const [bits, rate] = [at(head, o + 2) >> 4, (at(head, o + 2) >> 2) & 3];
    if (version === 1 || bits === 0 || bits === 15 || rate === 3) continue;
    const sampleRateHz = rates[rate] >> (version === 3 ? 0 : version === 2 ? 1 : 2);
    const kilobits = (version === 3 ? kilobits1 : kilobits2)[bits];
    const mono = at(head, o + 3) >> 6 === 3;
    const mark = o + 4 + (version === 3 ? (mono ? 17 : 32) : mono ? 9 : 17);
    const counted = ['Xing', 'Info'].includes(text(head, mark, 4)) && (at(head, mark + 7) & 1) === 1;
    const durationSeconds = counted
      ? (u32be(head, mark + 8) * (version === 3 ? 1152 : 576)) / sampleRateHz
      : (byteSize * 8) / (kilobits * 1000);
    return {
      container: 'MP3',
      codec: 'MP3',
      sampleRateHz,
      audioChannels: mono ? 1 : 2,
      bitDepth: null,
      durationSeconds: orNull(durationSeconds),
    };
  }
  return null;
}

const adtsRates = [
  96_000, 88_200, 64_000, 48_000, 44_100, 32_000, 24_000, 22_050, 16_000, 12_000, 11_025, 8000,
];

/** ISO/IEC 14496-3, ADTS. What extension doubles the rate is not told here, so it is only a guess. */
function adts(head: Uint8Array): CodedHead {
  return {
    ...told('AAC', 'AAC'),
    sampleRateHz: adtsRates[(at(head, 2) >> 2) & 15] ?? null,
    audioChannels: orNull(((at(head, 2) & 1) << 2) | (at(head, 3) >> 6)),
  };
}
