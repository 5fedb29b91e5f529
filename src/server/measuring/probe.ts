/** What ffprobe tells of a file that is not read natively. */
import { execFile } from 'node:child_process';
import { z } from 'zod';
import type { AudioFormat } from '../../engine/figures.ts';
import { layoutOfCount, layoutOfDecoder, type Layout } from '../../engine/layouts.ts';
import { UnreadableError } from '../../engine/source.ts';
import { log } from '../log.ts';
import { codecName, codedBits, containerName, isLossless } from './codec-names.ts';
import { reasonOfProbe } from './decoder-words.ts';
import { jailed, throwIfNotLaunched } from './jail.ts';
import { tracksOf, type Track } from './tracks.ts';

const probeSeconds = 60;
const mostAnswerBytes = 8 * 1024 ** 2;

const digits = z.coerce.number().optional().catch(undefined);
const tags = z.record(z.string(), z.string()).default({});
const streamSchema = z.object({
  index: z.number().int(),
  codec_type: z.string().optional(),
  codec_name: z.string().optional(),
  sample_fmt: z.string().optional(),
  sample_rate: digits,
  channels: z.number().int().optional(),
  channel_layout: z.string().optional(),
  bits_per_raw_sample: digits,
  bits_per_sample: digits,
  duration: digits,
  bit_rate: digits,
  tags,
});
export type ProbedStream = z.infer<typeof streamSchema>;
const probeSchema = z.object({
  streams: z.array(streamSchema).default([]),
  format: z
    .object({ format_name: z.string().default(''), duration: digits, bit_rate: digits, tags })
    .default({ format_name: '', tags: {} }),
});

export interface Probe {
  format: AudioFormat;
  layout: Layout;
  /** ffmpeg's numbers of the streams that are read as one: several where mono tracks are joined. */
  streamIndexes: number[];
  /** ffmpeg's name of the samples that its decoder gives, without the 'p' of planes. */
  sampleFormat: string;
  /** Seconds that the container tells; `null` where it only estimates or says nothing. */
  toldSeconds: number | null;
  /** How far that may be from what is there without a fault. */
  toldToleranceSeconds: number;
}

/** ffmpeg reckons the length of these from their bit rate. */
const estimated = ['mp3', 'aac', 'ac3', 'eac3', 'dts', 'loas', 'amr', 'mpegts', 'mpeg'];

/**
 * Reads the facts of one track as a choice of the file's (`tracks.ts`), counted from 0. `staged`: the file lies in a
 * private folder, `folder`, which is the program's own too. Throws UnreadableError, or the system's error where ffprobe is missing.
 */
export async function probe(
  path: string,
  {
    folder,
    staged,
    signal,
    wanted = 0,
  }: { folder: string; staged: boolean; signal: AbortSignal; wanted?: number },
): Promise<Probe> {
  const { streams, format } = await ask(path, folder, staged, signal);
  const tracks = tracksOf(streams);
  if (tracks.length > 0 && wanted >= tracks.length)
    throw new UnreadableError(
      'no-such-stream',
      `The file has ${tracks.length} audio ${tracks.length === 1 ? 'track' : 'tracks'}; number ${wanted + 1} is not among them.`,
    );
  const track = tracks.at(wanted);
  if (!track) {
    const kinds = [...new Set(streams.map((s) => s.codec_type ?? 'data'))];
    const found = kinds.length > 0 ? `only ${kinds.join(' and ')}` : 'no stream';
    throw new UnreadableError('not-audio', `The file holds no audio: ${found} was found in it.`);
  }
  const [stream] = track.streams;
  const { sample_rate: sampleRateHz } = stream;
  if (!sampleRateHz || !stream.channels || !stream.codec_name || !stream.sample_fmt)
    throw new UnreadableError(
      'codec-unknown',
      'The file holds audio in a codec that is not known here. Deliver it as WAV, FLAC, MP3, AAC or another common format.',
    );
  const layout = layoutOf(track);
  const own = Math.max(...track.streams.map((s) => s.duration ?? 0)) || null;
  const duration = own ?? format.duration ?? null;
  return {
    format: {
      container: containerName(format.format_name, format.tags.major_brand ?? ''),
      codec: codecName(stream.codec_name),
      sampleRateHz,
      bitDepth: codedBits(stream),
      channels: layout.speakers.length,
      layout: layout.name,
      durationSeconds: duration ?? 0,
      bitRateKbps: stream.codec_name.startsWith('pcm_') ? null : kilobits(track, format.bit_rate),
      ...(tracks.length > 1 && { streams: tracks.map(trackFacts) }),
    },
    layout,
    streamIndexes: track.streams.map((s) => s.index),
    sampleFormat: stream.sample_fmt.replace(/p$/, ''),
    toldSeconds: estimated.includes(format.format_name) ? null : duration,
    toldToleranceSeconds: own === null ? 0.5 + 0.01 * (duration ?? 0) : toleranceOf(stream.codec_name),
  };
}

/**
 * How far a track's own length may be off; that of a whole container may be its picture's. Whole samples are counted, and
 * a lost edit unit of an MXF (16.7 ms at 60 per second) must show; coders begin and end with some frames of their own.
 */
const toleranceOf = (codec: string): number => (isLossless(codec) ? 0.012 : 0.15);

const layoutOf = ({ streams }: Track): Layout =>
  streams.length > 1
    ? layoutOfCount(streams.length)
    : layoutOfDecoder(streams[0].channel_layout, streams[0].channels ?? 0);

function kilobits({ streams }: Track, ofFile: number | undefined): number | null {
  const own = streams.reduce((sum, s) => sum + (s.bit_rate ?? NaN), 0);
  return Math.round((own || ofFile || 0) / 1000) || null;
}

function trackFacts(track: Track) {
  const [stream] = track.streams;
  const { language, title, handler_name: handler } = stream.tags;
  const layout = layoutOf(track);
  return {
    codec: codecName(stream.codec_name ?? ''),
    channels: layout.speakers.length,
    layout: layout.name,
    // 'und': the container's word for not saying; 'SoundHandler': every encoder's word.
    language: language && language !== 'und' ? language : null,
    title: title ?? (handler && handler !== 'SoundHandler' ? handler : null),
  };
}

async function ask(path: string, folder: string, staged: boolean, signal: AbortSignal) {
  const { command, args, env } = await jailed(
    'ffprobe',
    ['-print_format', 'json', '-show_format', '-show_streams', '-i', `file:${path}`],
    { staged },
  );
  const { code, stdout, stderr } = await new Promise<{
    code: number | null;
    stdout: string;
    stderr: string;
  }>((resolve, reject) => {
    execFile(
      command,
      args,
      {
        cwd: folder,
        env,
        signal,
        timeout: probeSeconds * 1000,
        killSignal: 'SIGKILL',
        maxBuffer: mostAnswerBytes,
      },
      (error, stdout, stderr) => {
        if (error && (signal.aborted || 'syscall' in error)) reject(error);
        else
          resolve({ code: error ? (typeof error.code === 'number' ? error.code : null) : 0, stdout, stderr });
      },
    );
  });
  if (code === 0) return probeSchema.parse(JSON.parse(stdout));
  throwIfNotLaunched('ffprobe', code, stderr);
  log.info({ code, complaints: stderr.slice(0, 1000) }, 'ffprobe could not read a file');
  const { code: reason, message } = reasonOfProbe(stderr);
  throw new UnreadableError(reason, message);
}
