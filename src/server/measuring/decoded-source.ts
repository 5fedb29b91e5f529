/** Samples that ffmpeg decodes in a child process, which dies with the measurement. */
import { spawn } from 'node:child_process';
import { once } from 'node:events';
import type { Finding } from '../../engine/figures.ts';
import { layoutFindings } from '../../engine/containers/extent.ts';
import type { Encoding } from '../../engine/containers/samples.ts';
import { UnreadableError, type FrameWindow, type SampleSource } from '../../engine/source.ts';
import { jail, type Probe } from './probe.ts';

/** A decoder that gives nothing for so long hangs. */
const stallSeconds = 60;
/** What is kept of the decoder's complaints. */
const mostStderr = 16 * 1024;

export class DecodedSource implements SampleSource {
  readonly format;
  readonly layout;
  readonly findings: Finding[];
  readonly secondsTotal: number | null;
  readonly encoding: Encoding;

  constructor(
    private readonly path: string,
    private readonly probed: Probe,
  ) {
    this.format = probed.format;
    this.layout = probed.layout;
    this.findings = layoutFindings(probed.layout);
    this.secondsTotal = probed.format.durationSeconds || null;
    // A 32-bit float holds 24-bit samples exactly; deeper ones need a double.
    const wide = (probed.format.bitDepth ?? 0) > 24;
    this.encoding = { kind: 'float', bytes: wide ? 8 : 4, littleEndian: true };
  }

  async *blocks(signal: AbortSignal, window: FrameWindow = { startFrame: 0, endFrame: null }) {
    const { format, encoding } = this;
    const raw = encoding.bytes === 8 ? 'f64le' : 'f32le';
    const child = spawn(
      'ffmpeg',
      [
        ...jail,
        '-nostdin',
        '-i',
        this.path,
        '-map',
        `0:${this.probed.streamIndex}`,
        '-vn',
        '-sn',
        '-dn',
        '-f',
        raw,
        '-c:a',
        `pcm_${raw}`,
        'pipe:1',
      ],
      { stdio: ['ignore', 'pipe', 'pipe'] },
    );
    const ended = once(child, 'close').then(([code]) => code as number | null);
    // Awaited below; a spawn that failed is told by the stream's end before that.
    ended.catch(() => {});
    let complaints = '';
    child.stderr
      .setEncoding('utf8')
      .on('data', (text: string) => (complaints = (complaints + text).slice(0, mostStderr)));
    let stalled = false;
    const watch = setTimeout(() => {
      stalled = true;
      child.kill('SIGKILL');
    }, stallSeconds * 1000);
    const kill = () => child.kill('SIGKILL');
    signal.addEventListener('abort', kill, { once: true });

    const frameBytes = encoding.bytes * format.channels;
    let rest: Buffer = Buffer.alloc(0);
    let frames = 0;
    try {
      for await (const chunk of child.stdout as AsyncIterable<Buffer>) {
        watch.refresh();
        const bytes = rest.length > 0 ? Buffer.concat([rest, chunk]) : chunk;
        const count = Math.floor(bytes.length / frameBytes);
        rest = bytes.subarray(count * frameBytes);
        if (count === 0) continue;
        const from = Math.max(0, Math.min(count, window.startFrame - frames));
        const to = Math.min(count, (window.endFrame ?? Infinity) - frames);
        frames += count;
        if (to > from) yield { bytes: bytes.subarray(from * frameBytes, to * frameBytes), frames: to - from };
      }
      const code = await ended;
      signal.throwIfAborted();
      if (stalled)
        throw new UnreadableError(
          'decoder-too-slow',
          `Decoding stood still for ${stallSeconds} s and was ended. The file may be damaged; export it again.`,
        );
      this.#judgeEnd(code, frames, complaints);
    } finally {
      clearTimeout(watch);
      signal.removeEventListener('abort', kill);
      kill();
    }
  }

  #judgeEnd(code: number | null, frames: number, complaints: string): void {
    const first =
      complaints
        .split('\n')
        .find((line) => line.trim() !== '')
        ?.replaceAll(this.path, 'the file')
        .trim() ?? '';
    const seconds = frames / this.format.sampleRateHz;
    if (frames === 0)
      throw new UnreadableError(
        'decoder-failed',
        `The ${this.format.codec} audio in this file could not be decoded${first ? ` (${first})` : ''}. Export it again.`,
      );
    if (code !== 0 || first !== '')
      this.findings.push({
        code: 'unreadable-part',
        message: `Part of the file could not be decoded${first ? ` (${first})` : ''}; ${seconds.toFixed(3)} s were measured.`,
        ...(code !== 0 && { atSeconds: seconds }),
      });
    const told = this.probed.toldSeconds;
    if (told !== null && seconds < told - Math.max(0.5, told * 0.01))
      this.findings.push({
        code: 'truncated',
        message: `The file is cut short: it tells of ${told.toFixed(3)} s of audio, ${seconds.toFixed(3)} s are there.`,
        atSeconds: seconds,
      });
  }
}
