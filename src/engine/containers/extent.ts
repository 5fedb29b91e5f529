/** How far the samples truly go, and what to say where a header tells otherwise. */
import type { Finding } from '../figures.ts';
import type { Layout } from '../layouts.ts';
import { UnreadableError, type ByteSource } from '../source.ts';
import { fourCc, isId } from './chunks.ts';

const mostAudioChannels = 128;

/** Refuses counts and rates that no audio has. */
export function checkShape(container: string, audioChannels: number, sampleRateHz: number): void {
  if (audioChannels < 1 || audioChannels > mostAudioChannels)
    throw new UnreadableError(
      'header-broken',
      `The ${container} header is broken: it tells of ${audioChannels} audio channels.`,
    );
  if (!(sampleRateHz >= 2_000 && sampleRateHz <= 768_000))
    throw new UnreadableError(
      'header-broken',
      `The ${container} header is broken: it tells of a sample rate of ${sampleRateHz} Hz.`,
    );
}

interface Told {
  dataOffset: number;
  /** Bytes of audio that the header promises; `null` where it leaves that open. */
  promisedBytes: number | null;
  frameBytes: number;
  sampleRateHz: number;
  littleEndian: boolean;
  findings: Finding[];
}

/** Whole frames between the data's first byte and its true end; adds findings. Throws UnreadableError where there are none. */
export async function dataExtent(source: ByteSource, p: Told): Promise<{ frames: number }> {
  const present = Math.max(0, source.size - p.dataOffset);
  const seconds = (bytes: number) => (bytes / p.frameBytes / p.sampleRateHz).toFixed(3);
  let bytes = p.promisedBytes ?? present;
  if (p.promisedBytes === null)
    p.findings.push({
      code: 'size-lies',
      message: 'The header leaves the length of the audio open; all that the file holds was measured.',
    });
  else if (p.promisedBytes === 0 && present > 0 && !(await isChunkAt(source, p.dataOffset, p.littleEndian))) {
    p.findings.push({
      code: 'size-lies',
      message: 'The header says that there is no audio; what follows it was measured to the end of the file.',
    });
    bytes = present;
  } else if (p.promisedBytes > present) {
    p.findings.push({
      code: 'truncated',
      message: `The file is cut short: its header promises ${seconds(p.promisedBytes)} s of audio, ${seconds(present)} s are there.`,
      atSeconds: present / p.frameBytes / p.sampleRateHz,
    });
    bytes = present;
  } else if (await isUntold(source, p.dataOffset + p.promisedBytes, p.littleEndian))
    p.findings.push({
      code: 'size-lies',
      message: `Behind the ${seconds(p.promisedBytes)} s of audio that the header tells of stand ${present - p.promisedBytes} bytes that are no chunk; they were not measured. If they are audio (${seconds(present - p.promisedBytes)} s), export the file again.`,
      atSeconds: p.promisedBytes / p.frameBytes / p.sampleRateHz,
    });
  const frames = Math.floor(bytes / p.frameBytes);
  if (frames === 0)
    throw new UnreadableError('no-samples', 'The file has a header but not one sample of audio.');
  return { frames };
}

/** Whether something stands behind the audio that is neither a pad byte nor a chunk. */
async function isUntold(source: ByteSource, end: number, littleEndian: boolean): Promise<boolean> {
  if (source.size - end < 2) return false;
  return !(await isChunkAt(source, end, littleEndian)) && !(await isChunkAt(source, end + 1, littleEndian));
}

async function isChunkAt(source: ByteSource, offset: number, littleEndian: boolean): Promise<boolean> {
  const head = await source.read(offset, 8);
  if (head.length < 8 || !isId(fourCc(head, 0))) return false;
  return new DataView(head.buffer, head.byteOffset).getUint32(4, littleEndian) <= source.size - offset - 8;
}

/** Tells of a layout that the file does not name. */
export const layoutFindings = (layout: Layout): Finding[] =>
  layout.assumed
    ? [
        {
          code: 'layout-assumed',
          message: layout.speakers.includes('unknown')
            ? `The file does not say what its ${layout.speakers.length} audio channels are; each was given the weight of a front one.`
            : `The file does not say what its ${layout.speakers.length} audio channels are; the order ${layout.speakers.join(' ')} was assumed.`,
        },
      ]
    : [];
