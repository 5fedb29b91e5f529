/** What ffprobe tells of a file that is not read natively. */
import { execFile } from 'node:child_process';
import { promisify } from 'node:util';
import { z } from 'zod';
import type { AudioFormat } from '../../engine/figures.ts';
import { layoutOfDecoder, type Layout } from '../../engine/layouts.ts';
import { UnreadableError } from '../../engine/source.ts';

const run = promisify(execFile);
const probeSeconds = 60;

/** The jail of both programs: only local files and pipes, nothing read from a terminal. */
export const jail = ['-v', 'error', '-protocol_whitelist', 'file,pipe'];

const digits = z.coerce.number().optional().catch(undefined);
const probeSchema = z.object({
  streams: z
    .array(
      z.object({
        index: z.number().int(),
        codec_type: z.string().optional(),
        codec_name: z.string().optional(),
        sample_rate: digits,
        channels: z.number().int().optional(),
        channel_layout: z.string().optional(),
        bits_per_raw_sample: digits,
        bits_per_sample: digits,
        duration: digits,
      }),
    )
    .default([]),
  format: z
    .object({
      format_name: z.string().default(''),
      duration: digits,
      tags: z.record(z.string(), z.string()).default({}),
    })
    .default({ format_name: '', tags: {} }),
});

export interface Probe {
  format: AudioFormat;
  layout: Layout;
  streamIndex: number;
  /** Seconds that the container tells; `null` where it only estimates or says nothing. */
  toldSeconds: number | null;
}

const codecs: Record<string, string> = {
  flac: 'FLAC',
  mp3: 'MP3',
  mp2: 'MPEG-1 Layer II',
  aac: 'AAC',
  alac: 'ALAC',
  vorbis: 'Vorbis',
  opus: 'Opus',
  ac3: 'AC-3',
  eac3: 'E-AC-3',
  wavpack: 'WavPack',
  dts: 'DTS',
};

function containerOf(name: string, brand: string): string {
  if (name.includes('mp4')) return brand.startsWith('qt') ? 'MOV' : 'MP4';
  const first = name.split(',')[0];
  return first === 'matroska' ? 'Matroska' : first.toUpperCase();
}

/** Reads the facts of the first audio stream. Throws UnreadableError, or the system's error where ffprobe is missing. */
export async function probe(path: string, signal: AbortSignal): Promise<Probe> {
  const args = [...jail, '-print_format', 'json', '-show_format', '-show_streams', '-i', path];
  let text: string;
  try {
    ({ stdout: text } = await run('ffprobe', args, {
      signal,
      timeout: probeSeconds * 1000,
      maxBuffer: 8 * 1024 ** 2,
    }));
  } catch (error) {
    if (signal.aborted || (error instanceof Error && 'syscall' in error)) throw error;
    throw new UnreadableError(
      'not-audio',
      'This is not an audio file, or it is damaged at its start: nothing in it could be recognised.',
    );
  }
  const { streams, format } = probeSchema.parse(JSON.parse(text));
  const stream = streams.find((s) => s.codec_type === 'audio');
  if (!stream) {
    const found =
      streams.length > 0
        ? `only ${[...new Set(streams.map((s) => s.codec_type ?? 'data'))].join(' and ')}`
        : 'no stream';
    throw new UnreadableError('not-audio', `The file holds no audio: ${found} was found in it.`);
  }
  const { sample_rate: sampleRateHz, channels } = stream;
  if (!sampleRateHz || !channels || !stream.codec_name)
    throw new UnreadableError(
      'codec-unknown',
      'The file holds audio in a codec that is not known here. Deliver it as WAV, FLAC, MP3, AAC or another common format.',
    );
  const layout = layoutOfDecoder(stream.channel_layout, channels);
  const estimated = ['mp3', 'aac'].includes(format.format_name);
  const duration = stream.duration ?? format.duration;
  const pcm = stream.codec_name.startsWith('pcm_');
  return {
    format: {
      container: containerOf(format.format_name, format.tags.major_brand ?? ''),
      codec: pcm
        ? stream.codec_name.startsWith('pcm_f')
          ? 'PCM float'
          : 'PCM'
        : (codecs[stream.codec_name] ?? stream.codec_name),
      sampleRateHz,
      bitDepth: stream.bits_per_raw_sample || stream.bits_per_sample || null,
      channels,
      layout: layout.name,
      durationSeconds: duration ?? 0,
    },
    layout,
    streamIndex: stream.index,
    toldSeconds: estimated ? null : (duration ?? null),
  };
}
