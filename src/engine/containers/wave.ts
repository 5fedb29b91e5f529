/** WAV, RF64 and BW64 headers (EBU Tech 3306, ITU-R BS.2088; WAVE_FORMAT_EXTENSIBLE from secondary sources). */
import type { Finding } from '../figures.ts';
import { layoutOfCount, layoutOfMask } from '../layouts.ts';
import { UnreadableError, type ByteSource } from '../source.ts';
import { chunksOf, fourCc, isId, type Chunk } from './chunks.ts';
import { checkShape, dataExtent, layoutFindings } from './extent.ts';
import { bextBytes, ixmlBytes, programmeFacts } from './programme-chunks.ts';
import type { PcmLayout } from './pcm-source.ts';
import type { Encoding } from './samples.ts';

const unknownSize = 0xffffffff;

/** 64-bit sizes of RF64 and BW64: of the whole, of the data chunk, and of others by name. */
interface Sizes64 {
  whole: number;
  data: number;
  others: Map<string, number>;
}

function readDs64(bytes: Uint8Array): Sizes64 {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const u64 = (offset: number) => view.getUint32(offset, true) + view.getUint32(offset + 4, true) * 2 ** 32;
  const others = new Map<string, number>();
  if (bytes.length >= 28) {
    const entries = Math.min(view.getUint32(24, true), Math.floor((bytes.length - 28) / 12));
    for (let i = 0; i < entries; i++) others.set(fourCc(bytes, 28 + i * 12), u64(32 + i * 12));
  }
  return { whole: u64(0), data: u64(8), others };
}

interface Format {
  encoding: Encoding;
  codec: string;
  audioChannels: number;
  sampleRateHz: number;
  bitDepth: number;
  mask: number | null;
}

const guidTail = '0000001000800000aa00389b71';

/** The fmt chunk; `null` where the samples are compressed and a decoder must read them. */
function readFormat(bytes: Uint8Array): Format | null {
  if (bytes.length < 16)
    throw new UnreadableError('header-broken', 'The WAV header is broken: its format chunk is too short.');
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  let tag = view.getUint16(0, true);
  const audioChannels = view.getUint16(2, true);
  const sampleRateHz = view.getUint32(4, true);
  const blockAlign = view.getUint16(12, true);
  let bits = view.getUint16(14, true);
  let mask: number | null = null;
  const container = bits;
  if (tag === 0xfffe && bytes.length >= 40) {
    const valid = view.getUint16(18, true);
    if (valid > 0 && valid <= bits) bits = valid;
    mask = view.getUint32(20, true);
    tag = view.getUint16(24, true);
    const tail = [...bytes.subarray(27, 40)].map((b) => b.toString(16).padStart(2, '0')).join('');
    if (tail !== guidTail) return null;
  }
  if (tag !== 1 && tag !== 3) return null;
  checkShape('WAV', audioChannels, sampleRateHz);
  const declared = Math.ceil(container / 8);
  const stored = blockAlign % audioChannels === 0 ? blockAlign / audioChannels : declared;
  const byteCount = stored === 0 ? declared : stored;
  const allowed = tag === 3 ? [4, 8] : [1, 2, 3, 4];
  if (!allowed.includes(byteCount) || declared > byteCount)
    throw new UnreadableError(
      'header-broken',
      `The WAV header is broken: ${container} bits in ${byteCount} bytes is no sample format.`,
    );
  const kind = tag === 3 ? 'float' : byteCount === 1 ? 'unsigned' : 'integer';
  const encoding: Encoding = { kind, bytes: byteCount as Encoding['bytes'], littleEndian: true };
  return {
    encoding,
    codec: tag === 3 ? 'PCM float' : 'PCM',
    audioChannels,
    sampleRateHz,
    bitDepth: bits,
    mask,
  };
}

/** What a WAV family file holds; `null` where its samples are compressed. Throws UnreadableError. */
export async function readWave(source: ByteSource): Promise<PcmLayout | null> {
  const head = await source.read(0, 12);
  const container = { RIFF: 'WAV', RF64: 'RF64', BW64: 'BW64' }[fourCc(head, 0)] ?? 'WAV';
  const riffSize = new DataView(head.buffer, head.byteOffset).getUint32(4, true);
  const findings: Finding[] = [];
  let sizes: Sizes64 | null = null;
  let format: Format | null = null;
  let data: Chunk | null = null;
  let bext: Uint8Array | null = null;
  let ixml: Uint8Array | null = null;
  const sizeOf = (id: string, size32: number) =>
    size32 !== unknownSize || !sizes ? size32 : id === 'data' ? sizes.data : (sizes.others.get(id) ?? size32);
  for await (const chunk of chunksOf(source, 12, true, sizeOf)) {
    // Behind the samples stand whole chunks or nothing that matters.
    if (data && !isId(chunk.id)) break;
    if (chunk.id === 'ds64' && !sizes)
      sizes = readDs64(await source.read(chunk.offset, Math.min(chunk.size, 4096)));
    else if (chunk.id === 'fmt ' && !format) {
      format = readFormat(await source.read(chunk.offset, Math.min(chunk.size, 64)));
      if (!format) return null;
    } else if (chunk.id === 'data' && !data) data = chunk;
    else if (chunk.id === 'bext' && !bext)
      bext = await source.read(chunk.offset, Math.min(chunk.size, bextBytes));
    else if (chunk.id === 'iXML' && !ixml)
      ixml = await source.read(chunk.offset, Math.min(chunk.size, ixmlBytes));
    if (format && data && bext && ixml) break;
  }
  if (!format)
    throw new UnreadableError('header-broken', 'The WAV header is broken: it has no format chunk.');
  if (!data) throw new UnreadableError('no-samples', 'The file has a WAV header but no audio data.');

  const frameBytes = format.encoding.bytes * format.audioChannels;
  const streamed = data.size === unknownSize && !sizes;
  const { frames } = await dataExtent(source, {
    dataOffset: data.offset,
    promisedBytes: streamed ? null : data.size,
    frameBytes,
    sampleRateHz: format.sampleRateHz,
    littleEndian: true,
    findings,
  });
  const whole = (sizes && riffSize === unknownSize ? sizes.whole : riffSize) + 8;
  if (findings.length === 0 && Math.abs(whole - source.size) > 1)
    findings.push({
      code: 'size-lies',
      message: `The header says the file has ${whole} bytes; it has ${source.size}. All of its audio was measured.`,
    });
  const layout =
    format.mask === null || format.mask === 0
      ? layoutOfCount(format.audioChannels)
      : layoutOfMask(format.mask, format.audioChannels);
  return {
    format: {
      container,
      codec: format.codec,
      sampleRateHz: format.sampleRateHz,
      bitDepth: format.bitDepth,
      channels: format.audioChannels,
      layout: layout.name,
      durationSeconds: frames / format.sampleRateHz,
      ...programmeFacts(format.sampleRateHz, bext, ixml),
    },
    layout,
    findings: [...findings, ...layoutFindings(layout)],
    encoding: format.encoding,
    dataOffset: data.offset,
    frames,
  };
}
