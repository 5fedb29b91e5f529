/** AIFF and AIFF-C headers (layout of the format: from memory). */
import type { Finding } from '../figures.ts';
import { layoutOfCount } from '../layouts.ts';
import { UnreadableError, type ByteSource } from '../source.ts';
import { chanBytes, layoutOfChan } from './aiff-layout.ts';
import { chunksOf, fourCc, isId, type Chunk } from './chunks.ts';
import { checkShape, dataExtent, layoutFindings } from './extent.ts';
import type { PcmLayout } from './pcm-source.ts';
import type { Encoding } from './samples.ts';

/** An 80-bit extended number, big-endian. */
function extended(view: DataView, offset: number): number {
  const exponent = view.getUint16(offset) & 0x7fff;
  const mantissa = view.getUint32(offset + 2) * 2 ** 32 + view.getUint32(offset + 6);
  return mantissa * 2 ** (exponent - 16383 - 63);
}

interface Common {
  audioChannels: number;
  frames: number;
  bits: number;
  sampleRateHz: number;
  compression: string;
}

function readCommon(bytes: Uint8Array): Common {
  if (bytes.length < 18)
    throw new UnreadableError('header-broken', 'The AIFF header is broken: its common chunk is too short.');
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  return {
    audioChannels: view.getUint16(0),
    frames: view.getUint32(2),
    bits: view.getUint16(6),
    sampleRateHz: extended(view, 8),
    compression: bytes.length >= 22 ? fourCc(bytes, 18) : 'NONE',
  };
}

/** How the samples are stored; `null` where they are compressed. */
function encodingOf({ compression, bits }: Common): Encoding | null {
  const bytes = Math.ceil(bits / 8) as Encoding['bytes'];
  switch (compression) {
    case 'fl32':
    case 'FL32':
      return { kind: 'float', bytes: 4, littleEndian: false };
    case 'fl64':
    case 'FL64':
      return { kind: 'float', bytes: 8, littleEndian: false };
    case 'in24':
      return { kind: 'integer', bytes: 3, littleEndian: false };
    case 'in32':
      return { kind: 'integer', bytes: 4, littleEndian: false };
    case 'raw ':
      return bits === 8 ? { kind: 'unsigned', bytes: 1, littleEndian: false } : null;
    case 'NONE':
    case 'twos':
    case 'sowt':
      if (![1, 2, 3, 4].includes(bytes))
        throw new UnreadableError(
          'header-broken',
          `The AIFF header is broken: ${bits} bits is no sample format.`,
        );
      return { kind: 'integer', bytes, littleEndian: compression === 'sowt' };
    default:
      return null;
  }
}

/** What an AIFF file holds; `null` where its samples are compressed. Throws UnreadableError. */
export async function readAiff(source: ByteSource): Promise<PcmLayout | null> {
  const head = await source.read(0, 12);
  const container = fourCc(head, 8) === 'AIFC' ? 'AIFF-C' : 'AIFF';
  const findings: Finding[] = [];
  let common: Common | null = null;
  let sound: Chunk | null = null;
  let chan: Uint8Array | null = null;
  for await (const chunk of chunksOf(source, 12, false)) {
    // Behind the samples stand whole chunks or nothing that matters.
    if (sound && !isId(chunk.id)) break;
    if (chunk.id === 'COMM') common ??= readCommon(await source.read(chunk.offset, Math.min(chunk.size, 64)));
    else if (chunk.id === 'SSND') sound ??= chunk;
    else if (chunk.id === 'CHAN') chan ??= await source.read(chunk.offset, Math.min(chunk.size, chanBytes));
    if (common && sound && chan) break;
  }
  if (!common)
    throw new UnreadableError('header-broken', 'The AIFF header is broken: it has no common chunk.');
  const encoding = encodingOf(common);
  if (!encoding) return null;
  const { audioChannels } = common;
  const sampleRateHz = Math.round(common.sampleRateHz);
  checkShape('AIFF', audioChannels, sampleRateHz);
  if (!sound) throw new UnreadableError('no-samples', 'The file has an AIFF header but no audio data.');
  const start = await source.read(sound.offset, 4);
  const skip = start.length === 4 ? new DataView(start.buffer, start.byteOffset).getUint32(0) : 0;
  const frameBytes = encoding.bytes * audioChannels;
  const told = common.frames * frameBytes;
  const { frames } = await dataExtent(source, {
    dataOffset: sound.offset + 8 + skip,
    promisedBytes: told,
    frameBytes,
    sampleRateHz,
    littleEndian: false,
    findings,
  });
  if (findings.length === 0 && Math.abs(sound.size - 8 - skip - told) > 1)
    findings.push({
      code: 'size-lies',
      message: `The header gives the audio ${sound.size - 8 - skip} bytes in one place and ${told} in another; the second was taken.`,
    });
  const layout = (chan && layoutOfChan(chan, audioChannels)) ?? layoutOfCount(audioChannels);
  return {
    format: {
      container,
      codec: encoding.kind === 'float' ? 'PCM float' : 'PCM',
      sampleRateHz,
      bitDepth: encoding.kind === 'float' ? encoding.bytes * 8 : common.bits,
      channels: audioChannels,
      layout: layout.name,
      durationSeconds: frames / sampleRateHz,
    },
    layout,
    findings: [...findings, ...layoutFindings(layout)],
    encoding,
    dataOffset: sound.offset + 8 + skip,
    frames,
  };
}
