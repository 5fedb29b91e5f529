/** What ffprobe tells of a file that is not read natively. */
import { execFile } from 'node:child_process';
import { promisify } from 'node:util';
import { z } from 'zod';
import type { AudioFormat, AudioStream } from '../../engine/figures.ts';
import { layoutOfDecoder, type Layout } from '../../engine/layouts.ts';
import { UnreadableError } from '../../engine/source.ts';
import { jailed } from './jail.ts';

const run = promisify(execFile);
const probeSeconds = 60;

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
        bit_rate: digits,
        tags: z.record(z.string(), z.string()).default({}),
      }),
    )
    .default([]),
  format: z
    .object({
      format_name: z.string().default(''),
      duration: digits,
      bit_rate: digits,
      tags: z.record(z.string(), z.string()).default({}),
    })
    .default({ format_name: '', tags: {} }),
});

type Stream = z.infer<typeof probeSchema>['streams'][number];
const streamFacts = (stream: Stream): AudioStream => ({
  codec: codecName(stream.codec_name ?? ''),
  channels: stream.channels ?? 0,
  layout: layoutOfDecoder(stream.channel_layout, stream.channels ?? 0).name,
  // 'und': the container's word for not saying.
  language: stream.tags.language && stream.tags.language !== 'und' ? stream.tags.language : null,
  title: stream.tags.title ?? stream.tags.handler_name ?? null,
});

const codecName = (name: string): string =>
  name.startsWith('pcm_f') ? 'PCM float' : name.startsWith('pcm_') ? 'PCM' : (codecs[name] ?? name);

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

/** Reads the facts of an audio stream, counted from 0 among those of the file. Throws UnreadableError, or the system's error where ffprobe is missing. */
export async function probe(path: string, signal: AbortSignal, wanted = 0): Promise<Probe> {
  const { command, args, env } = await jailed('ffprobe', [
    ...['-print_format', 'json', '-show_format', '-show_streams', '-i', path],
  ]);
  let text: string;
  try {
    ({ stdout: text } = await run(command, args, {
      env,
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
  const sounding = streams.filter((s) => s.codec_type === 'audio');
  if (sounding.length > 0 && wanted >= sounding.length)
    throw new UnreadableError(
      'no-such-stream',
      `The file has ${sounding.length} audio ${sounding.length === 1 ? 'track' : 'tracks'}; number ${wanted + 1} is not among them.`,
    );
  const stream = sounding[wanted];
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
      codec: codecName(stream.codec_name),
      sampleRateHz,
      bitDepth: stream.bits_per_raw_sample || stream.bits_per_sample || null,
      channels,
      layout: layout.name,
      durationSeconds: duration ?? 0,
      bitRateKbps: pcm ? null : Math.round((stream.bit_rate ?? format.bit_rate ?? 0) / 1000) || null,
      ...(sounding.length > 1 && { streams: sounding.map(streamFacts) }),
    },
    layout,
    streamIndex: stream.index,
    toldSeconds: estimated ? null : (duration ?? null),
  };
}
