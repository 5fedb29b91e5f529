/** Tracks of a container as people choose among them: neighbouring mono tracks that belong together are read as one. */
import type { ProbedStream } from './probe.ts';

export interface Track {
  /** In the file's order, one at least; several: mono each, and alike. */
  streams: ProbedStream[];
}

/** ffmpeg joins no more inputs (amerge). */
const mostJoined = 64;

/**
 * The audio of a file as its choices, in order. MXF and MOV often keep each audio channel in a mono track (common
 * practice, no source), so a run of mono tracks of one codec, rate and language is one choice of that many audio channels.
 */
export function tracksOf(streams: readonly ProbedStream[]): Track[] {
  const tracks: Track[] = [];
  for (const stream of streams) {
    if (stream.codec_type !== 'audio') continue;
    const run = tracks.at(-1);
    if (run && run.streams.length < mostJoined && belongs(stream, run.streams[0])) run.streams.push(stream);
    else tracks.push({ streams: [stream] });
  }
  return tracks;
}

const belongs = (a: ProbedStream, b: ProbedStream): boolean =>
  a.channels === 1 &&
  b.channels === 1 &&
  a.codec_name === b.codec_name &&
  a.sample_rate === b.sample_rate &&
  a.sample_fmt === b.sample_fmt &&
  a.tags.language === b.tags.language;
