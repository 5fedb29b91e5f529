/** The first audio track of an MP4 or QuickTime file (ISO/IEC 14496-12), as far as its boxes tell. */
import type { ByteSource } from '@/engine/source.ts';
import type { CodedHead } from './coded-head.ts';

interface Box {
  kind: string;
  /** Of its content. */
  from: number;
  to: number;
}

const codecs: Record<string, string> = {
  mp4a: 'AAC',
  alac: 'ALAC',
  Opus: 'Opus',
  fLaC: 'FLAC',
  lpcm: 'PCM',
  sowt: 'PCM',
  twos: 'PCM',
  in24: 'PCM',
  'ac-3': 'AC-3',
};
const mostMoovBytes = 32 * 1024 ** 2;
const mostBoxes = 10_000;

/** Boxes between two places; stops at the first that does not fit. */
function boxesOf(view: DataView, from: number, to: number): Box[] {
  const boxes: Box[] = [];
  for (let at = from; at + 8 <= to && boxes.length < mostBoxes;) {
    let size = view.getUint32(at);
    let content = at + 8;
    if (size === 1 && at + 16 <= to) {
      size = Number(view.getBigUint64(at + 8));
      content = at + 16;
    } else if (size === 0) size = to - at;
    if (size < content - at || at + size > to) break;
    boxes.push({ kind: kindAt(view, at + 4), from: content, to: at + size });
    at += size;
  }
  return boxes;
}
const kindAt = (view: DataView, at: number) =>
  String.fromCharCode(...[0, 1, 2, 3].map((i) => view.getUint8(at + i)));

function inside(view: DataView, box: Box | undefined, ...path: string[]): Box | undefined {
  return path.reduce<Box | undefined>(
    (found, kind) => found && boxesOf(view, found.from, found.to).find((one) => one.kind === kind),
    box,
  );
}

export async function readMp4(bytes: ByteSource): Promise<CodedHead> {
  const first = await bytes.read(0, 12);
  const brand = String.fromCharCode(...first.subarray(8, 12));
  const told: CodedHead = {
    container: brand === 'qt  ' ? 'MOV' : 'MP4',
    codec: 'coded',
    sampleRateHz: null,
    audioChannels: null,
    bitDepth: null,
    durationSeconds: null,
  };
  const view = await readMoov(bytes);
  if (!view) return told;
  for (const trak of boxesOf(view, 0, view.byteLength).filter(({ kind }) => kind === 'trak')) {
    const mdia = inside(view, trak, 'mdia');
    const hdlr = inside(view, mdia, 'hdlr');
    if (!hdlr || hdlr.from + 12 > hdlr.to || kindAt(view, hdlr.from + 8) !== 'soun') continue;
    const [mdhd, stsd] = [inside(view, mdia, 'mdhd'), inside(view, mdia, 'minf', 'stbl', 'stsd')];
    return { ...told, ...(stsd && entryOf(view, stsd)), ...(mdhd && durationOf(view, mdhd)) };
  }
  return told;
}

/** The content of the moov box, wherever among the outermost boxes it stands. */
async function readMoov(bytes: ByteSource): Promise<DataView | null> {
  for (let at = 0, seen = 0; at + 8 <= bytes.size && seen < mostBoxes; seen++) {
    const head = await bytes.read(at, 16);
    const view = new DataView(head.buffer, head.byteOffset, head.length);
    if (head.length < 8) return null;
    let size = view.getUint32(0);
    const long = size === 1 && head.length === 16;
    if (long) size = Number(view.getBigUint64(8));
    else if (size === 0) size = bytes.size - at;
    const content = long ? 16 : 8;
    if (size < content) return null;
    if (kindAt(view, 4) === 'moov') {
      if (size > mostMoovBytes) return null;
      const moov = await bytes.read(at + content, size - content);
      return new DataView(moov.buffer, moov.byteOffset, moov.length);
    }
    at += size;
  }
  return null;
}

/** AudioSampleEntry: audio channels, and the rate as 16.16. */
function entryOf(view: DataView, stsd: Box): Partial<CodedHead> {
  const entry = stsd.from + 8;
  if (entry + 36 > stsd.to) return {};
  const kind = kindAt(view, entry + 4);
  const rate = view.getUint32(entry + 32) / 65_536;
  return {
    codec: codecs[kind] ?? 'coded',
    audioChannels: view.getUint16(entry + 24) || null,
    sampleRateHz: rate > 0 ? rate : null,
  };
}

function durationOf(view: DataView, mdhd: Box): Partial<CodedHead> {
  if (mdhd.from + 32 > mdhd.to && mdhd.from + 24 > mdhd.to) return {};
  const long = view.getUint8(mdhd.from) === 1 && mdhd.from + 32 <= mdhd.to;
  const timescale = view.getUint32(mdhd.from + (long ? 20 : 12));
  const length = long ? Number(view.getBigUint64(mdhd.from + 24)) : view.getUint32(mdhd.from + 16);
  return { durationSeconds: timescale > 0 && length > 0 ? length / timescale : null };
}
